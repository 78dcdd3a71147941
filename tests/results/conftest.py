"""A small assessment with odd values in every corner, and a comparison that knows NaN."""

import dataclasses
import math
from collections.abc import Callable
from typing import Any

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

NAN, INF = math.nan, math.inf


def stations(n: int) -> StationTable:
    steps = np.arange(n, dtype=float)
    values: dict[str, Any] = {
        field.name: 310.123456789 + steps / 7 for field in dataclasses.fields(StationTable)
    }
    values["station"] = 12.5 + 0.1 * steps
    values["heat_loss"] = 100 / 3 - steps
    if n:
        values["heat_loss"][0] = -0.0
        values["surface_temperature"][-1] = NAN
        values["resistance_high"][-1] = INF
    values["flags"] = np.zeros(n, dtype=np.int64)
    if n:
        values["flags"][-1] = StationFlag.GAP | StationFlag.CLIPPED
    return StationTable(**values)


def stretch(name: str, outline: tuple[tuple[float, float], ...]) -> Stretch:
    return Stretch(
        id=name,
        start=Interval(13.0, 12.9, 13.123456789),
        end=Interval(13.4, 13.3, 13.6),
        probability=0.97,
        heat_loss=Interval(151.23456789, 120.0, 190.0),
        excess=Interval(33.3, -1.0, INF),
        share_of_excess=NAN,
        outline=outline,
    )


def region(name: str, frame_id: str, tag: str, **changes: Any) -> RegionResult:
    found = RegionResult(
        region_id=name,
        frame_id=frame_id,
        tag=tag,
        area='Kesselhaus "Süd", Ebene\n2',
        gain=False,
        length=Interval(3.2, 3.0, 3.5),
        start_station=12.5,
        end_station=15.7,
        recorded_temperature=320.1,
        surface_temperature=Interval(319.987654321, 317.2, 322.9),
        heat_flux=Interval(140.0, 100.0, 190.0),
        heat_loss=Interval(101.5, 80.25, 130.125),
        total_loss=Interval(1234567.89, 1.0, 2e6),
        sound_loss=None,
        specified_loss=Interval(60.0, 50.0, 70.0),
        excess=Interval(NAN, NAN, NAN),
        resistance=Interval(0.42, 0.2, INF),
        specified_resistance=Interval(0.6, 0.5, 0.7),
        resistance_ratio=Interval(0.7, 0.3, INF),
        effective_conductivity=None,
        probability_damaged=0.9,
        probability_local=NAN,
        probability_aged=None,
        verdict=Verdict(
            "not quantified",
            Remark("not_quantified.interval_too_wide", (("relative_width", INF), ("why", "a/b~c"))),
            Remark("advice.tape_patch"),
        ),
        stretches=(stretch(f"{name}-s1", ((10.0, 20.5), (30.25, 20.0), (30.0, 40.0))),),
        stations=stations(5),
        missing=(Remark("missing.wind"),),
        cautions=(Remark("caution.touch", (("temperature_C", 71.25),)), Remark("caution.asbestos")),
        variance_shares=(("air temperature / frame", 0.6), ("emissivity", 0.3)),
        kinds=(("wet", 0.6), ("sound", 0.4)),
        air_temperature=293.15,
        strip_temperature=np.array([[300.0, NAN, 301.5], [302.0, 303.0, 304.0]]),
        draws={"heat_loss": np.array([1.0, NAN, INF, -2.5]), "excess": np.linspace(0, 1, 7)},
    )
    return dataclasses.replace(found, **changes)


def component(name: str, frame_id: str, **changes: Any) -> ComponentResult:
    found = ComponentResult(
        region_id=name,
        frame_id=frame_id,
        tag="=1+1",
        kind="Schieber, DN 50",
        lagged=False,
        surface_temperature=Interval(400.123456789, 390.0, 411.0),
        equivalent_length=Interval(1.0, 0.4, 2.0),
        heat_loss=Interval(812.3456789, -0.0, INF),
        reason=None,
        source='house table, "Süd"',
        draws={"heat_loss": np.array([800.0, NAN, 812.3, -1.0])},
    )
    return dataclasses.replace(found, **changes)


