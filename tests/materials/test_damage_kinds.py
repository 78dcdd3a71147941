"""The table of kinds of damage: what ships, and what a user may change in it."""

import pytest

from cladwatt.errors import TableError
from cladwatt.materials.damage_kinds import WHOLE_KINDS
from cladwatt.materials.load import load_tables
from cladwatt.materials.tables import lagging_material, table_rows

HEADER, UNITS, ROWS = table_rows("damage_kinds")


def own_table(tmp_path, shipped, changes):
    """A user's table with one row, that of a kind with changes."""
    row = dict(zip(HEADER, next(row for row in ROWS if row[0] == shipped), strict=True))
    row |= {"source": "", "provenance": "", "confidence": "", "note": ""} | changes
    folder = tmp_path / "tables"
    folder.mkdir()
    lines = [HEADER, UNITS, tuple(row[name] for name in HEADER)]
    text = "\n".join(",".join(f'"{cell}"' for cell in line) for line in lines)
    (folder / "damage_kinds.csv").write_text(text, encoding="utf-8")
    return folder


def test_every_kind_ships_with_a_prior_and_they_add_up():
    kinds = load_tables().damage_kinds
    assert set(kinds) >= {"compressed", "wet", "void", "open_joint", "bare", *WHOLE_KINDS}
    assert sum(kind.prior for kind in kinds.values()) == pytest.approx(1.0)
    for kind in kinds.values():
        assert kind.source
        assert kind.length[0] <= kind.length[1]
        assert sum(kind.sides) == pytest.approx(1.0)


def test_wet_lagging_spans_the_published_range():
    # the same range that stands beside mineral wool, with its sources
    published = lagging_material("mineral_wool_pipe_section").wet_ratio
    for name in ("wet", "wet_underside"):
        assert load_tables().damage_kinds[name].severity == published


def test_a_users_row_stands_in_place_of_the_shipped_one(tmp_path):
    kinds = load_tables(
        own_table(tmp_path, "wet", {"prior": "0.2", "severity_high": "40"})
    ).damage_kinds
    assert (kinds["wet"].prior, kinds["wet"].severity) == (0.2, (1.33, 40.0))
    assert kinds["wet"].source == "tables/damage_kinds.csv"
    assert kinds["void"] == load_tables().damage_kinds["void"]


@pytest.mark.parametrize(
    ("kind", "changes", "said"),
    [
        ("wet", {"kind": "wett"}, "nearest: wet"),
        ("sound", {}, "its prior belongs to the joint estimate"),
        ("wet", {"length_low_m": "9"}, "expected the lower first"),
        ("wet", {"flank": "0.5"}, "to add up to 1"),
        ("wet", {"severity_low": "0.5"}, "expected within 1 to 200"),
        ("wet", {"prior": "0.9"}, "to between 0 and 1"),
    ],
)
def test_what_cannot_be_is_refused_with_the_file_and_row(tmp_path, kind, changes, said):
    with pytest.raises(TableError) as refused:
        load_tables(own_table(tmp_path, kind, changes))
    message = str(refused.value)
    assert said in message
    assert "damage_kinds.csv" in message
