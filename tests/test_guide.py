"""Pages of the guide that are made by a command are what the command makes."""

import re
import runpy
from pathlib import Path

import pytest

import cladwatt
from cladwatt.materials.load import shipped_tables
from cladwatt.survey.keys import FRAME, LAYER, PIECE, REGION, REGION_VALUES, SECTIONS

CLONE = Path(__file__).parent.parent
PACKAGE = Path(cladwatt.__file__).parent
inputs = runpy.run_path(str(CLONE / "tests" / "guide_inputs.py"))
BOUND, DOT = r"\b", r"\."
PAGES = sorted((PACKAGE / "guide").glob("*.md"))


def test_the_page_of_inputs_is_the_one_made_from_the_keys():
    page = inputs["PAGE"].read_text(encoding="utf-8")
    assert page == inputs["page_text"](), "run python -m tests.guide_inputs"


def test_every_key_is_on_the_page_of_inputs():
    page = inputs["page_text"]()
    keys = [key for part in SECTIONS if part.name != "frame" for key in part.keys]
    keys += [key for key in FRAME if key.default != "as set for the whole survey"]
    keys += [*LAYER, *PIECE, *REGION, *REGION_VALUES.values()]
    assert [key.usual for key in keys if f"| `{key.usual}` |" not in page] == []


def test_what_is_kept_only_is_used_by_nothing():
    attributes = {"latitude": "latitude_deg", "longitude": "longitude_deg",
                  "wind_angle": "conditions.wind_angle_deg",
                  "convection": "survey.convection_model",
                  "flow": "line.flow",
                  "specific_heat": "line.specific_heat"}  # fmt: skip
    names = [attributes.get(name, name) for name in inputs["RECORDED_ONLY"]]
    taken = re.compile(
        "|".join(rf"{BOUND if '.' in name else DOT}{re.escape(name)}{BOUND}" for name in names)
    )
    sources = [PACKAGE / "assess.py"]
    for part in ("physics", "measure", "inverse", "report"):
        sources += (PACKAGE / part).glob("*.py")
    used = {path.name: taken.findall(path.read_text("utf-8")) for path in sources}
    assert {name: found for name, found in used.items() if found} == {}


def test_every_default_that_is_shown_is_looked_up():
    modules = [path for path in PACKAGE.rglob("*.py") if "materials" not in path.parts]
    source = "\n".join(path.read_text("utf-8") for path in modules)
    source = source.replace(
        'minus_air_{where}"', 'minus_air_indoors" "surroundings_minus_air_outdoors"'
    )
    source = source.replace('f"surroundings', '"surroundings')
    unused = {name for name in shipped_tables().defaults if f'"{name}"' not in source}
    assert unused == inputs["NOT_TAKEN"]


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.name)
def test_links_of_the_guide_lead_somewhere(page):
    targets = re.findall(r"\]\(([^)#\s]+)[^)]*\)", page.read_text(encoding="utf-8"))
    inside = [target for target in targets if not target.startswith(("http:", "https:"))]
    assert [target for target in inside if not (page.parent / target).exists()] == []


def test_modules_named_in_the_documents_exist():
    missing = []
    for document in [*PAGES, CLONE / "DEVELOPERS.md"]:
        for name in re.findall(r"`((?:[a-z_0-9]+/)+[a-z_0-9]+\.py)`", document.read_text("utf-8")):
            if not ((PACKAGE / name).exists() or (CLONE / name).exists()):
                missing.append(f"{document.name}: {name}")
    assert missing == []
