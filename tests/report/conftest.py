"""An invented assessment for the tests of report and console; no number in it was computed."""

from types import SimpleNamespace

import numpy as np
import pytest

from cladwatt.flags import StationFlag
from cladwatt.quantities import Remark
from cladwatt.results.assessment import (
    Assessment,
    Assumption,
    ComponentResult,
    FrameResult,
    Interval,
    LeftOut,
    LineTotal,
    RegionResult,
    Settings,
    StationTable,
    Stretch,
    Verdict,
)

NASTY = "<script>alert('x')</script> \u202eabc\u05d0\u05d1 \U0001f525 & \"q\" " + "W" * 300


def stations(count=160, length=8.0, *, gain=False, bump=(3.0, 4.2), gap=None, known=True, seed=3):
    generator = np.random.default_rng(seed)
    step = length / count
    station = (np.arange(count) + 0.5) * step
    shape = 0.5 * (np.tanh((station - bump[0]) / 0.15) - np.tanh((station - bump[1]) / 0.15))
    noise = generator.normal(0, 0.02, count)
    loss = 120 * (1 + 1.1 * shape + noise) * (-0.25 if gain else 1)
    ends = np.stack([0.85 * loss, 1.18 * loss])
    sound = np.full(count, -22.0 if gain else 108.0)
    ratio = 0.9 / (1 + 1.1 * shape + noise)
    resistance = 0.7 * ratio
    flags = np.zeros(count, dtype=np.int64)
    surface = 293.15 + loss / 5
    arrays = [loss, ends.min(axis=0), ends.max(axis=0)]
    if gap is not None:
        out = (station > gap[0]) & (station < gap[1])
        flags[out] = int(StationFlag.GAP)
        for values in (*arrays, surface, resistance, ratio):
            values[out] = np.nan
    nothing = np.full(count, np.nan)
    return StationTable(
        station=station, x=station * 60, y=np.full(count, 200.0), width=np.full(count, 24.0),
        length=np.full(count, step), recorded_temperature=surface - 1.0,
        surface_temperature=surface, surface_temperature_low=surface - 1.2,
        surface_temperature_high=surface + 1.2, heat_loss=arrays[0], heat_loss_low=arrays[1],
        heat_loss_high=arrays[2], sound_loss=sound if known else nothing,
        resistance=resistance if known else nothing,
        resistance_low=0.82 * resistance if known else nothing,
        resistance_high=1.2 * resistance if known else nothing,
        resistance_ratio=ratio if known else nothing, flags=flags,
    )  # fmt: skip


def field_of(table, rows=18, seed=5):
    generator = np.random.default_rng(seed)
    across = 1.5 * np.cos(np.linspace(-1, 1, rows))[:, None]
    return table.surface_temperature + across + generator.normal(0, 0.25, (rows, table.x.size))


def region(region_id="north-1", *, tag="NS-101", frame_id="f03", gain=False, known=True,
           level="quantified", reason=None, advice=None, stretches=None, damaged=0.97,
           scale=1.0, **rest):  # fmt: skip
    table = rest.pop("stations", None) or stations(gain=gain, known=known)
    sign = -0.25 if gain else 1.0

    def interval(median, low, high):
        ends = sorted((sign * scale * low, sign * scale * high))
        return Interval(sign * scale * median, ends[0], ends[1])

    if stretches is None:
        stretches = (
            Stretch("s1", Interval(3.0, 2.93, 3.06), Interval(4.2, 4.12, 4.29), 0.985,
                    interval(252, 214, 297), interval(158, 131, 189), 1.0,
                    ((180.0, 188.0), (252.0, 188.0), (252.0, 212.0), (180.0, 212.0)),
                    kinds=(("wet", 0.52), ("compressed", 0.41), ("void", 0.07))),
        )  # fmt: skip
    reason = reason or Remark("quantified.image_carries", (("relative_width", 0.33),))
    values = {
        "region_id": region_id, "frame_id": frame_id, "tag": tag, "area": "boiler house",
        "gain": gain, "length": Interval(8.0, 7.8, 8.2), "start_station": 0.0,
        "end_station": 8.0, "recorded_temperature": 316.0,
        "surface_temperature": Interval(317.2, 316.1, 318.3),
        "heat_flux": interval(312, 262, 365), "heat_loss": interval(140, 119, 165),
        "total_loss": interval(1120, 950, 1330),
        "sound_loss": interval(108, 97, 121) if known else None,
        "specified_loss": interval(94, 90, 98) if known else None,
        "excess": interval(32, 17, 51) if known else None,
        "resistance": Interval(0.61, 0.51, 0.73) if known else None,
        "specified_resistance": Interval(0.70, 0.67, 0.73) if known else None,
        "resistance_ratio": Interval(0.87, 0.72, 1.05) if known else None,
        "effective_conductivity": Interval(0.052, 0.043, 0.063) if known else None,
        "probability_damaged": damaged, "probability_local": damaged, "probability_aged": 0.01,
        "verdict": Verdict(level, reason, advice), "stretches": stretches, "stations": table,
        "variance_shares": (("band_emissivity", 0.44), ("convection", 0.31)),
        "kinds": (("bare", 0.85), ("missing_sector", 0.10), ("sound", 0.05)),
        "air_temperature": 293.15, "strip_temperature": field_of(table),
    }  # fmt: skip
    return RegionResult(**(values | rest))


