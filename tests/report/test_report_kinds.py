"""Kinds of damage as the reader meets them: words, bars, and what cannot be told."""

import pytest

from cladwatt.materials.load import shipped_tables
from cladwatt.report.console import console_summary
from cladwatt.report.kind_words import kinds_line, kinds_views, likely_kinds
from cladwatt.report.wording import has_wording, known_languages, text


@pytest.mark.parametrize("language", known_languages())
def test_every_kind_of_the_table_has_a_name(language):
    missing = [k for k in shipped_tables().damage_kinds if not has_wording(f"kind.{k}", language)]
    assert missing == []


def test_the_fewest_kinds_that_hold_four_fifths_are_likely():
    assert likely_kinds((("wet", 0.5), ("void", 0.3), ("bare", 0.2))) == [
        ("wet", 0.5),
        ("void", 0.3),
    ]
    assert likely_kinds((("wet", 0.81), ("void", 0.19))) == [("wet", 0.81)]


def test_kinds_that_cannot_be_told_apart_are_said_to_be_so(invented):
    whole, stretch = kinds_views(invented.region(), "en")
    assert whole.sentence == "Likely bare pipe."
    assert "wet, or compressed or thinned: the image cannot tell which" in stretch.sentence
    flat = tuple((name, 0.2) for name in ("wet", "void", "bare", "compressed", "open_joint"))
    (unknown,) = kinds_views(invented.region(kinds=flat, stretches=()), "en")
    assert unknown.sentence == text("report.kind_unknown")


def test_bars_are_as_long_as_the_probabilities(invented):
    whole, _ = kinds_views(invented.region(), "en")
    lengths = {name: float(length) for name, _, length in whole.bars}
    assert lengths["bare pipe"] == pytest.approx(8.5 * lengths["missing sector"])


def test_nothing_is_said_where_nothing_was_weighed(invented):
    bare = invented.region(kinds=(), stretches=())
    assert kinds_views(bare, "en") == ()
    assert kinds_line(bare, "en") == ""


def test_a_line_of_the_console_names_likely_kinds_of_damage_only(invented):
    region = invented.region(kinds=(("wet", 0.5), ("sound", 0.3), ("compressed", 0.2)))
    assert kinds_line(region, "en") == "likely wet (50 %), or compressed or thinned (20 %)"
    lines = console_summary(invented.assessment(), 90)
    assert any(line.strip() == "likely bare pipe (85 %)" for line in lines)
