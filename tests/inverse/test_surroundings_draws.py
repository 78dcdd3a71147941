"""Surroundings in pieces: two mixes of the same draws, and what a region mirrors of them."""

import math

import numpy as np
import pytest
from scipy.integrate import quad

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.frame_draws import draw_frame, mirrored
from cladwatt.physics.constants import STEFAN_BOLTZMANN
from cladwatt.physics.humidity import dew_point
from cladwatt.physics.sky import sky_temperature
from cladwatt.quantities import Quantity
from cladwatt.survey.model import Camera, Conditions, Site, SurroundingsPiece

BOOK = DrawBook(4, 4000)
TOLERANCE = 4 / math.sqrt(4000)
SKY, GROUND, WALL, HOT = 258.15, 285.15, 291.15, 393.15


def piece(what, temperature, share, u_temperature=0.0, u_share=0.0):
    factor = Quantity(share, u_share, lower=0.0, upper=1.0)
    return SurroundingsPiece(what, Quantity(temperature, u_temperature), factor)


def outdoors(*pieces, **changes) -> Conditions:
    fields = {
        "air_temperature": Quantity(283.15), "wind_speed": Quantity(2.0), "indoors": False,
        "surroundings_pieces": pieces,
    } | changes  # fmt: skip
    return Conditions(**fields)


def frame_of(conditions, frame_id="f1", book=BOOK):
    frame = draw_frame(book, frame_id, conditions, Camera(), Site())
    assert frame is not None
    return frame


def correlation(one, two) -> float:
    return float(np.corrcoef(one, two)[0, 1])


def planck(temperature: float, low: float = 7.5e-6, high: float = 14e-6) -> float:
    """In-band radiance by quadrature of Planck's law, no code of the package. [W/(m2 sr)]"""
    h, c, k = 6.62607015e-34, 299792458.0, 1.380649e-23

    def spectral(wavelength):
        return 2 * h * c**2 / wavelength**5 / math.expm1(h * c / (wavelength * k * temperature))

    return quad(spectral, low, high)[0]


def test_exact_pieces_radiate_as_their_fourth_powers_and_mirror_as_their_radiance():
    frame = frame_of(
        outdoors(
            piece("sky", SKY, 0.4), piece("ground", GROUND, 0.55), piece("neighbour", HOT, 0.05),
            sky_band_temperature=Quantity(233.15),
        )
    )  # fmt: skip
    fourth = (0.4 * SKY**4 + 0.55 * GROUND**4 + 0.05 * HOT**4) ** 0.25
    assert frame.surroundings_temperature == pytest.approx(fourth)
    radiance = 0.4 * planck(233.15) + 0.55 * planck(GROUND) + 0.05 * planck(HOT)
    seen = frame.band.radiance(np.median(frame.reflected_temperature))
    assert seen == pytest.approx(radiance, rel=2e-3)
    own = frame.reflected_temperature - np.median(frame.reflected_temperature)
    assert own.std() == pytest.approx(2.0, rel=0.02)


def test_view_factors_sum_to_one_in_every_draw():
    frame = frame_of(
        outdoors(piece("wall", WALL, 0.62, u_share=0.2), piece("other", WALL, 0.4, u_share=0.2))
    )
    assert frame.pieces.share.sum(axis=0) == pytest.approx(1.0)
    assert np.ptp(frame.pieces.share[0]) > 0.3
    # however they are shared out, two walls at one temperature are one
    assert frame.surroundings_temperature == pytest.approx(WALL)


def test_balance_and_band_see_the_same_draws():
    frame = frame_of(
        outdoors(piece("wall", WALL, 0.7, 2.0, 0.05), piece("neighbour", HOT, 0.3, 15.0, 0.1))
    )
    assert correlation(frame.surroundings_temperature, frame.reflected_temperature) > 0.95
    other = frame_of(
        outdoors(piece("wall", WALL, 0.7, 2.0, 0.05), piece("neighbour", HOT, 0.3, 15.0, 0.1)), "f2"
    )
    assert abs(correlation(frame.surroundings_temperature, other.surroundings_temperature)) < (
        TOLERANCE
    )


def test_their_spread_is_that_of_plain_random_numbers():
    frame = frame_of(
        outdoors(piece("wall", WALL, 0.7, 2.0, 0.04), piece("neighbour", HOT, 0.3, 15.0, 0.06))
    )
    random = np.random.default_rng(3)
    n = 200_000
    shares = np.stack([random.normal(0.7, 0.04, n), random.normal(0.3, 0.06, n)])
    shares /= shares.sum(axis=0)
    kelvin = np.stack([random.normal(WALL, 2.0, n), random.normal(HOT, 15.0, n)])
    expected = (shares * kelvin**4).sum(axis=0) ** 0.25
    assert frame.surroundings_temperature.std() == pytest.approx(expected.std(), rel=0.03)
    assert frame.surroundings_temperature.mean() == pytest.approx(expected.mean(), abs=0.2)


