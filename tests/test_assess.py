"""The whole path from frames on disk to an assessment, on scenes whose truth is known."""

import dataclasses
import math
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import tifffile

from cladwatt.assess import assess, assess_among_others, assess_frame
from cladwatt.assumptions import assumptions_of
from cladwatt.errors import Fault, InputError
from cladwatt.physics.band import Band
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.emissivity import directional_emissivity
from cladwatt.physics.lagged_pipe import LaggingLayer, SurfaceExchange, solve_lagged_pipe
from cladwatt.physics.radiometry import correct_temperature
from cladwatt.quantities import Quantity
from cladwatt.results.assessment import Assessment, Interval, Settings, interval_of
from cladwatt.survey.model import (
    AccuracyStatement,
    Camera,
    Cladding,
    Conditions,
    ConductivityCurve,
    FrameEntry,
    FrameFormat,
    Layer,
    Line,
    Recording,
    Site,
)
from cladwatt.survey.region import Region
from cladwatt.survey.survey import Survey

ROWS, COLUMNS, WIDTH = 120, 200, 36.0
UPPER, LOWER = 30.0, 84.0
"""Rows of the two pipes of a frame."""
SETTINGS = Settings(seed=3, draws=200)
CAMERA = Camera(field_of_view_deg=30.0, accuracy=AccuracyStatement(1.0, 1.0))
BAND = Band.rectangular(*CAMERA.band)
AIR, MIRRORED, SURROUNDINGS, WIND, TRANSMISSION = 293.15, 296.15, 295.15, 0.2, 0.99


def line(tag: str, inside: float | None = 453.15, **changes: Any) -> Line:
    wool = ConductivityCurve((250.0, 600.0), (0.045, 0.045), source="maker's sheet")
    paint = Cladding(
        name="painted", thickness=Quantity(0.001),
        band_emissivity=Quantity(0.92, 0.02, upper=1.0),
        total_emissivity=Quantity(0.90, 0.02, upper=1.0, source="handbook", confidence="medium"),
        solar_absorptance=Quantity(0.6), conductivity=50.0, is_metal=False,
    )  # fmt: skip
    fields: dict[str, Any] = {
        "pipe_outside_diameter": Quantity(0.1143),
        "layers": (Layer("wool", Quantity(0.060), wool, Quantity(1.0, 0.05)),),
        "cladding": paint,
        "installation_factor": Quantity(1.15, 0.08, lower=1.0, source="assumed", confidence="low"),
        "inside_temperature": None if inside is None else Quantity(inside, 2.0),
        "area": "Hall 2",
    } | changes
    return Line(tag, **fields)


def conditions(**changes: Any) -> Conditions:
    fields: dict[str, Any] = {
        "air_temperature": Quantity(AIR, 0.5),
        "surroundings_temperature": Quantity(SURROUNDINGS, 1.0),
        "reflected_temperature": Quantity(MIRRORED, 1.0),
        "atmosphere_transmission": Quantity(TRANSMISSION),
        "wind_speed": Quantity(WIND, 0.05, lower=0.0),
        "indoors": True,
    } | changes
    return Conditions(**fields)


def sound(of: Line) -> tuple[float, float]:
    """Loss and surface temperature of a line as sound as its installation factor. [W/m, K]"""
    assert of.inside_temperature is not None
    assert of.lagged_diameter is not None
    exchange = SurfaceExchange(
        AIR, SURROUNDINGS, WIND, of.lagged_diameter, of.cladding.total_emissivity.value
    )
    wool = LaggingLayer(ConductivityIntegral.constant(0.045), 0.060, of.installation_factor.value)
    state = solve_lagged_pipe(of.inside_temperature.value, 0.1143, [wool], exchange)
    return float(state.heat_loss), float(state.surface_temperature)


def scene(*pipes: tuple[float, Any]) -> np.ndarray:
    """What reaches the lens from pipes (row, surface temperature). [K]"""
    lens = np.full((ROWS, COLUMNS), AIR)
    for row, surface in pipes:
        across = (np.arange(ROWS) - row) / (WIDTH / 2)
        emissivity = directional_emissivity(0.92, np.arcsin(np.clip(across, -1, 1)), False)
        own = emissivity[:, None] * BAND.radiance(np.broadcast_to(surface, COLUMNS))
        whole = own + (1 - emissivity[:, None]) * BAND.radiance(MIRRORED)
        through = TRANSMISSION * whole + (1 - TRANSMISSION) * BAND.radiance(AIR)
        lens = np.where((np.abs(across) <= 1)[:, None], BAND.temperature(through), lens)
    return lens


