"""What a survey declares of steam, supports, clouds and surroundings stands among its inputs."""

from dataclasses import replace
from pathlib import Path

import pytest

from cladwatt.assumptions import assumptions_of
from cladwatt.quantities import Quantity
from cladwatt.survey.model import SurroundingsPiece, Tracing
from cladwatt.survey.survey_file import read_survey


@pytest.fixture(scope="module")
def sample():
    return read_survey(Path(__file__).parent.parent / "sample_data")


def listed(survey):
    return {(row.owner, row.quantity): row for row in assumptions_of(survey)}


def test_what_a_line_may_declare_is_listed(sample):
    tag, line = next(iter(sample.lines.items()))
    more = replace(
        line,
        steam_pressure=Quantity(8e5, 1e4),
        inside_film=Quantity(40.0, 8.0),
        flow=Quantity(0.5),
        specific_heat=Quantity(4180.0),
        supports_allowance=Quantity(0.15, 0.04),
        tracing=Tracing("electric", 6.0, temperature=Quantity(360.0, 5.0), power=Quantity(20.0)),
    )
    rows = listed(replace(sample, lines={tag: more}))
    owner = f"line {tag}"
    for name, value, unit in (
        ("steam_pressure", 8e5, "Pa"),
        ("inside_film", 40.0, "W/(m2 K)"),
        ("flow", 0.5, "kg/s"),
        ("specific_heat", 4180.0, "J/(kg K)"),
        ("supports_allowance", 0.15, "-"),
        ("tracer_temperature", 360.0, "K"),
        ("tracer_power", 20.0, "W/m"),
    ):
        row = rows[owner, name]
        assert (row.value, row.unit) == (value, unit)


def test_supports_are_listed_though_nobody_declared_them(sample):
    tag = next(iter(sample.lines))
    row = listed(sample)[f"line {tag}", "supports_allowance"]
    assert (row.value, row.confidence) == (0.0, "low")


def test_surroundings_in_pieces_are_listed_piece_by_piece(sample):
    pieces = (
        SurroundingsPiece("wall", Quantity(290.0, 2.0), Quantity(0.7, 0.05)),
        SurroundingsPiece("neighbour", Quantity(350.0, 5.0), Quantity(0.3, 0.05)),
    )
    first, *others = sample.frames
    bent = replace(first, conditions=replace(first.conditions, surroundings_pieces=pieces))
    rows = listed(replace(sample, frames=(bent, *others)))
    owner = f"frame {first.id}"
    assert rows[owner, "surroundings_1_wall_temperature"].value == 290.0
    assert rows[owner, "surroundings_2_neighbour_view_factor"].value == 0.3
