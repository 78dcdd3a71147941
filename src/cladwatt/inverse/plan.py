"""What a survey still to be walked can show of a line: the assessment of an image not yet taken.

A frame of the line is imagined as the conditions lead to expect it: a sound pipe, level and seen
square on, at its declared distance, every quantity at the middle of its draws. It is then observed
and concluded on like a recorded one, with the same draws, null and convection, so that what is
promised beforehand is what assessing will say.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from cladwatt.errors import RegionError
from cladwatt.inverse.advice import measurements_of, ranked_measurements
from cladwatt.inverse.cladding_fin import edge_spread
from cladwatt.inverse.conclude import conclude, moved
from cladwatt.inverse.detectable import SoundProfiles, smallest_rise
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.frame_draws import FrameDraws, draw_frame, mirrored
from cladwatt.inverse.joint import joint_update
from cladwatt.inverse.kelvin_per_rise import kelvin_of_rise
from cladwatt.inverse.line_draws import LineDraws, draw_line
from cladwatt.inverse.observe import Observed, observe_region
from cladwatt.inverse.outer_balance import outer_flux, vapour_of
from cladwatt.inverse.references import at_lens
from cladwatt.inverse.result import Interval, Verdict, interval_of
from cladwatt.inverse.seen import FrameImage
from cladwatt.inverse.sound import SoundDraws, sound_draws
from cladwatt.measure.noise import FrameNoise
from cladwatt.physics.convection_laws import ConvectionModel
from cladwatt.physics.emissivity import directional_emissivity
from cladwatt.quantities import Quantity, Remark
from cladwatt.survey.model import Camera, Conditions, Line, Site
from cladwatt.survey.region import Region
from cladwatt.types import FloatArray

__all__ = ["LinePlan", "Smallest", "Viewpoint", "plan_line"]

FIELD_OF_VIEW_DEG = 25.0
"""Horizontal, where the camera declares none; common practice, no source."""
NOISE = 0.06
"""Of a pixel, where the camera declares none; common practice, no source. [K]"""
DRAWN_SHARE = 0.9
"""Of the frame's width along which the pipe is drawn."""
LENGTHS = (0.2, 1.0)
"""Of stretches asked for beside one diameter. [m]"""


@dataclass(frozen=True)
class Viewpoint:
    """Where the frame will be taken from."""

    columns: int = 640
    """Width of a frame. [px]"""
    distance: float | None = None
    """Camera to pipe; the conditions' own, else the default's, where None. [m]"""


@dataclass(frozen=True)
class Smallest:
    """The smallest damage of one length that shows."""

    length: float
    """[m]"""
    rise: float
    """Of the loss over the sound one; infinite where none shows. [-]"""
    loss: float
    """The same per metre. [W/m]"""


@dataclass(frozen=True)
class LinePlan:
    """What can be expected of one line.

    Attributes
    ----------
    sound_loss, heat_loss : Interval or None
        What sound lagging loses, and how well assessing a sound pipe would know it. [W/m]
    width : float
        Of the pipe in the frame. [px]
    distance : float
        [m]
    strip_length : float
        Of pipe in one frame. [m]
    smallest : tuple of Smallest
        Over one diameter first.
    bring : tuple of Remark
        Measurements by what each would leave of the loss's width, best first.
    missing : tuple of Remark
        What keeps a promise from being made, or a number from being given.
    """

    tag: str
    area: str
    gain: bool = False
    verdict: Verdict | None = None
    sound_loss: Interval | None = None
    heat_loss: Interval | None = None
    surface_temperature: float = float("nan")
    width: float = float("nan")
    distance: float = float("nan")
    strip_length: float = float("nan")
    smallest: tuple[Smallest, ...] = ()
    bring: tuple[Remark, ...] = ()
    missing: tuple[Remark, ...] = ()


