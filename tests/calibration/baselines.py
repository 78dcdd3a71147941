"""What the estimator has to beat: the specification alone, and a careful user's spreadsheet.

Both use the declared values only. *As specified* is the loss of sound lagging, the image unused.
The *spreadsheet* takes the mean recorded temperature in the outline, corrects the emissivity by the
fourth power, adds one textbook correlation and radiation, and calls damaged what loses more than
1.25 times the specified loss.
"""

import numpy as np

from cladwatt.measure.outline import region_mask
from cladwatt.physics.air import air_properties
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.constants import GRAVITY, STEFAN_BOLTZMANN
from cladwatt.physics.forced_convection import nusselt_churchill_bernstein, reynolds_number
from cladwatt.physics.lagged_pipe import LaggingLayer, SurfaceExchange, solve_lagged_pipe
from cladwatt.physics.natural_convection import nusselt_churchill_chu_horizontal, rayleigh_number
from cladwatt.physics.radiometry import surface_temperature_fourth_power
from cladwatt.survey.frame import Frame
from cladwatt.survey.model import Conditions, FrameEntry, Line, Recording
from cladwatt.survey.region import Region
from cladwatt.survey.survey import Survey
from cladwatt.types import FloatArray

__all__ = [
    "DAMAGED_ABOVE",
    "cylinder_loss",
    "declared_losses",
    "fourth_power_corrected",
    "spreadsheet_extreme",
    "spreadsheet_loss",
]

DAMAGED_ABOVE = 1.25
"""Times the specified loss."""
_NOT_LAGGING = frozenset({"pipe", "component", "leave_out", "foil", "tape", "contact"})


def declared_losses(line: Line, conditions: Conditions) -> tuple[float, float]:
    """Return the specified and the sound loss at the declared values; NaN where not declared.

    Parameters
    ----------
    line : Line
    conditions : Conditions

    Returns
    -------
    specified, sound : float
        At laboratory conductivity, and times the installation factor. [W/m]
    """
    nothing = float("nan"), float("nan")
    air, pipe, inside = (
        conditions.air_temperature, line.pipe_outside_diameter, line.inside_temperature
    )  # fmt: skip
    if air is None or pipe is None or inside is None or line.lagged_diameter is None:
        return nothing
    around = conditions.surroundings_temperature or air
    wind = conditions.wind_speed
    exchange = SurfaceExchange(
        air.value,
        around.value,
        0.0 if wind is None else wind.value,
        line.lagged_diameter,
        line.cladding.total_emissivity.value,
        inclination_deg=line.inclination_deg,
    )
    losses = []
    for factor in (1.0, line.installation_factor.value):
        layers = []
        for layer in line.layers:
            if layer.thickness is None or layer.conductivity is None:
                return nothing
            curve = ConductivityIntegral(
                list(layer.conductivity.temperature), list(layer.conductivity.conductivity)
            )
            layers.append(
                LaggingLayer(curve, layer.thickness.value, factor * layer.conductivity_factor.value)
            )
        state = solve_lagged_pipe(inside.value, pipe.value, layers, exchange)
        losses.append(float(state.heat_loss))
    return losses[0], losses[1]


def spreadsheet_loss(
    survey: Survey, entry: FrameEntry, frame: Frame, region: Region, regions: tuple[Region, ...]
) -> float:
    """Return the loss per metre a spreadsheet gives; NaN where it gives none. [W/m]"""
    recorded = _recorded_within(frame, region, regions)
    line, conditions = survey.lines[str(region.tag)], entry.conditions
    if recorded.size == 0 or line.lagged_diameter is None:
        return float("nan")
    surface = _corrected(float(recorded.mean()), line, entry)
    if np.isnan(surface):
        return float("nan")
    return cylinder_loss(
        surface,
        conditions,
        diameter=line.lagged_diameter,
        emissivity=line.cladding.total_emissivity.value,
    )


def spreadsheet_extreme(
    survey: Survey, entry: FrameEntry, frame: Frame, region: Region, regions: tuple[Region, ...]
) -> float:
    """Return the hottest pixel in the outline, corrected; the coldest of a chilled line. [K]"""
    recorded = _recorded_within(frame, region, regions)
    line, air = survey.lines[str(region.tag)], entry.conditions.air_temperature
    inside = line.inside_temperature
    if recorded.size == 0 or inside is None or air is None:
        return float("nan")
    extreme = recorded.min() if inside.value < air.value else recorded.max()
    return _corrected(float(extreme), line, entry)


def _recorded_within(frame: Frame, region: Region, regions: tuple[Region, ...]) -> FloatArray:
    """Return what was recorded in an outline, other things in view left out. [K]"""
    shape = (frame.temperature.shape[0], frame.temperature.shape[1])
    inside = region_mask(region, shape)
    for other in regions:
        if other.id != region.id and other.role in _NOT_LAGGING:
            inside &= ~region_mask(other, shape)
    return np.asarray(frame.temperature[inside & np.isfinite(frame.temperature)])


def _corrected(recorded: float, line: Line, entry: FrameEntry) -> float:
    """Return the surface by the fourth power, NaN where no reflected temperature is known. [K]"""
    conditions = entry.conditions
    reflected = conditions.reflected_temperature or conditions.air_temperature
    if reflected is None:
        return float("nan")
    return fourth_power_corrected(
        recorded,
        entry.recording,
        emissivity=line.cladding.band_emissivity.value,
        reflected=reflected.value,
    )


def fourth_power_corrected(
    recorded: float, recording: Recording, *, emissivity: float, reflected: float
) -> float:
    """Undo the camera's emissivity and apply the declared one, both by the fourth power. [K]"""
    apparent = recorded
    if recording.emissivity < 1 and recording.reflected_temperature is not None:
        mirrored = (1 - recording.emissivity) * recording.reflected_temperature**4
        apparent = float((recording.emissivity * recorded**4 + mirrored) ** 0.25)
    return float(
        surface_temperature_fourth_power(apparent, emissivity=emissivity, reflected=reflected)
    )


def cylinder_loss(
    surface: float, conditions: Conditions, *, diameter: float, emissivity: float
) -> float:
    """Return the loss of a horizontal cylinder: in wind Churchill-Bernstein, else Churchill-Chu.

    Parameters
    ----------
    surface : float
        [K]
    conditions : Conditions
        Declared ones; only their values are used.
    diameter : float
        [m]
    emissivity : float
        Total.

    Returns
    -------
    float
        [W/m]
    """
    assert conditions.air_temperature is not None
    air = conditions.air_temperature.value
    around = conditions.surroundings_temperature
    surroundings = air if around is None else around.value
    if not np.isfinite(surface):
        return float("nan")
    film = air_properties((surface + air) / 2)
    prandtl = film.prandtl
    if conditions.indoors is False and conditions.wind_speed is not None:
        nusselt = nusselt_churchill_bernstein(
            reynolds_number(
                conditions.wind_speed.value,
                length=diameter,
                kinematic_viscosity=film.kinematic_viscosity,
            ),
            prandtl,
        )
    else:
        nusselt = nusselt_churchill_chu_horizontal(
            rayleigh_number(
                surface - air,
                length=diameter,
                expansion=film.expansion,
                kinematic_viscosity=film.kinematic_viscosity,
                prandtl=prandtl,
                gravity=GRAVITY,
            ),
            prandtl,
        )
    convection = float(nusselt) * float(film.conductivity) / diameter * (surface - air)
    radiation = emissivity * STEFAN_BOLTZMANN * (surface**4 - surroundings**4)
    return float(np.pi * diameter * (convection + radiation))
