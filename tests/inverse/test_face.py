"""Temperature and flux of the seen face against the measurement equation read forwards."""

import numpy as np
import pytest
from uncertainties import ufloat, wrap

from cladwatt.inverse.face import face_draws, surface_temperature_draws
from cladwatt.measure.face_bands import FaceBands
from cladwatt.physics.emissivity import directional_emissivity
from cladwatt.physics.lagged_pipe import surface_heat_flux
from cladwatt.quantities import Quantity
from cladwatt.survey.model import AccuracyStatement, Camera, Window

ANGLES = np.radians([-40.0, -20.0, 0.0, 20.0, 40.0])


def face_of(temperature: np.ndarray) -> FaceBands:
    return FaceBands(temperature, ANGLES, np.full(5, np.radians(20.0)))


def lens_of(bench, surface, angle) -> np.ndarray:
    """Forwards: what reaches the lens from a surface of this temperature at this angle."""
    band, conditions = bench.band, bench.conditions
    cladding = bench.line.cladding
    emissivity = directional_emissivity(cladding.band_emissivity.value, angle, cladding.is_metal)
    transmission = conditions.atmosphere_transmission.value
    scene = emissivity * band.radiance(surface) + (1 - emissivity) * band.radiance(
        conditions.reflected_temperature.value
    )
    air = band.radiance(conditions.air_temperature.value)
    return band.temperature(transmission * scene + (1 - transmission) * air)


@pytest.mark.parametrize("emissivity", [0.95, 0.6, 0.12])
@pytest.mark.parametrize("is_metal", [False, True])
def test_surface_temperature_comes_back_at_every_angle(bench, paint, emissivity, is_metal):
    from dataclasses import replace

    cladding = paint(emissivity, is_metal=is_metal)
    bench = bench.but(line=replace(bench.line, cladding=cladding))
    for angle in ANGLES:
        for surface in (279.0, 296.0, 330.0, 420.0):
            lens = lens_of(bench, surface, angle)
            found = surface_temperature_draws(
                np.atleast_1d(lens), np.array([angle]), bench.frame_draws(), bench.line_draws()
            )
            # the tables of the band are good to 1e-6 K; a small emissivity multiplies that
            assert found == pytest.approx(surface, abs=1e-4 / emissivity)


def test_face_of_one_temperature_has_that_temperature_and_its_flux(bench):
    surface = np.linspace(300.0, 340.0, 50)
    lens = np.stack([lens_of(bench, surface, angle) for angle in ANGLES])
    found = face_draws(
        face_of(lens), bench.frame_draws(), bench.line_draws(), np.full(bench.count, 0.2363)
    )
    assert found.surface_temperature == pytest.approx(
        np.broadcast_to(surface, (bench.count, 50)), abs=2e-3
    )
    flux = surface_heat_flux(surface, bench.exchange)
    assert found.heat_flux == pytest.approx(np.broadcast_to(flux, (bench.count, 50)), rel=3e-4)


def test_flux_of_an_uneven_face_is_the_mean_of_its_bands(bench):
    surface = np.array([300.0, 305.0, 310.0, 320.0, 330.0])
    lens = np.stack(
        [np.full(8, lens_of(bench, t, a)) for t, a in zip(surface, ANGLES, strict=True)]
    )
    found = face_draws(
        face_of(lens), bench.frame_draws(), bench.line_draws(), np.full(bench.count, 0.2363)
    )
    assert found.surface_temperature == pytest.approx(surface.mean(), abs=2e-3)
    # flux bends upwards: the mean of the bands' fluxes, not the flux of the mean
    flux = surface_heat_flux(surface, bench.exchange).mean()
    assert found.heat_flux == pytest.approx(flux, rel=3e-4)
    assert flux > 1.002 * surface_heat_flux(surface.mean(), bench.exchange)


def test_bands_weigh_by_the_angle_they_cover(bench):
    surface = np.array([300.0, 310.0, 320.0, 310.0, 300.0])
    lens = np.stack(
        [np.full(6, lens_of(bench, t, a)) for t, a in zip(surface, ANGLES, strict=True)]
    )
    face = FaceBands(lens, ANGLES, np.array([2.0, 1.0, 1.0, 1.0, 2.0]))
    found = face_draws(face, bench.frame_draws(), bench.line_draws(), np.full(bench.count, 0.2))
    assert found.surface_temperature == pytest.approx(
        np.average(surface, weights=face.extent), abs=2e-3
    )


def test_gaps_stay_gaps(bench):
    lens = np.full((5, 10), 305.0)
    lens[:, 4] = np.nan
    found = face_draws(
        face_of(lens), bench.frame_draws(), bench.line_draws(), np.full(bench.count, 0.2)
    )
    assert np.isnan(found.surface_temperature[:, 4]).all()
    assert np.isfinite(np.delete(found.surface_temperature, 4, axis=1)).all()


