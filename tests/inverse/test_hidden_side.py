"""The hidden part of the circumference: closed forms and limits."""

import numpy as np
import pytest

from cladwatt.inverse.hidden_side import HiddenSide, whole_flux


def hidden_with(excess_share, unevenness=0.0, seen_share: float = 0.3) -> HiddenSide:
    share = np.atleast_2d(np.asarray(excess_share, dtype=float)).T
    return HiddenSide(seen_share, np.full(share.shape[0], unevenness), share, ())


def test_a_sound_pipe_loses_all_round_what_it_shows_but_for_its_unevenness():
    seen = np.full((1, 10), 100.0)
    whole = whole_flux(seen, np.array([100.0]), hidden_with([1.0], unevenness=0.04))
    assert whole == pytest.approx(np.full((1, 10), 104.0))


def test_excess_is_weighed_by_what_is_seen_and_what_is_hidden():
    hidden = HiddenSide(0.3, np.array([0.0, 0.0, 0.1]), np.array([[0.0], [0.0], [0.5]]), ())
    seen = np.array([[100.0, 150.0]] * 3)
    whole = whole_flux(seen, np.full(3, 100.0), hidden)
    assert whole[:, 0] == pytest.approx([100, 100, 110])
    assert whole[:, 1] == pytest.approx([150 - 0.7 * 50, 100 + 0.3 * 50, 110 + (0.3 + 0.35) * 50])


def test_a_gain_is_mirrored():
    hidden = hidden_with([0.5])
    hot = whole_flux(np.array([[100.0, 150.0]]), np.array([100.0]), hidden)
    cold = whole_flux(np.array([[-100.0, -150.0]]), np.array([-100.0]), hidden)
    assert cold == pytest.approx(-hot)
