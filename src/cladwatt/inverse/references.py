"""Field references in a frame: foil, tape, contact reading, known background.

Each is worked out draw by draw with the same camera error, air and air path as the pipe beside
it, so what they share cancels where it should; then it is weighed against what was declared by
the inverse of the variances. A reading that cannot say anything is set aside with its reason.
"""

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.frame_draws import FrameDraws
from cladwatt.inverse.line_draws import LineDraws
from cladwatt.materials.load import shipped_tables
from cladwatt.measure.outline import region_mask, widened
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.field_methods import (
    emissivity_from_contact,
    emissivity_from_reference,
    reflected_temperature_from_foil,
)
from cladwatt.physics.radiometry import object_radiance
from cladwatt.quantities import Quantity, Remark
from cladwatt.survey.region import Region
from cladwatt.types import BoolArray, FloatArray

__all__ = [
    "ReferenceReading",
    "at_lens",
    "read_references",
    "with_emissivity",
    "with_frame_references",
]

FOIL_U = 0.5
"""Mean over the half space against what this cladding reflects; assumption. [K]"""
BACKGROUND_EMISSIVITY_U = 0.3
"""Error of a painted or brick background of known temperature by its emissivity. [K]"""
BEYOND = 3.5
"""Standard uncertainties beyond which a reading is broken and poisons all that it touches. [-]"""
TAPE_COOLING, TAPE_COOLING_METAL = 0.02, 0.08
"""Tape radiates more than what it sticks on and is cooler than the surface beside it, most on
bright metal: the emissivity found is too high by a half-normal share of this scale; assumption."""


@dataclass(frozen=True)
class ReferenceReading:
    """A reference region with what the frame shows there, at the lens. [K]"""

    region: Region
    reading: float
    beside: float
    """Of the pipe's own surface next to a tape patch; NaN for the others."""


def read_references(
    lens_temperature: FloatArray,
    regions: Sequence[Region],
    defaults: Mapping[str, Quantity] | None = None,
) -> tuple[ReferenceReading, ...]:
    """Read every reference region of a frame.

    Parameters
    ----------
    lens_temperature : (rows, cols) array
        Blackbody-equivalent temperature at the lens, NaN where masked. [K]
    regions : sequence of Region
        All regions of the frame.
    defaults : mapping of str to Quantity, optional
        Emissivity of tape and foil and u of a contact reading where the regions do not say;
        the shipped table's where not given.

    Returns
    -------
    tuple of ReferenceReading
        NaN readings where nothing usable lies inside.
    """
    readings = []
    for region in regions:
        if region.role not in ("foil", "tape", "contact", "background"):
            continue
        mask = region_mask(region, lens_temperature.shape)
        core = mask & ~widened(~mask, 1.0)
        inside = core if np.isfinite(lens_temperature[core]).sum() >= 4 else mask
        readings.append(
            ReferenceReading(
                _filled(region, defaults or shipped_tables().defaults),
                _median(lens_temperature, inside),
                _beside(lens_temperature, mask, region, regions),
            )
        )
    return tuple(readings)


def _filled(region: Region, defaults: Mapping[str, Quantity]) -> Region:
    """Fill in what a reference region does not say of itself."""
    if region.role == "foil" and region.band_emissivity is None:
        return replace(region, band_emissivity=defaults["foil_emissivity"])
    if region.role == "tape" and region.value is None:
        return replace(region, value=defaults["tape_emissivity"])
    if region.role == "contact" and region.value is not None and region.value.u == 0:
        # no probe is exact: it reads towards air
        return replace(region, value=replace(region.value, u=defaults["u_contact_reading"].value))
    return region


def _median(image: FloatArray, mask: BoolArray) -> float:
    values = image[mask]
    values = values[np.isfinite(values)]
    return float(np.median(values)) if values.size else float("nan")


def _beside(image: FloatArray, mask: BoolArray, region: Region, regions: Sequence[Region]) -> float:
    """Median of the pipe's surface in a ring around a patch, clear of its blurred rim."""
    if region.role != "tape":
        return float("nan")
    pipe = np.zeros(mask.shape, dtype=bool)
    for other in regions:
        if other.role == "pipe" and other.tag == region.tag:
            whole = region_mask(other, mask.shape)
            pipe |= whole & ~widened(~whole, 3.0)
    return _median(image, widened(mask, 8.0) & ~widened(mask, 2.0) & pipe)


