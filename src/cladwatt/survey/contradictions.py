"""Declared values that contradict each other: nothing stops for them, but they are asked about."""

import math
from collections.abc import Sequence

from cladwatt.quantities import Quantity
from cladwatt.survey.fault_list import FaultList
from cladwatt.survey.model import Layer
from cladwatt.survey.table_reader import Table

__all__ = ["ask_of_camera", "ask_of_conditions", "ask_of_layers", "ask_of_pressure"]

_ZERO_CELSIUS = 273.15
_FAR_OFF = 3.0
"""Standard uncertainties by which two statements must differ to be asked about."""
_WEATHER = 6000.0
"""Further than this no weather moves the air's pressure from that of its altitude. [Pa]"""
_WIDEST_GAP = 0.1
"""An air gap in lagging wider than this is rather a thickness in the wrong unit. [m]"""
_SKY = ("sky_total_temperature", "sky_band_temperature", "sky_view_factor")


def ask_of_conditions(
    table: Table, air: Quantity | None, sky_total: Quantity | None, faults: FaultList
) -> None:
    """Ask about sky, sun and window of a frame that do not fit each other.

    Parameters
    ----------
    table : Table
        Conditions with what the frame declares over them.
    air, sky_total : Quantity or None
        Temperatures of air and of the sky for the heat balance. [K]
    faults : FaultList
    """
    indoors = table.flag("indoors") is True
    sky = next((name for name in _SKY if table.quantity(name) is not None), "")
    if indoors and sky:
        _ask(table, sky, f"indoors is true, but {table.spelling(sky)} is declared",
             "expected no sky under a roof, or indoors = false", faults)  # fmt: skip
    _ask_warmer(table, "sky_total_temperature", sky_total, air, "the air", faults)
    band = table.quantity("sky_band_temperature")
    what = "what the heat balance exchanges with in the sky"
    _ask_warmer(table, "sky_band_temperature", band, sky_total, what, faults)
    sun = table.quantity("solar_irradiance")
    if sun is not None and sun.value > 0 and (indoors or table.flag("sun_on_pipe") is False):
        other = "indoors is true" if indoors else "sun_on_pipe is false"
        _ask(table, "solar_irradiance", f"{other}, but {table.spelling('solar_irradiance')} is"
             f" {sun.value:g}", "expected 0 where no sun reaches the pipe", faults)  # fmt: skip
    alone = table.quantity("window_temperature") is not None
    if alone and table.quantity("window_transmission") is None:
        found = "a window's temperature stands without its transmission: no window is taken off"
        _ask(table, "window_temperature", found, "expected window_transmission beside it", faults)


def _ask_warmer(
    table: Table,
    name: str,
    sky: Quantity | None,
    other: Quantity | None,
    what: str,
    faults: FaultList,
) -> None:
    if sky is None or other is None or not table.has(name):
        return
    if sky.value - other.value > _FAR_OFF * max(math.hypot(sky.u, other.u), 1.0):
        _ask(table, name, f"{table.spelling(name)} is {sky.value - _ZERO_CELSIUS:.4g} °C, warmer"
             f" than {what}, {other.value - _ZERO_CELSIUS:.4g} °C",
             "expected a sky that is colder; check both", faults)  # fmt: skip


def ask_of_pressure(
    table: Table, pressure: Quantity | None, altitude: float | None, faults: FaultList
) -> None:
    """Ask about a declared air pressure that no weather brings about at the altitude.

    Parameters
    ----------
    table : Table
        Read by the keys of ``site``.
    pressure : Quantity or None
        As declared. [Pa]
    altitude : float or None
        [m]
    faults : FaultList
    """
    if pressure is None or altitude is None:
        return
    from cladwatt.physics.air import pressure_at_altitude

    usual = float(pressure_at_altitude(altitude))
    if abs(pressure.value - usual) > _WEATHER:
        _ask(table, "pressure", f"{table.spelling('pressure')} is {pressure.value / 100:.0f} hPa,"
             f" but at {altitude:g} m the air's pressure is near {usual / 100:.0f} hPa",
             "expected the absolute pressure at the site, not reduced to sea level; check both",
             faults)  # fmt: skip


def ask_of_camera(table: Table, faults: FaultList) -> None:
    """Ask about a camera that is said to make no error.

    Parameters
    ----------
    table : Table
        Read by the keys of ``camera``.
    faults : FaultList
    """
    names = [name for name in ("accuracy", "accuracy_of_reading") if table.has(name)]
    if names and not any(table.number(name) for name in names):
        _ask(table, names[0], f"{table.spelling(names[0])} is 0: the camera would make no error",
             "expected its maker's limit; without one leave the key out, 2 K or 2 % then count",
             faults)  # fmt: skip


def ask_of_layers(
    table: Table, layers: Sequence[Layer], inside: Quantity | None, faults: FaultList
) -> None:
    """Ask about ice in a line that is not frozen, and about a very wide air gap.

    Parameters
    ----------
    table : Table
        Read by the keys of ``line``.
    layers : sequence of Layer
    inside : Quantity or None
        Inside temperature. [K]
    faults : FaultList
    """
    name = "layers" if table.get("layers") is not None else "lagging_condition"
    icy = any(layer.condition == "ice" for layer in layers)
    if icy and inside is not None and inside.value - _FAR_OFF * inside.u > _ZERO_CELSIUS:
        _ask(table, name, "the lagging is said to hold ice, but inside the line it is"
             f" {inside.value - _ZERO_CELSIUS:.4g} °C",
             "expected ice in lines below 0 °C only: is it wet?", faults)  # fmt: skip
    for layer in layers:
        wide = layer.thickness is not None and layer.thickness.value > _WIDEST_GAP
        if layer.kind == "air_gap" and wide:
            assert layer.thickness is not None
            _ask(table, name, f"an air gap is {1e3 * layer.thickness.value:g} mm wide",
                 "expected some millimetres: the relation for gaps hardly holds there; is it the"
                 " unit?", faults)  # fmt: skip
    alone = table.has("lagging_conductivity_temperature") and not table.has("lagging_conductivity")
    if alone:
        name = "lagging_conductivity_temperature"
        _ask(table, name, f"{table.spelling(name)} stands without a conductivity and is not used",
             f"expected {table.key('lagging_conductivity').usual} beside it", faults)  # fmt: skip


def _ask(table: Table, name: str, found: str, expected: str, faults: FaultList) -> None:
    faults.ask(table.place, table.spelling(name) if table.has(name) else name, found, expected)
