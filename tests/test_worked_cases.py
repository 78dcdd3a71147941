"""Five pipes worked out twice: by `cladwatt explain`, and by hand from the same recorded value.

The second calculation (`tests/by_hand`) knows what was declared and recorded, and nothing of the
package. Each frame shows its pipe at one recorded temperature all over the face.
"""

import math
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import tifffile
from CoolProp.CoolProp import PropsSI
from tests.by_hand.exchange import Place
from tests.by_hand.lagging import AirGap, Lagging, Solved, lagged_pipe
from tests.by_hand.radiance import over_the_face, surface_temperature, tabled_transmission

from cladwatt.explain.region import explain_region
from cladwatt.explain.steps import Explanation
from cladwatt.results.assessment import Settings
from cladwatt.survey.survey_file import read_survey

REGION = """{"type": "FeatureCollection", "features": [{"type": "Feature",
 "properties": {"id": "P1", "role": "pipe", "tag": "L1", "width_px": 60},
 "geometry": {"type": "LineString", "coordinates": [[8, 60], [190, 60]]}}]}"""
SURVEY = """\
[survey]
name = "Worked case"
date = 2026-03-18
[camera]
band_lower_um = 7.5
band_upper_um = 14.0
[recording]
emissivity = 0.95
reflected_temperature_C = 20.0
[[frame]]
id = "f1"
file = "f1.tiff"
unit = "C"
"""
ZERO = 273.15


def exactly(**quantities: float) -> str:
    """Return quantities as declared without uncertainty: then their median is their value."""
    return "\n".join(f"{name} = {{ value = {v}, u = 0.0 }}" for name, v in quantities.items())


def explained(folder: Path, recorded_C: float, *parts: str) -> Explanation:
    """Write a survey of one frame and one pipe, and return the steps of its explanation."""
    (folder / "regions").mkdir()
    (folder / "regions" / "f1.geojson").write_text(REGION)
    (folder / "survey.toml").write_text("\n".join((SURVEY, *parts)), encoding="utf-8")
    frame = np.full((120, 200), 20.0, dtype=np.float32)
    frame[26:95] = recorded_C  # wider than the region: no edge on the face
    frame += np.random.default_rng(1).normal(0.0, 0.002, frame.shape).astype(np.float32)
    tifffile.imwrite(folder / "f1.tiff", frame)
    return explain_region(read_survey(folder), "P1", settings=Settings(seed=1, draws=64))


@dataclass(frozen=True)
class Pipe:
    """A lagged pipe as declared. [K, m]"""

    inside: float
    diameter: float
    layers: tuple[Lagging | AirGap, ...]
    factor: float
    between: tuple[float, float]
    """Losses [W/m] between which the lagging's own is sought."""
    film: float | None = None
    supports: float = 0.0

    def solved(self, place: Place, factor: float = 1.0) -> Solved:
        return lagged_pipe(self.inside, self.diameter, self.layers, place, factor=factor,
                           film=self.film, between=self.between)  # fmt: skip


@dataclass(frozen=True)
class Seen:
    """What the camera recorded and what falsifies it. [K]"""

    recorded: float
    emissivity: float
    reflected: float
    transmission: float

    def surface(self, angle: float, air: float) -> float:
        return surface_temperature(
            self.recorded, camera_emissivity=0.95, camera_reflected=ZERO + 20.0,
            emissivity=self.emissivity, reflected=self.reflected, transmission=self.transmission,
            air=air, angle=angle,
        )  # fmt: skip


def compare(evidence, check: str, found: Explanation, seen: Seen, pipe: Pipe, place: Place,
            rel: float = 3e-3) -> None:  # fmt: skip
    """Hold the steps to the calculation by hand."""
    surface = over_the_face(lambda angle: seen.surface(angle, place.air))
    flux = over_the_face(lambda angle: place.flux(seen.surface(angle, place.air)))
    loss = math.pi * place.diameter * flux
    film = 0.0 if pipe.film is None else 1 / (math.pi * pipe.diameter * pipe.film)
    resistance = (pipe.inside - surface) / loss - film
    specified, sound = pipe.solved(place), pipe.solved(place, pipe.factor)
    sound_loss = sound.loss * (1 + pipe.supports)
    for what, symbol, hand, unit, allowed in (
        ("loss", "q'", loss, "W/m", rel),
        ("resistance", "R", resistance, "m K/W", rel),
        ("loss as specified", "q'_spec", specified.loss, "W/m", rel),
        ("loss of sound lagging", "q'_sound", sound_loss, "W/m", rel),
        ("resistance over specified", "ratio", resistance / specified.resistance, "", 2 * rel),
        ("excess over sound", "excess", loss - sound_loss, "W/m", 6 * rel),
    ):
        evidence(check, what, found.value(symbol), hand, unit=unit, rel=allowed)
    evidence(check, "surface temperature", found.value("T_face"), surface, unit="K", abs=0.02)


