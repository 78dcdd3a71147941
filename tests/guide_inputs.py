"""Writes the guide's page of inputs from the key list: ``python -m tests.guide_inputs``."""

import math
from pathlib import Path

from cladwatt.materials.load import shipped_tables
from cladwatt.survey.keys import (
    LAYER,
    PIECE,
    REGION,
    REGION_VALUES,
    SECTIONS,
    Key,
    Section,
)
from cladwatt.units import Unit

PAGE = Path(__file__).parent.parent / "src/cladwatt/guide/inputs.md"

RECORDED_ONLY = frozenset(
    {
        "pipe_material", "latitude", "longitude", "access",
    }
)  # fmt: skip
"""Read, checked and kept, but no number of this version depends on them."""

NOT_TAKEN: frozenset[str] = frozenset()
"""Defaults that nothing looks up; the key list or the method says what holds."""

HEAD = """\
# Inputs

Every key of `survey.toml`, of a line or frame list kept as CSV, and of a region. This page is made
from the list the reader itself works by (`survey/keys.py`), and the last table from the defaults
that ship; `python -m tests.guide_inputs` writes it, and a test compares it.

- A key says its unit: `air_temperature_C`, `air_temperature_K` or `air_temperature_F`. A key whose
  unit is missing is a fault; no unit is guessed.
- The standard uncertainty (one sigma) of a quantity stands beside it under the same name with `u_`
  before it, in the same unit (`u_air_temperature_C = 0.5`), or both stand together:
  `air_temperature_C = { value = 21.0, u = 0.5 }`. The column *u if not declared* says what is
  taken otherwise: common practice, no source, unless a source is named. The larger of two counts.
- `"unknown"` may stand in place of any number, date or flag: what depends on it is left out with
  its reason, the rest is given.
- *asked* in the column of defaults means that nothing is assumed: where the key is missing,
  `cladwatt check` puts it as a question.
- *kept only* marks what is read and checked, though no number of this version depends on it.

`cladwatt start` writes all of these, commented out, into a new survey; `cladwatt schema survey` and
`cladwatt schema regions` print them as JSON Schema.
"""

DEFAULTS_HEAD = """\
## Defaults and their sources

What is taken where nothing is declared (`cladwatt tables defaults` prints the rows in full);
`assessment.json` and the report list every one that was used. There is no default for pipe size,
lagging thickness, inside temperature, air temperature or outdoor wind. Emissivity, sheet thickness
and conductivity come from the tables `claddings` and `lagging_conductivity`, by the names in the
line list.

| quantity | value | u | unit | source | confidence |
| --- | --- | --- | --- | --- | --- |
"""


def page_text() -> str:
    """Return the page."""
    parts = [HEAD]
    for part in SECTIONS:
        keys = part.keys
        name = f"[[{part.name}]]" if part.array else f"[{part.name}]"
        if part.name == "frame":
            keys = tuple(key for key in keys if key.default != "as set for the whole survey")
        parts.append(f"## `{name}`: {_title(part)}\n\n{_table(keys)}")
        if part.name == "line":
            parts.append(f"### `layers` of a line, each `{{ ... }}`\n\n{_table(LAYER)}")
        if part.name == "conditions":
            parts.append(f"### `surroundings` piece by piece, each `{{ ... }}`\n\n{_table(PIECE)}")
    parts.append(
        "## Properties of a region\n\n"
        "In `regions/FRAME.geojson`; coordinates are `[x, y]` in pixels, x right, y down, `[0, 0]` "
        "the centre of the first pixel.\n\n"
        f"{_table(REGION)}"
    )
    readings = "".join(
        _row(key, role=f"`{role}`: {_lower(key.meaning)}") for role, key in REGION_VALUES.items()
    )
    parts.append(f"### The reading of a region, by role\n\n{_HEADER}{readings}")
    parts.append(DEFAULTS_HEAD + _default_rows())
    return "\n".join(parts)


_HEADER = """\
| key | meaning | unit | accepted | default | u if not declared |
| --- | --- | --- | --- | --- | --- |
"""


def _title(part: Section) -> str:
    return _lower(part.title).replace("camera_", "`camera_`")


def _lower(words: str) -> str:
    return words[:1].lower() + words[1:]


def _table(keys: tuple[Key, ...]) -> str:
    return _HEADER + "".join(_row(key) for key in keys)


def _row(key: Key, role: str = "") -> str:
    unit = key.units[0]
    cells = (
        f"`{key.usual}`",
        _meaning(key, role),
        _units(key),
        _accepted(key, unit),
        _default(key),
        _u(key, unit),
    )
    return "| " + " | ".join(cell.replace("|", "\\|") for cell in cells) + " |\n"


def _meaning(key: Key, role: str) -> str:
    return (role or key.meaning) + (" (*kept only*)" if key.name in RECORDED_ONLY else "")


def _units(key: Key) -> str:
    if key.dimension == "ratio":
        return f"0 to 1, or `{key.name}_percent`"
    texts = [unit.text for unit in key.units if unit.text]
    others = ", ".join(f"`{written}`" for written, _ in key.spellings[1:])
    return (texts[0] if texts else "") + (f", or {others}" if others else "")


def _accepted(key: Key, unit: Unit) -> str:
    if key.kind == "choice":
        return ", ".join(f'`"{word}"`' for word in key.choices)
    words = {
        "text": "text", "name": "text", "flag": "`true` or `false`", "date": "date",
        "time": "date and time", "file": "path", "size": "nominal size", "layers": "list",
        "pieces": "list",
    }  # fmt: skip
    if key.kind in words:
        return words[key.kind]
    low, high = (
        f"{unit.from_si(bound):.6g}" if math.isfinite(bound) else ""
        for bound in (key.lower, key.upper)
    )
    if low and high:
        return f"{'over ' if key.lower_open else ''}{low} to {high}"
    return "number"


def _default(key: Key) -> str:
    if key.required:
        return "required"
    words = [key.default] if key.default else []
    return "; ".join([*words, "asked"] if key.ask and "asked" not in key.default else words)


def _u(key: Key, unit: Unit) -> str:
    parts = []
    u, share, said = key.usual_u()
    if u:
        parts.append(f"{u / unit.factor:.3g} {_difference(unit)}".strip())
    if share:
        parts.append(f"{100 * share:.3g} %")
    source = "" if "no source" in said else f" ({said})"
    return " or ".join(parts) + source if key.kind == "quantity" else ""


def _difference(unit: Unit) -> str:
    return "K" if unit.text == "°C" else unit.text


def _default_rows() -> str:
    tables = shipped_tables()
    header, _, rows = tables.rows["defaults"]
    _, _, source_rows = tables.rows["sources"]
    short = {row[0]: row[1] for row in source_rows}
    found = []
    for row in rows:
        cell = dict(zip(header, row, strict=True))
        if cell["quantity"] in NOT_TAKEN:
            continue
        sources = "; ".join(short.get(name, name) for name in cell["source"].split("|"))
        origin = "" if cell["provenance"] in sources else f": {cell['provenance']}"
        unit = "" if cell["unit"] == "1" else cell["unit"]
        found.append(
            f"| `{cell['quantity']}` | {cell['value']} | {cell['u']} | {unit} | {sources}"
            f"{origin} | {cell['confidence']} |\n"
        )
    return "".join(found)


if __name__ == "__main__":
    PAGE.write_text(page_text(), encoding="utf-8", newline="\n")