def recorded(lens: np.ndarray, recording: Recording) -> np.ndarray:
    """What a camera with these settings writes down. [K]"""
    return correct_temperature(
        lens, band=BAND, emissivity=recording.emissivity,
        reflected_temperature=recording.reflected_temperature,
        transmission=recording.transmission,
        atmosphere_temperature=recording.atmosphere_temperature,
    )  # fmt: skip


def pipe(name: str, frame: str, tag: str, row: float, **changes: Any) -> Region:
    fields: dict[str, Any] = {
        "centreline": ((10.0, row), (190.0, row)), "widths": (WIDTH, WIDTH),
    } | changes  # fmt: skip
    return Region(name, frame, "pipe", tag, **fields)


def drawn(name: str, frame: str, role: Any, box: tuple[float, ...], **rest: Any) -> Region:
    left, top, right, bottom = box
    ring = ((left, top), (right, top), (right, bottom), (left, bottom))
    return Region(name, frame, role, outline=ring, **rest)


HS, HW, CW = line("HS-1"), line("HW-2", 373.15), line("CW-3", 279.15)


class Folder:
    """A survey of three frames, written once: two hot lines twice, one of them with a chilled."""

    def __init__(self, root: Path) -> None:
        self.root = root
        self.survey = Survey(
            root=root, name="Invented mill", date=None, inspector="A. Tester", site=Site(),
            camera=CAMERA, lines={one.tag: one for one in (HS, HW, CW)}, frames=(), regions=(),
        )  # fmt: skip
        surface = {one.tag: sound(one)[1] for one in (HS, HW, CW)}
        self.add("a", scene((UPPER, surface["HS-1"]), (LOWER, surface["HW-2"])))
        self.add("b", scene((UPPER, surface["HS-1"]), (LOWER, surface["CW-3"])))
        hot = np.full(COLUMNS, surface["HW-2"])
        hot[80:120] += 8.0
        self.add("c", scene((UPPER, hot)))
        self.draw(
            pipe("a1", "a", "HS-1", UPPER), pipe("a2", "a", "HW-2", LOWER),
            pipe("b1", "b", "HS-1", UPPER), pipe("b2", "b", "CW-3", LOWER),
            pipe("c1", "c", "HW-2", UPPER),
        )  # fmt: skip

    def add(
        self, name: str, lens: np.ndarray, recording: Recording | None = None, **changes: Any
    ) -> None:
        recording = recording or Recording(0.95, 293.15)
        noise = np.random.default_rng(len(self.survey.frames)).normal(0, 0.02, lens.shape)
        path = self.root / f"{name}.tiff"
        tifffile.imwrite(path, recorded(lens + noise, recording))
        entry = FrameEntry(name, path, FrameFormat(unit="K"), recording, conditions(**changes))
        self.change(frames=(*self.survey.frames, entry))

    def draw(self, *regions: Region) -> None:
        self.change(regions=(*self.survey.regions, *regions))

    def change(self, **changes: Any) -> None:
        self.survey = dataclasses.replace(self.survey, **changes)

    def only(self, *frames: str) -> Survey:
        """The survey with some of its frames, in this order."""
        return dataclasses.replace(
            self.survey,
            frames=tuple(self.survey.frame(name) for name in frames),
            regions=tuple(r for name in frames for r in self.survey.regions_of(name)),
        )


@pytest.fixture
def folder(tmp_path: Path) -> Folder:
    return Folder(tmp_path)


@pytest.fixture(scope="module")
def mill(tmp_path_factory: pytest.TempPathFactory) -> Survey:
    return Folder(tmp_path_factory.mktemp("mill")).survey


@pytest.fixture(scope="module")
def assessed(mill: Survey) -> Assessment:
    return assess(mill, settings=Settings(seed=3, draws=1000))


def same(one: Any, other: Any) -> bool:
    """Equal to the last bit, draws included; NaN equals NaN."""
    if isinstance(one, np.ndarray):
        return np.array_equal(one, other, equal_nan=True)
    if dataclasses.is_dataclass(one):
        names = [field.name for field in dataclasses.fields(one) if field.name != "seconds"]
        return all(same(getattr(one, name), getattr(other, name)) for name in names)
    if isinstance(one, dict):
        return one.keys() == other.keys() and all(same(one[key], other[key]) for key in one)
    if isinstance(one, tuple | list):
        return len(one) == len(other) and all(map(same, one, other))
    if isinstance(one, float) and math.isnan(one):
        return math.isnan(other)
    return bool(one == other)


