"""The commented survey file that a new survey starts from, made from the key list."""

import json
from collections.abc import Sequence
from dataclasses import dataclass

from cladwatt.survey.keys import FRAME, SECTIONS, Key, Section
from cladwatt.units import Unit

__all__ = ["StarterFrame", "starter_survey_toml"]

_WIDTH = 96
_HEAD = """\
# Survey file of cladwatt. Lines beginning with # are not read: take the # away from what you know.
#
# A key says its unit: air_temperature_C, air_temperature_K or air_temperature_F.
# Beside a quantity stands its standard uncertainty (one sigma): u_air_temperature_C = 0.5;
# where it is left out, a generous one is taken and named in the results.
# What nobody knows is written "unknown": what depends on it is left out, the rest still given.
# Numbers have a decimal point: 4.5, not 4,5.
"""
_ALTERNATIVES = {
    "line": "# One [[line]] per pipe of the line list; or keep them in a CSV, line_list above.",
    "frame": "# One [[frame]] per frame; or in a CSV, frame_list above. Keys of [conditions] and "
    "[format] may\n# stand in a frame where it differs, those of [recording] with camera_ before "
    "them.",
}


@dataclass(frozen=True)
class StarterFrame:
    """A frame of the new survey.

    Parameters
    ----------
    file : str
        Path from the survey folder.
    id : str
        Empty for the file's stem.
    unit : str
        ``C``, ``K`` or ``F`` where it seems likely: written as a comment to confirm, unless
        `unit_is_sure`.
    unit_is_sure : bool
        Whether it stands in the file.
    scale, offset : float, optional
        Likely ones of integer counts, to confirm.
    note : str
        What the file looks like, as a comment.
    """

    file: str
    id: str = ""
    unit: str = ""
    unit_is_sure: bool = False
    scale: float | None = None
    offset: float | None = None
    note: str = ""


def starter_survey_toml(frames: Sequence[StarterFrame] = (), *, name: str = "New survey") -> str:
    """Return a commented survey file with the meaning, unit and default of each key.

    Parameters
    ----------
    frames : sequence of StarterFrame
        Frames it begins with; what was guessed of them is commented out, to be confirmed.
    name : str
        Name of the survey.

    Returns
    -------
    str
        Valid TOML in which everything but name and frames is commented out.
    """
    parts = [_HEAD]
    for section in SECTIONS:
        if section.name == "frame":
            parts.append(_frames(section, frames))
        elif section.name == "line":
            keys = "\n".join(_key_text(key) for key in section.keys)
            parts.append(f"{_title(section)}\n{_ALTERNATIVES['line']}\n# [[line]]\n{keys}\n")
        else:
            written = {"name": _text(name)} if section.name == "survey" else {}
            keys = "\n".join(_key_text(key, written.get(key.name)) for key in section.keys)
            parts.append(f"{_title(section)}\n[{section.name}]\n{keys}\n")
    return "\n".join(parts)


def _text(text: str) -> str:
    """Return text as a TOML string; JSON's escapes are TOML's."""
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


def _printable(text: str) -> str:
    return "".join(letter if letter.isprintable() else " " for letter in text)


def _title(section: Section) -> str:
    return f"# --- {section.title} ".ljust(_WIDTH, "-")


def _key_text(key: Key, written: str | None = None) -> str:
    lines = [f"# {key.meaning}{_accepted(key)}."]
    if key.default:
        lines.append(f"# Default: {key.default}.")
    elif key.ask:
        lines.append('# No default: declare it or write "unknown".')
    if written is not None:
        lines.append(f"{key.usual} = {written}")
        return "\n".join(lines)
    lines.append(f"#{key.usual} = {key.example or chr(34) * 2}")
    if key.kind == "quantity" and any(key.usual_u()[:2]):
        lines.append(f"#u_{key.usual} = {_default_u(key, key.units[0])}")
    return "\n".join(lines)


def _default_u(key: Key, unit: Unit) -> str:
    try:
        value = unit.to_si(float(key.example))
    except ValueError:
        value = 0.0
    return f"{key.default_u(value) / unit.factor:.3g}"


def _accepted(key: Key) -> str:
    if key.kind == "choice":
        return " (" + ", ".join(f'"{word}"' for word in key.choices) + ")"
    if key.dimension == "ratio":
        return f" [0 to 1] (or {key.name}_percent)"
    texts = [unit.text for unit in key.units if unit.text]
    if not texts:
        return ""
    others = ", ".join(written for written, _ in key.spellings[1:])
    return f" [{texts[0]}]" + (f" (or {others})" if others else "")


def _frames(section: Section, frames: Sequence[StarterFrame]) -> str:
    own = [key for key in FRAME if key.default != "as set for the whole survey"]
    lines = [_title(section), _ALTERNATIVES["frame"]]
    if not frames:
        lines += ["# [[frame]]", *(_key_text(key) for key in own)]
    for number, frame in enumerate(frames):
        lines.append(_frame(frame))
        if number == 0:
            lines += [_key_text(key) for key in own if key.name not in ("id", "file")]
    return "\n".join(lines) + "\n"


def _frame(frame: StarterFrame) -> str:
    lines = ["[[frame]]"]
    if frame.note:
        lines += [f"# {_printable(line)}" for line in frame.note.splitlines()]
    lines.append(f"file = {_text(frame.file)}")
    if frame.id:
        lines.append(f"id = {_text(frame.id)}")
    if frame.unit:
        sure = "" if frame.unit_is_sure else "#"
        hint = "" if frame.unit_is_sure else "  # likely; confirm by taking the first # away"
        lines.append(f"{sure}unit = {_text(frame.unit)}{hint}")
    for name, value in (("scale", frame.scale), ("offset", frame.offset)):
        if value is not None:
            lines.append(f"#{name} = {float(value)!r}  # likely; confirm")
    return "\n".join(lines)