def plan_line(
    line: Line,
    conditions: Conditions,
    camera: Camera,
    site: Site,
    book: DrawBook,
    *,
    defaults: Mapping[str, Quantity],
    convection_model: ConvectionModel = "churchill",
    view: Viewpoint | None = None,
) -> LinePlan:
    """Tell what a frame of a line in these conditions can show.

    Parameters
    ----------
    line : Line
    conditions : Conditions
        Expected.
    camera : Camera
    site : Site
    book : DrawBook
    defaults : mapping of str to Quantity
    convection_model : str
    view : Viewpoint, optional

    Returns
    -------
    LinePlan
        Without numbers where something needed is unknown; `missing` names it.
    """
    view = view or Viewpoint()
    nothing = LinePlan(line.tag, line.area, missing=_missing(line, conditions))
    if nothing.missing:
        return nothing
    distance = _distance(conditions, view, defaults)
    known = replace(conditions, distance=conditions.distance or Quantity(distance, 0.1 * distance))
    owner = f"plan:{line.tag}"
    frame = draw_frame(
        book, owner, known, camera, site, defaults=defaults, convection_model=convection_model
    )
    assert frame is not None
    indoors = conditions.indoors is not False
    frame = mirrored(frame, book, owner, is_metal=line.cladding.is_metal, indoors=indoors)
    drawn = draw_line(book, line)
    sound = sound_draws(drawn, frame)
    if sound is None:
        return nothing
    camera = replace(camera, field_of_view_deg=camera.field_of_view_deg or FIELD_OF_VIEW_DEG)
    try:
        observed = _observed(line, known, camera, book, owner, frame, drawn, sound, distance, view)
    except RegionError:
        narrow = Verdict("not quantified", Remark("not_quantified.too_narrow"),
                         Remark("advice.closer_frame"))  # fmt: skip
        return replace(nothing, verdict=narrow, distance=distance)
    return _concluded(observed, book, distance)


def _missing(line: Line, conditions: Conditions) -> tuple[Remark, ...]:
    """Return what must be known before anything can be promised."""
    lagging = all(
        layer.thickness is not None and layer.conductivity is not None for layer in line.layers
    )
    known = {
        "missing.air_temperature": conditions.air_temperature is not None,
        "missing.wind": conditions.wind_speed is not None,
        "missing.inside_temperature": line.inside_temperature is not None,
        "missing.diameter": line.lagged_diameter is not None,
        "missing.lagging": lagging and bool(line.layers),
    }
    return tuple(Remark(key) for key, is_known in known.items() if not is_known)


def _distance(conditions: Conditions, view: Viewpoint, defaults: Mapping[str, Quantity]) -> float:
    if view.distance is not None:
        return view.distance
    declared = conditions.distance or defaults["distance"]
    return declared.value


def _observed(
    line: Line,
    conditions: Conditions,
    camera: Camera,
    book: DrawBook,
    owner: str,
    frame: FrameDraws,
    drawn: LineDraws,
    sound: SoundDraws,
    distance: float,
    view: Viewpoint,
) -> Observed:
    """Imagine the frame and observe it."""
    assert line.lagged_diameter is not None
    assert camera.field_of_view_deg is not None
    focal = view.columns / 2 / np.tan(np.radians(camera.field_of_view_deg) / 2)
    width = float(focal * line.lagged_diameter / distance)
    rows = int(np.ceil(1.3 * width)) + 8
    across = (np.arange(rows) - (rows - 1) / 2) / (width / 2)
    temperature = _surface_temperature(frame, drawn, sound)
    on_pipe = np.where(
        np.abs(across) <= 1, _seen(temperature, np.asarray(across), frame, drawn), np.nan
    )
    air = float(np.median(frame.air_temperature))
    lens = np.repeat(np.where(np.isnan(on_pipe), air, on_pipe)[:, None], view.columns, axis=1)
    noise = NOISE if camera.noise is None else camera.noise.value
    lens += noise * book.generator(owner, "pixels").standard_normal(lens.shape)
    nowhere = np.zeros(lens.shape, dtype=bool)
    margin = (1 - DRAWN_SHARE) / 2 * view.columns
    middle = (rows - 1) / 2
    ends = ((margin, middle), (view.columns - margin, middle))
    region = Region(owner.removeprefix("plan:"), owner, "pipe", line.tag,
                    centreline=ends, widths=(width, width))  # fmt: skip
    return observe_region(
        region, line, image=FrameImage(owner, lens, lens, nowhere, FrameNoise(noise, 1.0)),
        left_out=nowhere, components=nowhere, known_lengths=(), frame=frame, line_draws=drawn,
        conditions=conditions, camera=camera, book=book,
    )  # fmt: skip