def component(region_id, frame_id="f03", tag="NS-101", **rest):
    values = {
        "kind": "valve", "lagged": False, "surface_temperature": Interval(421.0, 415.0, 428.0),
        "equivalent_length": Interval(0.98, 0.41, 1.99), "heat_loss": Interval(812, 330, 1700),
        "reason": None, "source": "house table 3", "draws": {"heat_loss": np.array([812.0])},
    }  # fmt: skip
    return ComponentResult(region_id, frame_id, tag, **(values | rest))


def components():
    """Two that lose, one that gains, one without a number; by frame."""
    first = (
        component("valve-1"),
        component("flange-1", kind="flange", lagged=True, heat_loss=Interval(41, 17, 93),
                  equivalent_length=Interval(0.84, 0.45, 1.58), source="house table 4"),
        component("hanger-1", kind="hanger", lagged=True, equivalent_length=None, heat_loss=None,
                  source="", draws={}, reason=Remark("not_quantified.component_hanger")),
    )  # fmt: skip
    second = (
        component("valve-9", "f05", "CHW-7", surface_temperature=Interval(281.0, 280.2, 281.8),
                  heat_loss=Interval(-29, -61, -12)),
    )  # fmt: skip
    return first, second


def assessment(*, extra=()):
    advice = Remark("advice.tape_patch", (("width_now", 42.0), ("width_then", 19.0)))
    corners = ((0.0, 0.0), (1.0, 0.0), (1.0, 1.0))
    spots = [(0.7, 1.0, 0.71), (1.6, 2.3, 0.94), (2.6, 2.75, 0.88), (6.5, 7.4, 0.999)]
    many = tuple(
        Stretch(
            f"s{i + 1}", Interval(a, a - 0.05, a + 0.05), Interval(b, b - 0.06, b + 0.06), p,
            Interval(200, 170, 240), Interval(40, 30, 52), 0.3, corners,
        )
        for i, (a, b, p) in enumerate(spots)
    )  # fmt: skip
    first = (
        region(cautions=(Remark("caution.touch", (("temperature_C", 64.0),)),),
               remarks=(Remark("remark.tape_used", (("emissivity", 0.91),)),), advice=advice),
        region("north-2", stations=stations(gap=(5.2, 5.7), seed=9), stretches=many, scale=1.4,
               level="indicative",
               reason=Remark("indicative.interval_wide", (("relative_width", 0.63),)),
               advice=Remark("advice.wind"), damaged=0.99,
               remarks=(Remark("not_quantified.component_hanger"),)),
        region("north-3", stretches=(), damaged=0.06, stations=stations(bump=(-9, -8))),
    )  # fmt: skip
    second = (
        region("chill-1", tag="CHW-7", frame_id="f05", gain=True, damaged=0.8,
               cautions=(Remark("caution.dew_point", (("dew_point_C", 13.2),)),)),
        region("cond-1", tag="CD-22", frame_id="f05", known=False, damaged=None,
               missing=(Remark("missing.inside_temperature"),), stretches=()),
        region("roof-1", tag="NS-140", frame_id="f05", level="not quantified",
               reason=Remark("not_quantified.interval_too_wide", (("relative_width", 2.4),)),
               advice=Remark("advice.tape_patch"), damaged=0.66),
        *extra,
    )  # fmt: skip
    left_out = (
        LeftOut("frame", "f07", "f07", "frames/f07.csv:12: row 12 has 319 values; expected 320"),
        LeftOut("line", "XX-1", "", "lists/lines.csv:4: no diameter"),
    )
    drawn = components()
    return Assessment(
        survey_name="Holm Quay winter walk-down", place="Holm Quay dye works", date="2026-01-14",
        inspector="R. Adeyemi", version="0.1.0", settings=Settings(seed=7, draws=1000),
        inputs=(("survey.toml", "a" * 64), ("frames/f03.tiff", "b" * 64)),
        frames=(
            FrameResult("f03", "b" * 64, (240, 320), first, (), components=drawn[0]),
            FrameResult("f05", "c" * 64, (240, 320), second, (),
                        (Remark("frame.dead_pixels", (("pixels", 3),)),), drawn[1]),
        ),
        lines=(
            LineTotal("NS-101", "boiler house", False, Interval(24, 23.4, 24.6),
                      Interval(3810, 3240, 4490), Interval(1020, 540, 1610),
                      ("north-1", "north-2", "north-3")),
            LineTotal("CHW-7", "boiler house", True, Interval(8, 7.8, 8.2),
                      Interval(-280, -333, -238), None, ("chill-1",)),
        ),
        total_loss=Interval(6050, 5080, 7290), total_gain=Interval(280, 238, 333),
        total_excess=Interval(1040, 560, 1650), component_loss=Interval(853, 370, 1740),
        component_gain=Interval(29, 12, 61), left_out=left_out,
        assumptions=(
            Assumption("line NS-101", "installation_factor", 1.15, 0.08, "-", "practice", "low"),
            Assumption("frame f03", "air_temperature", 293.15, 0.5, "K", "declared", "declared"),
            Assumption("frame f05", "air_temperature", 293.15, 0.5, "K", "declared", "declared"),
            Assumption("line NS-101", "band_emissivity", 0.9, 0.03, "-", "claddings", "medium"),
        ),
        remarks=(), camera={"model": "own build", "serial": "0042"},
    )  # fmt: skip


@pytest.fixture(name="invented", scope="session")
def invented_fixture():
    return SimpleNamespace(
        assessment=assessment, region=region, component=component, stations=stations, nasty=NASTY
    )
