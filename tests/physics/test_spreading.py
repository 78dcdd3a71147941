"""What smears a defect along a pipe: lens, cladding, lagging; each beside another calculation."""

import math

import numpy as np
import pytest
from tests.finite_elements import COEFFICIENT, CONDUCTIVITY, INNER, INSIDE, OUTER, slices

from cladwatt.physics.spreading import (
    blur_matrix,
    lengthwise_admittance,
    point_spread_sigma,
    slice_waves,
    spread_matrix,
    surface_response,
)


def spreading(size, step, sheet_conductance):
    wavenumber, vectors = slice_waves(np.full(size, step))
    admittance = lengthwise_admittance(
        wavenumber,
        conductivity=CONDUCTIVITY,
        inner_diameter=2 * INNER,
        outer_diameter=2 * OUTER,
    )
    response = surface_response(
        wavenumber,
        surface_coefficient=COEFFICIENT,
        sheet_conductance=sheet_conductance,
        admittance=admittance,
    )
    return spread_matrix(np.full(size, step), response, vectors)


@pytest.mark.parametrize(
    ("half_width", "ratio", "sheet", "allowed"),
    [
        (0.015, 8.0, 0.16, 0.002),
        (0.015, 8.0, 0.0075, 0.03),
        # under a coat a narrow hot slice feeds its neighbours more than sound lagging would
        (0.015, 8.0, 0.0, 0.16),
        (0.5, 4.0, 0.16, 0.002),
        (0.5, 4.0, 0.0075, 0.001),
        (0.5, 4.0, 0.0, 0.001),
    ],
    ids=[f"{what} under {sheet}" for what in ("joint", "a metre wet")
         for sheet in ("aluminium", "stainless", "coat")],
)  # fmt: skip
def test_a_local_defect_spreads_as_finite_elements_say(half_width, ratio, sheet, allowed, evidence):
    place, conductance, temperature = slices(half_width, ratio, sheet)
    supply = conductance * (INSIDE - temperature)
    leaving = spreading(place.size, 0.005, sheet) @ supply
    middle = place.size // 2
    expected = COEFFICIENT * temperature
    name, unit = "fem_local_defect", "W/m2"
    case = f"{2 * half_width:g} m, sheet {sheet:g} W/K"
    evidence(name, f"beside {case}", leaving[0], expected[0], unit=unit, rel=1e-4)
    evidence(name, f"middle of {case}", leaving[middle], expected[middle], unit=unit, rel=allowed)
    # the heat that leaves altogether, above what leaves far away
    found, truth = (0.005 * float(np.sum(one - one[0])) for one in (leaving, expected))
    evidence(name, f"excess of {case}", found, truth, unit="W/m", rel=0.012)


def test_no_heat_is_made_or_lost():
    lengths = np.linspace(0.01, 0.03, 40)
    wavenumber, vectors = slice_waves(lengths)
    response = surface_response(wavenumber, surface_coefficient=9.0, sheet_conductance=0.2)
    matrix = spread_matrix(lengths, response, vectors)
    np.testing.assert_allclose(lengths @ matrix, lengths, rtol=1e-9)
    np.testing.assert_allclose(matrix.sum(axis=1), 1.0, rtol=1e-9)
    blur = blur_matrix(40, 1.7)
    np.testing.assert_allclose(blur.sum(axis=0), 1.0, rtol=1e-9)
    np.testing.assert_allclose(blur.sum(axis=1), 1.0, rtol=1e-9)


def test_a_step_falls_as_along_a_fin():
    # Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass Transfer, 6th edition,
    # section 3.6: exp(-x / length) beside a step, half of the step at it
    step, length = 0.002, 0.1
    wavenumber, vectors = slice_waves(np.full(1000, step))
    response = surface_response(
        wavenumber, surface_coefficient=10.0, sheet_conductance=10.0 * length**2
    )
    place = (np.arange(1000) - 499.5) * step
    found = spread_matrix(np.full(1000, step), response, vectors) @ (place > 0)
    far = 0.5 * np.exp(-np.abs(place) / length)
    np.testing.assert_allclose(found, np.where(place > 0, 1 - far, far), atol=1e-3)


def test_a_thin_coat_conducts_lengthwise_as_a_slab():
    # Carslaw, Jaeger: k m coth(m L) of a slab with one face held, where the radius is large
    m, thickness = np.array([1.0, 10.0, 50.0, 200.0]), 0.05
    found = lengthwise_admittance(
        m, conductivity=0.04, inner_diameter=200.0, outer_diameter=200.0 + 2 * thickness
    )
    slab = 0.04 * (m / np.tanh(m * thickness) - 1 / thickness)
    np.testing.assert_allclose(found, slab, rtol=2e-3)


def test_a_spot_holds_its_share_of_a_gaussian():
    sigma = point_spread_sigma(3.0)
    assert math.erf(1.5 / sigma / math.sqrt(2)) ** 2 == pytest.approx(0.9)
