"""The hidden part of the circumference: closed forms and limits."""

import numpy as np
import pytest

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.hidden_side import Evenness, HiddenSide, evenness_of, whole_flux
from cladwatt.inverse.stretches import Run
from cladwatt.measure.face_bands import FaceBands

BOOK = DrawBook(6, 4000)
ANGLES = np.radians([-40.0, -20.0, 0.0, 20.0, 40.0])
SOUND = np.ones(100, dtype=bool)
SOUND[35:66] = False
RUN = Run(40, 60, 5.0, 20.0, 1.0, 1.0, 1.0)


def hidden_with(evenness: float, edge: float = 1.0, seen_share: float = 0.28) -> HiddenSide:
    return HiddenSide.draw(BOOK, "region:a", seen_share, Evenness(evenness, edge))


def face_with(contrast) -> FaceBands:
    temperature = np.full((5, 100), 310.0)
    temperature[:, 40:61] += np.asarray(contrast, dtype=float)[:, None]
    return FaceBands(temperature, ANGLES, np.ones(5))


def test_a_sound_pipe_loses_all_round_what_it_shows():
    seen = np.full((4000, 10), 100.0)
    whole = whole_flux(seen, seen.mean(axis=1), hidden_with(1.0))
    assert whole.mean() == pytest.approx(100.0, rel=1e-3)
    assert whole[:, 0].std() == pytest.approx(4.0, rel=0.03)  # unevenness of 4 %
    assert np.ptp(whole, axis=1).max() == pytest.approx(0, abs=1e-9)


def test_excess_is_weighed_by_what_is_seen_and_what_is_hidden():
    hidden = HiddenSide(0.3, np.array([0.0, 0.0, 0.1]), np.array([1.0, 0.0, 0.5]))
    seen = np.array([[100.0, 150.0]] * 3)
    whole = whole_flux(seen, np.full(3, 100.0), hidden)
    assert whole[:, 0] == pytest.approx([100, 100, 110])
    assert whole[:, 1] == pytest.approx([150, 100 + 0.3 * 50, 110 + (0.3 + 0.7 * 0.5) * 50])


def test_a_gain_is_mirrored():
    hidden = HiddenSide(0.3, np.zeros(1), np.array([0.5]))
    hot = whole_flux(np.array([[100.0, 150.0]]), np.array([100.0]), hidden)
    cold = whole_flux(np.array([[-100.0, -150.0]]), np.array([-100.0]), hidden)
    assert cold == pytest.approx(-hot)


def test_an_even_face_speaks_for_the_hidden_side():
    even, uneven = hidden_with(1.0).excess_share, hidden_with(0.1).excess_share
    assert np.median(even) == pytest.approx(1.0, abs=0.05)
    assert np.median(uneven) < 0.7
    assert uneven.std() > 0.2  # nobody knows
    assert uneven.min() >= 0


def test_a_dark_edge_leaves_little_behind():
    assert np.mean(hidden_with(0.0, edge=0.2).excess_share) < np.mean(
        hidden_with(0.0, edge=1.0).excess_share
    )


def test_share_of_all_round_damage_grows_with_evenness():
    means = [hidden_with(value).excess_share.mean() for value in (0.0, 0.3, 0.5, 0.7, 1.0)]
    assert np.all(np.diff(means) >= 0)
    assert means[-1] > means[0]


def test_evenness_of_known_faces():
    even = evenness_of(face_with([4, 4, 4, 4, 4]), (RUN,), SOUND, sign=1)
    assert even == Evenness(pytest.approx(1.0), pytest.approx(1.0))
    one_side = evenness_of(face_with([8, 4, 0, 0, 0]), (RUN,), SOUND, sign=1)
    assert one_side.evenness == pytest.approx(0.0)
    assert one_side.edge == pytest.approx(8 / 2.4)
    middle = evenness_of(face_with([1, 4, 5, 4, 2]), (RUN,), SOUND, sign=1)
    assert middle.evenness == pytest.approx(0.2)
    assert middle.edge == pytest.approx(2 / 3.2)


def test_evenness_follows_the_sign_of_the_damage():
    cold = evenness_of(face_with([-4, -4, -4, -4, -2]), (RUN,), SOUND, sign=-1)
    assert cold.evenness == pytest.approx(0.5)


def test_without_runs_nothing_is_uneven():
    assert evenness_of(face_with([9, 0, 0, 0, 0]), (), SOUND, sign=1) == Evenness()
    two_bands = FaceBands(np.full((2, 100), 310.0), ANGLES[:2], np.ones(2))
    assert evenness_of(two_bands, (RUN,), SOUND, sign=1) == Evenness()


def test_gaps_inside_the_run_are_left_out():
    face = face_with([4, 4, 4, 4, 4])
    face.temperature[:, 45:50] = np.nan
    assert evenness_of(face, (RUN,), SOUND, sign=1).evenness == pytest.approx(1.0)
