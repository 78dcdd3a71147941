"""In-band radiance, and the way from a recorded temperature to a surface temperature and back.

A camera measures radiance in its band, not temperature. Every correction here is made in that
radiance: first the radiance that reached the lens is rebuilt from the settings the camera had
applied, then it is taken apart with the true ones. Correcting a corrected temperature, or
correcting by fourth powers, is not the same thing.

The air path lies between the surface and the window (or the lens where there is no window); the
few centimetres between window and lens are neglected.
"""

from __future__ import annotations

from cladwatt.physics.band import Band
from cladwatt.physics.field_methods import (
    MINIMUM_SEPARATION,
    accuracy_standard_uncertainty,
    emissivity_from_contact,
    emissivity_from_reference,
    reflected_temperature_from_foil,
)
from cladwatt.physics.measurement_equation import (
    correct_temperature,
    lens_radiance,
    object_radiance,
    surface_temperature_fourth_power,
)

__all__ = [
    "MINIMUM_SEPARATION",
    "Band",
    "accuracy_standard_uncertainty",
    "correct_temperature",
    "emissivity_from_contact",
    "emissivity_from_reference",
    "lens_radiance",
    "object_radiance",
    "reflected_temperature_from_foil",
    "surface_temperature_fourth_power",
]