def region_of(assessment: Assessment, name: str):
    return next(region for region in assessment.regions if region.region_id == name)


# ---- truth --------------------------------------------------------------------------------


@pytest.mark.parametrize(("name", "of"), [("a1", HS), ("a2", HW), ("b1", HS), ("b2", CW)])
def test_sound_pipes_are_found_as_they_are(assessed, name, of):
    loss, surface = sound(of)
    found = region_of(assessed, name)
    assert found.heat_loss.median == pytest.approx(loss, rel=0.08)
    assert found.heat_loss.low < loss < found.heat_loss.high
    assert found.surface_temperature.low < surface < found.surface_temperature.high
    assert found.sound_loss.low < loss < found.sound_loss.high
    assert found.excess.low < 0 < found.excess.high
    assert found.resistance_ratio.low < 1 / 1.15 < found.resistance_ratio.high
    assert found.probability_local < 0.1
    assert found.gain == (of is CW)


def test_the_hot_band_is_found(assessed):
    found = region_of(assessed, "c1")
    (stretch,) = (one for one in found.stretches if one.probability > 0.5)
    step = found.stations.length[0]
    assert stretch.start.low < (80 - 10.5) * step < stretch.start.high
    assert stretch.end.low < (120 - 10.5) * step < stretch.end.high
    assert found.probability_damaged > 0.9


def test_nothing_is_left_out_of_a_good_survey(assessed):
    assert assessed.left_out == ()


@pytest.mark.parametrize(
    "recording",
    [Recording(), Recording(0.7, 300.0), Recording(0.95, 293.15, 0.9, 290.0)],
    ids=["none", "emissivity", "air path"],
)
def test_what_the_camera_had_applied_does_not_matter(folder, assessed, recording):
    entry = folder.survey.frame("c")
    lens = tifffile.imread(entry.path)
    undone = Recording(0.95, 293.15)
    radiance = 0.95 * BAND.radiance(lens) + 0.05 * BAND.radiance(293.15)
    again = recorded(BAND.temperature(radiance), recording)
    assert entry.recording == undone
    tifffile.imwrite(folder.root / "d.tiff", again)
    other = dataclasses.replace(entry, path=folder.root / "d.tiff", recording=recording)
    alone = folder.only("c")
    survey = dataclasses.replace(alone, frames=(other,))
    result = assess(survey, settings=assessed.settings).regions[0]
    before = region_of(assess(alone, settings=assessed.settings), "c1")
    assert result.heat_loss.median == pytest.approx(before.heat_loss.median, rel=1e-4)
    assert result.heat_loss.high == pytest.approx(before.heat_loss.high, rel=1e-4)
    assert len(result.stretches) == len(before.stretches)


# ---- reproducible -------------------------------------------------------------------------


def test_workers_and_executors_change_nothing(mill):
    one = assess(mill, settings=SETTINGS)
    assert same(one, assess(mill, settings=SETTINGS, workers=2))
    with ThreadPoolExecutor(2) as executor:
        assert same(one, assess(mill, settings=SETTINGS, executor=executor))


def test_order_of_frames_changes_no_region(folder):
    one = assess(folder.only("a", "b", "c"), settings=SETTINGS)
    two = assess(folder.only("c", "a", "b"), settings=SETTINGS)
    assert [frame.frame_id for frame in two.frames] == ["c", "a", "b"]
    for region in one.regions:
        assert same(region, region_of(two, region.region_id)), region.region_id
    assert two.total_loss.median == pytest.approx(one.total_loss.median)


def test_one_frame_among_others_is_that_of_the_whole_survey(folder):
    one = assess_among_others(folder.survey, folder.survey.frame("b"), SETTINGS)
    assert same(one, assess(folder.survey, settings=SETTINGS).frames[1])


def test_a_frame_alone_is_all_there_is_of_a_survey_of_one(folder):
    alone = assess_frame(folder.survey, folder.survey.frame("b"), SETTINGS)
    assert same(alone, assess(folder.only("b"), settings=SETTINGS).frames[0])


def test_seed_decides_the_draws_and_hardly_the_result(mill):
    one, two = (assess(mill, settings=Settings(seed=seed, draws=1000)) for seed in (1, 2))
    assert one.total_loss != two.total_loss
    assert two.total_loss.median == pytest.approx(one.total_loss.median, rel=0.03)
    assert two.total_loss.relative_width == pytest.approx(one.total_loss.relative_width, rel=0.15)
    assert same(one, assess(mill, settings=one.settings))


