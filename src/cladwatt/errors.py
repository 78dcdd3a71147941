"""The error tree, and the fault: one thing wrong with an input, said in three parts."""

from dataclasses import dataclass
from typing import Literal

__all__ = [
    "CladwattError",
    "Fault",
    "FaultyInputError",
    "FitError",
    "FrameError",
    "InputError",
    "RegionError",
    "ResultsError",
    "SurveyFileError",
    "TableError",
]


@dataclass(frozen=True)
class Fault:
    """One fault of an input: where it stands, what was found, what is accepted.

    Parameters
    ----------
    path : str
        File as the user knows it, relative to the survey folder where it lies inside.
    where : str
        Key path (``frame[3].distance_m``), feature (``feature 2 (id 'north-1')``) or ``""``.
    found : str
        What was found, with the value shown, e.g. ``emissivity is 1.3``.
    expected : str
        What is accepted and the way out, e.g. ``expected 0 < emissivity <= 1``.
    line : int, optional
        Line in the file, counted from 1.
    severity : {"error", "question"}
        A question does not stop anything; it is put to the user.
    frame_id, region_id, tag : str, optional
        What is left out because of this fault; all None: the whole survey stops.
    """

    path: str
    where: str
    found: str
    expected: str
    line: int | None = None
    severity: Literal["error", "question"] = "error"
    frame_id: str | None = None
    region_id: str | None = None
    tag: str | None = None

    def __str__(self) -> str:
        place = self.path if self.line is None else f"{self.path}:{self.line}"
        subject = f"{self.where}: " if self.where else ""
        return f"{place}: {subject}{self.found}; {self.expected}"


class CladwattError(Exception):
    """Base of every error this package raises on purpose."""


class InputError(CladwattError, ValueError):
    """An argument or input is not acceptable; the message says what would be."""


class FaultyInputError(InputError):
    """An input file is faulty.

    Attributes
    ----------
    faults : tuple of Fault
        Everything found wrong, in the order of the file.
    """

    def __init__(self, *faults: Fault) -> None:
        self.faults = faults
        super().__init__("\n".join(str(fault) for fault in faults))


class SurveyFileError(FaultyInputError):
    """The survey file, or a CSV it names, cannot be used."""


class FrameError(FaultyInputError):
    """One frame cannot be read or its values cannot be what is declared."""


class RegionError(FaultyInputError):
    """One region cannot be used."""


class TableError(FaultyInputError):
    """A material table is faulty, or a name is not in it."""


class ResultsError(CladwattError):
    """A results folder cannot be written or read."""


class FitError(CladwattError):
    """A solver did not reach its tolerance."""
