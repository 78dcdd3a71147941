"""What the README shows and says to type is what a run gives."""

import re
import runpy
import shutil
from pathlib import Path

import pandas
import pytest

import cladwatt
from cladwatt.report.html_report import strip_pictures
from cladwatt.survey.fault_list import FaultList
from cladwatt.survey.region_format import parse_regions

CLONE = Path(__file__).parent.parent
README = (CLONE / "README.md").read_text(encoding="utf-8")
pictures = runpy.run_path(str(CLONE / "tests" / "readme_pictures.py"))
AGAIN = "run python -m tests.readme_pictures"


def block(mark: str) -> str:
    """Return the code block that follows ``<!-- mark -->``."""
    found = re.search(rf"<!-- {mark} -->\n *```\w*\n(.*?)\n *```", README, re.DOTALL)
    assert found is not None, f"no block {mark} in the README"
    return found.group(1)


@pytest.fixture(scope="module")
def assessment():
    return cladwatt.assess(cladwatt.read_survey(CLONE / "sample_data"))


def test_the_table_is_that_of_a_run(assessment):
    assert pictures["shown"](README) == pictures["excerpt"](assessment), AGAIN


def test_the_picture_is_that_of_a_run(assessment):
    # words and numbers; how a curve's pixels are packed may differ between machines
    def words(svg: str) -> list[str]:
        return re.findall(r"<(?:text|title|desc)[^>]*>([^<]*)<", svg)

    fresh = words(strip_pictures(assessment)[pictures["SHOWN_REGION"]])
    assert len(fresh) > 10
    assert words(pictures["PICTURE"].read_text(encoding="utf-8")) == fresh, AGAIN


def test_the_picture_shows_a_damaged_stretch(assessment):
    shown = pictures["SHOWN_REGION"]
    region = next(region for region in assessment.regions if region.region_id == shown)
    assert region.stretches
    assert region.verdict.level != "not quantified"


def test_the_excerpt_is_found_in_a_readme_and_put_there():
    begin, end = pictures["BEGIN"], pictures["END"]
    text = f"a\n{begin}```\nold\n```\n{end}\nb\n"
    assert pictures["shown"](text) == "old"
    renewed = pictures["renewed"](text, "new  table")
    assert pictures["shown"](renewed) == "new  table"
    assert renewed.startswith("a\n")
    assert renewed.endswith("\nb\n")
    with pytest.raises(SystemExit, match="lacks the lines"):
        pictures["renewed"]("no marks", "new")


def test_notebook_lines_and_the_one_that_loads_a_table(tmp_path, monkeypatch):
    shutil.copytree(
        CLONE / "sample_data", tmp_path / "sample_data", ignore=shutil.ignore_patterns("results")
    )
    monkeypatch.chdir(tmp_path)
    names = {"pandas": pandas}
    code = block("notebook")
    assert len(code.splitlines()) == 5
    exec(compile(code, "README.md", "exec"), names)
    assert len(names["regions"]) == 33
    assert names["stretches"]["probability"].between(0, 1).all()
    cladwatt.write_results(names["assessment"], Path("sample_data/results"))
    loaded = block("pandas")
    assert len(loaded.splitlines()) == 1
    exec(compile(loaded, "README.md", "exec"), names)
    assert list(names["regions"]["region_id"]) == [r.region_id for r in names["assessment"].regions]


def test_the_regions_shown_can_be_read():
    faults = FaultList()
    regions = parse_regions(block("regions").encode(), "regions/f.geojson", "f", faults)
    assert not faults.faults
    assert [region.role for region in regions] == ["pipe", "component"]