def with_frame_references(
    frame: FrameDraws, readings: Sequence[ReferenceReading], book: DrawBook
) -> tuple[FrameDraws, tuple[Remark, ...]]:
    """Narrow the camera's offset by a known background, and the reflected temperature by foil.

    Parameters
    ----------
    frame : FrameDraws
    readings : sequence of ReferenceReading
    book : DrawBook

    Returns
    -------
    FrameDraws
    tuple of Remark
        What was used, and what was set aside.
    """
    remarks: list[Remark] = []
    for reading in (r for r in readings if r.region.role == "background"):
        if reading.region.value is None or not np.isfinite(reading.reading):
            remarks.append(_set_aside(reading, "no known temperature or no usable pixels"))
            continue
        if not np.any(frame.calibration_offset(np.array([reading.reading]))):
            remarks.append(_set_aside(reading, "the camera is declared without error"))
            continue
        known = book.quantity(f"region:{reading.region.id}", "value", reading.region.value)
        known = known + BACKGROUND_EMISSIVITY_U * book.normal(
            f"region:{reading.region.id}", "emissivity"
        )
        known = at_lens(frame, known)
        offset = frame.calibration_offset(np.array([reading.reading]))[:, 0]
        limit = offset / frame.calibration
        off = abs(float(np.median(known)) - reading.reading)
        if off > BEYOND * math.hypot(float(np.std(offset)), float(np.std(known))):
            remarks.append(
                _set_aside(
                    reading,
                    f"the camera is {off:.1f} K off the temperature declared for it, more than "
                    "both uncertainties explain; check its value and its place in the frame",
                )
            )
            continue
        frame = replace(
            frame,
            calibration=_weighed(frame.calibration, (known - reading.reading) / limit),
        )
    for reading in (r for r in readings if r.region.role == "foil"):
        reflected = _foil(frame, reading, book)
        if reflected is None:
            remarks.append(_set_aside(reading, "no usable pixels"))
            continue
        apart = _apart(frame.reflected_temperature, reflected)
        if apart is not None:
            remarks.append(
                _set_aside(reading, f"it is {apart:.1f} K off the declared reflected temperature")
            )
            continue
        combined = _weighed(frame.reflected_temperature, reflected)
        frame = replace(frame, reflected_temperature=combined)
        middle = float(np.median(combined)) - ZERO_CELSIUS
        remarks.append(Remark("remark.foil_used", (("temperature_C", middle),)))
    return frame, tuple(remarks)


def at_lens(frame: FrameDraws, temperature: FloatArray) -> FloatArray:
    """Return what a black thing shows at the lens through air and window, (count,). [K]"""
    band, through = frame.band, frame.window_transmission
    air, window = band.radiance(frame.air_temperature), band.radiance(frame.window_temperature)
    before = frame.transmission * band.radiance(temperature) + (1 - frame.transmission) * air
    emitted = (1 - through - frame.window_reflectance) * window
    return band.temperature(through * before + frame.window_reflectance * air + emitted)


def _before_window(frame: FrameDraws, reading: float) -> FloatArray:
    """Return what arrives at the window, else at the lens, camera error undone, (count,). [K]"""
    seen = reading + frame.calibration_offset(np.array([reading]))[:, 0]
    if np.all(frame.window_transmission == 1):
        return np.asarray(seen)
    band = frame.band
    before = object_radiance(
        band.radiance(seen),
        emissivity=1.0,
        reflected_radiance=None,
        window_transmission=frame.window_transmission,
        window_reflectance=frame.window_reflectance,
        window_radiance=band.radiance(frame.window_temperature),
        window_reflected_radiance=band.radiance(frame.air_temperature),
    )
    return band.temperature(before)


def _foil(frame: FrameDraws, reading: ReferenceReading, book: DrawBook) -> FloatArray | None:
    """Return draws of the reflected temperature by a foil, or by the value read from it."""
    owner = f"region:{reading.region.id}"
    spread = FOIL_U * book.normal(owner, "half_space")
    if reading.region.value is not None:
        return book.quantity(owner, "value", reading.region.value) + spread
    if not np.isfinite(reading.reading):
        return None
    seen = _before_window(frame, reading.reading)
    emissivity = reading.region.band_emissivity
    assert emissivity is not None
    return spread + reflected_temperature_from_foil(
        seen,
        band=frame.band,
        foil_emissivity=book.quantity(owner, "band_emissivity", emissivity),
        foil_temperature=frame.air_temperature,
        transmission=frame.transmission,
        atmosphere_temperature=frame.air_temperature,
    )