def test_progress_tells_each_frame_in_order(mill):
    steps: list[tuple[int, int, str]] = []
    assess(mill, settings=SETTINGS, progress=lambda *step: steps.append(step))
    assert steps == [(1, 3, "a"), (2, 3, "b"), (3, 3, "c")]


@pytest.mark.parametrize("draws", [0, -5, 1, 39])
def test_settings_out_of_range_are_refused(mill, draws):
    with pytest.raises(InputError, match=f"{draws}; expected"):
        assess(mill, settings=Settings(draws=draws))


# ---- totals -------------------------------------------------------------------------------


def percentiles(draws: np.ndarray) -> Interval:
    low, median, high = np.percentile(draws, [2.5, 50, 97.5])
    return Interval(float(median), float(low), float(high))


def test_totals_are_summed_draw_by_draw(assessed):
    hot = [region for region in assessed.regions if not region.gain]
    total = percentiles(np.sum([region.draws["total_loss"] for region in hot], axis=0))
    found = assessed.total_loss
    assert (found.low, found.median, found.high) == pytest.approx(
        (total.low, total.median, total.high)
    )


def test_a_total_is_wider_than_independent_sums(assessed):
    hot = [region.draws["total_loss"] for region in assessed.regions if not region.gain]
    random = np.random.default_rng(0)
    independent = percentiles(np.sum([random.permutation(one) for one in hot], axis=0))
    assert assessed.total_loss.relative_width > 1.2 * independent.relative_width


def test_two_frames_of_a_line_share_what_belongs_to_line_and_camera(assessed):
    one, two = (region_of(assessed, name).draws["total_loss"] for name in ("a1", "b1"))
    assert np.corrcoef(one, two)[0, 1] > 0.25


def test_gains_and_losses_are_never_netted(assessed, folder):
    chilled = region_of(assessed, "b2")
    assert chilled.total_loss.median < 0
    assert assessed.total_gain.median == pytest.approx(-chilled.total_loss.median)
    assert assessed.total_gain.low == pytest.approx(-chilled.total_loss.high)
    hot_only = assess(folder.only("a"), settings=SETTINGS)
    assert hot_only.total_gain is None
    assert hot_only.total_loss.median > 0


def test_a_line_is_the_sum_of_its_regions(assessed):
    totals = {total.tag: total for total in assessed.lines}
    assert set(totals) == {"HS-1", "HW-2", "CW-3"}
    assert totals["HS-1"].regions == ("a1", "b1")
    assert totals["HS-1"].area == "Hall 2"
    assert totals["CW-3"].gain
    length = sum(region_of(assessed, name).draws["length"] for name in ("a1", "b1"))
    assert totals["HS-1"].length.median == pytest.approx(float(np.median(length)))
    loss = sum(region_of(assessed, name).draws["total_loss"] for name in ("a1", "b1"))
    assert totals["HS-1"].total_loss.median == pytest.approx(float(np.median(loss)))


def test_an_unknown_sound_loss_stays_out_of_the_excess_only(folder):
    (layer,) = HS.layers
    unknown = dataclasses.replace(HS, layers=(dataclasses.replace(layer, conductivity=None),))
    folder.change(lines={**folder.survey.lines, "HS-1": unknown})
    result = assess(folder.only("a"), settings=SETTINGS)
    excess = region_of(result, "a2").draws["total_excess"]
    assert result.total_excess.median == pytest.approx(float(np.median(excess)))
    both = region_of(result, "a1").draws["total_loss"] + region_of(result, "a2").draws["total_loss"]
    assert result.total_loss.median == pytest.approx(float(np.median(both)))
    assert {total.tag: total.excess is None for total in result.lines} == {
        "HS-1": True, "HW-2": False,
    }  # fmt: skip


# ---- left out -----------------------------------------------------------------------------


def test_an_unreadable_frame_is_left_out_and_the_rest_assessed(folder):
    (folder.root / "a.tiff").write_bytes(b"not an image at all")
    result = assess(folder.survey, settings=SETTINGS)
    (left,) = result.left_out
    assert (left.what, left.id, left.frame_id) == ("frame", "a", "a")
    assert "a.tiff" in left.message
    assert [frame.frame_id for frame in result.frames] == ["a", "b", "c"]
    assert {region.region_id for region in result.regions} == {"b1", "b2", "c1"}
    assert "a.tiff" not in dict(result.inputs)