def test_hot_level_pipe_in_a_hall(tmp_path, evidence):
    found = explained(
        tmp_path, 37.0, "[conditions]", "indoors = true",
        exactly(air_temperature_C=20.0, surroundings_temperature_C=22.0,
                reflected_temperature_C=23.0, relative_humidity=0.5, distance_m=5.0,
                wind_speed_m_s=0.2),
        '[[line]]\ntag = "L1"\nlagging_material = "unknown"\ncladding = "painted_steel"',
        exactly(pipe_outside_diameter_mm=168.3, lagging_thickness_mm=60.0,
                lagging_conductivity_W_m_K=0.045, installation_factor=1.2,
                cladding_thickness_mm=0.7, emissivity=0.92, total_emissivity=0.88,
                fluid_temperature_C=180.0),
    )  # fmt: skip
    place = Place(air=ZERO + 20, surroundings=ZERO + 22, wind=0.2, diameter=0.2897,
                  emissivity=0.88, humidity=0.5)  # fmt: skip
    pipe = Pipe(ZERO + 180, 0.1683, (Lagging(0.06, lambda _: 0.045),), 1.2, (60.0, 95.0))
    seen = Seen(ZERO + 37, 0.92, ZERO + 23, tabled_transmission(20, 50, 5))
    compare(evidence, "worked_hall", found, seen, pipe, place)


def test_riser_in_a_wind_that_helps(tmp_path, evidence):
    """Wind at 40 degrees to the axis, blowing up a hot riser at 900 hPa."""
    found = explained(
        tmp_path, 23.0, "[site]", exactly(pressure_hPa=900.0),
        '[conditions]\nindoors = false\nwind_along = "up"',
        exactly(air_temperature_C=10.0, surroundings_temperature_C=6.0,
                reflected_temperature_C=2.0, relative_humidity=0.5, distance_m=10.0,
                wind_speed_m_s=1.2, wind_angle_deg=40.0),
        '[[line]]\ntag = "L1"\nlagging_material = "unknown"\ncladding = "painted_steel"\n'
        "inclination_deg = 90",
        exactly(pipe_outside_diameter_mm=219.1, lagging_thickness_mm=80.0,
                lagging_conductivity_W_m_K=0.052, installation_factor=1.1,
                cladding_thickness_mm=0.8, emissivity=0.9, total_emissivity=0.86,
                fluid_temperature_C=240.0),
    )  # fmt: skip
    place = Place(air=ZERO + 10, surroundings=ZERO + 6, wind=1.2, diameter=0.3807,
                  emissivity=0.86, humidity=0.5, pressure=9e4, inclination=90.0,
                  wind_angle=40.0)  # fmt: skip
    pipe = Pipe(ZERO + 240, 0.2191, (Lagging(0.08, lambda _: 0.052),), 1.1, (100.0, 160.0))
    seen = Seen(ZERO + 23, 0.9, ZERO + 2, tabled_transmission(10, 50, 10))
    compare(evidence, "worked_riser", found, seen, pipe, place)


def test_sunlit_pipe_between_sky_ground_and_a_hot_neighbour(tmp_path, evidence):
    pieces = ((0.45, -5.0, "sky"), (0.35, 12.0, "ground"), (0.20, 45.0, "neighbour"))
    found = explained(
        tmp_path, 21.0, "[conditions]\nindoors = false\nsun_on_pipe = true",
        "surroundings = [" + ", ".join(
            f'{{ what = "{what}", temperature_C = {celsius}, u_temperature_C = 0, '
            f"view_factor = {share}, u_view_factor = 0 }}" for share, celsius, what in pieces
        ) + "]",
        exactly(air_temperature_C=10.0, reflected_temperature_C=-2.0, relative_humidity=0.8,
                distance_m=5.0, wind_speed_m_s=2.5, solar_irradiance_W_m2=300.0),
        '[[line]]\ntag = "L1"\nlagging_material = "unknown"\ncladding = "painted_steel"\n'
        "inclination_deg = 30",
        exactly(pipe_outside_diameter_mm=114.3, lagging_thickness_mm=50.0,
                lagging_conductivity_W_m_K=0.04, installation_factor=1.15,
                cladding_thickness_mm=0.8, emissivity=0.91, total_emissivity=0.87,
                solar_absorptance=0.5, fluid_temperature_C=150.0),
    )  # fmt: skip
    around = sum(share * (ZERO + celsius) ** 4 for share, celsius, _ in pieces) ** 0.25
    place = Place(air=ZERO + 10, surroundings=around, wind=2.5, diameter=0.2159,
                  emissivity=0.87, humidity=0.8, inclination=30.0,
                  sun=0.5 * 300 * 0.2159 / (math.pi * 0.2159))  # fmt: skip
    pipe = Pipe(ZERO + 150, 0.1143, (Lagging(0.05, lambda _: 0.04),), 1.15, (45.0, 75.0))
    seen = Seen(ZERO + 21, 0.91, ZERO - 2, tabled_transmission(10, 80, 5))
    compare(evidence, "worked_sunlit", found, seen, pipe, place)