def test_no_flux_without_wind(bench, hall_with):
    bench = bench.but(conditions=hall_with(wind_speed=None))
    found = face_draws(
        face_of(np.full((5, 6), 305.0)),
        bench.frame_draws(),
        bench.line_draws(),
        np.full(bench.count, 0.2),
    )
    assert found.heat_flux is None
    assert np.isfinite(found.surface_temperature).all()


def test_a_window_is_undone(bench, hall_with):
    window = Window(Quantity(0.7), Quantity(0.1), Quantity(300.0))
    plain = bench
    bench = bench.but(conditions=hall_with(window=window))
    band, air = bench.band, bench.conditions.air_temperature.value
    before = band.radiance(lens_of(plain, 340.0, 0.0))
    behind = 0.7 * before + 0.1 * band.radiance(air) + 0.2 * band.radiance(300.0)
    found = surface_temperature_draws(
        np.atleast_1d(band.temperature(behind)),
        np.zeros(1),
        bench.frame_draws(),
        bench.line_draws(),
    )
    assert found == pytest.approx(340.0, abs=1e-3)


def test_calibration_error_is_undone_draw_by_draw(bench):
    camera = Camera(accuracy=AccuracyStatement(2.0, 0.0))
    bench = bench.but(camera=camera)
    frame, line = bench.frame_draws(), bench.line_draws()
    lens = np.atleast_1d(lens_of(bench, 320.0, 0.0))
    found = surface_temperature_draws(lens, np.zeros(1), frame, line)[:, 0, 0]
    # each draw: the surface whose lens value is the recorded one plus the error undone
    for draw in (0, 57, 199):
        again = lens_of(bench, found[draw], 0.0)
        assert again == pytest.approx(lens[0] + 2 * frame.calibration[draw], abs=1e-4)


def test_more_mirrored_than_received_is_no_temperature(bench, paint, hall_with):
    from dataclasses import replace

    bench = bench.but(
        line=replace(bench.line, cladding=paint(0.05)),
        conditions=hall_with(reflected_temperature=Quantity(340.0)),
    )
    found = surface_temperature_draws(
        np.array([290.0]), np.zeros(1), bench.frame_draws(), bench.line_draws()
    )
    assert np.isnan(found).all()


SMALL = {
    "band_emissivity": (0.6, 0.004),
    "reflected_temperature": (296.15, 0.2),
    "air_temperature": (293.15, 0.1),
}


@pytest.mark.parametrize("only", [*SMALL, "all"])
def test_small_uncertainties_propagate_to_first_order(bench, hall_with, paint, only, evidence):
    """Standard uncertainty of temperature and flux against the package `uncertainties`.

    Linear propagation (JCGM 100) by numerical derivatives of a scalar forward chain.
    """
    from dataclasses import replace

    u = {name: size if only in (name, "all") else 0.0 for name, (_, size) in SMALL.items()}
    bench = bench.but(
        count=2000,
        line=replace(bench.line, cladding=paint(0.6, u["band_emissivity"])),
        conditions=hall_with(
            air_temperature=Quantity(293.15, u["air_temperature"]),
            reflected_temperature=Quantity(296.15, u["reflected_temperature"]),
        ),
    )
    lens = float(lens_of(bench, 325.0, 0.0))
    band = bench.band

    def temperature(emissivity: float, reflected: float, air: float) -> float:
        scene = (band.radiance(lens) - 0.02 * band.radiance(air)) / 0.98
        own = scene - (1 - emissivity) * band.radiance(reflected)
        return float(band.temperature(own / emissivity))

    def flux(emissivity: float, reflected: float, air: float) -> float:
        exchange = replace(bench.exchange, air_temperature=air)
        return float(surface_heat_flux(temperature(emissivity, reflected, air), exchange))

    # derivatives over the uncertainties themselves: the tables are linear between nodes
    inputs = [ufloat(value, u[name]) if u[name] else value for name, (value, _) in SMALL.items()]
    face = FaceBands(np.full((1, 4), lens), np.zeros(1), np.ones(1))
    found = face_draws(face, bench.frame_draws(), bench.line_draws(), np.full(bench.count, 0.2363))

    def derivative(function, index):
        def slope(*values: float) -> float:
            step = 0.5 * list(SMALL.values())[index][1]
            up, down = list(values), list(values)
            up[index] += step
            down[index] -= step
            return (function(*up) - function(*down)) / (2 * step)

        return slope

    for function, drawn in (
        (temperature, found.surface_temperature),
        (flux, found.heat_flux),
    ):
        expected = wrap(function, [derivative(function, index) for index in range(3)])(*inputs)
        assert drawn is not None
        what = function.__name__
        mean, u = drawn[:, 0].mean(), drawn[:, 0].std()
        evidence("uncertainties_first_order", what, mean, expected.nominal_value, rel=2e-3)
        evidence("uncertainties_first_order", f"u of {what}", u, expected.std_dev, rel=0.04)