def test_a_missing_frame_is_left_out(folder):
    (folder.root / "b.tiff").unlink()
    (left,) = assess(folder.survey, settings=SETTINGS).left_out
    assert (left.what, left.id) == ("frame", "b")


def test_a_region_outside_its_frame_is_left_out(folder):
    far = pipe("c9", "c", "HW-2", UPPER, centreline=((150.0, 30.0), (500.0, 30.0)))
    folder.draw(far)
    result = assess(folder.only("c"), settings=SETTINGS)
    (left,) = result.left_out
    assert (left.what, left.id, left.frame_id) == ("region", "c9", "c")
    assert "outside its frame" in left.message
    assert [region.region_id for region in result.regions] == ["c1"]


def test_no_air_temperature_leaves_the_frames_regions_out_by_name(folder):
    first, *rest = folder.survey.frames
    airless = dataclasses.replace(first, conditions=conditions(air_temperature=None))
    folder.change(frames=(airless, *rest))
    result = assess(folder.survey, settings=SETTINGS)
    assert [(left.what, left.id, left.message) for left in result.left_out] == [
        ("region", "a1", ""), ("region", "a2", ""),
    ]  # fmt: skip
    assert {left.remark.key for left in result.left_out} == {"missing.air_temperature"}
    assert {region.region_id for region in result.regions} == {"b1", "b2", "c1"}


def test_a_component_is_named_and_its_stations_left_out(folder):
    whole = assess(folder.only("c"), settings=SETTINGS).regions[0]
    folder.draw(drawn("v1", "c", "component", (80.0, 10.0, 120.0, 50.0), kind="valve"))
    result = assess(folder.only("c"), settings=SETTINGS)
    assert result.left_out == ()
    (valve,) = result.frames[0].components
    assert (valve.region_id, valve.kind, valve.lagged, valve.reason) == ("v1", "valve", False, None)
    (region,) = result.regions
    assert region.length.median < 0.82 * whole.length.median
    assert all(stretch.probability < 0.5 for stretch in region.stretches)  # the hot band is gone


def test_the_sum_of_components_is_drawn_together_and_in_no_other_total(folder):
    whole = assess(folder.only("c"), settings=SETTINGS)
    assert (whole.component_loss, whole.component_gain) == (None, None)
    for name, left in (("v1", 60.0), ("v2", 120.0)):
        folder.draw(drawn(name, "c", "component", (left, 10.0, left + 30.0, 50.0), kind="valve"))
    result = assess(folder.only("c"), settings=SETTINGS)
    one, other = (component.draws["heat_loss"] for component in result.components)
    assert result.component_loss == interval_of(one + other)
    assert result.component_gain is None
    assert result.total_loss == interval_of(result.regions[0].draws["total_loss"])
    # lengths are drawn apart: the sum is better known than each alone
    (first, _) = (component.heat_loss for component in result.components)
    assert result.component_loss.relative_width < first.relative_width


def test_a_component_in_a_frame_without_air_temperature_is_named_with_its_reason(folder):
    folder.draw(drawn("v1", "a", "component", (80.0, 10.0, 120.0, 50.0), kind="valve"))
    first, *rest = folder.survey.frames
    airless = dataclasses.replace(first, conditions=conditions(air_temperature=None))
    folder.change(frames=(airless, *rest))
    (valve,) = assess(folder.survey, settings=SETTINGS).components
    assert (valve.region_id, valve.heat_loss, valve.reason.key) == (
        "v1", None, "missing.air_temperature",
    )  # fmt: skip


def test_a_region_wholly_covered_is_left_out_with_its_reason(folder):
    folder.draw(drawn("x1", "a", "leave_out", (0.0, 5.0, 199.0, 56.0)))
    result = assess(folder.only("a"), settings=SETTINGS)
    (left,) = result.left_out
    assert (left.what, left.id) == ("region", "a1")
    assert "100% of it lies under other regions (x1)" in left.message
    assert [region.region_id for region in result.regions] == ["a2"]


def test_a_crossing_pipe_is_left_out_without_breaking_the_stations(folder):
    crossing = pipe(
        "a3", "a", "HW-2", 0.0, centreline=((100.0, 0.0), (100.0, 119.0)), widths=(20.0, 20.0)
    )
    whole = region_of(assess(folder.only("a"), settings=SETTINGS), "a1")
    folder.draw(crossing)
    result = region_of(assess(folder.only("a"), settings=SETTINGS), "a1")
    assert result.length.median == pytest.approx(whole.length.median)
    assert np.array_equal(result.stations.station, whole.stations.station)
    gaps = np.isnan(result.stations.heat_loss)
    assert np.all(gaps[85:95])
    assert not gaps[:70].any()
    assert not gaps[110:].any()


