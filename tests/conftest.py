"""With CI set, a skipped test is a failure: there everything a test needs is installed."""

import os

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
