"""The survey folder: reading its files, keeping their digests, refusing what lies outside."""

import difflib
import hashlib
from dataclasses import dataclass, field
from pathlib import Path, PurePosixPath, PureWindowsPath

from cladwatt.errors import Fault, SurveyFileError
from cladwatt.survey.fault_list import FaultList, shown
from cladwatt.survey.table_reader import Table
from cladwatt.survey.values import Problem

__all__ = ["Source"]

_MAXIMUM_LIST_BYTES = 256 * 1024 * 1024


@dataclass
class Source:
    """A survey folder.

    Parameters
    ----------
    root : Path
        Absolute, links resolved.
    digests : dict
        SHA-256 by path from the root of every file read so far.
    """

    root: Path
    digests: dict[str, str] = field(default_factory=dict)

    def name(self, path: Path) -> str:
        """Return a path as the user knows it: from the survey folder, with slashes."""
        return path.relative_to(self.root).as_posix()

    def digest(self, path: Path) -> None:
        """Note the digest of a file that another module reads."""
        try:
            self.digests[self.name(path)] = hashlib.sha256(path.read_bytes()).hexdigest()
        except OSError:
            return

    def read(self, path: Path, name: str, limit: int) -> bytes:
        """Return a file's bytes and note its digest.

        Raises
        ------
        SurveyFileError
            If it cannot be read or is larger than `limit` bytes.
        """
        try:
            size = path.stat().st_size
            if size > limit:
                raise SurveyFileError(
                    Fault(name, "", f"the file has {size} bytes", f"expected at most {limit}")
                )
            data = path.read_bytes()
        except OSError as error:
            reason = error.strerror or type(error).__name__
            raise SurveyFileError(
                Fault(name, "", f"it cannot be read ({reason})", "expected a readable file")
            ) from None
        self.digests[name] = hashlib.sha256(data).hexdigest()
        return data

    def locate(self, text: str, *, among: tuple[str, ...] = ()) -> Path:
        r"""Return the file a survey names.

        Parameters
        ----------
        text : str
            Path from the survey folder; ``\`` counts as ``/``.
        among : tuple of str
            Folders in which it is looked for next.

        Raises
        ------
        Problem
            If it is absolute, leaves the folder, is missing or is a folder.
        """
        relative = text.replace("\\", "/")
        absolute = PurePosixPath(relative).is_absolute() or PureWindowsPath(text).drive
        if absolute or "\x00" in text:
            raise Problem(f"the path is {shown(text)}", "expected a path from the survey folder")
        try:
            for folder in ("", *among):
                path = (self.root / folder / relative).resolve()
                if not path.is_relative_to(self.root):
                    raise Problem(
                        f"the path {shown(text)} leaves the survey folder",
                        "copy the file into the survey",
                    )
                if path.is_file():
                    return path
                if path.is_dir():
                    raise Problem(f"{shown(text)} is a folder", "expected a file")
        except (OSError, ValueError, RuntimeError) as error:
            raise Problem(f"the path {shown(text)} cannot be used ({error})", "rename") from None
        raise Problem(f"there is no file {shown(text)}", f"expected one{self._nearest(relative)}")

    def _nearest(self, relative: str) -> str:
        folder = (self.root / relative).parent
        try:
            names = [path.name for path in folder.iterdir()]
        except OSError:
            return " in the survey folder"
        close = difflib.get_close_matches(PurePosixPath(relative).name, names, n=2)
        return f" (nearest: {', '.join(close)})" if close else " in the survey folder"

    def listed(self, head: Table, name: str, faults: FaultList) -> tuple[bytes | None, str]:
        """Return bytes and name of a CSV list the survey file names; None where it names none."""
        text = head.text(name)
        if not text:
            return None, ""
        try:
            path = self.locate(text)
            return self.read(path, self.name(path), _MAXIMUM_LIST_BYTES), self.name(path)
        except Problem as problem:
            faults.add(head.place, name, problem.found, problem.expected)
        except SurveyFileError as error:
            faults.faults.extend(error.faults)
        return None, ""
