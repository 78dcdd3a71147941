"""README, DEVELOPERS and the guide name every command and every option."""

import argparse
import re
from pathlib import Path

import pytest

from cladwatt.faces.cli.main import build_parser

CLONE = Path(__file__).parent.parent
TEST_COMMAND = (
    'python3 -m venv .venv && .venv/bin/python -m pip install -q -e ".[test]" '
    "&& .venv/bin/python -m pytest -q"
)
MAIN_JOB = (
    "python3 -m venv .venv && .venv/bin/python -m pip install -q . "
    "&& .venv/bin/cladwatt assess sample_data"
)


def text_of(*names: str) -> str:
    return "\n".join((CLONE / name).read_text(encoding="utf-8") for name in names)


def commands() -> dict[str, argparse.ArgumentParser]:
    parser = build_parser()
    for action in parser._actions:
        if isinstance(action, argparse._SubParsersAction):
            return dict(action.choices)
    raise AssertionError("the parser has no commands")


def options(parser: argparse.ArgumentParser) -> list[str]:
    return sorted(
        option
        for action in parser._actions
        for option in action.option_strings
        if option.startswith("--") and option != "--help"
    )


@pytest.mark.parametrize("command", list(commands()))
def test_every_command_is_documented(command):
    assert f"cladwatt {command}" in text_of("README.md", "DEVELOPERS.md")


@pytest.mark.parametrize(
    "option",
    sorted({o for parser in [build_parser(), *commands().values()] for o in options(parser)}),
)
def test_every_option_is_documented(option):
    guide = [str(page) for page in sorted((CLONE / "src/cladwatt/guide").rglob("*.md"))]
    assert re.search(rf"(?<![\w-]){option}(?![\w-])", text_of("README.md", "DEVELOPERS.md", *guide))


def test_the_readme_gives_both_one_line_commands():
    readme = text_of("README.md")
    assert TEST_COMMAND in readme
    assert MAIN_JOB in readme


def test_continuous_integration_runs_the_readme_s_commands():
    script = text_of(".ci/run")
    assert TEST_COMMAND in script
    assert MAIN_JOB in script


@pytest.mark.parametrize("name", ["README.md", "DEVELOPERS.md"])
def test_links_inside_the_clone_lead_somewhere(name):
    targets = re.findall(r"\]\(([^)#\s]+)[^)]*\)", text_of(name))
    inside = [target for target in targets if not target.startswith(("http:", "https:", "mailto:"))]
    assert [target for target in inside if not (CLONE / target).exists()] == []


def test_commands_named_in_the_readme_exist():
    named = set(re.findall(r"cladwatt ([a-z]+)\b", text_of("README.md")))
    assert named & set(commands())
    assert not {n for n in named if f"`cladwatt {n}" in text_of("README.md")} - set(commands())
