"""What the report's template prints: texts and numbers ready made, nothing left to decide."""

from dataclasses import dataclass

from markupsafe import Markup

from cladwatt.quantities import Remark
from cladwatt.report.findings import Finding, finding_of, signed, unique_remarks, where_damaged
from cladwatt.report.kind_words import KindsView, kinds_views
from cladwatt.report.numbers import (
    PRINT,
    celsius,
    celsius_interval,
    decimals_for,
    format_interval,
    format_number,
    format_probability,
)
from cladwatt.report.wording import quantity_name, sentence, text
from cladwatt.results.assessment import (
    Assessment,
    Assumption,
    Interval,
    LineTotal,
    RegionResult,
    Stretch,
)

__all__ = [
    "AssumptionView",
    "FindingView",
    "LineView",
    "RegionView",
    "assumption_views",
    "finding_view",
    "line_view",
    "region_view",
]

MOST_SHARES = 4
NOTABLE_REST = 0.1


@dataclass(frozen=True)
class FindingView:
    """One row of the findings."""

    anchor: str
    region: RegionResult
    where: str
    loss: str
    sound: str
    excess: str
    probability: str
    verdict: str
    advice: str
    loss_known: bool


@dataclass(frozen=True)
class RegionView:
    """One region with its picture."""

    anchor: str
    region: RegionResult
    svg: Markup
    figures: tuple[tuple[str, str], ...]
    stretches: tuple[tuple[str, ...], ...]
    kinds: tuple[KindsView, ...]
    verdict: str
    level: str
    reason: str
    advice: str
    shares: str
    missing: tuple[str, ...]
    cautions: tuple[str, ...]
    remarks: tuple[str, ...]


@dataclass(frozen=True)
class LineView:
    """One line's sums."""

    line: LineTotal
    length: str
    total: str
    excess: str
    regions: str


@dataclass(frozen=True)
class AssumptionView:
    """One declared or assumed quantity, for all that share it."""

    quantity: str
    value: str
    uncertainty: str
    source: str
    confidence: str
    owners: str


def _verdict(region: RegionResult, language: str) -> str:
    return text(f"verdict.{region.verdict.level.replace(' ', '_')}", language)


def _advice(region: RegionResult, language: str) -> str:
    advice = region.verdict.advice
    return sentence(advice, language) if advice is not None else ""


def finding_view(finding: Finding, anchor: str, language: str) -> FindingView:
    """Return a finding ready to print; its numbers give way to words where not quantified."""
    region = finding.region
    key = "not_known" if finding.quantified else "not_quantified"
    instead = text(f"report.{key}", language)

    def shown(interval: Interval | None) -> str:
        return format_interval(interval, "") if interval is not None else instead

    to = f"{PRINT.space}{PRINT.range_word}{PRINT.space}"
    places = [
        f"{format_number(start, 2)}{to}{format_number(end, 2)}"
        for start, end in where_damaged(region)
    ]
    return FindingView(
        anchor=anchor,
        region=region,
        where="; ".join(places),
        loss=shown(finding.loss),
        sound=shown(finding.sound),
        excess=shown(finding.excess),
        probability=format_probability(finding.probability),
        verdict=_verdict(region, language),
        advice=_advice(region, language),
        loss_known=finding.loss is not None,
    )


def region_view(region: RegionResult, anchor: str, svg: str, language: str) -> RegionView:
    """Return a region ready to print."""

    def words(remarks: tuple[Remark, ...]) -> tuple[str, ...]:
        return tuple(sentence(remark, language) for remark in unique_remarks(remarks))

    return RegionView(
        anchor=anchor,
        region=region,
        svg=Markup(svg),
        figures=tuple(_figures(region, language)),
        stretches=tuple(_stretch_rows(region, language)),
        kinds=kinds_views(region, language),
        verdict=_verdict(region, language),
        level=region.verdict.level.replace(" ", "-"),
        reason=sentence(region.verdict.reason, language),
        advice=_advice(region, language),
        shares=_shares(region, language),
        missing=words(region.missing),
        cautions=words(region.cautions),
        remarks=words(region.remarks),
    )


def _shares(region: RegionResult, language: str) -> str:
    """Return what the variance comes from, the rest that no declared quantity carries with it."""
    named = [(n, share) for n, share in region.variance_shares[:MOST_SHARES] if share >= 0.01]
    words = [
        f"{quantity_name(name, language)} {format_probability(share)}" for name, share in named
    ]
    rest = 1.0 - sum(share for _, share in named)
    if named and rest >= NOTABLE_REST:
        share = format_probability(rest)
        words.append(text("report.shares_rest", language, share=share))
    return ", ".join(words)


