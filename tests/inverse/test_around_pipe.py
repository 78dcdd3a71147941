"""Where around the pipe the excess lies: a finite-element ring, simulated sectors, limits.

Outside check: the fin equation around a ring of sheet with a sector that is given heat, by
quadratic finite elements of scikit-fem on one half of the ring.
"""

import math

import numpy as np
import pytest
from skfem import Basis, BilinearForm, ElementLineP2, LinearForm, MeshLine, solve
from skfem.helpers import dot, grad

from cladwatt.inverse.around_pipe import BandContrast, shown_by_sector, weigh_sides
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.stretch_side import side_named
from cladwatt.measure.face_bands import FaceBands

BOOK = DrawBook(6, 2000)
ANGLES = np.radians([-40.0, -20.0, 0.0, 20.0, 40.0])
EXTENT = np.full(5, math.radians(20.0))
FACE = FaceBands(np.full((5, 10), 310.0), ANGLES, EXTENT)
SEEN_SHARE = float(EXTENT.sum() / (2 * math.pi))
RISE = 5.0


def weighed(contrast, *, spread=0.4, sigma=0.1, top=-math.pi / 2):
    return weigh_sides(
        BandContrast(np.asarray(contrast, dtype=float), FACE, sigma, sigma, RISE, spread, top)
    )


def ring_by_elements(width, centre, spread):
    """Excess at the angles of the bands, by quadratic elements, even about the sector's middle."""
    nodes = np.unique(np.concatenate([np.linspace(0, math.pi, 400), [width / 2]]))
    basis = Basis(MeshLine(nodes), ElementLineP2())
    stiffness = BilinearForm(lambda u, v, _: spread**2 * dot(grad(u), grad(v)) + u * v).assemble(
        basis
    )
    load = LinearForm(lambda v, w: (w.x[0] < width / 2) * v).assemble(basis)
    found = solve(stiffness, load)
    apart = np.abs(np.angle(np.exp(1j * (ANGLES - centre))))
    order = np.argsort(basis.doflocs[0])
    return np.interp(apart, basis.doflocs[0][order], found[order])


@pytest.mark.parametrize(("width", "centre", "spread"), [
    (60, 0, 0.3), (120, 90, 0.6), (180, 180, 0.4), (30, -50, 0.2), (240, 170, 1.0),
])  # fmt: skip
def test_a_sector_spreads_around_as_finite_elements_say(width, centre, spread, evidence):
    width, centre = math.radians(width), math.radians(centre)
    found = shown_by_sector(ANGLES, np.asarray(width), np.asarray(centre), spread)
    evidence("sector_ring", "excess", found, ring_by_elements(width, centre, spread), abs=0.006)


def test_an_even_face_speaks_for_the_hidden_side():
    around = weighed([4, 4, 4, 4, 4])
    hidden = around.draw(BOOK, "region:a", SEEN_SHARE)
    assert around.all_round > 0.8
    assert np.median(hidden) == pytest.approx(1.0, abs=0.1)


def test_one_sided_damage_names_its_side_and_leaves_the_hidden_part_wide():
    below, above = weighed([0.2, 0.4, 0.9, 2.2, 4.5]), weighed([4.5, 2.2, 0.9, 0.4, 0.2])
    assert side_named(below.all_round, below.upper, below.under).side == "underside"
    assert side_named(above.all_round, above.upper, above.under).side == "upper side"
    even = weighed([4, 4, 4, 4, 4]).draw(BOOK, "region:a", SEEN_SHARE)
    one_sided = below.draw(BOOK, "region:a", SEEN_SHARE)
    assert np.ptp(np.percentile(one_sided, [2.5, 97.5])) > 2 * np.ptp(
        np.percentile(even, [2.5, 97.5])
    )


def test_which_side_is_up_is_not_guessed():
    around = weighed([0.2, 0.4, 0.9, 2.2, 4.5], top=None)
    assert (around.upper, around.under) == (0.0, 0.0)
    assert side_named(around.all_round, around.upper, around.under).side == "not known"


def test_damage_in_the_middle_of_the_face_leaves_little_behind():
    hidden = weighed([0.5, 3.0, 6.0, 3.0, 0.5]).draw(BOOK, "region:a", SEEN_SHARE)
    assert np.median(hidden) < 0.3


def simulated(random, number):
    """One damage with its noise: found draws of the whole excess and the true one, else None."""
    all_round = random.uniform() < 0.5
    width = math.radians(random.uniform(30, 240))
    centre = math.radians(random.uniform(-180, 180))
    spread = random.uniform(0.3, 0.8)
    height = RISE * 10 ** random.uniform(math.log10(0.3), math.log10(6.0))
    shape = shown_by_sector(ANGLES, np.asarray(width), np.asarray(centre), spread)
    if all_round:
        shape, width = np.ones(5), 2 * math.pi
    contrast = height * shape * (1 + 0.1 * random.normal(size=5)) + 0.1 * random.normal(size=5)
    if contrast.mean() < 0.5:
        return None  # not seen at all: no run, no stretch
    around = weighed(contrast, spread=spread * random.uniform(0.8, 1.25))
    hidden = around.draw(BOOK, f"region:{number}", SEEN_SHARE)
    found = contrast.mean() * (SEEN_SHARE + (1 - SEEN_SHARE) * hidden)
    return found, height * width / (2 * math.pi), all_round


def test_simulated_damage_all_round_and_sectors_together():
    """Over both kinds at their prior, seeds pooled.

    Sectors by themselves come out worse: some 20 % too high in the median and covered in 77 %,
    since a wide sector that faces the camera looks like damage all round.
    """
    cases = [
        case
        for seed in (11, 12, 13)
        for random in [np.random.default_rng(seed)]
        for number in range(300)
        if (case := simulated(random, number)) is not None
    ]
    off = np.array([math.log(np.median(found) / true) for found, true, _ in cases])
    inside = np.array(
        [np.percentile(found, 2.5) <= true <= np.percentile(found, 97.5)
         for found, true, _ in cases]
    )  # fmt: skip
    assert abs(np.median(off)) < 0.05
    assert inside.mean() > 0.87
