import numpy as np
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from cladwatt.physics.atmosphere import air_path_transmission
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.emissivity import directional_emissivity
from cladwatt.physics.humidity import dew_point
from cladwatt.physics.radiometry import (
    Band,
    correct_temperature,
    emissivity_from_reference,
    lens_radiance,
    reflected_temperature_from_foil,
)

BANDS = st.sampled_from(
    [Band.rectangular(7.5e-6, 14e-6), Band.rectangular(8e-6, 12e-6), Band.rectangular(3e-6, 5e-6)]
)
LONG_WAVE = Band.rectangular(7.5e-6, 14e-6)
RECORDED = st.floats(ZERO_CELSIUS - 40.0, ZERO_CELSIUS + 600.0)
AMBIENT = st.floats(ZERO_CELSIUS - 40.0, ZERO_CELSIUS + 60.0)
SHARE = st.floats(0.05, 1.0)


@given(RECORDED, BANDS)
def test_black_and_clear_leaves_the_recorded_value(recorded, band):
    found = correct_temperature(recorded, band=band, emissivity=1.0, reflected_temperature=None)
    tolerance = 5e-6 if band.limits[0] < 5e-6 else 1e-6
    assert abs(float(found) - recorded) < tolerance


@given(RECORDED, AMBIENT, AMBIENT, SHARE, SHARE, SHARE, AMBIENT)
def test_the_cameras_own_settings_return_the_recorded_value(
    recorded, reflected, air, emissivity, transmission, window, window_temperature
):
    camera = {
        "emissivity": emissivity,
        "reflected_temperature": reflected,
        "transmission": transmission,
        "atmosphere_temperature": air,
        "window_transmission": window,
        "window_temperature": window_temperature,
    }
    found = correct_temperature(
        recorded,
        band=LONG_WAVE,
        **camera,
        **{f"camera_{name}": value for name, value in camera.items()},
    )
    # the tables' 1e-8 of the radiance at the lens, divided by what of it came from the surface
    share = emissivity * transmission * window
    at_lens = float(lens_radiance(recorded, band=LONG_WAVE, **camera))
    slope = float(LONG_WAVE.radiance_derivative(recorded))
    assert abs(float(found) - recorded) < 2e-6 + 1e-7 * at_lens / (share * slope)


@given(AMBIENT, SHARE, SHARE)
def test_everything_at_one_temperature_reads_it(temperature, emissivity, transmission):
    at_lens = lens_radiance(
        temperature,
        band=LONG_WAVE,
        emissivity=emissivity,
        reflected_temperature=temperature,
        transmission=transmission,
        atmosphere_temperature=temperature,
    )
    assert abs(float(LONG_WAVE.temperature(at_lens)) - temperature) < 2e-6


@given(RECORDED, st.floats(1e-3, 50.0), AMBIENT, SHARE)
def test_correction_increases_with_the_recorded_value(recorded, step, reflected, emissivity):
    found = correct_temperature(
        np.array([recorded, recorded + step]),
        band=LONG_WAVE,
        emissivity=emissivity,
        reflected_temperature=reflected,
    )
    assume(np.isfinite(found).all())
    assert found[1] > found[0]


@given(RECORDED, AMBIENT, st.floats(0.1, 0.95))
def test_lower_emissivity_moves_the_result_away_from_the_reflected(recorded, reflected, emissivity):
    assume(abs(recorded - reflected) > 0.1)
    found = correct_temperature(
        recorded, band=LONG_WAVE, emissivity=emissivity, reflected_temperature=reflected
    )
    assume(np.isfinite(found))
    assert (float(found) > recorded) == (recorded > reflected)


@given(AMBIENT, AMBIENT, st.floats(0.0, 0.3))
def test_foil_round_trip(reflected, foil, foil_emissivity):
    apparent = LONG_WAVE.temperature(
        (1 - foil_emissivity) * LONG_WAVE.radiance(reflected)
        + foil_emissivity * LONG_WAVE.radiance(foil)
    )
    found = reflected_temperature_from_foil(
        apparent, band=LONG_WAVE, foil_emissivity=foil_emissivity, foil_temperature=foil
    )
    assert abs(float(found) - reflected) < 1e-5


@given(st.floats(300.0, 600.0), AMBIENT, st.floats(0.05, 1.0), st.floats(0.8, 1.0))
def test_reference_emitter_round_trip(surface, reflected, emissivity, reference):
    assume(abs(surface - reflected) > 10.01)
    read = [
        LONG_WAVE.temperature(
            lens_radiance(surface, band=LONG_WAVE, emissivity=e, reflected_temperature=reflected)
        )
        for e in (emissivity, reference)
    ]
    found = emissivity_from_reference(
        *read, band=LONG_WAVE, reference_emissivity=reference, reflected_temperature=reflected
    )
    assert abs(float(found) - emissivity) < 1e-6


@given(st.floats(1e-3, 1.0), st.floats(-np.pi / 2, np.pi / 2), st.booleans())
def test_directional_emissivity_stays_physical(normal, angle, is_metal):
    found = float(directional_emissivity(normal, angle, is_metal))
    assert 0.0 < found <= 1.0
    assert float(directional_emissivity(normal, 0.0, is_metal)) == normal or np.isclose(
        float(directional_emissivity(normal, 0.0, is_metal)), normal, rtol=1e-12
    )


@settings(max_examples=50)
@given(st.floats(0.0, 150.0), st.floats(230.0, 330.0), st.floats(0.0, 1.0))
def test_transmission_is_a_share(distance, air, humidity):
    found = float(
        air_path_transmission(
            distance, air_temperature=air, relative_humidity=humidity, band_limits=(8e-6, 14e-6)
        )
    )
    assert 0.0 < found <= 1.0


@given(st.floats(240.0, 330.0), st.floats(0.05, 1.0))
def test_dew_point_never_exceeds_the_air(air, humidity):
    found = float(dew_point(air, humidity))
    assert found <= air + 1e-8
    if humidity < 0.99:
        assert found < air
