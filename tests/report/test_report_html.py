import re
from dataclasses import replace
from html.parser import HTMLParser
from itertools import pairwise
from xml.etree import ElementTree

import numpy as np
import pytest

from cladwatt.quantities import Remark
from cladwatt.report.findings import is_finding, ranked_findings, where_damaged
from cladwatt.report.html_report import report_html, write_report
from cladwatt.report.views import region_view
from cladwatt.results.assessment import Assumption, Interval

VOID = {"meta", "br", "link", "img", "hr", "input"}


class Page(HTMLParser):
    """Collects tags, ids, links and text; fails where elements do not close in order."""

    def __init__(self, html):
        super().__init__()
        self.open, self.tags, self.ids, self.links, self.texts = [], [], [], [], []
        self.feed(html)
        assert self.open == []

    def handle_starttag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))
        self.ids += [value for name, value in attrs if name == "id"]
        self.links += [value for name, value in attrs if name in ("href", "src")]
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag, attrs):
        self.handle_starttag(tag, attrs)
        if tag not in VOID:
            self.open.pop()

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        if self.open and self.open[-1] not in ("style", "title", "desc"):
            self.texts.append(data)

    @property
    def words(self):
        return re.sub(r"\s+", " ", " ".join(self.texts))


@pytest.fixture(scope="module")
def html(invented):
    return report_html(invented.assessment())


@pytest.fixture(scope="module")
def page(html):
    return Page(html)


def test_totals_and_header(page):
    for needed in (
        "Holm Quay winter walk-down", "Holm Quay dye works", "2026-01-14", "R. Adeyemi", "0042",
        "6000 W", "(5100 to 7300)", "280 W", "(238 to 333)", "1040 W",
        "never set off against each other",
    ):  # fmt: skip
        assert needed in page.words, needed


def test_findings_are_ranked_by_expected_excess(invented):
    found = ranked_findings(invented.assessment())
    assert [f.region.region_id for f in found] == ["north-2", "north-1", "chill-1", "roof-1"]
    assert found[0].excess.median == pytest.approx(1.4 * 32 * 8)
    assert found[2].excess == Interval(*(pytest.approx(v * 8) for v in (8, 4.25, 12.75)))
    assert found[3].loss is None


def test_the_excess_over_the_length_comes_from_the_draws_where_they_are_kept(invented):
    draws = np.linspace(100.0, 300.0, 1001)
    region = invented.region(draws={"total_excess": draws})
    survey = invented.assessment(extra=(region,))
    (excess,) = (f.excess for f in ranked_findings(survey) if f.region is region)
    assert (excess.low, excess.median, excess.high) == pytest.approx((105.0, 200.0, 295.0))


def test_where_is_the_stretches_or_the_whole_region(invented):
    assert where_damaged(invented.region()) == ((3.0, 4.2),)
    assert where_damaged(invented.region(stretches=())) == ((0.0, 8.0),)


def test_not_quantified_prints_no_number(invented):
    survey = invented.assessment()
    roof = next(r for r in survey.regions if r.region_id == "roof-1")
    article = re.search(r"<h3><bdi>NS-140.*?</article>", report_html(survey), re.DOTALL).group()
    assert "not quantified" in article
    figures = article.split('class="figures"')[1]
    for interval in (roof.heat_loss, roof.total_loss, roof.excess):
        assert f"{interval.low:.0f}" not in figures
    assert "240" in article  # the reason's relative width, in percent


def test_a_region_without_number_stands_among_what_could_not_be_quantified(page):
    listed = page.words.split("What could not be assessed or quantified")[1]
    listed = listed.split("The regions")[0]
    assert "region roof-1" in listed
    assert "240" in listed  # the reason's relative width, in percent


def test_a_pipe_too_narrow_to_be_measured_is_no_finding(invented):
    reason = Remark("not_quantified.too_narrow", (("width_px", 2.0),))
    narrow = invented.region(level="not quantified", reason=reason, damaged=0.97)
    assert not is_finding(narrow)
    assert is_finding(invented.region(damaged=0.97))


