"""A module imports only from its own floor and those below it."""

import ast
import sys
from pathlib import Path

import pytest

import cladwatt

ROOT = Path(cladwatt.__file__).parent

FLOORS = {
    "errors": 0, "quantities": 0, "flags": 0, "types": 0, "units": 0,
    "physics": 1,
    "materials": 2, "survey": 2,
    "measure": 3,
    "inverse": 4,
    "results": 5,
    "report": 6,
    "assess": 7, "frame_assessment": 7, "assumptions": 7, "explain": 7, "planning": 7,
    "synthetic": 7,
    "faces": 8, "__main__": 8, "__init__": 8,
}  # fmt: skip
"""Floor of every part of the package, by the name behind ``cladwatt.``."""

# within one floor these do not know each other
APART = {
    ("materials", "survey"),
    ("assess", "synthetic"),
    ("assumptions", "synthetic"),
    ("explain", "synthetic"),
    ("planning", "synthetic"),
}

OUTSIDE = {"physics": {"numpy", "scipy"}, "materials": set(), "errors": set(), "quantities": set(),
           "flags": set(), "units": set(), "types": {"numpy"}}  # fmt: skip
"""What a part may import besides the standard library and this package; others are free."""

TOUCHES_FILES = {"pathlib", "os", "io", "csv", "json", "tomllib", "shutil", "tempfile", "glob"}
DRAWS = {"pandas", "jinja2", "matplotlib"}
"""Only from the report's floor on."""

ALLOWED = {
    ("cladwatt.survey.csv_format", "pandas"): "reads a large CSV matrix quickest; no table leaves",
    ("cladwatt.survey.tiff_format", "logging"): "gives the reader's own logger a deaf handler",
}
"""Exceptions, by module and import, with their reason."""

MODULES = sorted(ROOT.rglob("*.py"))


def part_of(module: str) -> str:
    """Return the part a module name belongs to: ``cladwatt.survey.frame`` to ``survey``."""
    names = module.split(".")
    return names[1] if len(names) > 1 else "__init__"


def module_name(path: Path) -> str:
    parts = list(path.relative_to(ROOT.parent).with_suffix("").parts)
    if parts[-1] == "__init__" and len(parts) > 2:
        parts.pop()
    return ".".join(parts)


def imports_of(text: str) -> set[str]:
    """Return every module named by an import anywhere in the text, inside functions too."""
    found: set[str] = set()
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.Import):
            found.update(alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, "imports are absolute"
            module = node.module or ""
            # `from cladwatt import errors` means the module errors
            found.update(
                f"{module}.{alias.name}" if module == "cladwatt" else module for alias in node.names
            )
    return found


def wrong_imports(module: str, text: str) -> list[str]:
    """Return what `module` imports that it must not, each as a sentence."""
    part = part_of(module)
    wrong = []
    for name in sorted(imports_of(text)):
        top = name.split(".")[0]
        if (module, top) in ALLOWED:
            continue
        if top == "cladwatt":
            other = part_of(name)
            if FLOORS[other] > FLOORS[part]:
                wrong.append(f"{module} (floor {FLOORS[part]}) imports {name} ({FLOORS[other]})")
            if (part, other) in APART:
                wrong.append(f"{module} imports {name}, which stands apart")
        elif top not in sys.stdlib_module_names:
            if part in OUTSIDE and top not in OUTSIDE[part]:
                wrong.append(f"{module} imports {name}; {part} may not")
            if top in DRAWS and FLOORS[part] < FLOORS["report"]:
                wrong.append(f"{module} imports {name} below the report")
        elif part in ("physics", "measure", "inverse") and top in TOUCHES_FILES:
            wrong.append(f"{module} imports {name}; {part} knows no files")
        elif top == "logging" and FLOORS[part] < FLOORS["faces"]:
            wrong.append(f"{module} imports {name} below the faces")
    return wrong


@pytest.mark.parametrize("path", MODULES, ids=module_name)
def test_imports_go_downwards(path):
    assert wrong_imports(module_name(path), path.read_text(encoding="utf-8")) == []


@pytest.mark.parametrize("path", MODULES, ids=module_name)
def test_only_the_faces_print(path):
    if FLOORS[part_of(module_name(path))] == FLOORS["faces"]:
        return
    calls = [node for node in ast.walk(ast.parse(path.read_text(encoding="utf-8")))
             if isinstance(node, ast.Call) and isinstance(node.func, ast.Name)]  # fmt: skip
    assert not [call.lineno for call in calls if call.func.id == "print"]


@pytest.mark.parametrize(("module", "name"), list(ALLOWED))
def test_an_exception_is_still_needed(module, name):
    path = ROOT.parent / Path(*module.split(".")).with_suffix(".py")
    assert name in imports_of(path.read_text(encoding="utf-8"))


def test_every_part_has_a_floor():
    parts = {path.stem for path in ROOT.glob("*.py")}
    parts |= {path.parent.name for path in ROOT.glob("*/__init__.py")}
    assert parts == set(FLOORS)


@pytest.mark.parametrize(
    ("module", "text"),
    [
        ("cladwatt.physics.air", "from cladwatt.materials.tables import table_rows"),
        ("cladwatt.physics.air", "def f():\n    import pandas"),
        ("cladwatt.physics.air", "from pathlib import Path"),
        ("cladwatt.errors", "import numpy"),
        ("cladwatt.survey.frame", "from cladwatt.measure import strip"),
        ("cladwatt.materials.tables", "from cladwatt.survey.model import Line"),
        ("cladwatt.inverse.level", "import cladwatt.results.store"),
        ("cladwatt.results.store", "import pandas as pd"),
        ("cladwatt.report.tables", "from cladwatt import assess"),
        ("cladwatt.assess", "from cladwatt.faces.cli import main"),
        ("cladwatt.assess", "import logging"),
    ],
)
def test_a_wrong_way_import_is_seen(module, text):
    assert wrong_imports(module, text)


@pytest.mark.parametrize(
    ("module", "text"),
    [
        ("cladwatt.physics.air", "import math\nimport numpy\nfrom cladwatt.errors import Fault"),
        ("cladwatt.survey.frame", "from cladwatt.materials.tables import pipe_size"),
        ("cladwatt.faces.cli.main", "from cladwatt.assess import assess"),
    ],
)
def test_a_right_way_import_passes(module, text):
    assert wrong_imports(module, text) == []
