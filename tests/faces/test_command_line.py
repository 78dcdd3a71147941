"""The command line as a whole: help, exit codes, streams, and what never reaches a user."""

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from cladwatt.errors import Fault, InputError, SurveyFileError
from cladwatt.faces.cli.main import main
from cladwatt.faces.cli.messages import ExitCode, Messages, counted
from cladwatt.faces.cli.progress import ProgressBar

COMMANDS = ("assess", "check", "start", "sample", "tables", "schema")
HEAVY = ("numpy", "scipy", "pandas", "cv2", "tifffile", "jinja2", "PIL")


def process(*arguments: str, **options: object) -> "subprocess.CompletedProcess[str]":
    return subprocess.run(
        [sys.executable, "-m", "cladwatt", *arguments],
        capture_output=True, text=True, encoding="utf-8", timeout=120, check=False, **options,
    )  # fmt: skip


@pytest.mark.parametrize("arguments", [["--help"], ["--version"], ["assess", "--help"], ["assess"]])
def test_help_loads_nothing_heavy(arguments):
    code = (
        "import sys; from cladwatt.faces.cli.main import main\n"
        f"main({arguments!r})\n"
        f"print('loaded', [name for name in {HEAVY!r} if name in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.endswith("loaded []\n")


@pytest.mark.parametrize("command", COMMANDS)
def test_help_of_each_tells_inputs_exit_codes_and_an_example(cladwatt, command):
    ended = cladwatt(command, "--help")
    assert ended.code == 0
    assert "exit codes:" in ended.out
    assert f"cladwatt {command}" in ended.out.partition("example")[2]
    assert max(len(line) for line in ended.out.splitlines()) <= 100


def test_help_lists_every_command_and_exit_code(cladwatt):
    out = cladwatt("--help").out
    assert all(f"\n    {command} " in out for command in COMMANDS)
    assert all(f"\n  {code:<4d} " in out for code in ExitCode)


def test_no_command_and_unknown_command_are_wrong_usage(cladwatt):
    assert cladwatt().code == ExitCode.WRONG_USAGE
    ended = cladwatt("asses")
    assert ended.code == ExitCode.WRONG_USAGE
    assert "'assess'" in ended.err


def test_console_script_and_module_run_the_same():
    script = Path(sys.executable).with_name("cladwatt")
    done = subprocess.run([script, "--version"], capture_output=True, text=True, check=True)
    assert done.stdout == process("--version").stdout
    assert done.stdout.startswith("cladwatt ")


def raising(error):
    def run(*_):
        raise error

    return run


def fail_with(monkeypatch, error):
    """Let `check` raise this."""
    monkeypatch.setattr("cladwatt.survey.checking.check_survey", raising(error))


@pytest.mark.parametrize(
    ("error", "code", "said"),
    [
        (InputError("width is 0; expected more"), 1, "cladwatt: width is 0; expected more"),
        (SurveyFileError(Fault("survey.toml", "site.x", "x is 1", "expected 2", line=7)), 1,
         "survey.toml:7: site.x: x is 1; expected 2"),
        (PermissionError(13, "Permission denied", "frames/a.csv"), 1,
         "cladwatt: frames/a.csv: the system refused: Permission denied"),
        (MemoryError(), 1, "not enough memory"),
        (KeyboardInterrupt(), 130, "interrupted"),
        (ZeroDivisionError("division by zero"), 1,
         "a fault in the program, not in your files (ZeroDivisionError: division by zero)"),
    ],
)  # fmt: skip
def test_every_error_is_one_message(cladwatt, monkeypatch, error, code, said):
    fail_with(monkeypatch, error)
    ended = cladwatt("check", "anywhere")
    assert ended.code == code
    assert said in ended.err
    assert ended.out == ""


def test_debug_shows_where_a_fault_of_the_program_happened(capsys, monkeypatch):
    fail_with(monkeypatch, ZeroDivisionError("division by zero"))
    assert main(["--debug", "check", "anywhere"]) == ExitCode.COULD_NOT
    assert "Traceback (most recent call last)" in capsys.readouterr().err


def test_control_characters_reach_no_terminal(cladwatt, monkeypatch):
    fail_with(monkeypatch, InputError("tag is '\x1b[31mred\x07'"))
    assert "\x1b" not in cladwatt("check", "anywhere").err


@pytest.mark.skipif(os.name != "posix", reason="pipes end differently elsewhere")
def test_a_reader_that_goes_away_is_no_error():
    for arguments in ("tables claddings", "--help", "--version", "schema survey"):
        done = subprocess.run(
            ["bash", "-c", f'"{sys.executable}" -m cladwatt {arguments} | true; '
             'echo "code ${PIPESTATUS[0]}"'],
            capture_output=True, text=True, check=True, timeout=120,
        )  # fmt: skip
        assert done.stdout == "code 0\n"
        assert done.stderr == ""


def test_a_terminal_without_the_signs_still_gets_the_text():
    done = process("tables", "lagging_conductivity", env={
        **os.environ, "PYTHONIOENCODING": "ascii", "PYTHONUTF8": "0", "LC_ALL": "C"})  # fmt: skip
    assert done.returncode == 0
    assert "\\xb0C" in done.stdout


@pytest.mark.skipif(os.name != "posix", reason="sends a signal to a process group")
@pytest.mark.parametrize("workers", ["1", "2"])
def test_ctrl_c_ends_a_run_with_one_line_and_no_results(survey, workers):
    run = subprocess.Popen(
        [sys.executable, "-m", "cladwatt", "assess", survey, "--draws", "50000",
         "--workers", workers],
        stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, start_new_session=True,
    )  # fmt: skip
    time.sleep(3.0)
    assert run.poll() is None, "the run ended before it could be interrupted"
    # as a terminal does: to the command and all its workers
    os.killpg(run.pid, signal.SIGINT)
    out, err = run.communicate(timeout=60)
    assert run.returncode == ExitCode.INTERRUPTED
    assert out == ""
    assert err.splitlines() == ["cladwatt: interrupted; nothing half-written was left behind"]
    assert not (survey / "results").exists()


class Terminal:
    def __init__(self, is_terminal: bool) -> None:
        self.text, self.is_terminal = "", is_terminal

    def write(self, text: str) -> int:
        self.text += text
        return len(text)

    def flush(self) -> None:
        pass

    def isatty(self) -> bool:
        return self.is_terminal


def watched(monkeypatch, *, terminal=True, silent=False):
    stream = Terminal(terminal)
    monkeypatch.setattr(sys, "stderr", stream)
    with ProgressBar(60, silent=silent) as bar:
        bar(1, 4, "f01")
        bar(4, 4, "a name far too long for the line " * 4 + "\x1b[2J")
    return stream.text


def test_progress_is_drawn_on_a_terminal_and_wiped_at_the_end(monkeypatch):
    text = watched(monkeypatch)
    drawn = [part for part in text.split("\r") if part.strip()]
    assert drawn[0].startswith("[######..................] 1/4 0:00 f01")
    assert "4/4" in drawn[1]
    assert all(len(part) <= 59 for part in drawn)
    assert "\x1b" not in text
    assert text.split("\r")[-2].isspace()
    assert text.endswith("\r")


@pytest.mark.parametrize(("terminal", "silent"), [(False, False), (True, True)])
def test_progress_is_silent_when_piped_or_quiet(monkeypatch, terminal, silent):
    assert watched(monkeypatch, terminal=terminal, silent=silent) == ""


def test_counts_agree_with_their_noun():
    assert counted(1, "fault") == "1 fault"
    assert counted(0, "fault") == "0 faults"
    assert counted(2, "entry", "entries") == "2 entries"


def test_width_is_that_of_the_terminal(monkeypatch):
    monkeypatch.setenv("COLUMNS", "71")
    assert Messages().width == 71