def test_chilled_pipe_below_the_dew_point(tmp_path, evidence):
    """Water condenses all over: latent heat, and the film's emissivity in the band and in total."""
    found = explained(
        tmp_path, 24.5, "[conditions]", "indoors = true",
        exactly(air_temperature_C=30.0, surroundings_temperature_C=30.0,
                reflected_temperature_C=29.0, relative_humidity=0.8, distance_m=5.0,
                wind_speed_m_s=0.3),
        '[[line]]\ntag = "L1"\nlagging_material = "unknown"\ncladding = "painted_steel"',
        exactly(pipe_outside_diameter_mm=88.9, lagging_thickness_mm=13.0,
                lagging_conductivity_W_m_K=0.04, installation_factor=1.2,
                cladding_thickness_mm=0.5, emissivity=0.9, total_emissivity=0.85,
                fluid_temperature_C=4.0),
    )  # fmt: skip
    place = Place(air=ZERO + 30, surroundings=ZERO + 30, wind=0.3, diameter=0.1159,
                  emissivity=0.85, humidity=0.8, condenses=True)  # fmt: skip
    pipe = Pipe(ZERO + 4, 0.0889, (Lagging(0.013, lambda _: 0.04),), 1.2, (-26.0, -15.0))
    seen = Seen(ZERO + 24.5, 0.96, ZERO + 29, tabled_transmission(30, 80, 5))
    assert place.dew_point - 3 < seen.surface(0.0, place.air) < place.dew_point - 0.6
    # humidity ratios instead of partial pressures, another diffusivity: 2 % of the latent heat
    compare(evidence, "worked_chilled", found, seen, pipe, place, rel=1e-2)


CURVE = ((20.0, 0.036), (100.0, 0.045), (200.0, 0.062), (300.0, 0.085))
"""Invented conductivity. [°C], [W/(m K)]"""


def test_air_gap_and_two_layers_round_steam(tmp_path, evidence):
    """Superimposed: steam by its gauge pressure, a film inside, an air gap, supports."""
    (tmp_path / "tables").mkdir()
    (tmp_path / "tables" / "lagging_conductivity.csv").write_text(
        "material,temperature_C,conductivity_W_per_m_K,u_relative\n,°C,W/(m K),1\n"
        + "".join(f"invented_felt,{at},{k},0.0\n" for at, k in CURVE),
        encoding="utf-8",
    )
    layers = (
        '{ kind = "air_gap", thickness_mm = 12.0, u_thickness_mm = 0, inner_emissivity = 0.8, '
        "outer_emissivity = 0.5 }",
        '{ material = "unknown", thickness_mm = 30.0, u_thickness_mm = 0, '
        "conductivity_W_m_K = 0.06, u_conductivity_W_m_K = 0 }",
        '{ material = "invented_felt", thickness_mm = 40.0, u_thickness_mm = 0 }',
    )
    found = explained(
        tmp_path, 34.0, "[site]", exactly(pressure_hPa=950.0), "[conditions]\nindoors = true",
        exactly(air_temperature_C=20.0, surroundings_temperature_C=20.0,
                reflected_temperature_C=20.0, relative_humidity=0.5, distance_m=5.0,
                wind_speed_m_s=0.15),
        '[[line]]\ntag = "L1"\nsteam_pressure_is = "gauge"\ncladding = "painted_steel"',
        f"layers = [{', '.join(layers)}]",
        exactly(steam_pressure_bar=12.0, inside_film_W_m2_K=60.0, supports_allowance=0.1,
                pipe_outside_diameter_mm=114.3, installation_factor=1.15,
                cladding_thickness_mm=0.6, emissivity=0.92, total_emissivity=0.9),
    )  # fmt: skip
    place = Place(air=ZERO + 20, surroundings=ZERO + 20, wind=0.15, diameter=0.2795,
                  emissivity=0.9, humidity=0.5, pressure=9.5e4)  # fmt: skip
    temperatures, conductivities = zip(*CURVE, strict=True)
    pipe = Pipe(
        float(PropsSI("T", "P", 12e5 + 9.5e4, "Q", 1, "Water")), 0.1143,
        (
            AirGap(0.012, 0.8, 0.5), Lagging(0.03, lambda _: 0.06),
            Lagging(0.04, lambda t: float(np.interp(t - ZERO, temperatures, conductivities))),
        ),
        1.15, (60.0, 85.0), film=60.0, supports=0.1,
    )  # fmt: skip
    seen = Seen(ZERO + 34, 0.92, ZERO + 20, tabled_transmission(20, 50, 5))
    # the package takes a gap's conductivity for 10 K between its faces
    compare(evidence, "worked_steam", found, seen, pipe, place, rel=6e-3)


def test_the_second_calculation_knows_nothing_of_the_package():
    for path in (Path(__file__).parent / "by_hand").glob("*.py"):
        assert "cladwatt" not in path.read_text(encoding="utf-8"), path.name
