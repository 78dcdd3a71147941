"""Kinds of damage in words: the likely ones with their probability, and what cannot be told."""

from collections.abc import Sequence
from dataclasses import dataclass

from cladwatt.report.numbers import CONSOLE, NumberStyle, format_probability
from cladwatt.report.wording import kind_name, text
from cladwatt.results.assessment import RegionResult

__all__ = ["KindsView", "kinds_line", "kinds_views", "likely_kinds"]

TOGETHER = 0.8
"""The fewest kinds that hold this share of the probability are named."""
MOST_NAMED = 3
"""With more of them none is named: nothing is told."""
LEAST_SHOWN = 0.03
MOST_BARS = 5
BAR_EM = 8.0
"""Length of a bar that stands for certainty. [em]"""

Kinds = Sequence[tuple[str, float]]


@dataclass(frozen=True)
class KindsView:
    """Kinds of one stretch or region: bars of (name, probability, length in em), and a sentence."""

    of: str
    bars: tuple[tuple[str, str, str], ...]
    sentence: str


def likely_kinds(kinds: Kinds) -> list[tuple[str, float]]:
    """Return the fewest kinds, likeliest first, that hold `TOGETHER` of the probability."""
    named: list[tuple[str, float]] = []
    for kind in kinds:
        named.append(kind)
        if sum(share for _, share in named) >= TOGETHER:
            break
    return named


def _joined(names: Sequence[str], language: str) -> str:
    return text("report.kind_or", language).join(names)


def _sentence(kinds: Kinds, language: str) -> str:
    """Return what the kinds come to in a sentence; says so where they cannot be told apart."""
    named = likely_kinds(kinds)
    names = [kind_name(name, language) for name, _ in named]
    if len(named) == 1:
        return text("report.kind_likely", language, kind=names[0])
    if len(named) <= MOST_NAMED:
        return text("report.kind_not_told", language, kinds=_joined(names, language))
    return text("report.kind_unknown", language)


def _view(of: str, kinds: Kinds, language: str) -> KindsView:
    shown = [(name, share) for name, share in kinds[:MOST_BARS] if share >= LEAST_SHOWN]
    return KindsView(
        of=of,
        bars=tuple(
            (kind_name(name, language), format_probability(share), f"{BAR_EM * share:.2f}")
            for name, share in shown
        ),
        sentence=_sentence(kinds, language),
    )


def kinds_views(region: RegionResult, language: str) -> tuple[KindsView, ...]:
    """Return the kinds of a region and of its stretches ready to print; only where weighed."""
    found = [] if not region.kinds else [(text("report.kind_of_region", language), region.kinds)]
    found += [(stretch.id, stretch.kinds) for stretch in region.stretches if stretch.kinds]
    return tuple(_view(of, kinds, language) for of, kinds in found)


def kinds_line(region: RegionResult, language: str, style: NumberStyle = CONSOLE) -> str:
    """Return the likely kinds of a finding for one line: "likely wet 62 %"; empty for none.

    Sound is left out: a finding is put in front of the reader as damage.
    """
    damage = [(name, share) for name, share in region.kinds if name != "sound"]
    total = sum(share for _, share in damage)
    if not total > 0:
        return ""
    named = likely_kinds([(name, share / total) for name, share in damage])[:MOST_NAMED]
    words = [
        f"{kind_name(name, language)} ({format_probability(share * total, style)})"
        for name, share in named
    ]
    return text("console.kinds", language, kinds=_joined(words, language))