def test_the_part_of_the_variance_nothing_declared_carries_is_said(invented):
    shares = (("convection", 0.07), ("wind_speed", 0.02), ("diameter", 0.001))
    view = region_view(invented.region(variance_shares=shares), "a", "", "en")
    assert view.shares.startswith("convection model 7")
    assert "all else" in view.shares
    assert "91" in view.shares
    whole = region_view(invented.region(variance_shares=(("convection", 0.95),)), "a", "", "en")
    assert "all else" not in whole.shares


def test_every_input_and_setting_is_named(page):
    for needed in ("a" * 64, "frames/f03.tiff", "Seed 7", "Draws 1000"):
        assert needed in page.words


def test_left_out_with_reason(page):
    assert "row 12 has 319 values; expected 320" in page.words
    assert "line XX-1" in page.words


def test_components_have_a_section_of_their_own(page):
    words = page.words.split("Flanges, valves and hangers ")[-1].split("Sums by line")[0]
    words = words.replace("\u00a0", " ")
    for needed in (
        "valve · valve-1 NS-101 bare 147.9 (141.9 to 154.9) 0.98 (0.41 to 1.99) of bare pipe "
        "810 (330 to 1700)",
        "flange · flange-1 NS-101 lagged", "0.84 (0.45 to 1.58) of the clad line 41 (17 to 93)",
        "valve · valve-9 CHW-7", "29 (12 to 61) gain",
        "a loss of 850 W (370 to 1740); a gain of 29 W (12 to 61)", "no part of the totals",
        "orders of magnitude", "Equivalent lengths: house table 3; house table 4; how far",
    ):  # fmt: skip
        assert needed in words, needed
    hanger = words.split("hanger · hanger-1")[1].split("valve · valve-9")[0]
    assert "a share of a line's loss, and the sound loss of this line is not known" in hanger
    assert "not in these totals; they are estimated apart" in page.words


def test_a_survey_without_components_does_not_speak_of_them(invented):
    survey = invented.assessment()
    frames = tuple(replace(frame, components=()) for frame in survey.frames)
    survey = replace(survey, frames=frames, component_loss=None, component_gain=None)
    assert "lange" not in Page(report_html(survey)).words


def test_components_with_nothing_known_print_no_nan(invented):
    nan = Interval(*[float("nan")] * 3)
    survey = invented.assessment()
    odd = invented.component(
        invented.nasty, tag="", kind=invented.nasty, surface_temperature=nan,
        equivalent_length=nan, heat_loss=nan,
    )  # fmt: skip
    frames = (replace(survey.frames[0], components=(odd,)), *survey.frames[1:])
    html = report_html(replace(survey, frames=frames))
    assert "<script" not in html
    words = Page(html).words.split("Flanges, valves and hangers ")[-1].split("Sums by line")[0]
    assert words.count("not known") >= 2
    assert not re.search(r"\bnan\b|None", words)


def test_defaults_and_declared_apart(page):
    defaults, declared = page.words.split("Defaults used")[1].split("Declared for this survey")
    assert "installation factor" in defaults
    assert "practice" in defaults
    assert "20.00 °C" in declared
    assert "frame f03, frame f05" in declared
    assert "0.50 K" in declared


def test_assumptions_are_printed_in_the_units_people_use(invented):
    def row(quantity, value, u, unit):
        return Assumption("camera", quantity, value, u, unit, "declared", "declared")

    survey = replace(
        invented.assessment(),
        assumptions=(
            row("band_lower", 7.5e-6, 0.0, "m"), row("cladding_thickness", 0.0008, 0.0001, "m"),
            row("inside_temperature", 433.15, 2.0, "K"), row("distance", 4.0, 0.2, "m"),
        ),
    )  # fmt: skip
    words = Page(report_html(survey)).words.replace("\u00a0", " ")
    for needed in ("7.5 µm", "0.80 mm", "0.10 mm", "160.0 °C", "2.0 K", "4.00 m", "0.20 m"):
        assert needed in words, needed


def test_without_a_diameter_the_flux_is_still_given(invented):
    region = invented.region(
        "bare", heat_loss=None, total_loss=None, excess=None, level="not quantified",
        reason=Remark("not_quantified.no_diameter"), stretches=(),
    )  # fmt: skip
    words = Page(report_html(invented.assessment(extra=(region,)))).words
    tail = words.split("NS-101 · bare")[-1].replace("\u00a0", " ")
    assert "Flux over the seen face 312 W/m² (262 to 365)" in tail