def test_faults_of_the_survey_are_left_out_and_questions_are_not(folder):
    folder.change(
        faults=(
            Fault("survey.toml", "line[3]", "no thickness", "expected one", tag="XX-9"),
            Fault("regions/a.geojson", "feature 3", "no such tag", "expected one of",
                  frame_id="a", region_id="a7"),
            Fault("survey.toml", "frame[4]", "is not there", "expected a file", frame_id="z"),
            Fault("survey.toml", "line[1]", "a bit odd", "please check", severity="question",
                  tag="HS-1"),
        )
    )  # fmt: skip
    result = assess(folder.only("c"), settings=SETTINGS)
    assert [(left.what, left.id, left.frame_id) for left in result.left_out] == [
        ("line", "XX-9", ""), ("region", "a7", "a"), ("frame", "z", "z"),
    ]  # fmt: skip
    assert all(left.message for left in result.left_out)


def test_a_frame_without_pipes_is_read_and_empty(folder):
    folder.add("d", scene())
    result = assess(folder.only("d"), settings=SETTINGS)
    assert result.regions == ()
    assert result.left_out == ()
    assert (result.total_loss, result.total_gain, result.total_excess) == (None, None, None)
    assert result.frames[0].shape == (ROWS, COLUMNS)


# ---- references, inputs, assumptions ------------------------------------------------------


def test_a_foil_in_the_frame_serves_all_its_regions(folder):
    folder.draw(drawn("foil", "a", "foil", (150.0, 52.0, 170.0, 62.0)))
    result = assess(folder.only("a", "c"), settings=SETTINGS)
    for region in result.regions:
        used = "remark.foil_used" in {remark.key for remark in region.remarks}
        assert used == (region.frame_id == "a")


def test_inputs_are_named_from_the_root_with_their_digests(folder):
    import hashlib

    folder.change(digests={"survey.toml": "f" * 64})
    result = assess(folder.survey, settings=SETTINGS)
    digest = hashlib.sha256((folder.root / "a.tiff").read_bytes()).hexdigest()
    assert dict(result.inputs)["a.tiff"] == digest
    assert [name for name, _ in result.inputs] == ["a.tiff", "b.tiff", "c.tiff", "survey.toml"]
    assert result.frames[0].sha256 == digest
    assert result.camera["band_um"] == "7.5-14"


def test_every_quantity_stands_among_the_assumptions(mill, assessed):
    rows = {(row.owner, row.quantity): row for row in assessed.assumptions}
    assert assessed.assumptions == assumptions_of(mill)
    factor = rows["line HS-1", "installation_factor"]
    assert (factor.value, factor.u, factor.source, factor.confidence) == (
        1.15, 0.08, "assumed", "low",
    )  # fmt: skip
    wool = rows["line HS-1", "layer_1_conductivity"]
    assert (wool.value, wool.source, wool.unit) == (0.045, "maker's sheet", "W/(m K)")
    assert wool.u == pytest.approx(0.045 * 0.05)
    assert rows["line CW-3", "inside_temperature"].value == 279.15
    assert rows["camera", "accuracy_limit"].value == 1.0
    assert rows["line HW-2", "layer_1_thickness"].value == 0.060
    declared = {(owner, name) for owner, name in rows if owner == "all frames"}
    assert {name for _, name in declared} == {
        "air_temperature", "surroundings_temperature", "reflected_temperature",
        "atmosphere_transmission", "wind_speed",
    }  # fmt: skip


def test_conditions_that_differ_name_their_frames(folder):
    folder.add("d", scene(), air_temperature=Quantity(300.0, 1.0))
    owners = {
        row.owner: row.value
        for row in assumptions_of(folder.survey)
        if row.quantity == "air_temperature"
    }
    assert owners == {"frame a, b, c": AIR, "frame d": 300.0}


def test_unknown_quantities_are_no_assumptions(folder):
    folder.change(
        lines={"HS-1": line("HS-1", None, pipe_outside_diameter=None)},
        site=Site(pressure=Quantity(95_000.0, 100.0)),
    )
    rows = {(row.owner, row.quantity) for row in assumptions_of(folder.survey)}
    assert ("line HS-1", "inside_temperature") not in rows
    assert ("line HS-1", "pipe_outside_diameter") not in rows
    assert ("site", "pressure") in rows
    assert ("line HS-1", "band_emissivity") in rows
