"""How far cladding spreads heat, and when a stretch is too short for it."""

from dataclasses import replace

import numpy as np
import pytest

from cladwatt.inverse.cladding_fin import spread_remark, spreading_length
from cladwatt.inverse.result import Interval, Stretch
from cladwatt.quantities import Quantity

SURE = Interval(1.0, 0.9, 1.1)


def stretch(start: float, end: float) -> Stretch:
    edges = (Interval(at, at - 0.01, at + 0.01) for at in (start, end))
    return Stretch("R:1", *edges, 0.9, SURE, SURE, 1.0, ())


def seen_of(bench, conductivity: float, thickness: float):
    sheet = replace(bench.line.cladding, conductivity=conductivity, thickness=Quantity(thickness))
    bench = bench.but(line=replace(bench.line, cladding=sheet))
    return bench.observe(bench.lens(315.0))


def test_the_length_is_that_of_a_fin_that_air_surroundings_and_lagging_cool(bench):
    observed = seen_of(bench, 200.0, 1e-3)
    found = spreading_length(observed.seen, observed.balance.sound)
    # painted sheet indoors gives off some 9 to 11 W/(m2 K), 50 mm of wool conduct some 0.7
    for total, longer in ((9.0, True), (12.5, False)):
        assert (np.sqrt(200.0 * 1e-3 / total) > found) == longer
    without = spreading_length(observed.seen, None)
    assert found < without < 1.1 * found


@pytest.mark.parametrize(
    ("conductivity", "end", "said"),
    [(200.0, 0.20, True), (200.0, 0.40, False), (0.17, 0.05, False)],
    ids=["short on aluminium", "long on aluminium", "short on plastic"],
)
def test_only_a_stretch_short_against_it_is_remarked_on(bench, conductivity, end, said):
    observed = seen_of(bench, conductivity, 1e-3)
    remarks = spread_remark(observed.seen, observed.balance.sound, (stretch(0.0, end),))
    assert [remark.key for remark in remarks] == ["remark.spread_by_cladding"] * said


def test_a_strip_without_stretches_needs_no_word(bench):
    observed = seen_of(bench, 200.0, 1e-3)
    assert spread_remark(observed.seen, observed.balance.sound, ()) == ()
