import numpy as np
import pytest
from scipy.ndimage import gaussian_filter

from cladwatt.measure.noise import estimate_noise, robust_sigma


@pytest.mark.parametrize("smoothing", [0.0, 0.7, 1.0, 1.4])
def test_noise_and_its_reach_are_found_again(smoothing):
    rng = np.random.default_rng(4)
    white = rng.normal(0, 0.06, (240, 320))
    noise = gaussian_filter(white, smoothing) if smoothing else white
    rows, columns = np.mgrid[:240, :320]
    scene = 295 + 0.02 * columns + 10 * (abs(rows - 120) < 30)
    found = estimate_noise(scene + noise)
    assert found.sigma == pytest.approx(noise.std(), rel=0.08)
    # the area over which Gaussian-smoothed noise hangs together: the sum of its autocorrelation
    area = 1.0 if smoothing == 0 else 4 * np.pi * smoothing**2
    assert found.correlated_area == pytest.approx(area, rel=0.35)


def test_masked_pixels_do_not_count():
    rng = np.random.default_rng(4)
    image = 300 + rng.normal(0, 0.1, (100, 100))
    image[20:40, :] = np.nan
    assert estimate_noise(image).sigma == pytest.approx(0.1, rel=0.08)


def test_noiseless_image_has_none():
    assert estimate_noise(np.full((50, 50), 300.0)).sigma == 0.0


def test_robust_sigma_ignores_outliers_and_nan():
    values = np.concatenate([np.random.default_rng(1).normal(0, 2, 10_000), [1e6, np.nan]])
    assert robust_sigma(values) == pytest.approx(2.0, rel=0.05)
    assert robust_sigma(np.array([np.nan])) == 0.0
