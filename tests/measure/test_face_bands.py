import numpy as np

from cladwatt.measure.face_bands import bands_of

ANGLE = np.arcsin(np.linspace(-0.77, 0.77, 15))


def test_uniform_face_stays_uniform():
    temperature, angle, _ = bands_of(np.full((15, 40), 310.0), ANGLE, 5)
    assert temperature.shape == (5, 40)
    assert np.all(temperature == 310.0)
    assert np.allclose(angle, -angle[::-1])


def test_masked_part_of_the_face_does_not_shift_the_profile():
    """Top 2 K warmer than bottom; half of the warm rows masked over some stations."""
    across = np.linspace(-1, 1, 15)[:, None]
    samples = 310.0 + across + np.zeros((15, 60))
    masked = samples.copy()
    masked[10:, 20:40] = np.nan
    whole, _, _ = bands_of(samples, ANGLE, 5)
    partly, _, _ = bands_of(masked, ANGLE, 5)
    assert np.allclose(partly.mean(axis=0), whole.mean(axis=0))


def test_mostly_masked_station_is_a_gap_in_every_band():
    samples = np.full((15, 60), 310.0)
    samples[:8, 30] = np.nan
    temperature, _, _ = bands_of(samples, ANGLE, 5)
    assert np.isnan(temperature[:, 30]).all()
    assert np.isfinite(np.delete(temperature, 30, axis=1)).all()


def test_narrow_pipe_gets_as_many_bands_as_rows():
    temperature, angle, _ = bands_of(np.full((3, 20), 300.0), ANGLE[[2, 7, 12]], 5)
    assert temperature.shape == (3, 20)
    assert angle.shape == (3,)


def test_bands_together_cover_the_seen_angle():
    _, _, extent = bands_of(np.full((15, 40), 310.0), ANGLE, 5)
    half_row = 0.77 / 14
    assert np.isclose(extent.sum(), 2 * np.arcsin(0.77 + half_row))
    assert extent[0] > extent[2]  # a row near the edge stands for more of the circumference
