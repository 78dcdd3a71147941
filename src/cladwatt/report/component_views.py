"""What the report prints of flanges, valves and hangers, ready made."""

from dataclasses import dataclass

from cladwatt.materials.fittings import fitting_kind
from cladwatt.report.findings import component_sums
from cladwatt.report.numbers import as_gain, celsius_interval, format_interval
from cladwatt.report.wording import sentence, text
from cladwatt.results.assessment import Assessment, ComponentResult, Interval

__all__ = ["ComponentView", "component_sources", "component_view", "components_sum"]


@dataclass(frozen=True)
class ComponentView:
    """One component; where `reason` stands there is neither length nor loss."""

    name: str
    tag: str
    state: str
    temperature: str
    length: str
    loss: str
    by_image: str
    by_table: str
    reason: str


def component_view(one: ComponentResult, language: str) -> ComponentView:
    """Return a component ready to print."""

    def said(key: str, **values: str) -> str:
        return text(f"report.{key}", language, **values)

    surface, length, loss = one.surface_temperature, one.equivalent_length, one.heat_loss
    of_clad = one.lagged or fitting_kind(one.kind) == "hanger"
    of = "component_of_lagged" if of_clad else "component_of_bare"
    losses = [
        said("not_known") if by is None else _loss(by, said("gain_mark"))
        for by in (loss, one.image_loss, one.table_loss)
    ]
    return ComponentView(
        name=f"{one.kind or said('not_stated')} · {one.region_id}",
        tag=one.tag,
        state=said("component_lagged" if one.lagged else "component_bare"),
        temperature=said("not_known")
        if surface is None
        else format_interval(celsius_interval(surface), "", most=1),
        length=said("not_known")
        if length is None
        else said(of, length=format_interval(length, "", most=2)),
        loss=losses[0],
        by_image=losses[1],
        by_table=losses[2],
        reason="" if one.reason is None else sentence(one.reason, language),
    )


def _loss(loss: Interval, mark: str) -> str:
    """Return a loss, or a gain as a positive one with its mark."""
    if loss.median < 0:
        return f"{format_interval(as_gain(loss), '')} {mark}".strip()
    return format_interval(loss, "")


def components_sum(assessment: Assessment, language: str) -> str:
    """Return what all components come to, losses and gains apart; empty where none is known."""
    sums = [
        text(f"report.component_sum_{way}", language, sum=format_interval(value, "W"))
        for way, _, value in component_sums(assessment)
    ]
    return text("report.components_sum", language, sums="; ".join(sums)) if sums else ""


def component_sources(assessment: Assessment) -> str:
    """Return the sources of the equivalent lengths that were used, each once."""
    # where the uncertainty comes from stands after it
    sources = (
        source.partition("; u: ")[0]
        for one in assessment.components
        for source in one.source.split(" | ")
        if source
    )
    return "; ".join(dict.fromkeys(sources))
