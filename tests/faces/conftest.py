"""A survey small enough to assess in a second: an invented boiler house, two frames."""

import json
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
import tifffile

from cladwatt.faces.cli.main import main

ROWS, COLUMNS = 96, 160

SURVEY = """\
[survey]
name = "Invented boiler house"
date = 2026-03-18
inspector = "T. Ester"

[camera]
noise_K = 0.05

[recording]
emissivity = 0.95
reflected_temperature_C = 20.0

[conditions]
indoors = true
air_temperature_C = 20.0
u_air_temperature_C = 0.5
distance_m = 3.0

[[line]]
tag = "HS-101"
area = "Boiler house"
dn = 100
lagging_material = "mineral wool"
lagging_thickness_mm = 50
cladding = "painted_steel"
fluid_temperature_C = 180.0

[[line]]
tag = "CW-7"
dn = 80
lagging_material = "elastomeric_foam"
lagging_thickness_mm = 25
cladding = "painted_steel"
fluid_temperature_C = 6.0
service = "chilled"

[[frame]]
file = "frames/steam.tiff"
unit = "C"

[[frame]]
file = "frames/chilled.csv"
unit = "C"
"""


def pipe_picture(along: float, *, bump: float = 0.0) -> np.ndarray:
    """Return an invented frame in °C: air at 20, one pipe 30 pixels wide along the middle row."""
    rows, columns = np.mgrid[0:ROWS, 0:COLUMNS]
    across = np.clip((16.0 - np.abs(rows - 48.0)) / 1.5, 0.0, 1.0)
    pipe = along + bump * np.exp(-0.5 * ((columns - 100.0) / 6.0) ** 2)
    noise = np.random.default_rng(5).normal(0.0, 0.05, (ROWS, COLUMNS))
    return 20.0 + (pipe - 20.0) * across + noise


def feature(region_id: str, tag: str | None, *, role: str = "pipe") -> dict[str, object]:
    return {
        "type": "Feature",
        "properties": {"id": region_id, "role": role, "tag": tag, "width_px": 30},
        "geometry": {"type": "LineString", "coordinates": [[8, 48], [150, 48]]},
    }


def write_features(path: Path, *features: dict[str, object]) -> None:
    path.write_text(json.dumps({"type": "FeatureCollection", "features": features}))


@pytest.fixture
def survey(tmp_path: Path) -> Path:
    """Return the folder of a survey without faults."""
    folder = tmp_path / "boiler_house"
    for name in ("frames", "regions"):
        (folder / name).mkdir(parents=True)
    (folder / "survey.toml").write_text(SURVEY, encoding="utf-8")
    hot = pipe_picture(31.0, bump=25.0).astype(np.float32)
    tifffile.imwrite(folder / "frames" / "steam.tiff", hot)
    chilled = "\n".join(";".join(f"{v:.2f}" for v in row) for row in pipe_picture(17.0))
    (folder / "frames" / "chilled.csv").write_text(chilled.replace(".", ","))
    write_features(folder / "regions" / "steam.geojson", feature("north-1", "HS-101"))
    write_features(folder / "regions" / "chilled.geojson", feature("south-1", "CW-7"))
    return folder


@pytest.fixture
def edit(survey: Path) -> Callable[[str, str], None]:
    """Return a function that changes one passage of the survey file."""

    def change(old: str, new: str) -> None:
        path = survey / "survey.toml"
        text = path.read_text(encoding="utf-8")
        assert text.count(old) >= 1, old
        path.write_text(text.replace(old, new, 1), encoding="utf-8")

    return change


class Ended:
    """How a command ended: exit code and both streams."""

    def __init__(self, code: int, out: str, err: str) -> None:
        self.code, self.out, self.err = code, out, err
        assert "Traceback" not in out + err


@pytest.fixture
def cladwatt(capsys: pytest.CaptureFixture[str]) -> Callable[..., Ended]:
    """Return a function that runs the command line in this process."""

    def run(*arguments: object) -> Ended:
        capsys.readouterr()
        code = main([str(argument) for argument in arguments])
        streams = capsys.readouterr()
        return Ended(code, streams.out, streams.err)

    return run


@pytest.fixture
def draw(survey: Path) -> Callable[..., None]:
    """Return a function that draws regions, (id, tag[, properties]), on a frame anew."""

    def on(frame_id: str, *regions: tuple[object, ...]) -> None:
        features = []
        for region_id, tag, *rest in regions:
            one = feature(str(region_id), tag if tag is None else str(tag))
            for name, value in (rest[0] if rest else {}).items():
                place = one["geometry"] if name == "coordinates" else one["properties"]
                place[name] = value
            features.append(one)
        write_features(survey / "regions" / f"{frame_id}.geojson", *features)

    return on
