"""The short table a run ends with: worst findings first, then what could not be assessed."""

import textwrap

from cladwatt.report.findings import (
    Finding,
    all_left_out,
    component_sums,
    ranked_findings,
    where_damaged,
)
from cladwatt.report.kind_words import kinds_line
from cladwatt.report.numbers import (
    CONSOLE,
    format_interval,
    format_number,
    format_probability,
)
from cladwatt.report.svg import clip_text, plain, undirected
from cladwatt.report.wording import sentence, text
from cladwatt.results.assessment import Assessment, LeftOut

__all__ = ["console_summary"]

MOST_FINDINGS = 12
NARROWEST = 64


def console_summary(assessment: Assessment, width: int = 80, language: str = "en") -> list[str]:
    """Return the end of a run as plain lines.

    Parameters
    ----------
    assessment : Assessment
        What the run found.
    width : int
        Columns of the terminal; below 64 is taken as 64.
    language : str
        Code of a language file.

    Returns
    -------
    list of str
        Lines without line ends, none wider than `width` as far as characters are one column wide.
    """
    width = max(width, NARROWEST)
    lines = _totals(assessment, width, language) + _components(assessment, width, language)
    findings = ranked_findings(assessment)
    if findings:
        lines += ["", *textwrap.wrap(text("console.findings", language), width)]
        lines += _table(findings[:MOST_FINDINGS], width, language)
        if len(findings) > MOST_FINDINGS:
            rest = len(findings) - MOST_FINDINGS
            lines.append("  " + text("console.more", language, count=rest))
    else:
        lines += ["", *textwrap.wrap(text("console.no_findings", language), width)]
    return lines + _not_assessed(assessment, width, language)


def _short(words: str, limit: int) -> str:
    return clip_text(undirected(words), limit)


def _totals(assessment: Assessment, width: int, language: str) -> list[str]:
    totals = [
        ("total_loss", assessment.total_loss),
        ("total_gain", assessment.total_gain),
        ("total_excess", assessment.total_excess),
    ]
    rows = [
        (text(f"console.{key}", language), format_interval(value, "W", CONSOLE))
        for key, value in totals
        if value is not None
    ]
    rest = max((len(name) for name, _ in rows), default=0)
    lines = [
        line
        for name, value in rows
        for line in textwrap.wrap(f"{name.ljust(rest)}  {value}", width, subsequent_indent="  ")
    ]
    return lines or textwrap.wrap(text("console.no_totals", language), width)


def _components(assessment: Assessment, width: int, language: str) -> list[str]:
    """Return what the components come to, beside the totals of the pipes."""
    if not assessment.components:
        return []
    known = component_sums(assessment)
    words = text("console.components", language, count=len(assessment.components))
    sums = [
        text(f"console.component_{way}", language, count=count, sum=format_interval(value, "W",
             CONSOLE))
        for way, count, value in known
    ]  # fmt: skip
    words += ": " + "; ".join(sums or [text("console.components_unknown", language)])
    return textwrap.wrap(f"{words}. {text('console.components_apart', language)}", width)


def _table(findings: tuple[Finding, ...], width: int, language: str) -> list[str]:
    wide = width >= 96
    heads = [text(f"console.head_{name}", language) for name in ("region", "where", "loss",
             "excess", "probability")]  # fmt: skip
    rows = [_row(finding, language) for finding in findings]
    if not wide:
        heads, rows = (
            [h for i, h in enumerate(heads) if i != 2],
            [[cell for i, cell in enumerate(row) if i != 2] for row in rows],
        )
    sizes = [max(len(row[i]) for row in [heads, *rows]) for i in range(len(heads))]
    spare = width - 2 * len(sizes) - sum(sizes[2:])
    sizes[1] = min(sizes[1], max(spare - sizes[0], 11))
    sizes[0] = min(sizes[0], max(spare - sizes[1], 8))
    lines = []
    kinds = ["", *(kinds_line(finding.region, language) for finding in findings)]
    for row, words in zip([heads, *rows], kinds, strict=True):
        cells = [_short(cell, size).ljust(size) for cell, size in zip(row, sizes, strict=True)]
        lines.append(("  " + "  ".join(cells)).rstrip()[:width])
        lines += _wrapped(words, width, "    ")
    return lines


def _row(finding: Finding, language: str) -> list[str]:
    region = finding.region
    unknown = text(
        "console.not_known" if finding.quantified else "console.not_quantified", language
    )
    places = [
        f"{format_number(a, 1, CONSOLE)}-{format_number(b, 1, CONSOLE)}"
        for a, b in where_damaged(region)
    ]
    return [
        f"{region.tag} {region.region_id}",
        ", ".join(places[:2]) + (f" +{len(places) - 2}" if len(places) > 2 else "") + " m",
        format_interval(finding.loss, "W/m", CONSOLE) if finding.loss else unknown,
        format_interval(finding.excess, "W", CONSOLE) if finding.excess else unknown,
        format_probability(finding.probability, CONSOLE),
    ]


def _not_assessed(assessment: Assessment, width: int, language: str) -> list[str]:
    lines: list[str] = []
    unquantified = [r for r in assessment.regions if r.verdict.level == "not quantified"]
    if unquantified:
        lines += ["", text("console.unquantified", language)]
        for region in unquantified:
            name = f"{_short(region.tag, 30)} {_short(region.region_id, 30)}"
            lines += _item(name, sentence(region.verdict.reason, language), width)
    items = all_left_out(assessment)
    if items:
        lines += ["", text("console.left_out", language)]
        for item in items:
            what = text(f"console.{item.what}", language)
            lines += _item(f"{what} {_short(item.id, 40)}", _reason(item, language), width)
    return lines


def _reason(item: LeftOut, language: str) -> str:
    if item.remark is not None:
        return sentence(item.remark, language)
    return undirected(plain(item.message))


def _item(name: str, reason: str, width: int) -> list[str]:
    return _wrapped(f"{name}: {reason}", width, "  ")


def _wrapped(words: str, width: int, indent: str) -> list[str]:
    """Return words on lines; a number and its percent sign stay on one."""
    lines = textwrap.wrap(
        words.replace(" %", "\u00a0%"),
        width,
        initial_indent=indent,
        subsequent_indent=indent + "  ",
    )
    return [line.replace("\u00a0", " ") for line in lines]