def odd_assessment() -> Assessment:
    long_tag = "=HYPERLINK-" + "x" * 289
    first = FrameResult(
        frame_id="f01",
        sha256="a" * 64,
        shape=(240, 320),
        regions=(
            region("nord|1", "f01", "Dampf Ü-101 蒸気 🔥"),
            region("r2", "f01", long_tag, stretches=(stretch("line", ((1.0, 2.0), (3.0, 4.0))),)),
        ),
        left_out=(LeftOut("region", "r9", "f01", "regions/f01.geojson: too few pixels"),),
        remarks=(Remark("remark.question"),),
        components=(
            component("v|1", "f01"),
            component(
                "hanger-ü",
                "f01",
                kind="hanger",
                lagged=True,
                equivalent_length=None,
                heat_loss=None,
                surface_temperature=None,
                source="",
                draws={},
                reason=Remark("not_quantified.component_hanger"),
            ),
        ),
        seconds=0.25,
    )
    second = FrameResult(
        frame_id="../Halle 2/CON",
        sha256="b" * 64,
        shape=(0, 0),
        regions=(
            region(
                "r3", "../Halle 2/CON", "007", gain=True, stations=stations(0), stretches=(),
                heat_loss=None, air_temperature=None, strip_temperature=None, draws={},
                verdict=Verdict("indicative", Remark("indicative.sign_known")),
            ),
        ),
        left_out=(),
    )  # fmt: skip
    return Assessment(
        survey_name="Umlauf Süd",
        place="",
        date="2026-03-04",
        inspector="R. Ōta",
        version="0.1.0",
        settings=Settings(seed=7, draws=4),
        inputs=(("survey.toml", "c" * 64), ("frames/\udcff.tiff", "d" * 64)),
        frames=(first, second),
        lines=(
            LineTotal("007", "", True, Interval(1.0, 0.9, 1.1), Interval(-5.0, -INF, NAN), None,
                      ("r3",)),
        ),
        total_loss=Interval(250.0, 200.0, 300.0),
        total_gain=None,
        total_excess=Interval(NAN, NAN, NAN),
        component_loss=Interval(812.3456789, 400.0, INF),
        left_out=(
            LeftOut("line", "B-7", "", "", Remark("missing.diameter")),
        ),
        assumptions=(
            Assumption("line 007", "installation_factor", 1.15, 0.08, "", "house table", "low"),
        ),
        remarks=(Remark("remark.masked_share", (("share", 0.02),)),),
        camera={"serial": "K-1", "band": "7.5–14 µm"},
        versions={"python": "3.12.1", "numpy": "2.1.0"},
    )  # fmt: skip


def differences(one: Any, other: Any, at: str = "") -> list[str]:
    """Every place where two results differ; NaN equals NaN, types must agree."""
    if isinstance(one, np.ndarray) and isinstance(other, np.ndarray):
        alike = one.dtype == other.dtype and np.array_equal(one, other, equal_nan=True)
        return [] if alike else [at]
    if type(one) is not type(other):
        return [f"{at}: {type(one)} and {type(other)}"]
    if dataclasses.is_dataclass(one):
        names = [field.name for field in dataclasses.fields(one) if field.name != "seconds"]
        parts = [(name, getattr(one, name), getattr(other, name)) for name in names]
    elif isinstance(one, dict):
        if one.keys() != other.keys():
            return [f"{at}: {sorted(one)} and {sorted(other)}"]
        parts = [(key, one[key], other[key]) for key in one]
    elif isinstance(one, tuple):
        if len(one) != len(other):
            return [f"{at}: {len(one)} and {len(other)} items"]
        parts = [(str(i), a, b) for i, (a, b) in enumerate(zip(one, other, strict=True))]
    elif isinstance(one, float) and math.isnan(one):
        return [] if math.isnan(other) else [at]
    else:
        return [] if one == other else [f"{at}: {one!r} and {other!r}"]
    return [line for name, a, b in parts for line in differences(a, b, f"{at}.{name}")]


@pytest.fixture
def odd() -> Assessment:
    return odd_assessment()


@pytest.fixture
def differ() -> Callable[[Any, Any], list[str]]:
    return differences
