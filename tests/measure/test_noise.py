import numpy as np
import pytest
from scipy.ndimage import gaussian_filter

from cladwatt.measure.noise import estimate_noise, robust_sigma


@pytest.mark.parametrize("smoothing", [0.0, 0.7, 1.0, 1.4])
def test_noise_and_its_reach_are_found_again(smoothing, evidence):
    rng = np.random.default_rng(4)
    white = rng.normal(0, 0.06, (240, 320))
    noise = gaussian_filter(white, smoothing) if smoothing else white
    rows, columns = np.mgrid[:240, :320]
    scene = 295 + 0.02 * columns + 10 * (abs(rows - 120) < 30)
    found = estimate_noise(scene + noise)
    evidence("known_noise", "of one pixel", found.sigma, noise.std(), unit="K", rel=0.08)
    # the area over which Gaussian-smoothed noise hangs together: the sum of its autocorrelation
    area = 1.0 if smoothing == 0 else 4 * np.pi * smoothing**2
    evidence("known_noise", "area", found.correlated_area, area, unit="px2", rel=0.25)


@pytest.mark.parametrize("smoothing", [(1.2, 0.0), (1.3, 0.6)])
def test_noise_that_reaches_further_down_the_columns(smoothing):
    white = np.random.default_rng(4).normal(0, 0.06, (240, 320))
    noise = gaussian_filter(white, smoothing)
    found = estimate_noise(295 + noise)
    # each way the sum of a Gaussian's autocorrelation, 2 sqrt(pi) times its width
    area = np.prod([max(1.0, 2 * np.sqrt(np.pi) * width) for width in smoothing])
    assert found.sigma == pytest.approx(noise.std(), rel=0.08)
    assert found.correlated_area == pytest.approx(area, rel=0.3)


def test_a_pattern_of_columns_is_not_missed():
    rng = np.random.default_rng(4)
    image = 295 + rng.normal(0, 0.03, (240, 320)) + rng.normal(0, 0.08, 320)
    assert estimate_noise(image).sigma == pytest.approx(np.hypot(0.03, 0.08), rel=0.15)


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
