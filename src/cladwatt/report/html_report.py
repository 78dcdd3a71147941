"""The report as one self-contained HTML file, and the strip pictures as files beside it."""

from pathlib import Path
from typing import TYPE_CHECKING, Any

from cladwatt.report.findings import all_left_out, ranked_findings, unique_remarks
from cladwatt.report.numbers import format_interval
from cladwatt.report.strip_face import common_limits
from cladwatt.report.strip_picture import strip_svg
from cladwatt.report.svg import clip_text, plain
from cladwatt.report.wording import phrases, sentence, text
from cladwatt.results.assessment import Assessment, RegionResult
from cladwatt.results.file_names import file_stems

if TYPE_CHECKING:
    from jinja2 import Environment

__all__ = ["report_html", "strip_pictures", "write_report"]

SHORT = 48
"""Characters of a name in a table; it stands in full over its region."""


def _environment() -> "Environment":
    from jinja2 import Environment, PackageLoader, StrictUndefined
    from markupsafe import Markup

    def finalize(value: Any) -> Any:
        if isinstance(value, str) and not isinstance(value, Markup):
            return plain(value).replace(" %", "\u00a0%")
        return value

    environment = Environment(
        loader=PackageLoader("cladwatt.report", "templates"),
        autoescape=True,
        undefined=StrictUndefined,
        finalize=finalize,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters["short"] = lambda words: clip_text(words, SHORT)
    return environment


def strip_pictures(
    assessment: Assessment, language: str = "en", *, heading: bool = True
) -> dict[str, str]:
    """Draw the strip of every region; regions of one line share their colours where they can.

    Parameters
    ----------
    assessment : Assessment
        What one run found.
    language : str
        Code of a language file.
    heading : bool
        Whether each picture carries its own heading.

    Returns
    -------
    dict of str to str
        SVG by region id.
    """
    by_line: dict[str, list[RegionResult]] = {}
    for region in assessment.regions:
        by_line.setdefault(region.tag, []).append(region)
    return {
        region.region_id: strip_svg(
            region,
            air_temperature=region.air_temperature,
            limits=common_limits(region, by_line[region.tag]),
            language=language,
            heading=heading,
        )
        for region in assessment.regions
    }


def report_html(assessment: Assessment, *, language: str = "en") -> str:
    """Return the report as one HTML document that needs nothing beside it.

    Parameters
    ----------
    assessment : Assessment
        What one run found.
    language : str
        Code of a language file.

    Returns
    -------
    str
        The document. Equal assessments give equal text.
    """
    from cladwatt.report import views
    from cladwatt.report.component_views import (
        component_sources,
        component_view,
        components_sum,
    )
    from cladwatt.report.line_views import log_views

    drawn = strip_pictures(assessment, language, heading=False)
    findings = ranked_findings(assessment)
    ordered = views.region_order(assessment, findings)
    anchors = {region.region_id: f"region-{i}" for i, region in enumerate(ordered, 1)}
    shown = [
        views.region_view(r, anchors[r.region_id], drawn[r.region_id], language) for r in ordered
    ]
    context = {
        "language": language,
        "assessment": assessment,
        "t": lambda key, **values: text(f"report.{key}", language, **values),
        "phrases": lambda key: phrases(f"report.{key}", language),
        "sentence": lambda remark: sentence(remark, language),
        "totals": _totals(assessment, language),
        "unquantified": views.unquantified_count(assessment),
        "findings": [
            views.finding_view(item, anchors[item.region.region_id], language) for item in findings
        ],
        "regions": shown,
        "unquantified_regions": [view for view in shown if view.level == "not-quantified"],
        "components": [component_view(one, language) for one in assessment.components],
        "components_sum": components_sum(assessment, language),
        "component_sources": component_sources(assessment),
        "logs": log_views(assessment, language),
        "lines": [views.line_view(line, language) for line in assessment.lines],
        "left_out": all_left_out(assessment),
        "survey_remarks": [sentence(r, language) for r in unique_remarks(assessment.remarks)],
        "frame_remarks": [
            (frame.frame_id, [sentence(r, language) for r in unique_remarks(frame.remarks)])
            for frame in assessment.frames
            if frame.remarks
        ],
        "defaults": views.assumption_views(assessment, declared=False, language=language),
        "declared": views.assumption_views(assessment, declared=True, language=language),
    }
    return _environment().get_template("report.html").render(context)


def _totals(assessment: Assessment, language: str) -> list[tuple[str, str, str]]:
    rows = [
        ("total_loss", assessment.total_loss),
        ("total_gain", assessment.total_gain),
        ("total_excess", assessment.total_excess),
    ]
    shown = []
    for key, value in rows:
        if value is not None:
            figure, _, interval = format_interval(value, "W").partition(" (")
            shown.append((text(f"report.{key}", language), figure, interval.rstrip(")")))
    return shown


def write_report(assessment: Assessment, folder: Path, *, language: str = "en") -> list[Path]:
    """Write ``report.html`` and ``strips/<region>.svg`` into an existing folder.

    Parameters
    ----------
    assessment : Assessment
        What one run found.
    folder : Path
        Folder to write into.
    language : str
        Code of a language file.

    Returns
    -------
    list of Path
        What was written, the report first.
    """
    pictures = strip_pictures(assessment, language)
    report = folder / "report.html"
    report.write_text(
        report_html(assessment, language=language),
        encoding="utf-8",
        newline="\n",
    )
    written = [report]
    stems = file_stems(pictures)
    if pictures:
        (folder / "strips").mkdir(exist_ok=True)
    for region_id, picture in pictures.items():
        path = folder / "strips" / f"{stems[region_id]}.svg"
        path.write_text(picture, encoding="utf-8", newline="\n")
        written.append(path)
    return written
