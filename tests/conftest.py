"""What all tests share.

With CI set, a skipped test is a failure: there everything a test needs is installed. Checks against
the outside go through the fixture ``evidence``; ``--evidence FOLDER`` runs those alone and keeps
what they compared.
"""

import os
from pathlib import Path

import pytest

_skipped: list[str] = []


def _note(report: pytest.TestReport | pytest.CollectReport) -> None:
    # an expected failure is reported as skipped too
    if report.skipped and not hasattr(report, "wasxfail"):
        reason = report.longrepr[2] if isinstance(report.longrepr, tuple) else report.longrepr
        _skipped.append(f"{report.nodeid}: {reason}")


def pytest_runtest_logreport(report: pytest.TestReport) -> None:
    _note(report)


def pytest_collectreport(report: pytest.CollectReport) -> None:
    _note(report)


def _counts(config: pytest.Config) -> bool:
    """Whether this is the process that decides, and CI is set."""
    return bool(os.environ.get("CI")) and not hasattr(config, "workerinput")


@pytest.hookimpl(trylast=True)
def pytest_sessionfinish(session: pytest.Session) -> None:
    if _counts(session.config) and _skipped and session.exitstatus == pytest.ExitCode.OK:
        session.exitstatus = pytest.ExitCode.TESTS_FAILED


def pytest_terminal_summary(
    terminalreporter: pytest.TerminalReporter, config: pytest.Config
) -> None:
    if _counts(config) and _skipped:
        terminalreporter.section("skipped although CI is set: failed")
        for line in _skipped:
            terminalreporter.line(line)


def pytest_addoption(parser: pytest.Parser) -> None:
    parser.addoption(
        "--evidence",
        metavar="FOLDER",
        help="run only what is checked against the outside, and write the records to FOLDER",
    )


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    if config.getoption("--evidence"):
        others = [item for item in items if "evidence" not in getattr(item, "fixturenames", ())]
        config.hook.pytest_deselected(items=others)
        items[:] = [item for item in items if item not in set(others)]


@pytest.fixture
def evidence(request: pytest.FixtureRequest):
    """Assert against the outside; see ``tests/evidence``."""
    # here, since this file also runs by itself (test_skips_with_ci.py)
    from tests.evidence.recorder import Evidence, write_records

    kept = Evidence()
    yield kept
    folder = request.config.getoption("--evidence")
    # what is expected to fail is a known misprint: said in the catalogue, compared with nothing
    if folder and not request.node.get_closest_marker("xfail"):
        write_records(kept.records, Path(folder))
