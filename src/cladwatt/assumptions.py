"""Every quantity an assessment rested on, with its source: nothing assumed unseen."""

from cladwatt.measure.strip import UNKNOWN_VIEW_DEG
from cladwatt.quantities import Quantity
from cladwatt.results.assessment import Assumption
from cladwatt.survey.model import Conditions, Line, SurroundingsPiece
from cladwatt.survey.survey import Survey

__all__ = ["assumptions_of"]

_CONDITION_UNITS = {
    "air_temperature": "K",
    "surroundings_temperature": "K",
    "reflected_temperature": "K",
    "relative_humidity": "-",
    "distance": "m",
    "atmosphere_transmission": "-",
    "wind_speed": "m/s",
    "sky_band_temperature": "K",
    "sky_total_temperature": "K",
    "sky_view_factor": "-",
    "cloud_cover": "-",
    "solar_irradiance": "W/m2",
    "hours_since_rain": "h",
    "hours_since_sun": "h",
}


def assumptions_of(survey: Survey) -> tuple[Assumption, ...]:
    """List every declared quantity and default behind a survey's results.

    Parameters
    ----------
    survey : Survey

    Returns
    -------
    tuple of Assumption
        Camera, site, then lines, then frames in their order; a condition equal in all frames
        stands once.
    """
    rows = [*_camera(survey)]
    if survey.site.pressure is not None:
        rows.append(_row("site", "pressure", survey.site.pressure, "Pa"))
    for line in survey.lines.values():
        rows.extend(_line(line))
    rows.extend(_conditions(survey))
    return tuple(rows)


def _row(owner: str, name: str, quantity: Quantity, unit: str) -> Assumption:
    return Assumption(
        owner, name, quantity.value, quantity.u, unit, quantity.source, quantity.confidence
    )


def _camera(survey: Survey) -> list[Assumption]:
    camera = survey.camera
    band = camera.band_source
    accuracy = camera.accuracy
    rows = [
        Assumption("camera", "band_lower", camera.band[0], 0.0, "m", band, ""),
        Assumption("camera", "band_upper", camera.band[1], 0.0, "m", band, ""),
        Assumption("camera", "accuracy_limit", accuracy.limit, 0.0, "K", accuracy.source, ""),
        Assumption("camera", "accuracy_percent", accuracy.percent, 0.0, "%", accuracy.source, ""),
    ]
    if camera.noise is not None:
        rows.append(_row("camera", "noise", camera.noise, "K"))
    if camera.field_of_view_deg is None:
        # half of what it shortens lengths by is their uncertainty: about half of the angle
        view, why = UNKNOWN_VIEW_DEG, "assumption, no source; half its effect on lengths is u"
        rows.append(Assumption("camera", "field_of_view", view, view / 2, "deg", why, "low"))
    return rows


def _line(line: Line) -> list[Assumption]:
    owner = f"line {line.tag}"
    cladding = line.cladding
    named: list[tuple[str, Quantity | None, str]] = [
        ("pipe_outside_diameter", line.pipe_outside_diameter, "m"),
        ("inside_temperature", line.inside_temperature, "K"),
        ("steam_pressure", line.steam_pressure, "Pa"),
        ("inside_film", line.inside_film, "W/(m2 K)"),
        ("flow", line.flow, "kg/s"),
        ("specific_heat", line.specific_heat, "J/(kg K)"),
        ("installation_factor", line.installation_factor, "-"),
        ("supports_allowance", line.supports_allowance, "-"),
        ("tracer_temperature", line.tracing.temperature, "K"),
        ("tracer_power", line.tracing.power, "W/m"),
        ("band_emissivity", cladding.band_emissivity, "-"),
        ("total_emissivity", cladding.total_emissivity, "-"),
        ("cladding_thickness", cladding.thickness, "m"),
    ]
    rows = [_row(owner, name, value, unit) for name, value, unit in named if value is not None]
    for number, layer in enumerate(line.layers, start=1):
        if layer.thickness is not None:
            rows.append(_row(owner, f"layer_{number}_thickness", layer.thickness, "m"))
        if layer.conductivity is not None:
            curve = layer.conductivity
            middle = curve.conductivity[len(curve.conductivity) // 2]
            rows.append(
                Assumption(
                    owner,
                    f"layer_{number}_conductivity",
                    middle,
                    middle * layer.conductivity_factor.u,
                    "W/(m K)",
                    curve.source,
                    layer.conductivity_factor.confidence,
                )
            )
    return rows


def _conditions(survey: Survey) -> list[Assumption]:
    rows = []
    for name, unit in _CONDITION_UNITS.items():
        by_value: dict[Quantity, list[str]] = {}
        for frame in survey.frames:
            value = _condition(frame.conditions, name)
            if value is not None:
                by_value.setdefault(value, []).append(frame.id)
        for value, frames in by_value.items():
            rows.append(_row(_frames_named(survey, frames), name, value, unit))
    return rows + _pieces(survey)


def _frames_named(survey: Survey, frames: list[str]) -> str:
    everywhere = len(frames) == len(survey.frames)
    return "all frames" if everywhere else "frame " + ", ".join(frames)


def _pieces(survey: Survey) -> list[Assumption]:
    """List surroundings declared in pieces, once for all frames that share them."""
    by_pieces: dict[tuple[SurroundingsPiece, ...], list[str]] = {}
    for frame in survey.frames:
        pieces = frame.conditions.surroundings_pieces
        if pieces:
            by_pieces.setdefault(pieces, []).append(frame.id)
    rows = []
    for pieces, frames in by_pieces.items():
        owner = _frames_named(survey, frames)
        for number, piece in enumerate(pieces, start=1):
            name = f"surroundings_{number}_{piece.what}"
            rows.append(_row(owner, f"{name}_temperature", piece.temperature, "K"))
            rows.append(_row(owner, f"{name}_view_factor", piece.view_factor, "-"))
    return rows


def _condition(conditions: Conditions, name: str) -> Quantity | None:
    value: Quantity | None = getattr(conditions, name)
    return value
