"""``cladwatt schema``: the JSON Schemas of what is read and written."""

import argparse

from cladwatt.faces.cli.common import CommandGroup, add_command
from cladwatt.faces.cli.messages import ExitCode, Messages

__all__ = ["add"]

_DESCRIPTION = """\
Print a JSON Schema (draft 2020-12), for an editor that completes and checks, or for a program.
"""
_END = """\
names:
  survey      survey.toml, as read into JSON
  regions     regions/FRAME.geojson: shapes in pixel coordinates and their properties
  assessment  assessment.json, in the results folder

exit codes:
  0 done; 1 could not; 2 wrong usage

example:
  cladwatt schema survey > survey.schema.json
"""
_FILES = {
    "survey": ("cladwatt.survey", "schemas/survey.schema.json"),
    "regions": ("cladwatt.survey", "schemas/regions.schema.json"),
    "assessment": ("cladwatt.results", "assessment.schema.json"),
}


def add(commands: CommandGroup) -> None:
    """Add the command to the parser."""
    parser = add_command(
        commands, "schema", _run, summary="print the JSON Schema of survey, regions or results",
        description=_DESCRIPTION, end=_END,
    )  # fmt: skip
    parser.add_argument("name", metavar="NAME", choices=tuple(_FILES), help=", ".join(_FILES))


def _run(options: argparse.Namespace, messages: Messages) -> ExitCode:
    from importlib.resources import files

    package, name = _FILES[options.name]
    messages.output(files(package).joinpath(name).read_text(encoding="utf-8"))
    return ExitCode.DONE
