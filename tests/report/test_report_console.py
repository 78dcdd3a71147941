from dataclasses import replace

import pytest

from cladwatt.report.console import console_summary


def test_worst_first_then_what_could_not_be_assessed(invented):
    lines = console_summary(invented.assessment(), 110)
    order = [next(i for i, line in enumerate(lines) if key in line)
             for key in ("Heat loss, hot lines", "north-2", "north-1", "CHW-7", "Not quantified:",
                         "Not assessed:", "frame f07")]  # fmt: skip
    assert order == sorted(order)
    assert "6000 W (5100 to 7300)" in lines[0]
    row = next(line for line in lines if "north-1" in line)
    assert "140 W/m (119 to 165)" in row
    assert "260 W (140 to 410)" in row
    assert "98 %" in row


def test_components_stand_apart_from_the_totals(invented):
    lines = console_summary(invented.assessment(), 200)
    (line,) = [line for line in lines if line.startswith("Components")]
    assert line == (
        "Components (flanges, valves, hangers), 4 drawn: 2 with an estimate, losing 850 W (370 to "
        "1740); 1 with an estimate, gaining 29 W (12 to 61). Not part of the totals above."
    )
    assert lines.index(line) == 3


def test_components_without_any_number_are_still_counted(invented):
    survey = invented.assessment()
    (hanger,) = (one for one in survey.components if one.kind == "hanger")
    frame = replace(survey.frames[0], components=(hanger,))
    survey = replace(survey, frames=(frame,), component_loss=None, component_gain=None)
    assert "1 drawn: none could be estimated." in " ".join(console_summary(survey, 90))


def test_not_quantified_in_the_place_of_numbers(invented):
    row = next(line for line in console_summary(invented.assessment(), 110) if "NS-140" in line)
    assert row.count("not quantified") == 2


@pytest.mark.parametrize("width", [64, 80, 100, 160])
def test_no_line_is_wider_than_the_terminal(invented, width):
    survey = invented.assessment(extra=(invented.region(invented.nasty, tag=invented.nasty),))
    lines = console_summary(survey, width)
    assert max(map(len, lines)) <= width
    assert not any(c in line for line in lines for c in "\u202e\n\x1b")


def test_plain_latin_text_for_old_terminals(invented):
    for line in console_summary(invented.assessment(), 160):
        line.encode("cp1252")


@pytest.mark.parametrize("width", range(64, 130))
def test_no_line_begins_with_a_percent_sign(invented, width):
    lines = console_summary(invented.assessment(), width)
    assert not [line for line in lines if line.lstrip().startswith("%")]


def test_nothing_found_is_said(invented):
    survey = replace(invented.assessment(), frames=(), total_loss=None, total_gain=None,
                     total_excess=None, left_out=())  # fmt: skip
    assert console_summary(survey, 90) == [
        "No heat loss could be worked out.",
        "",
        "No region is more likely damaged than not.",
    ]
