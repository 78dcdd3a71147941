"""What no single table can show: dates, and temperatures against each other."""

from collections.abc import Mapping, Sequence
from datetime import date, timedelta

from cladwatt.physics.atmosphere import is_known_band
from cladwatt.physics.convection_laws import CONVECTION_LAWS, CONVECTION_MODELS, ConvectionModel
from cladwatt.quantities import Quantity
from cladwatt.survey.fault_list import FaultList, Place, shown
from cladwatt.survey.model import Camera, FrameEntry, Line
from cladwatt.survey.region import Region
from cladwatt.survey.survey_regions import region_place
from cladwatt.survey.table_reader import Table

__all__ = ["check_air_path", "check_dates", "check_temperatures", "checked_convection"]

_ZERO_CELSIUS = 273.15
_HOT_FLUIDS = ("steam", "condensate", "hot")
_CHILLED_FLUIDS = ("chilled", "brine", "refrigerant", "cold")


def check_dates(
    head: Table, camera: Camera, frames: Sequence[FrameEntry], faults: FaultList
) -> None:
    """Question dates that do not fit each other."""
    day = head.get("date")
    if not isinstance(day, date):
        return
    calibrated = camera.calibration_date
    if calibrated is not None and calibrated > day:
        faults.ask(
            head.place, "date",
            f"the camera was calibrated on {calibrated}, after the survey of {day}",
            "check both dates",
        )  # fmt: skip
    for frame in frames:
        if frame.time is not None and abs(frame.time.date() - day) > timedelta(days=31):
            faults.ask(
                head.place, "date",
                f"frame {shown(frame.id)} was recorded on {frame.time.date()}, the survey made"
                f" on {day}", "check both dates",
            )  # fmt: skip


def check_air_path(
    place: Place, camera: Camera, frames: Sequence[FrameEntry], faults: FaultList
) -> None:
    """Ask for the air's transmission in a band for which none is printed."""
    open_ = [frame.id for frame in frames if frame.conditions.atmosphere_transmission is None]
    if open_ and not is_known_band(camera.band):
        lower, upper = (1e6 * end for end in camera.band)
        faults.ask(
            place, "band_lower_um",
            f"the transmission of air is not held for a band of {lower:.3g} to {upper:.3g} µm, and"
            f" frame {shown(open_[0])} declares none: nothing can be said of it",
            "declare atmosphere_transmission; over a few metres of air it is near 1",
        )  # fmt: skip


def checked_convection(
    model: Table, frames: Sequence[FrameEntry], faults: FaultList
) -> ConvectionModel:
    """Return the model of convection asked for; one for still air is refused in wind."""
    asked = model.text("convection")
    chosen = next((name for name in CONVECTION_MODELS if name == asked), CONVECTION_MODELS[0])
    if CONVECTION_LAWS[chosen].forced is not None:
        return chosen
    for frame in frames:
        wind, found = frame.conditions.wind_speed, ""
        if frame.conditions.indoors is False:
            found = "was recorded outdoors"
        elif wind is not None and wind.value > 0 and wind.source.startswith("declared"):
            found = f"has a wind of {wind.value:g} m/s"
        if found:
            others = ", ".join(name for name in CONVECTION_MODELS if name != chosen)
            faults.add(
                model.place, "convection",
                f"convection is {shown(chosen)}, a rule for still air indoors, but frame"
                f" {shown(frame.id)} {found}",
                f"expected still air (indoors = true, no wind or wind_speed_m_s = 0), or one of"
                f" {others}",
            )  # fmt: skip
            break
    return chosen


def check_temperatures(
    lines: Mapping[str, Line],
    written: Mapping[str, Table],
    frames: Mapping[str, FrameEntry],
    regions: Sequence[Region],
    wide_air: Quantity | None,
    faults: FaultList,
) -> set[str]:
    """Return the tags whose inside temperature contradicts their service.

    `written` holds the table each line was built from.

    Each region of such a line is named as left out with it.
    """
    drawn: dict[str, list[FrameEntry]] = {tag: [] for tag in lines}
    for region in regions:
        if region.tag is not None and region.role == "pipe" and region.frame_id in frames:
            drawn[region.tag].append(frames[region.frame_id])
    wrong: set[str] = set()
    for tag, line in lines.items():
        airs = [(f"air of frame {f.id}", f.conditions.air_temperature) for f in drawn[tag]]
        if not airs:
            airs = [("air of [conditions]", wide_air)]
        if any(_contradicts(line, written[tag], where, air, faults) for where, air in airs):
            wrong.add(tag)
    for region in regions:
        if region.tag in wrong:
            faults.add(
                region_place(region), "tag",
                f"its line {shown(region.tag)} is left out: its temperature contradicts its"
                " service", "mend the line and the region comes back",
            )  # fmt: skip
    return wrong


def _service(line: Line, declared: str) -> str:
    """Return ``hot`` or ``chilled`` as declared or as the fluid's name says, else nothing."""
    if declared:
        return declared
    words = line.fluid.casefold()
    if any(word in words for word in _CHILLED_FLUIDS):
        return "chilled"
    return "hot" if any(word in words for word in _HOT_FLUIDS) else ""


def _contradicts(
    line: Line, table: Table, where: str, air: Quantity | None, faults: FaultList
) -> bool:
    inside = line.inside_temperature
    declared = table.text("service")
    service = _service(line, declared)
    if air is None or inside is None or not service:
        return False
    difference = inside.value - air.value
    if (difference < 0) != (service == "hot") or difference == 0:
        return False
    name = "service" if declared else "fluid"
    word = declared or line.fluid
    side = "colder" if service == "hot" else "warmer"
    faults.add(
        table.place, name,
        f"{name} is {shown(word)} but the {line.inside_is} at"
        f" {inside.value - _ZERO_CELSIUS:.4g} °C is {side} than the {where},"
        f" {air.value - _ZERO_CELSIUS:.4g} °C",
        "expected the other way round; check both temperatures and their units",
    )  # fmt: skip
    return True