def with_emissivity(
    line: LineDraws,
    tag: str,
    frame: FrameDraws,
    readings: Sequence[ReferenceReading],
    book: DrawBook,
) -> tuple[LineDraws, tuple[Remark, ...]]:
    """Narrow a line's emissivity by tape patches and contact readings on it in this frame.

    Parameters
    ----------
    line : LineDraws
    tag : str
    frame : FrameDraws
    readings : sequence of ReferenceReading
    book : DrawBook

    Returns
    -------
    LineDraws
    tuple of Remark
    """
    remarks: list[Remark] = []
    for reading in readings:
        if reading.region.tag != tag or reading.region.role not in ("tape", "contact"):
            continue
        lacking = _lacking(reading)
        if lacking is not None:
            remarks.append(_set_aside(reading, lacking))
            continue
        found = _emissivity(reading, frame, line, book)
        usable = np.isfinite(found) & (found > 0.01) & (found < 1.0)
        if usable.mean() < 0.5:
            remarks.append(_set_aside(reading, "surface within 10 K of the reflected temperature"))
            continue
        off = _apart(line.band_emissivity, found[usable])
        if off is not None:
            remarks.append(_set_aside(reading, f"its emissivity is {off:.2f} off the declared one"))
            continue
        combined = np.where(usable, _weighed(line.band_emissivity, found), line.band_emissivity)
        line = replace(line, band_emissivity=np.clip(combined, 0.01, 0.999))
        remarks.append(Remark("remark.tape_used", (("emissivity", float(np.median(combined))),)))
    return line, tuple(remarks)


def _lacking(reading: ReferenceReading) -> str | None:
    """Return what a tape patch or contact reading lacks, None where it is complete."""
    if not np.isfinite(reading.reading):
        return "no usable pixels"
    if reading.region.role == "contact":
        return "no contact temperature given" if reading.region.value is None else None
    return None if np.isfinite(reading.beside) else "no usable pixels of the pipe beside it"


def _emissivity(
    reading: ReferenceReading, frame: FrameDraws, line: LineDraws, book: DrawBook
) -> FloatArray:
    """Return draws of the emissivity beside a patch or at a contact reading; NaN where none."""
    owner = f"region:{reading.region.id}"
    seen = _before_window(frame, reading.reading)
    if reading.region.role == "contact":
        contact = reading.region.value
        assert contact is not None
        return emissivity_from_contact(
            seen,
            book.quantity(owner, "value", contact),
            band=frame.band,
            reflected_temperature=frame.reflected_temperature,
            transmission=frame.transmission,
            atmosphere_temperature=frame.air_temperature,
        )
    tape = reading.region.value
    assert tape is not None
    beside = _before_window(frame, reading.beside)
    emissivity = emissivity_from_reference(
        beside,
        seen,
        band=frame.band,
        reference_emissivity=book.quantity(owner, "value", tape),
        reflected_temperature=frame.reflected_temperature,
        transmission=frame.transmission,
        atmosphere_temperature=frame.air_temperature,
    )
    cooling = TAPE_COOLING_METAL if line.is_metal else TAPE_COOLING
    return emissivity * (1 - cooling * np.abs(book.normal(owner, "heat_balance")))


def _apart(declared: FloatArray, found: FloatArray) -> float | None:
    """Return how far a reading is off, None where both uncertainties explain it."""
    off = abs(float(np.nanmedian(found)) - float(np.median(declared)))
    scatter = math.hypot(float(np.nanstd(found)), float(np.std(declared)))
    return off if off > BEYOND * scatter else None


def _weighed(declared: FloatArray, found: FloatArray) -> FloatArray:
    """Return the two weighed by the inverse of their variances, draw by draw."""
    declared_variance = float(np.nanvar(declared))
    found_variance = float(np.nanvar(found))
    if declared_variance + found_variance == 0:
        return found
    share = declared_variance / (declared_variance + found_variance)
    return share * found + (1 - share) * declared


def _set_aside(reading: ReferenceReading, reason: str) -> Remark:
    return Remark("remark.reading_not_used", (("id", reading.region.id), ("reason", reason)))
