"""The sample: same seed, same bytes; truth that agrees with itself; read back without a fault."""

import csv
import json
from dataclasses import replace

import numpy as np
import pytest

from cladwatt.errors import InputError
from cladwatt.survey.frame import read_frame
from cladwatt.survey.survey_file import read_survey
from cladwatt.synthetic import sample
from cladwatt.synthetic.damage import DAMAGE_KINDS, draw_damage
from cladwatt.synthetic.frame_files import FRAME_FILES, frame_bytes
from cladwatt.synthetic.plant import load_plant

SMALL = ("f06_calender_riser", "f10_from_the_gallery")


def contents(folder):
    return {
        path.relative_to(folder).as_posix(): path.read_bytes()
        for path in sorted(folder.rglob("*"))
        if path.is_file()
    }


@pytest.fixture
def small_plant(monkeypatch):
    """Two small frames of the plant, so that a sample takes a second."""
    plant = load_plant()
    frames = tuple(
        replace(frame, pipes=tuple(replace(pipe, only=()) for pipe in frame.pipes))
        for frame in plant.frames
        if frame.id in SMALL
    )
    small = replace(plant, frames=frames)
    monkeypatch.setattr(sample, "load_plant", lambda _corners: small)
    monkeypatch.setattr(sample, "_KINDS", ("bare", "aged"))
    return small


@pytest.fixture(scope="module")
def whole(tmp_path_factory):
    folder = tmp_path_factory.mktemp("whole") / "sample"
    sample.write_sample(folder, 7)
    return folder


@pytest.mark.usefixtures("small_plant")
def test_the_same_seed_gives_the_same_bytes(tmp_path):
    sample.write_sample(tmp_path / "one", 3)
    sample.write_sample(tmp_path / "two", 3)
    sample.write_sample(tmp_path / "three", 4)
    one, two, three = (contents(tmp_path / name) for name in ("one", "two", "three"))
    assert one == two
    assert one.keys() == three.keys()
    same = {name for name in one if one[name] == three[name]}
    assert same == {"truth/README.txt", "camera_response.csv"}


@pytest.mark.usefixtures("small_plant")
def test_an_empty_folder_is_filled(tmp_path):
    folder = tmp_path / "empty"
    folder.mkdir()
    sample.write_sample(folder, 3)
    assert (folder / "survey.toml").is_file()
    assert [path.name for path in tmp_path.iterdir()] == ["empty"]


