"""A small survey on disk that tests bend one line at a time."""

import json
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest

SURVEY_TEXT = """\
[survey]
name = "Weaving shed"
date = 2026-03-18
inspector = "R. Okafor"

[site]
altitude_m = 95
timezone = "+01:00"

[camera]
accuracy_K = 2.0
accuracy_of_reading_percent = 2.0

[recording]
emissivity = 0.95
reflected_temperature_C = 20.0

[conditions]
indoors = true
air_temperature_C = 21.0
u_air_temperature_C = 0.5

[format]
unit = "C"

[[line]]
tag = "HS-101"
dn = 100
lagging_material = "mineral_wool_pipe_section"
lagging_thickness_mm = 50
cladding = "painted_steel"
fluid_temperature_C = 165.0
service = "hot"

[[line]]
tag = "CW-7"
pipe_outside_diameter_mm = 60.3
lagging_material = "mineral_wool_pipe_section"
lagging_thickness_mm = 30
cladding = "weathered_galvanised"
fluid_temperature_C = 6.0
service = "chilled"

[[frame]]
file = "frames/f01.csv"
time = 2026-03-18T09:40:00

[[frame]]
file = "frames/f02.csv"
air_temperature_C = 25.0
"""


def feature(identity: str = "east", tag: str | None = "HS-101", **more: object) -> dict:
    """A pipe region; `geometry` and any property may be given."""
    geometry = more.pop(
        "geometry", {"type": "LineString", "coordinates": [[5.0, 40.0], [150.0, 42.0]]}
    )
    properties = {"id": identity, "role": "pipe", "tag": tag, "width_px": 20.0} | more
    return {"type": "Feature", "properties": properties, "geometry": geometry}


def square(x: float, y: float, side: float = 10.0) -> dict:
    ring = [[x, y], [x + side, y], [x + side, y + side], [x, y + side], [x, y]]
    return {"type": "Polygon", "coordinates": [ring]}


@dataclass(frozen=True)
class SurveyFolder:
    """A survey folder and ways to bend it."""

    root: Path

    def edit(self, old: str, new: str) -> "SurveyFolder":
        path = self.root / "survey.toml"
        text = path.read_text("utf-8")
        assert text.count(old) >= 1, f"{old!r} does not stand in the survey file"
        path.write_text(text.replace(old, new, 1), "utf-8")
        return self

    def write(self, name: str, content: str | bytes) -> "SurveyFolder":
        path = self.root / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content.encode() if isinstance(content, str) else content)
        return self

    def draw(self, *features: object, frame: str = "f01") -> "SurveyFolder":
        return self.write(
            f"regions/{frame}.geojson",
            json.dumps({"type": "FeatureCollection", "features": list(features)}),
        )


@pytest.fixture
def survey_folder(tmp_path: Path) -> SurveyFolder:
    folder = SurveyFolder(tmp_path / "shed")
    folder.write("survey.toml", SURVEY_TEXT)
    random = np.random.default_rng(3)
    for number, name in enumerate(("f01", "f02")):
        values = 21.0 + random.normal(0, 0.1, (80, 160))
        values[30:50] += 15 + number
        rows = "\n".join(";".join(f"{value:.3f}" for value in row) for row in values)
        folder.write(f"frames/{name}.csv", rows + "\n")
    folder.draw(feature(), frame="f01")
    folder.draw(feature("west", "CW-7"), frame="f02")
    return folder


@pytest.fixture
def drawn() -> Callable[..., dict]:
    return feature


@pytest.fixture
def box() -> Callable[..., dict]:
    return square
