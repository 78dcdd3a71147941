"""The strip picture: a pipe straightened into metres, what it shows and what it loses."""

import hashlib
import math

from cladwatt.report import colours
from cladwatt.report.numbers import as_gain, format_interval, format_number
from cladwatt.report.strip_curves import draw_loss, draw_metres, draw_ratio
from cladwatt.report.strip_face import draw_face, temperature_limits
from cladwatt.report.strip_marks import draw_marks, draw_tints, label_rows, stretch_label
from cladwatt.report.strip_series import series_of, with_pixels
from cladwatt.report.strip_sheet import (
    FACE_HEIGHT,
    FACE_TOP,
    GAP,
    LEFT,
    LOSS_HEIGHT,
    RATIO_HEIGHT,
    RIGHT,
    ROW_HEIGHT,
    TITLE_Y,
    WIDTH,
    Sheet,
    draw_words,
)
from cladwatt.report.svg import Axis, Drawing, clip_text, isolated
from cladwatt.report.wording import sentence, text
from cladwatt.results.assessment import RegionResult

__all__ = ["strip_svg", "temperature_limits"]

PANELS = LOSS_HEIGHT + GAP + RATIO_HEIGHT
FOOT = 46.0


def strip_svg(
    region: RegionResult,
    *,
    air_temperature: float | None,
    limits: tuple[float, float] | None = None,
    language: str = "en",
    heading: bool = True,
) -> str:
    """Draw the strip picture of a region.

    Parameters
    ----------
    region : RegionResult
        What the region came to.
    air_temperature : float or None
        Centre of the colour scale; the region's own where None, the lower limit where both are
        unknown. [K]
    limits : (float, float), optional
        Range of the colour scale; from the region itself where None. [K]
    language : str
        Code of a language file.
    heading : bool
        Whether line, region, frame and verdict stand over the picture.

    Returns
    -------
    str
        A complete SVG, self-contained, its ids unique to the region.
    """
    scaled = math.isfinite(region.start_station) and math.isfinite(region.end_station)
    if not scaled:
        region = with_pixels(region)
    low, high = sorted((region.start_station, region.end_station))
    metres = Axis(low, high if high > low else low + 1.0, LEFT, RIGHT)
    rows = label_rows(region, metres, language)
    top = FACE_TOP + FACE_HEIGHT + 8 + ROW_HEIGHT * max(1, len(rows))
    svg = Drawing(
        WIDTH,
        top + PANELS + FOOT,
        _prefix(region, heading),
        _title(region, language),
        _description(region, metres, language, "strip" if scaled else "strip_pixels"),
        top=0.0 if heading else TITLE_Y + 14,
    )
    svg.rect(0, 0, WIDTH, svg.height, fill=colours.PAPER)
    sheet = Sheet(
        svg,
        region,
        series_of(region),
        metres,
        air=region.air_temperature if air_temperature is None else air_temperature,
        limits=limits or temperature_limits(region),
        hatch=svg.hatch(),
        language=language,
        along="metres" if scaled else "pixels",
    )
    if heading:
        _draw_heading(sheet)
    _draw_panels(sheet, top)
    quantified = region.verdict.level != "not quantified"
    draw_marks(sheet, rows, FACE_TOP, top + PANELS if quantified else top)
    return svg.render()


def _draw_panels(sheet: Sheet, top: float) -> None:
    region = sheet.region
    if region.verdict.level == "not quantified":
        draw_face(sheet)
        reason = sentence(region.verdict.reason, sheet.language)
        draw_words(sheet, top, PANELS, [sheet.say("not_quantified"), reason])
    else:
        draw_tints(sheet, top, top + PANELS)
        draw_face(sheet)
        draw_loss(sheet, top)
        draw_ratio(sheet, top + LOSS_HEIGHT + GAP)
    draw_metres(sheet, top + PANELS)


def _prefix(region: RegionResult, heading: bool) -> str:
    key = f"{region.frame_id}\0{region.region_id}".encode("utf-8", "replace")
    # A letter first, and another where the same region stands twice in one page.
    return "s" + hashlib.sha256(key).hexdigest()[:10] + ("" if heading else "e")


def _title(region: RegionResult, language: str, tag: int = 2000, rest: int = 2000) -> str:
    return text(
        "strip.title",
        language,
        tag=isolated(clip_text(region.tag, tag)),
        region=isolated(clip_text(region.region_id, rest)),
        frame=isolated(clip_text(region.frame_id, rest)),
    )


def _description(region: RegionResult, metres: Axis, language: str, along: str) -> str:
    def say(key: str, **parameters: str) -> str:
        return text(f"strip.described_{key}", language, **parameters)

    start, end = format_number(metres.low, 1), format_number(metres.high, 1)
    parts = [say(along, start=start, end=end)]
    if region.verdict.level == "not quantified":
        parts.append(say("not_quantified"))
    elif region.heat_loss is not None:
        loss = as_gain(region.heat_loss) if region.gain else region.heat_loss
        parts.append(say("gain" if region.gain else "loss", loss=format_interval(loss, "W/m")))
    names = "; ".join(stretch_label(stretch, language) for stretch in region.stretches)
    parts.append(say("stretches", stretches=names) if names else say("none"))
    return " ".join(parts)


def _draw_heading(sheet: Sheet) -> None:
    svg, level = sheet.svg, sheet.region.verdict.level
    words = _title(sheet.region, sheet.language, 34, 26)
    svg.text(LEFT, TITLE_Y, words, fill=colours.INK, font_weight="600", font_size=15)
    shown = text(f"verdict.{level.replace(' ', '_')}", sheet.language)
    svg.text(WIDTH - 8, TITLE_Y, shown, fill=colours.INK, text_anchor="end")
    svg.line(LEFT, TITLE_Y + 8, WIDTH - 8, TITLE_Y + 8, stroke=colours.INK)