def test_a_folder_in_use_is_refused(tmp_path):
    (tmp_path / "note.txt").write_text("mine")
    with pytest.raises(InputError, match="holds files already; expected a new or an empty folder"):
        sample.write_sample(tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == ["note.txt"]


def test_a_file_is_refused(tmp_path):
    (tmp_path / "note.txt").write_text("mine")
    with pytest.raises(InputError, match="is a file; expected a new or an empty folder"):
        sample.write_sample(tmp_path / "note.txt")


def test_a_negative_seed_is_refused(tmp_path):
    with pytest.raises(InputError, match="seed is -1; expected 0 or more"):
        sample.write_sample(tmp_path / "new", -1)


@pytest.mark.usefixtures("small_plant")
def test_nothing_is_left_of_a_sample_cut_short(tmp_path, monkeypatch):
    def fail(*_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(sample, "truth_json", fail)
    with pytest.raises(InputError, match="cannot be written \\(No space left on device\\)"):
        sample.write_sample(tmp_path / "new", 3)
    assert list(tmp_path.iterdir()) == []


def test_every_kind_is_dealt_and_near_half_is_sound():
    plant = load_plant()
    only = {pipe.id: pipe.only for frame in plant.frames for pipe in frame.pipes}
    plain = {pipe.id for frame in plant.frames if not frame.is_corner for pipe in frame.pipes}
    for seed in range(20):
        dealt = sample.assign_damage(plant, np.random.default_rng(seed))
        kinds = {region: kind for region, kind in dealt.items() if region in plain}
        assert set(kinds.values()) == set(DAMAGE_KINDS)
        share = list(kinds.values()).count("sound") / len(kinds)
        assert 0.4 <= share <= 0.6
        assert all(not only[region] or kind in only[region] for region, kind in kinds.items())


@pytest.mark.parametrize("kind", [kind for kind in DAMAGE_KINDS if kind not in ("sound", "aged")])
def test_damage_lies_in_its_room(kind):
    random = np.random.default_rng(5)
    for _ in range(50):
        damage = draw_damage(kind, (0.4, 1.3), random, facing=1.0)
        assert 0.4 < damage.start < damage.end < 1.3


@pytest.mark.parametrize("kind", list(FRAME_FILES))
def test_every_file_kind_is_read_back(kind, tmp_path):
    from cladwatt.survey.model import Conditions, FrameEntry, FrameFormat, Recording

    random = np.random.default_rng(6)
    temperature = 300.0 + 20 * random.random((30, 40))
    suffix, keys, _ = FRAME_FILES[kind]
    path = tmp_path / f"frame{suffix}"
    path.write_bytes(frame_bytes(kind, temperature))
    entries = dict(line.split(" = ") for line in keys.splitlines())
    counts = "scale" in entries
    layout = FrameFormat(
        unit=entries["unit"].strip('"'),
        scale=float(entries["scale"]) if counts else None,
        offset=float(entries["offset"]) if counts else None,
        rows_from=entries.get("rows_from", '"top"').strip('"'),
    )
    frame = read_frame(FrameEntry("f", path, layout, Recording(), Conditions()), root=tmp_path)
    # half of the step of 0.01, or of 0.01 °F
    assert frame.temperature == pytest.approx(temperature, abs=0.0051)


def test_the_whole_sample_is_read_without_a_fault(whole):
    from cladwatt.survey.checking import check_survey

    survey = read_survey(whole)
    assert survey.faults == ()
    assert check_survey(whole) == ()
    assert sum(path.stat().st_size for path in whole.rglob("*") if path.is_file()) < 6e6
    roles = {region.role for region in survey.regions}
    assert {"pipe", "foil", "tape", "component", "leave_out"} <= roles
    assert 25 <= sum(region.role == "pipe" for region in survey.regions) <= 36


def test_the_truth_agrees_with_itself(whole):
    truth = json.loads((whole / "truth" / "truth.json").read_text(encoding="utf-8"))
    assert truth["invented"] is True
    with (whole / "truth" / "truth_stations.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    drawn = {region.id for region in read_survey(whole).regions if region.role == "pipe"}
    assert {region["region_id"] for region in truth["regions"]} == drawn
    for region in truth["regions"]:
        own = [row for row in rows if row["region_id"] == region["region_id"]]
        counted = [float(r["heat_loss_W_per_m"]) for r in own if r["component"] == "0"]
        assert np.mean(counted) == pytest.approx(region["heat_loss_W_per_m"], abs=1e-3)
        assert float(own[-1]["station_m"]) == pytest.approx(region["length_m"], abs=0.04)
        throughout = region["kind"] in ("aged", "soaked")
        local = not throughout and region["kind"] != "sound"
        assert bool(region["stretches"]) == local
        loss = region.get("untraced_loss_W_per_m", region["heat_loss_W_per_m"])
        ratio = loss / region["sound_loss_W_per_m"]
        assert region["damaged"] == (local or (throughout and ratio > 1.1))
        # what flows along the pipe into a body is missing beside it; one line is not at rest
        at_rest = "hours_at_temperature" not in truth["lines"][region["tag"]]
        if region["kind"] == "sound" and not region["components"] and at_rest:
            assert ratio == pytest.approx(1.0, abs=0.06)
        for stretch in region["stretches"]:
            assert 0 < stretch["start_m"] < stretch["end_m"] < region["length_m"]
            inside = [
                float(r["heat_loss_W_per_m"]) for r in own
                if stretch["start_m"] < float(r["station_m"]) < stretch["end_m"]
            ]  # fmt: skip
            assert abs(np.mean(inside)) > 1.05 * abs(region["sound_loss_W_per_m"])


def test_declared_values_miss_the_truth_by_their_uncertainty():
    # over many draws the truth scatters about the declared value as declared
    from cladwatt.synthetic.truth import draw_frame, draw_line, draw_shared

    plant, random = load_plant(), np.random.default_rng(8)
    line, frame = plant.lines["LS-114"], plant.frames[0]
    lines = [draw_line(line, random) for _ in range(600)]
    frames = [draw_frame(frame, draw_shared(random), random) for _ in range(600)]
    fluid = line.quantities["fluid_temperature_C"]
    off = [(truth.fluid_temperature - 273.15 - fluid.value) / fluid.u for truth in lines]
    assert np.mean(off) == pytest.approx(0.0, abs=0.15)
    assert np.std(off) == pytest.approx(1.0, abs=0.1)
    assert np.std([truth.installation_factor for truth in lines]) == pytest.approx(0.08, rel=0.1)
    # a limit of error is rectangular: standard deviation 1 / sqrt(3) of it
    calibration = [truth.calibration for truth in frames]
    assert np.std(calibration) == pytest.approx(3**-0.5, rel=0.08)
    assert np.max(np.abs(calibration)) <= 1.0


def test_an_image_inverted_with_the_truth_gives_the_true_surface(monkeypatch):
    # settings, calibration, air path, emissivity and reflection undone one by one, by hand
    from cladwatt.physics.emissivity import directional_emissivity
    from cladwatt.synthetic.response import true_band

    plant, band = load_plant(), true_band()
    frames = tuple(frame for frame in plant.frames if frame.id == "f02_hall_north")
    camera = {**plant.camera, "emissivity": 1.0, "noise_K": 0.0}
    monkeypatch.setattr(sample, "_KINDS", ())
    lines, made = sample.make_frames(replace(plant, frames=frames, camera=camera), 1)
    frame = next(made)
    truth, pipe, region = frame.truth, frame.pipes[0], frame.drawn.regions[0]
    assert region.tag == "HS-201"
    first, last = np.array(region.centreline[0]), np.array(region.centreline[-1])
    along = (last - first) / np.linalg.norm(last - first)
    side = np.array([-along[1], along[0]])
    across = np.linspace(-0.75, 0.75, 31)
    middle = first + (last - first) * np.linspace(0.1, 0.9, 60)[:, None]
    points = middle[:, None, :] + side * (region.widths[0] / 2 * across)[:, None]
    x, y = np.round(points).astype(int).transpose(2, 0, 1)
    black = band.radiance(frame.recorded[y, x] - 2.0 * truth.calibration)
    left = black - (1 - truth.transmission) * band.radiance(truth.air_temperature)
    emissivity = directional_emissivity(
        lines["HS-201"].band_emissivity, np.abs(np.arcsin(across)), False
    )
    mirrored = (1 - emissivity) * band.radiance(truth.reflected_temperature)
    found = band.temperature((left / truth.transmission - mirrored) / emissivity)
    # patchy emissivity of 3 % and a hidden half that is cooled otherwise
    assert found.mean() == pytest.approx(pipe.surface_temperature.mean(), abs=0.6)


def test_frames_of_rarer_cases_leave_the_others_as_they_are(whole, tmp_path):
    # so that the calibration can do without them
    plain = tmp_path / "plain"
    sample.write_sample(plain, 7, sample.SampleOptions(corners=False))
    with_them, without = contents(whole), contents(plain)
    shared = [name for name in without if name.startswith(("frames/", "regions/"))]
    assert len(shared) == 20
    assert all(with_them[name] == without[name] for name in shared)
    more = json.loads(with_them["truth/truth.json"])
    less = json.loads(without["truth/truth.json"])
    assert more["regions"][: len(less["regions"])] == less["regions"]
    assert more["lines"].items() >= less["lines"].items()


@pytest.mark.parametrize(("share", "expected"), [(0.0, 0), (0.5, 4), (1.0, 9), (2.0, 16)])
def test_the_share_of_damaged_pipes_can_be_set(share, expected):
    # twice nine would be more than the sixteen pipes that may be damaged
    plant = load_plant(corners=False)
    counts = [
        sum(kind != "sound" for kind in
            sample.assign_damage(plant, np.random.default_rng(seed), share).values())
        for seed in range(10)
    ]  # fmt: skip
    assert max(counts) <= expected
    assert min(counts) >= expected - (2 if share > 1 else 0)


def only_frame(name, options=None, seed=1):
    plant = load_plant()
    frames = tuple(frame for frame in plant.frames if frame.id == name)
    lines, made = sample.make_frames(
        replace(plant, frames=frames), seed, options or sample.SampleOptions()
    )
    return lines, next(made)


def test_another_convection_law_and_a_biased_one_change_the_truth(monkeypatch):
    monkeypatch.setattr(sample, "_KINDS", ())
    name = "f08_bridge_bend"
    plain = only_frame(name)[1]
    other = only_frame(name, sample.SampleOptions(convection="morgan_zukauskas"))[1]
    biased = only_frame(name, sample.SampleOptions(convection_bias=1.3))[1]
    assert biased.truth.convection_factor == pytest.approx(1.3 * plain.truth.convection_factor)
    first, second, third = (
        frame.pipes[0].surface_temperature.mean() for frame in (plain, other, biased)
    )
    assert 0.1 < abs(second - first) < 5.0
    assert third < first - 0.5


def test_the_sun_can_be_put_on_every_outdoor_frame(monkeypatch):
    monkeypatch.setattr(sample, "_KINDS", ())
    plain = only_frame("f08_bridge_bend")[1]
    sunny = only_frame("f08_bridge_bend", sample.SampleOptions(sun=True))[1]
    assert plain.truth.sun == ()
    assert 250.0 < sunny.truth.solar_irradiance < 950.0
    assert sunny.truth.air_temperature == plain.truth.air_temperature
    warmer = sunny.pipes[0].surface_temperature.mean() - plain.pipes[0].surface_temperature.mean()
    assert warmer > 1.0
    assert "sun_on_pipe = true" in sample.survey_text(load_plant(), (sunny.plant,), 1)
    indoors = only_frame("f06_calender_riser", sample.SampleOptions(sun=True))[1]
    assert indoors.truth.sun == ()


def test_every_rarer_case_is_declared_and_true(whole):
    truth = json.loads((whole / "truth" / "truth.json").read_text(encoding="utf-8"))
    by_id = {region["region_id"]: region for region in truth["regions"]}
    frames, lines = truth["frames"], truth["lines"]
    text = (whole / "survey.toml").read_text(encoding="utf-8")
    for key in (
        "spectral_response = ", 'steam_pressure_is = "gauge"', 'kind = "air_gap"', "layers = [",
        "cloud_cover = ", "sky_total_temperature_C = ", "sky_band_temperature_C = ",
        'what = "neighbour"', "solar_irradiance_W_m2 = ", "sun_on_pipe = true",
        "surface_wet = true", "tracer_clock_position = ", "hours_at_temperature = ",
        'tracing = "electric"', "tracer_power_W_m = ", 'condition = "ice"',
        'lagging_condition = "wet"', 'wind_along = "up"', 'wind_along = "down"',
        "wind_angle_deg = ",
        "sheltered = true", "window_transmission = ", "camera_window_transmission = ",
        "inside_film_W_m2_K = ", "flow_kg_s = ", "specific_heat_J_kg_K = ", "wall_temperature_C = ",
        "supports_allowance = ", "range_upper_C = ", "inclination_deg = 65",
    ):  # fmt: skip
        assert key in text
    # saturated steam of 7 bar gauge boils at 170.4 °C
    assert lines["LS-130"]["fluid_temperature_C"] == pytest.approx(170.4, abs=4.0)
    assert frames["f11_bridge_in_the_sun"]["solar_irradiance_W_m2"] > 200
    brine = by_id["R23"]
    assert brine["heat_loss_W_per_m"] < 0
    assert 0.02 < brine["water_on_surface"] < 0.9
    assert by_id["R25"]["water_on_surface"] > 0.3
    traced = by_id["R24"]
    assert 0.1 < traced["tracer_heat_W_per_m"] / traced["heat_loss_W_per_m"] < 0.8
    assert 1.02 < traced["heat_loss_W_per_m"] / traced["untraced_loss_W_per_m"] < 1.6
    # the reference of a traced line is the same line with its tracer off
    assert traced["excess_W_per_m"] == pytest.approx(
        traced["untraced_loss_W_per_m"] - traced["sound_loss_W_per_m"], abs=1e-4
    )
    assert abs(traced["excess_W_per_m"]) < 0.03 * traced["sound_loss_W_per_m"]
    cable = by_id["R28"]
    # a cable on the pipe's wall warms the fluid: what leaves hardly grows
    assert 1.0 < cable["heat_loss_W_per_m"] / cable["untraced_loss_W_per_m"] < 1.1
    young = by_id["R22"]
    assert young["heat_loss_W_per_m"] < 0.97 * young["sound_loss_W_per_m"]
    assert young["inside_heat_W_per_m"] > 1.1 * young["heat_loss_W_per_m"]
    bodies = {
        (one["kind"], one["lagged"]): one for region in by_id.values()
        for one in region["components"]
    }  # fmt: skip
    assert {(kind, lagged) for kind in ("valve", "flange") for lagged in (True, False)} <= set(
        bodies
    )
    for kind in ("valve", "flange"):
        bare, covered = bodies[kind, False], bodies[kind, True]
        assert bare["added_lagged_length_m"] > 4 * covered["added_lagged_length_m"] > 0


def test_a_tracer_shows_at_its_hour():
    # 4 o'clock looking along the line, drawn from left to right: low on the side of the camera
    frame = only_frame("f13_brine_and_starch")[1]
    pipe = next(pipe for pipe in frame.pipes if pipe.plant.tag == "ST-630")
    around = pipe.skin.temperature.mean(axis=0)
    warmest = (np.argmax(around) + 0.5) * 24 / around.size / 2
    assert warmest == pytest.approx(4.0, abs=0.3)
    assert around.max() - around.min() > 1.0
    region = frame.drawn.regions[1]
    (x, y), width = region.centreline[1], region.widths[1]
    column = frame.recorded[:, round(x)]
    above, below = column[round(y - 0.25 * width)], column[round(y + 0.25 * width)]
    assert below > above + 0.5
