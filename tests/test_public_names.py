"""The public names: all importable, all light until used, and the same from any side."""

import importlib
import subprocess
import sys
from pathlib import Path

import pytest

import cladwatt

ROOT = Path(cladwatt.__file__).parent

PUBLIC = {
    "Assessment", "CladwattError", "Fault", "Settings", "Survey", "__version__", "assess",
    "assumptions_table", "check_survey", "components_table", "left_out_table", "lines_table",
    "read_results", "read_survey", "regions_table", "stations_table", "stretches_table",
    "write_report", "write_results", "write_sample",
}  # fmt: skip


def in_a_new_process(code: str) -> str:
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    return done.stdout.strip()


def test_the_public_list_is_the_one_written_here():
    assert set(cladwatt.__all__) == PUBLIC
    assert len(cladwatt.__all__) == len(PUBLIC)


@pytest.mark.parametrize("name", sorted(PUBLIC))
def test_every_public_name_is_there_and_listed(name):
    assert getattr(cladwatt, name) is not None
    assert name in dir(cladwatt)


def test_star_import_gives_exactly_the_public_names():
    code = "from cladwatt import *; print(sorted(n for n in dir() if n != '__builtins__'))"
    names = eval(in_a_new_process(code))
    # dunder names of the new process's own module aside
    assert {name for name in names if not name.startswith("__")} == PUBLIC - {"__version__"}


def test_an_unknown_name_is_an_attribute_error():
    with pytest.raises(AttributeError, match="no attribute 'asess'"):
        cladwatt.asess  # noqa: B018


def test_importing_the_package_loads_nothing_heavy():
    code = (
        "import sys, cladwatt; cladwatt.CladwattError; cladwatt.__version__;"
        "print([n for n in ('numpy', 'scipy', 'pandas', 'cv2', 'jinja2') if n in sys.modules])"
    )
    assert in_a_new_process(code) == "[]"


@pytest.mark.parametrize(
    "first",
    [
        "import cladwatt",
        "import cladwatt.assess",
        "from cladwatt.assess import assess_frame",
        "from cladwatt import assess",
        "import importlib; importlib.import_module('cladwatt.assess')",
    ],
)
def test_assess_is_the_function_whatever_was_imported_first(first):
    code = f"{first}\nimport cladwatt\nprint(type(cladwatt.assess).__name__)\n"
    assert in_a_new_process(code + "from cladwatt import assess; assert callable(assess)") == (
        "function"
    )


def test_version_is_that_of_the_installed_package():
    from importlib.metadata import version

    assert cladwatt.__version__ == version("cladwatt")


def modules():
    for path in sorted(ROOT.rglob("*.py")):
        parts = path.relative_to(ROOT.parent).with_suffix("").parts
        if parts[-1] not in ("__init__", "__main__"):
            yield ".".join(parts)


@pytest.mark.parametrize("name", list(modules()))
def test_every_module_says_what_is_public_and_has_it(name):
    module = importlib.import_module(name)
    assert module.__doc__
    missing = [public for public in module.__all__ if not hasattr(module, public)]
    assert missing == []
    assert len(set(module.__all__)) == len(module.__all__)


def test_the_package_is_marked_as_typed():
    assert (ROOT / "py.typed").is_file()
