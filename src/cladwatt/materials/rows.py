"""Typed rows of the material tables, in SI."""

from dataclasses import dataclass
from typing import Literal, get_args

from cladwatt.quantities import Quantity

__all__ = [
    "COUNTS_AS",
    "AirRow",
    "CladdingMaterial",
    "Confidence",
    "CountsAs",
    "DamageKind",
    "Fitting",
    "LaggingMaterial",
    "PipeSize",
]

Confidence = Literal["declared", "high", "medium", "low"]
CountsAs = Literal["bare_pipe", "lagged_pipe", "line_share"]
COUNTS_AS: tuple[CountsAs, ...] = get_args(CountsAs)


@dataclass(frozen=True)
class LaggingMaterial:
    """A lagging material: laboratory conductivity against mean temperature, dry and new.

    Parameters
    ----------
    key, name : str
        Key as a survey writes it, and the readable name.
    temperature : tuple of float
        Nodes, increasing; the curve is valid between the first and the last. [K]
    conductivity : tuple of float
        At the nodes, linear between them. [W/(m K)]
    u_relative : float
        Relative standard uncertainty of the whole curve, the largest of its nodes.
    source : str
        Where the conductivity comes from.
    confidence : {"declared", "high", "medium", "low"}
        The lowest of its nodes.
    maximum_service_temperature : float or None
        None where no source is held. [K]
    vapour_tight : bool
        Closed cells that hardly pass water vapour without a separate retarder.
    wet_ratio : (float, float) or None
        Lowest and highest published ratio of wet to dry conductivity; None where unknown.
    service_source, wet_source : str
        Where these two come from.
    density, specific_heat : Quantity or None
        Of the dry lagging, for the time it takes to follow; None where unknown.
        [kg/m3], [J/(kg K)]
    """

    key: str
    name: str
    temperature: tuple[float, ...]
    conductivity: tuple[float, ...]
    u_relative: float
    source: str
    confidence: Confidence
    maximum_service_temperature: float | None = None
    vapour_tight: bool = False
    wet_ratio: tuple[float, float] | None = None
    service_source: str = ""
    wet_source: str = ""
    aliases: tuple[str, ...] = ()
    density: Quantity | None = None
    specific_heat: Quantity | None = None


@dataclass(frozen=True)
class CladdingMaterial:
    """The outer surface of a line: sheet, coat, bare lagging or bare pipe.

    Parameters
    ----------
    key, name : str
        Key as a survey writes it, and the readable name.
    band_emissivity : Quantity
        In the long-wave infrared band, near the normal.
    total_emissivity : Quantity
        Total hemispherical, for the heat balance.
    solar_absorptance : Quantity
        Share of sunlight absorbed.
    conductivity : float
        Of the sheet or coat. [W/(m K)]
    thickness : Quantity
        Usual thickness, 0 where there is no sheet. [m]
    is_metal : bool
        Whether emissivity against angle follows bare metal rather than a dielectric coat.
    source : str
        Where the emissivities come from.
    confidence : {"declared", "high", "medium", "low"}
        How far they can be trusted.
    """

    key: str
    name: str
    band_emissivity: Quantity
    total_emissivity: Quantity
    solar_absorptance: Quantity
    conductivity: float
    thickness: Quantity
    is_metal: bool
    source: str
    confidence: Confidence
    aliases: tuple[str, ...] = ()


@dataclass(frozen=True)
class PipeSize:
    """Outside diameters of one nominal pipe size; None where a series does not have it.

    Parameters
    ----------
    dn : int or None
        Nominal diameter DN.
    nps : float or None
        Nominal pipe size in inches, e.g. 2.5.
    asme, en : float or None
        Outside diameter in the ASME B36.10M and in the EN 10220 series. [m]
    u_relative : float
        Relative standard uncertainty of the diameter.
    source : str
        Where the diameters come from.
    """

    dn: int | None
    nps: float | None
    asme: float | None
    en: float | None
    u_relative: float
    source: str
    confidence: Confidence


@dataclass(frozen=True)
class HangerSpacing:
    """How far apart hangers are on a size of pipe, with water and with steam or gas in it. [m]"""

    outside_diameter: float
    water: float
    vapour: float
    source: str
    confidence: Confidence


@dataclass(frozen=True)
class Fitting:
    """What one fitting of a line counts as.

    Parameters
    ----------
    key : str
        Of the row.
    kind : str
        ``flange`` (a pair), ``valve`` or ``hanger``, or what a user's own table adds.
    lagged : bool
        Whether the fitting itself is lagged.
    counts_as : {"bare_pipe", "lagged_pipe", "line_share"}
        What `amount` is: metres of bare pipe of the same size and temperature, metres of the
        lagged line beside it, or a share of the whole line's loss.
    amount : Quantity
        With the spread of what is printed. [m] or [-]
    """

    key: str
    kind: str
    lagged: bool
    counts_as: CountsAs
    amount: Quantity


@dataclass(frozen=True)
class DamageKind:
    """What one kind of damage may look like.

    Parameters
    ----------
    key, name : str
    severity : (float, float)
        Range; what it means is the kind's own, see the table. [-]
    length : (float, float)
        Along the pipe, every factor equally likely. [m]
    sides : (float, float, float, float)
        Probability that it goes all round, or lies on the upper side, the underside or a flank.
    half_angle_deg : (float, float)
        Half of the sector it takes where it does not go all round. [deg]
    edge : (float, float)
        Length over which it sets in. [m]
    prior : float
        Probability that a region has it.
    source : str
    confidence : {"declared", "high", "medium", "low"}
    """

    key: str
    name: str
    severity: tuple[float, float]
    length: tuple[float, float]
    sides: tuple[float, float, float, float]
    half_angle_deg: tuple[float, float]
    edge: tuple[float, float]
    prior: float
    source: str
    confidence: Confidence


@dataclass(frozen=True)
class AirRow:
    """Dry air at 101 325 Pa, as the reference equations give it; for printing and for tests.

    Temperature [K], density [kg/m3], specific heat [J/(kg K)], dynamic viscosity [Pa s],
    conductivity [W/(m K)], Prandtl number [-].
    """

    temperature: float
    density: float
    specific_heat: float
    dynamic_viscosity: float
    conductivity: float
    prandtl: float
    source: str
