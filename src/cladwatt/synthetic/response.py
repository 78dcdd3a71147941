"""The camera's band: as it really is, and as its maker's type sheet gives it."""

import numpy as np

from cladwatt.physics.band import Band

__all__ = ["RESPONSE_FILE", "response_text", "true_band"]

RESPONSE_FILE = "camera_response.csv"

_TYPE_SHEET = (
    (7.2, 0.00), (7.6, 0.55), (8.0, 0.85), (8.6, 0.94), (9.5, 0.97), (10.5, 1.00),
    (11.5, 0.99), (12.5, 0.94), (13.2, 0.84), (13.7, 0.66), (14.2, 0.00),
)  # fmt: skip
"""Wavelength in micrometres and relative response of the type; each camera is a little off."""


def true_band() -> Band:
    """Return the camera's real band, softer at its ends than a rectangle."""
    return Band.from_response(
        np.array([7.3e-6, 7.8e-6, 8.5e-6, 11.0e-6, 13.0e-6, 13.7e-6, 14.2e-6]),
        np.array([0.0, 0.75, 0.95, 1.0, 0.92, 0.7, 0.0]),
    )


def response_text() -> str:
    """Return the response file an inspector would have from the camera's maker."""
    rows = [f"{wavelength:.2f},{response:.2f}" for wavelength, response in _TYPE_SHEET]
    return "\n".join(["wavelength_um,response", *rows]) + "\n"
