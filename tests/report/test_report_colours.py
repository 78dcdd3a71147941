import re
from importlib import resources

import numpy as np
import pytest

from cladwatt.report import colours


def codes(palette):
    return [f"#{red:02x}{green:02x}{blue:02x}" for red, green, blue in palette.tolist()]


# WCAG 2.1: black on white is 21:1 by definition; #777777 on white falls just short of 4.5:1.
def test_contrast_of_the_guidelines_own_cases():
    assert colours.contrast_ratio("#000000", "#ffffff") == pytest.approx(21.0)
    assert 4.4 < colours.contrast_ratio("#777777", "#ffffff") < 4.5


@pytest.mark.parametrize("ground", [colours.PAPER, colours.MARK])
@pytest.mark.parametrize("ink", [colours.INK, colours.QUIET, colours.LOSS, colours.GAIN])
def test_text_and_lines_meet_level_aa(ink, ground):
    assert colours.contrast_ratio(ink, ground) >= 4.5


def test_style_sheet_uses_these_colours():
    css = (resources.files("cladwatt.report") / "templates" / "report.css").read_text("utf-8")
    for name, code in (("ink", colours.INK), ("quiet", colours.QUIET), ("loss", colours.LOSS)):
        assert f"--{name}: {code}" in css
    used = set(re.findall(r"#[0-9a-f]{3,6}\b", css))
    assert used <= {colours.INK, colours.QUIET, colours.HAIR, colours.FAINT, colours.LOSS,
                    colours.MARK, "#fff"}  # fmt: skip


def test_both_sides_darken_away_from_air_temperature():
    grey = np.array(
        [colours.relative_luminance(code) for code in codes(colours.diverging_palette())]
    )
    assert np.all(np.diff(grey[1:129]) > -1e-3)
    assert np.all(np.diff(grey[128:]) < 1e-3)
    assert grey[128] > 0.85
    assert max(grey[1], grey[255]) < 0.06


def test_loss_and_gain_differ_in_blue_against_red_not_red_against_green():
    palette = colours.diverging_palette().astype(int)
    steps = np.arange(30, 128)
    warm, cold = palette[128 + steps - 1], palette[128 - steps + 1]
    assert np.all(warm[:, 0] - warm[:, 2] > 25)
    assert np.all(cold[:, 2] - cold[:, 0] > 20)


def test_index_is_centred_on_air_and_even_on_both_sides():
    values = np.array([283.15, 293.15, 303.15, 333.15, 400.0, np.nan])
    index = colours.temperature_index(values, centre=293.15, limits=(283.15, 333.15))
    assert index.tolist() == [96, 128, 160, 255, 255, 0]
