"""With CI set, the suite's own conftest turns a skip into a failure; without, it does not."""

import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

CONFTEST = Path(__file__).with_name("conftest.py")
SKIPPED_TEST = "import pytest\n\ndef test_one():\n    pytest.skip('no browser here')\n"
SKIPPED_MODULE = "import pytest\n\npytest.importorskip('no_such_module_anywhere')\n"
EXPECTED_FAILURE = "import pytest\n\n@pytest.mark.xfail\ndef test_one():\n    assert False\n"
PASSING = "def test_other():\n    pass\n"


def suite(folder: Path, text: str, *, ci: bool, workers: str) -> "subprocess.CompletedProcess[str]":
    shutil.copy(CONFTEST, folder / "conftest.py")
    (folder / "test_a.py").write_text(text)
    (folder / "test_b.py").write_text(PASSING)
    environment = {name: value for name, value in os.environ.items()
                   if name != "CI" and not name.startswith("PYTEST")}  # fmt: skip
    return subprocess.run(
        [sys.executable, "-m", "pytest", "-q", "-n", workers, "-p", "no:cacheprovider", folder],
        cwd=folder, env=environment | ({"CI": "true"} if ci else {}),
        capture_output=True, text=True, timeout=120, check=False,
    )  # fmt: skip


@pytest.mark.parametrize("workers", ["0", "1"])
@pytest.mark.parametrize("text", [SKIPPED_TEST, SKIPPED_MODULE], ids=["test", "module"])
def test_a_skip_fails_the_run(tmp_path, text, workers):
    done = suite(tmp_path, text, ci=True, workers=workers)
    assert done.returncode == pytest.ExitCode.TESTS_FAILED, done.stdout
    assert "skipped although CI is set" in done.stdout


def test_a_skip_passes_elsewhere(tmp_path):
    assert suite(tmp_path, SKIPPED_TEST, ci=False, workers="0").returncode == pytest.ExitCode.OK


def test_an_expected_failure_is_no_skip(tmp_path):
    assert suite(tmp_path, EXPECTED_FAILURE, ci=True, workers="1").returncode == pytest.ExitCode.OK