def _figures(region: RegionResult, language: str) -> list[tuple[str, str]]:
    def named(key: str, value: str) -> tuple[str, str]:
        return text(f"report.{key}", language), value

    instead = text("report.not_quantified", language)
    quantified = region.verdict.level != "not quantified"
    rows = [
        named("length", format_interval(region.length, "m", most=2)),
        named(
            "recorded_temperature",
            format_number(celsius(region.recorded_temperature), 1) + PRINT.space + "°C",
        ),
        named(
            "surface_temperature",
            format_interval(celsius_interval(region.surface_temperature), "°C", most=1),
        ),
    ]
    if region.air_temperature is not None:
        air = format_number(celsius(region.air_temperature), 1) + PRINT.space + "°C"
        rows.append(named("air_temperature", air))
    quantities = [
        ("heat_gain" if region.gain else "heat_loss", signed(region, region.heat_loss), "W/m"),
        ("image_loss", signed(region, region.image_loss), "W/m"),
        ("tracer_heat", region.tracer_heat, "W/m"),
        ("fluid_loss", region.fluid_loss, "W/m"),
        ("total_region_loss", signed(region, region.total_loss), "W"),
        ("heat_flux", signed(region, region.heat_flux), "W/m²"),
        ("sound_loss", signed(region, region.sound_loss), "W/m"),
        ("specified_loss", signed(region, region.specified_loss), "W/m"),
        ("declared_loss", signed(region, region.declared_loss), "W/m"),
        ("excess_per_metre", signed(region, region.excess), "W/m"),
        ("resistance", region.resistance, "m K/W"),
        ("specified_resistance", region.specified_resistance, "m K/W"),
        ("declared_resistance", region.declared_resistance, "m K/W"),
        ("resistance_ratio", region.resistance_ratio, ""),
        ("effective_conductivity", region.effective_conductivity, "W/(m K)"),
    ]
    flux_remains = region.verdict.reason.key == "not_quantified.no_diameter"
    needs_no_image = {
        "sound_loss", "specified_loss", "specified_resistance", "declared_loss",
        "declared_resistance",
    }  # fmt: skip
    for key, value, unit in quantities:
        if value is not None:
            shown = quantified or key in needs_no_image or (key == "heat_flux" and flux_remains)
            rows.append(named(key, format_interval(value, unit) if shown else instead))
    for key in ("probability_damaged", "probability_local", "probability_aged"):
        probability = getattr(region, key)
        if probability is not None:
            rows.append(named(key, format_probability(probability)))
    return rows


def _stretch_rows(region: RegionResult, language: str) -> list[tuple[str, ...]]:
    quantified = region.verdict.level != "not quantified"
    instead = text("report.not_quantified", language)
    rows: list[tuple[str, ...]] = []
    for stretch in region.stretches:
        loss, excess = signed(region, stretch.heat_loss), signed(region, stretch.excess)
        rows.append(
            (
                stretch.id,
                format_interval(stretch.start, "", most=2),
                format_interval(stretch.end, "", most=2),
                format_probability(stretch.probability),
                _side(stretch, language),
                format_interval(loss, "") if quantified and loss else instead,
                format_interval(excess, "") if quantified and excess else instead,
            )
        )
    return rows


def _side(stretch: Stretch, language: str) -> str:
    """Return which side of the pipe is damaged, with the probability of that."""
    words = text(f"side.{stretch.side.replace(' ', '_')}", language)
    if stretch.side == "not known":
        return words
    return f"{words}, P {format_probability(stretch.side_probability)}"


def line_view(line: LineTotal, language: str) -> LineView:
    """Return a line's sums ready to print."""
    excess = line.excess
    if excess is not None and line.gain:
        excess = Interval(-excess.median, -excess.high, -excess.low)
    total = line.total_loss
    if line.gain:
        total = Interval(-total.median, -total.high, -total.low)
    return LineView(
        line=line,
        length=format_interval(line.length, "", most=2),
        total=format_interval(total, ""),
        excess=format_interval(excess, "") if excess else text("report.not_known", language),
        regions=", ".join(line.regions),
    )


def _printed_unit(item: Assumption) -> tuple[float, str]:
    """Return factor and unit that suit the quantity; lengths of pipes and sheets are in mm."""
    if item.unit == "m" and item.quantity.startswith("band_"):
        return 1e6, "µm"
    if item.unit == "m" and item.quantity.endswith(("thickness", "diameter")):
        return 1e3, "mm"
    return 1.0, "" if item.unit in ("-", "", "1") else item.unit.replace("m2", "m²").replace(
        "deg", "°"
    )


def _value_words(item: Assumption) -> tuple[str, str]:
    factor, unit = _printed_unit(item)
    value, u = item.value * factor, item.u * factor
    after = PRINT.space + unit if unit else ""
    value_after = after
    if unit == "K" and "temperature" in item.quantity:
        value, value_after = celsius(value), PRINT.space + "°C"
    if u > 0:
        decimals = min(decimals_for(u), 6)
        return (
            format_number(value, decimals) + value_after,
            format_number(u, decimals) + after,
        )
    return f"{value:.6g}".replace("-", PRINT.minus) + value_after, "0" + after


def assumption_views(
    assessment: Assessment, *, declared: bool, language: str
) -> list[AssumptionView]:
    """Return the declared or the default quantities, equal ones of several owners as one."""
    groups: dict[tuple[str, str, str, str, str], list[str]] = {}
    for item in assessment.assumptions:
        if (item.source.partition(":")[0] == "declared") == declared:
            value, u = _value_words(item)
            key = (item.quantity, value, u, item.source, item.confidence)
            groups.setdefault(key, []).append(item.owner)
    views = []
    for (quantity, value, u, source, confidence), owners in groups.items():
        names = list(dict.fromkeys(owners))
        shown = ", ".join(names[:6])
        if len(names) > 6:
            shown = text("report.owners_more", language, first=shown, count=len(names) - 6)
        name = quantity_name(quantity, language)
        views.append(AssumptionView(name, value, u, source, confidence, shown))
    return views


def region_order(assessment: Assessment, findings: tuple[Finding, ...]) -> tuple[RegionResult, ...]:
    """Return all regions: the findings in their order, then the rest as surveyed."""
    first = [finding.region for finding in findings]
    seen = {id(region) for region in first}
    return (*first, *(r for r in assessment.regions if id(r) not in seen))


def unquantified_count(assessment: Assessment) -> int:
    """Return how many regions the totals contain without a printed number."""
    return sum(
        not finding_of(region).quantified and region.total_loss is not None
        for region in assessment.regions
    )