def test_cautions_and_limits(page):
    for needed in ("asbestos", "height", "replaces none", "permit", "about 64 °C"):
        assert needed in page.words


def test_self_contained(page, html):
    assert [t for t, _ in page.tags if t in ("script", "link", "iframe", "img", "object")] == []
    assert all(link.startswith(("#", "data:image/png;base64,")) for link in page.links)
    assert "@import" not in html
    assert re.findall(r"url\((?!#)", html) == []
    assert set(re.findall(r"https?://[^\"' <]+", html)) == {"http://www.w3.org/2000/svg"}


def test_links_lead_somewhere_and_ids_are_unique(page):
    assert len(page.ids) == len(set(page.ids))
    targets = [link[1:] for link in page.links if link.startswith("#")]
    assert targets
    assert set(targets) <= set(page.ids)


def test_every_picture_has_a_text_for_those_who_cannot_see_it(page):
    pictures = [attrs for tag, attrs in page.tags if tag == "svg"]
    assert len(pictures) == 6
    for attrs in pictures:
        assert attrs["role"] == "img"
        assert set(attrs["aria-labelledby"].split()) <= set(page.ids)


def test_headings_do_not_skip_a_level(page):
    levels = [int(tag[1]) for tag, _ in page.tags if re.fullmatch(r"h[1-6]", tag)]
    assert levels[0] == 1
    assert all(b - a <= 1 for a, b in pairwise(levels))


def test_hostile_text_is_escaped_everywhere(invented):
    nasty = invented.nasty + "\x00"
    survey = invented.assessment(extra=(invented.region(nasty, tag=nasty, area=nasty),))
    survey = replace(
        survey, survey_name=nasty, place=nasty, inspector=nasty, camera={nasty: nasty},
        left_out=(*survey.left_out, replace(survey.left_out[0], id=nasty, message=nasty)),
        inputs=((nasty, "d" * 64),), remarks=(Remark(nasty),),
    )  # fmt: skip
    html = report_html(survey)
    assert "<script" not in html
    assert "\x00" not in html
    assert "&lt;script&gt;" in html
    Page(html)


def test_an_empty_survey_still_reports(invented):
    survey = replace(
        invented.assessment(), frames=(), lines=(), total_loss=None, total_gain=None,
        total_excess=None, assumptions=(), left_out=(), inputs=(), camera={},
    )  # fmt: skip
    words = Page(report_html(survey)).words
    assert "not known" in words
    assert "no proof that all lagging is sound" in words
    assert "Every frame and region of the survey was assessed." in words


def test_unknown_numbers_are_said_not_printed_as_nan(invented):
    nan = float("nan")
    nothing = Interval(nan, nan, nan)
    region = invented.region(
        "lost", heat_loss=None, total_loss=None, excess=None, sound_loss=None,
        surface_temperature=nothing, resistance=Interval(float("inf"), 0.4, float("inf")),
    )  # fmt: skip
    words = Page(report_html(invented.assessment(extra=(region,)))).words
    assert not re.search(r"\bnan\b|\binf\b|None|∞", words)
    assert "above 0.40 m K/W" in words


def test_same_input_same_bytes(invented, html):
    assert report_html(invented.assessment()) == html


def test_files(invented, tmp_path):
    survey = invented.assessment(extra=(invented.region("con/../x"), invented.region("CON")))
    written = write_report(survey, tmp_path)
    assert written[0] == tmp_path / "report.html"
    assert {p.parent for p in written[1:]} == {tmp_path / "strips"}
    assert (tmp_path / "strips" / "north-1.svg").is_file()
    assert len(written) == len({p.name.casefold() for p in written}) == 9
    for path in written[1:]:
        ElementTree.parse(path)


def test_what_was_read_from_a_declared_file_is_declared(invented):
    band = Assumption("camera", "band_lower", 7.6e-6, 0.0, "m", "declared: response.csv", "")
    words = Page(report_html(replace(invented.assessment(), assumptions=(band,)))).words
    assert "response.csv" in words.split("Declared for this survey")[1]
    assert "response.csv" not in words.split("Declared for this survey")[0]


def test_kinds_stand_with_bars_and_words(html, page):
    assert "Likely kind of damage" in page.words
    assert "the image cannot tell which" in page.words
    assert "bare pipe" in page.words
    assert 'class="bar" style="width:6.80em"' in html
