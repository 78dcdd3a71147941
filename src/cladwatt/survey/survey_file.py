"""Read a survey folder: survey file, lists and regions; pixels are read later, on demand."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from datetime import date
from pathlib import Path

from cladwatt.errors import Fault, FaultyInputError, SurveyFileError, TableError
from cladwatt.materials.load import MaterialTables, load_tables, shipped_tables
from cladwatt.survey.fault_list import FaultList, Place, shown
from cladwatt.survey.frame_builder import build_camera, build_conditions, build_site
from cladwatt.survey.frame_list import read_frames
from cladwatt.survey.keys import SECTIONS, TOP_LEVEL, section
from cladwatt.survey.line_builder import build_line
from cladwatt.survey.line_list import Entry, line_entries_of_csv, repeated
from cladwatt.survey.model import Line, Site
from cladwatt.survey.response_file import read_response
from cladwatt.survey.surroundings_builder import read_pieces
from cladwatt.survey.survey import Survey
from cladwatt.survey.survey_checks import (
    check_air_path,
    check_dates,
    check_temperatures,
    checked_convection,
)
from cladwatt.survey.survey_regions import read_all_regions
from cladwatt.survey.survey_source import Source
from cladwatt.survey.table_reader import Table, nearest, read_table
from cladwatt.survey.toml_text import LineFinder, parse_toml

__all__ = ["SURVEY_FILE", "load_survey", "read_survey"]

SURVEY_FILE = "survey.toml"
_MAXIMUM_BYTES = 64 * 1024 * 1024


def read_survey(folder: str | Path, *, frames_needed: bool = True) -> Survey:
    """Read a survey folder.

    Parameters
    ----------
    folder : str or Path
        Folder with ``survey.toml``, its frames and ``regions/``.
    frames_needed : bool
        Whether a survey without frames is faulty; one still to be walked has none.

    Returns
    -------
    Survey
        Lines, frames and regions that can be used. What cannot, and what hangs on it, is left
        out; the reasons and the questions stand in `faults`.

    Raises
    ------
    SurveyFileError
        With every fault that stops the survey as a whole: no such folder, no or broken survey
        file, faulty survey-wide keys, nothing usable in it.

    Examples
    --------
    >>> survey = read_survey("sample_data")  # doctest: +SKIP
    """
    survey, faults = load_survey(folder, frames_needed=frames_needed)
    stopping = faults.stopping()
    if survey is None or stopping:
        raise SurveyFileError(*stopping)
    return replace(survey, faults=tuple(faults.faults))


def load_survey(
    folder: str | Path, *, frames_needed: bool = True
) -> tuple[Survey | None, FaultList]:
    """Read as much of a survey as can be read.

    Parameters
    ----------
    folder : str or Path
    frames_needed : bool
        As for `read_survey`.

    Returns
    -------
    survey : Survey or None
        None where there is no readable survey file; its `faults` is empty.
    faults : FaultList
        Everything found wrong, and questions.
    """
    faults = FaultList()
    root = Path(folder)
    try:
        source = _opened(root)
        data = source.read(source.root / SURVEY_FILE, SURVEY_FILE, _MAXIMUM_BYTES)
        document, text = parse_toml(data, SURVEY_FILE)
    except FaultyInputError as error:
        faults.faults.extend(error.faults)
        return None, faults
    read = _Document(document, LineFinder(text), source, faults, frames_needed=frames_needed)
    return read.survey(), faults


def _opened(root: Path) -> Source:
    try:
        if not root.exists():
            raise _stop(root, "there is no such folder", "expected a survey folder")
        if not root.is_dir():
            raise _stop(root, "this is a file", f"expected the folder that holds {SURVEY_FILE}")
        resolved = root.resolve()
        if not (resolved / SURVEY_FILE).is_file():
            found = "is a folder" if (resolved / SURVEY_FILE).is_dir() else "is missing"
            raise _stop(
                root, f"{SURVEY_FILE} {found}",
                "expected a survey folder; `cladwatt start` makes one",
            )  # fmt: skip
    except SurveyFileError:
        raise  # a ValueError too
    except (OSError, ValueError) as error:
        raise _stop(root, f"it cannot be opened ({error})", "expected a survey folder") from None
    return Source(resolved)


def _stop(root: Path, found: str, expected: str) -> SurveyFileError:
    return SurveyFileError(Fault(str(root), "", found, expected))


@dataclass
class _Document:
    """The parsed survey file on its way to a survey."""

    document: Mapping[str, object]
    finder: LineFinder
    source: Source
    faults: FaultList
    tables: MaterialTables = field(default_factory=shipped_tables)
    frames_needed: bool = True

    def survey(self) -> Survey:
        self._check_top_level()
        self.tables = self._tables()
        head = self._section("survey")
        site_table = self._section("site")
        site = build_site(site_table, self.tables, self.faults)
        described = self._section("camera")
        response = read_response(self.source, described, self.faults)
        camera = build_camera(described, self.tables, self.faults, response)
        wide = {
            name: self._section(name, ask=False) for name in ("recording", "conditions", "format")
        }
        wide["conditions"] = read_pieces(wide["conditions"], self.faults)
        frames = read_frames(
            self._entries("frame"), head, site_table, wide, self.source, self.tables, self.faults,
            needed=self.frames_needed,
        )  # fmt: skip
        lines, dropped, written = self._lines(head, site)
        usable = {frame.id: frame for frame in frames.entries}
        regions = read_all_regions(
            self.source, frames.entries, frames.dropped, lines, dropped, self.tables, self.faults
        )
        check_dates(head, camera, frames.entries, self.faults)
        check_air_path(described.place, camera, frames.entries, self.faults)
        convection = checked_convection(self._section("model"), frames.entries, self.faults)
        wrong = check_temperatures(lines, written, usable, regions, frames.wide_air, self.faults)
        lines = {tag: line for tag, line in lines.items() if tag not in wrong}
        day = head.get("date")
        return Survey(
            root=self.source.root,
            name=head.text("name"),
            date=day if isinstance(day, date) else None,
            inspector=head.text("inspector"),
            site=site,
            camera=camera,
            lines=lines,
            frames=frames.entries,
            regions=tuple(region for region in regions if region.tag not in wrong),
            digests=dict(sorted(self.source.digests.items())),
            tables=self.tables,
            convection_model=convection,
            conditions=build_conditions(wide["conditions"], self.tables, FaultList()),
        )

    def _check_top_level(self) -> None:
        for name in self.document:
            if name in TOP_LEVEL:
                continue
            place = Place(SURVEY_FILE, line_of=lambda key: self.finder.line(key, 0, ""))
            line = self.finder.line(name, 0, "") or self.finder.line("", 0, name)
            homes = [part.name for part in SECTIONS if name in part.spellings]
            if homes and not isinstance(self.document[name], (dict, list)):
                found = f"{name} stands outside of any table"
                expected = f"expected it under [{homes[0]}]"
            else:
                found = f"there is no table {shown(name)}"
                expected = f"expected one of {', '.join(sorted(TOP_LEVEL))}"
                expected += nearest(name, TOP_LEVEL)
            self.faults.add(place, name, found, expected, line=line)

    def _tables(self) -> MaterialTables:
        folder = self.source.root / "tables"
        if not folder.is_dir():
            return shipped_tables()
        for path in sorted(folder.glob("*.csv")):
            self.source.digest(path)
        try:
            return load_tables(folder)
        except TableError as error:
            self.faults.faults.extend(error.faults)
            return shipped_tables()

    def _place(self, name: str, index: int, prefix: str) -> Place:
        return Place(SURVEY_FILE, prefix, lambda key: self.finder.line(name, index, key))

    def _section(self, name: str, *, ask: bool = True) -> Table:
        part = section(name)
        raw = self.document.get(name, {})
        return read_table(
            part,
            raw,
            self._place(name, 0, name),
            self.faults,
            ask=ask and name != "recording",
            defaults=self.tables.defaults,
        )

    def _entries(self, name: str) -> list[Entry]:
        """Return the raw tables of ``[[line]]`` or ``[[frame]]``."""
        raw = self.document.get(name, [])
        if not isinstance(raw, list):
            self.faults.add(
                self._place(name, 0, name), "", f"[{name}] is a single table",
                f"expected double brackets, [[{name}]], one table per {name}",
            )  # fmt: skip
            return []
        return [
            Entry(item, self._place(name, index, f"{name}[{index + 1}]"), {})
            for index, item in enumerate(raw)
        ]

    def _lines(
        self, head: Table, site: Site
    ) -> tuple[dict[str, Line], dict[str, str], dict[str, Table]]:
        """Return the usable lines, why others were dropped, and the tables of the usable."""
        entries = self._entries("line")
        entries += self._listed(head)
        tables = [self._line_table(entry) for entry in entries]
        twice = repeated(table.text("tag") for table, _ in tables if table.text("tag"))
        lines: dict[str, Line] = {}
        dropped: dict[str, str] = {}
        written: dict[str, Table] = {}
        for table, sound in tables:
            tag = table.text("tag")
            if tag.casefold() in twice and tag:
                self._tag_twice(table, [other for other, _ in tables])
                dropped[tag] = "its tag stands in the line list more than once"
                continue
            line = build_line(table, self.tables, self.faults, site_pressure=site.pressure)
            if line is None or not sound or not tag:
                dropped[tag] = "the line list is at fault there"
                continue
            lines[tag] = line
            written[tag] = table
        if not entries and not self.faults.stopping():
            self.faults.add(
                Place(SURVEY_FILE), "", "the survey has no lines",
                "expected [[line]] tables, or line_list in [survey]",
            )  # fmt: skip
        return lines, dropped, written

    def _listed(self, head: Table) -> list[Entry]:
        data, path = self.source.listed(head, "line_list", self.faults)
        if data is None:
            return []
        try:
            return line_entries_of_csv(data, path, self.faults)
        except SurveyFileError as error:
            self.faults.faults.extend(error.faults)
            return []

    def _line_table(self, entry: Entry) -> tuple[Table, bool]:
        raw_tag = entry.raw.get("tag") if isinstance(entry.raw, dict) else None
        tag = raw_tag.strip() if isinstance(raw_tag, str) and raw_tag.strip() else None
        place = replace(entry.place, tag=tag or f"{entry.place.prefix} (no tag)")
        if tag is not None:
            place = replace(place, prefix=f"{place.prefix} ({tag[:60]})")
        before = self.faults.errors
        table = read_table(
            section("line"),
            entry.raw,
            place,
            self.faults,
            ask=False,
            defaults=self.tables.defaults,
        )
        if self.faults.errors == before:
            self._ask_of_line(table)
        return table, self.faults.errors == before

    def _ask_of_line(self, table: Table) -> None:
        """Ask for what no default may replace, with what makes it needless left aside."""
        names = []
        inside = ("fluid_temperature", "wall_temperature", "steam_pressure")
        if not any(table.has(name) for name in inside):
            names.append("fluid_temperature")
        if not table.has("layers") and table.text("lagging_material").lower() != "none":
            if not table.has("lagging_material") and not table.has("lagging_conductivity"):
                names.append("lagging_material")
            if not table.has("lagging_thickness"):
                names.append("lagging_thickness")
        for name in names:
            key = table.key(name)
            self.faults.ask(
                table.place, key.usual,
                f"{key.usual} is missing and nothing is assumed in its place",
                'declare it or write "unknown"',
            )  # fmt: skip

    def _tag_twice(self, table: Table, others: Iterable[Table]) -> None:
        folded = table.text("tag").casefold()
        places = [
            _said(other.place)
            for other in others
            if other is not table and other.text("tag").casefold() == folded
        ]
        self.faults.add(
            table.place, "tag",
            f"the tag {shown(table.text('tag'))} is used more than once (also {places[0]})",
            "expected it once; letter case alone does not tell tags apart",
        )  # fmt: skip


def _said(place: Place) -> str:
    line = place.line_of("tag")
    return f"{place.path}:{line}" if line is not None else place.path