def test_a_declared_reflected_temperature_wins_and_the_balance_keeps_the_pieces():
    frame = frame_of(
        outdoors(
            piece("wall", WALL, 0.7), piece("neighbour", HOT, 0.3),
            reflected_temperature=Quantity(300.0, 1.0),
        )
    )  # fmt: skip
    assert frame.reflected_temperature.mean() == pytest.approx(300.0, abs=0.05)
    fourth = (0.7 * WALL**4 + 0.3 * HOT**4) ** 0.25
    assert frame.surroundings_temperature == pytest.approx(fourth)
    plain = frame_of(outdoors(reflected_temperature=Quantity(300.0, 1.0)))
    apart = [
        mirrored(one, BOOK, "a", is_metal=True, indoors=False).reflected_temperature
        for one in (frame, plain)
    ]
    assert np.array_equal(*apart)


def test_metal_mirrors_another_mix_than_the_view_factors_and_a_coat_hardly():
    frame = frame_of(outdoors(piece("wall", WALL, 0.8), piece("neighbour", HOT, 0.2)))

    def seen(is_metal):
        found = mirrored(frame, BOOK, "a", is_metal=is_metal, indoors=True).reflected_temperature
        return frame.band.radiance(found), found

    metal, metal_K = seen(True)
    coat, coat_K = seen(False)
    # Dirichlet: the variance of a share is F (1 - F) over the number of directions, 4 and 30
    step = planck(HOT) - planck(WALL)
    assert metal.std() == pytest.approx(step * math.sqrt(0.2 * 0.8 / 4), rel=0.06)
    assert coat.std() == pytest.approx(step * math.sqrt(0.2 * 0.8 / 30), rel=0.15)
    mean = 0.8 * planck(WALL) + 0.2 * planck(HOT)
    assert metal.mean() == pytest.approx(mean, rel=0.02)
    # never outside what there is to mirror, but for the scatter that every region has
    assert metal_K.min() > WALL - 12
    assert metal_K.max() < HOT + 12
    assert metal_K.std() > 2 * coat_K.std()


def test_one_temperature_all_round_is_mirrored_alike_by_metal():
    frame = frame_of(outdoors(piece("wall", WALL, 0.8), piece("roof", WALL, 0.2)))
    plain = frame_of(outdoors(reflected_temperature=Quantity(WALL)))
    apart = [
        mirrored(one, BOOK, "a", is_metal=True, indoors=True).reflected_temperature
        - one.reflected_temperature
        for one in (frame, plain)
    ]
    assert apart[0] == pytest.approx(apart[1], abs=1e-4)


def test_a_sky_by_its_clouds_takes_the_draws_of_air_and_humidity_along():
    sky = Quantity(273.0, 5.0, lower=240.0, upper=300.0, source="sky by cloud cover and humidity")
    changes = {
        "air_temperature": Quantity(290.0, 3.0),
        "relative_humidity": Quantity(0.5, 0.1, lower=0.0, upper=1.0),
        "cloud_cover": Quantity(0.2, 0.1, lower=0.0, upper=1.0),
    }
    alone = frame_of(outdoors(sky_total_temperature=sky, sky_view_factor=Quantity(1.0), **changes))
    in_pieces = frame_of(outdoors(SurroundingsPiece("sky", sky, Quantity(1.0)), **changes))
    for one in (np.mean, np.std):
        apart = one(alone.surroundings_temperature) - one(in_pieces.surroundings_temperature)
        assert abs(apart) < 0.1
    found = alone.surroundings_temperature
    assert correlation(found, alone.air_temperature) > 0.5
    nominal = float(sky_temperature(290.0, dew_point(290.0, 0.5), 0.2))
    assert np.median(found) == pytest.approx(nominal, abs=0.3)
    assert found.std() == pytest.approx(5.0, rel=0.05)


def test_a_guessed_sky_in_the_band_stays_below_the_drawn_air():
    guess = Quantity(
        253.15, 60 / math.sqrt(12), lower=223.15, upper=283.15, shape="rectangular",
        source="below the air's by 0 to 60 K",
    )  # fmt: skip
    frame = frame_of(
        outdoors(
            piece("sky", SKY, 1.0),
            sky_band_temperature=guess,
            air_temperature=Quantity(283.15, 4.0),
        )
    )
    apart = frame.air_temperature - frame.pieces.band_temperature[0]
    assert apart.min() == pytest.approx(0.0, abs=0.1)
    assert apart.max() == pytest.approx(60.0, abs=0.1)
    assert frame.surroundings_temperature == pytest.approx(SKY)


def test_a_net_flux_to_pieces_is_the_sum_over_them():
    frame = frame_of(outdoors(piece("sky", SKY, 0.5), piece("wall", WALL, 0.5)))
    whole = 0.9 * STEFAN_BOLTZMANN * (310.0**4 - frame.surroundings_temperature[0] ** 4)
    parts = [0.5 * 0.9 * STEFAN_BOLTZMANN * (310.0**4 - one**4) for one in (SKY, WALL)]
    assert whole == pytest.approx(sum(parts))
