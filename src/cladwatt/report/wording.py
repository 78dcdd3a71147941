"""All wording in one place: a key and its parameters become a sentence of one language."""

import math
import re
import tomllib
from collections.abc import Mapping
from functools import cache
from importlib import resources
from string import Formatter
from typing import Any

from cladwatt.errors import InputError
from cladwatt.quantities import Remark

__all__ = [
    "has_wording",
    "kind_name",
    "known_languages",
    "phrases",
    "quantity_name",
    "sentence",
    "text",
]

_OPTIONAL = re.compile(r"\[\[(.*?)\]\]", re.DOTALL)


class _SentenceFormatter(Formatter):
    """Formats fractions in percent and says so where a number has no end."""

    def format_field(self, value: Any, format_spec: str) -> str:
        if isinstance(value, str):
            return value
        if not math.isfinite(value):
            return "beyond any number"
        if format_spec == "%":
            percent = 100.0 * value
            return "over 999 %" if percent > 999 else f"{percent:.0f} %"
        return str(super().format_field(value, format_spec)).replace("-", "\u2212")


_FORMATTER = _SentenceFormatter()


def known_languages() -> tuple[str, ...]:
    """Return the codes of the languages that have a file, sorted."""
    folder = resources.files("cladwatt.report") / "languages"
    names = (entry.name for entry in folder.iterdir())
    return tuple(sorted(name.removesuffix(".toml") for name in names if name.endswith(".toml")))


@cache
def _table(language: str) -> dict[str, Any]:
    if language not in known_languages():
        raise InputError(
            f"language is {language!r}; expected one of {', '.join(known_languages())}"
        )
    file = resources.files("cladwatt.report") / "languages" / f"{language}.toml"
    return tomllib.loads(file.read_text(encoding="utf-8"))


def _template(key: str, language: str) -> str | None:
    node: Any = _table(language)
    for part in key.split("."):
        if not isinstance(node, dict) or part not in node:
            return None
        node = node[part]
    return node if isinstance(node, str) else None


def _names(template: str) -> set[str]:
    return {name for _, name, _, _ in _FORMATTER.parse(template) if name}


def _fill(template: str, parameters: Mapping[str, float | str]) -> str:
    def segment(match: re.Match[str]) -> str:
        return match.group(1) if _names(match.group(1)) <= parameters.keys() else ""

    return _FORMATTER.vformat(_OPTIONAL.sub(segment, template), (), parameters)


def has_wording(key: str, language: str = "en") -> bool:
    """Return whether a key has a text in a language."""
    return _template(key, language) is not None


def phrases(key: str, language: str = "en") -> tuple[str, ...]:
    """Return a list of texts without parameters; raises InputError if the key holds none."""
    node: Any = _table(language)
    for part in key.split("."):
        node = node.get(part) if isinstance(node, dict) else None
    if not isinstance(node, list):
        raise InputError(f"list key is {key!r}; expected a list of the language file {language!r}")
    return tuple(str(item) for item in node)


def text(key: str, language: str = "en", **parameters: float | str) -> str:
    """Return one text of the program.

    Parameters
    ----------
    key : str
        Dotted key, e.g. ``report.title``.
    language : str
        Code of a language file.
    **parameters
        Values for the places in the text.

    Returns
    -------
    str
        The text, not escaped.

    Raises
    ------
    InputError
        If the language or key is unknown, or a parameter is missing.
    """
    template = _template(key, language)
    if template is None:
        raise InputError(f"text key is {key!r}; expected a key of the language file {language!r}")
    try:
        return _fill(template, parameters)
    except KeyError as missing:
        raise InputError(f"text {key!r} lacks its parameter {missing.args[0]!r}") from missing


def sentence(remark: Remark, language: str = "en") -> str:
    """Put a remark into words.

    Parameters
    ----------
    remark : Remark
        Key and parameters. ``relative_width`` and ``share`` are fractions; ``width_now`` and
        ``width_then`` are in percent; other names end in their unit.
    language : str
        Code of a language file.

    Returns
    -------
    str
        One sentence, not escaped. A key without wording comes back as it stands, with its
        parameters, so that a finished run never fails over a text.

    Raises
    ------
    InputError
        If the language is unknown or a parameter the sentence needs is missing.
    """
    if not has_wording(remark.key, language):
        values = ", ".join(f"{name} {value}" for name, value in remark.parameters)
        return f"{remark.key} ({values})" if values else remark.key
    return text(remark.key, language, **dict(remark.parameters))


def kind_name(name: str, language: str = "en") -> str:
    """Return the readable name of a kind of damage; unknown names lose their underscores."""
    template = _template(f"kind.{name}", language)
    return template if template is not None else name.replace("_", " ")


def quantity_name(name: str, language: str = "en") -> str:
    """Return the readable name of a quantity; unknown names lose their underscores."""
    template = _template(f"quantity.{name}", language)
    return template if template is not None else name.replace("_", " ")
