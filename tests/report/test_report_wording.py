import re
import tomllib
from pathlib import Path

import pytest

import cladwatt.report
from cladwatt.errors import InputError
from cladwatt.quantities import Remark
from cladwatt.report.wording import (
    has_wording,
    known_languages,
    phrases,
    quantity_name,
    sentence,
    text,
)

SOURCE = Path(cladwatt.report.__file__).parents[1]
LITERAL = re.compile(
    r"""["']((?:quantified|indicative|not_quantified|missing|caution|advice|remark|frame)\.[a-z_]+)["']"""
)
REMARK = re.compile(r"""Remark\(\s*(?:key=)?["']([\w.]+)["']""")

GROUPS = ("quantified", "indicative", "not_quantified", "missing", "caution", "advice", "remark")


def keys_in_source():
    keys = set()
    for path in SOURCE.rglob("*.py"):
        code = path.read_text(encoding="utf-8")
        keys |= set(REMARK.findall(code)) | set(LITERAL.findall(code))
    return sorted(keys)


def test_the_scan_finds_keys():
    assert "frame.dead_pixels" in keys_in_source()


@pytest.mark.parametrize("language", known_languages())
def test_every_key_the_program_uses_has_wording(language):
    wanted = [key for key in keys_in_source() if key.split(".")[0] != "strip"]
    assert [key for key in wanted if not has_wording(key, language)] == []


def remark_keys():
    """Keys of remarks; a question is a complete message of its own."""
    return [k for k in keys_in_source() if k.split(".")[0] in GROUPS and k != "remark.question"]


def test_no_wording_is_left_of_remarks_nobody_makes():
    table = tomllib.loads((SOURCE / "report/languages/en.toml").read_text(encoding="utf-8"))
    worded = {f"{group}.{name}" for group in GROUPS for name in table[group]}
    assert sorted(worded - set(keys_in_source())) == []


@pytest.mark.parametrize("key", remark_keys())
def test_every_remark_is_a_sentence_without_its_parameters(key):
    words = sentence(Remark(key))
    assert words[0].isupper()
    assert words.endswith(".")
    assert not re.search(r"[{}\[\]]|  | [.,;:]", words)


def test_fractions_are_shown_in_percent():
    words = sentence(Remark("indicative.interval_wide", (("relative_width", 0.634),)))
    assert "63 % of its median" in words


@pytest.mark.parametrize(("width", "shown"), [(42.0, "over 999 %"), (float("inf"), "beyond any")])
def test_endless_widths_are_words(width, shown):
    assert shown in sentence(
        Remark("not_quantified.interval_too_wide", (("relative_width", width),))
    )


def test_advice_says_what_it_promises():
    words = sentence(Remark("advice.tape_patch", (("width_now", 42.0), ("width_then", 19.4))))
    assert words.endswith("the loss would likely be known to about ±19 % instead of ±42 %.")


def test_braces_in_a_parameter_stay_as_they_are():
    words = sentence(Remark("remark.reading_not_used", (("reason", "{temperature_C} [[x]]"),)))
    assert "{temperature_C} [[x]]" in words


def test_a_key_without_wording_is_shown_not_raised():
    assert sentence(Remark("no.such_key", (("share", 0.5),))) == "no.such_key (share 0.5)"


def test_faults_name_what_is_accepted():
    with pytest.raises(InputError, match="language is 'xx'; expected one of en"):
        text("report.summary", "xx")
    with pytest.raises(InputError, match=r"text key is 'report\.nothing'"):
        text("report.nothing")
    with pytest.raises(InputError, match="lacks its parameter 'survey'"):
        text("report.title")
    with pytest.raises(InputError, match=r"list key is 'report\.title'"):
        phrases("report.title")


def test_quantity_names():
    assert quantity_name("band_emissivity") == "emissivity in the camera's band"
    assert quantity_name("some_new_thing") == "some new thing"


def test_standing_cautions_say_the_needful():
    words = " ".join(phrases("report.caution_list"))
    for needed in ("asbestos", "Hot surfaces", "Live plant", "height", "Local codes", "licensed"):
        assert needed in words
    assert "replaces none" in words