def _surface_temperature(frame: FrameDraws, line: LineDraws, sound: SoundDraws) -> float:
    """Return where the outer balance gives off the sound loss, at the medians. [K]"""
    assert line.lagged_diameter is not None
    assert line.inside_temperature is not None
    exchange = line.exchange(frame, line.lagged_diameter)
    flux = float(np.median(sound.heat_loss / (np.pi * line.lagged_diameter)))
    air, inside = (
        float(np.median(values)) for values in (frame.air_temperature, line.inside_temperature)
    )
    low, high = min(air, inside) - 40, max(air, inside) + 80
    vapour = vapour_of(frame, line)
    for _ in range(24):
        tried = (low + high) / 2
        given = np.median(outer_flux(np.full(frame.count, tried), exchange, vapour))
        low, high = (tried, high) if given < flux else (low, tried)
    return (low + high) / 2


def _seen(temperature: float, across: FloatArray, frame: FrameDraws, line: LineDraws) -> FloatArray:
    """Return what a surface shows at the lens across the pipe, at the medians, (rows,). [K]"""
    parts = ("air_temperature", "transmission", "window_transmission", "window_reflectance",
             "window_temperature", "reflected_temperature")  # fmt: skip
    nominal = {name: np.array([np.median(getattr(frame, name))]) for name in parts}
    middle = replace(frame, **nominal)  # type: ignore[arg-type]
    angle = np.arcsin(np.clip(across, -1, 1))
    normal = np.array([np.median(line.band_emissivity)])
    emissivity = directional_emissivity(normal, angle, line.is_metal)
    band = frame.band
    own = emissivity * band.radiance(np.full(1, temperature))
    thrown_back = (1 - emissivity) * band.radiance(middle.reflected_temperature)
    return at_lens(middle, band.temperature(own + thrown_back))


def _concluded(observed: Observed, book: DrawBook, distance: float) -> LinePlan:
    """Conclude on the imagined frame as on a recorded one."""
    owner = observed.seen.region.frame_id
    evidence = observed.evidence()
    updates = joint_update([] if evidence is None else [evidence], book, owner)
    result = conclude(observed, updates)
    seen, balance, shift = moved(observed, updates)
    lens = kelvin_of_rise(seen, balance.sound_at, balance.base)
    profiles = SoundProfiles.draw(
        balance.null,
        seen.strip.x.size,
        book.generator(owner, "sound_profiles"),
        kelvin_per_rise=lens,
        spread_length=edge_spread(seen, balance.sound, balance.null.station_length),
    )
    loss = abs(result.sound_loss.median) if result.sound_loss is not None else float("nan")
    diameter = float(np.median(seen.diameter))
    smallest = []
    for length in (diameter, *LENGTHS):
        rise = smallest_rise(profiles, length)
        smallest.append(Smallest(length, rise, rise * loss))
    bring = ranked_measurements(
        result.draws.get("heat_loss"), measurements_of(seen, balance.sound, shift)
    )
    return LinePlan(
        tag=seen.line.tag,
        area=seen.line.area,
        gain=seen.gain,
        verdict=result.verdict,
        sound_loss=result.sound_loss,
        heat_loss=result.heat_loss,
        surface_temperature=interval_of(seen.mean_along(seen.drawn.surface_temperature)).median,
        width=seen.width,
        distance=distance,
        strip_length=profiles.length,
        smallest=tuple(smallest),
        bring=bring,
    )
