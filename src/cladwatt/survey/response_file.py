"""The spectral response of a camera from a CSV beside the survey file."""

from cladwatt.errors import SurveyFileError
from cladwatt.survey.fault_list import FaultList, Place
from cladwatt.survey.keys import Key, Section
from cladwatt.survey.list_csv import cell_value, read_rows
from cladwatt.survey.survey_source import Source
from cladwatt.survey.table_reader import Table
from cladwatt.survey.values import Problem, check_range, read_number

__all__ = ["Response", "half_response_band", "parse_response", "read_response"]

Response = tuple[tuple[float, ...], tuple[float, ...]]
"""Wavelengths [m], increasing, and the relative response at each."""

_SECTION = Section(
    "a spectral response",
    "",
    (
        Key(
            "wavelength", "number", "Wavelength", "wavelength", 1.5e-6, 30e-6, required=True
        ),
        Key("response", "number", "Relative response", lower=0.0, upper=1e6, required=True),
    ),
)  # fmt: skip
_FEWEST, _MOST = 3, 20_000


def read_response(source: Source, camera: Table, faults: FaultList) -> Response | None:
    """Return the response the camera names; None where it names none or it is faulty.

    Parameters
    ----------
    source : Source
        The survey folder.
    camera : Table
        Read by the keys of ``camera``.
    faults : FaultList
        Gets what is wrong with the file, or beside it.
    """
    data, path = source.listed(camera, "spectral_response", faults)
    if data is None:
        return None
    for name in ("band_lower", "band_upper"):
        if camera.has(name):
            faults.add(
                camera.place, camera.spelling(name),
                f"spectral_response and {camera.spelling(name)} are both given",
                "expected one of them: the file says where the band ends",
            )  # fmt: skip
            return None
    try:
        return parse_response(data, path, faults)
    except SurveyFileError as error:
        faults.faults.extend(error.faults)
        return None


def parse_response(data: bytes, path: str, faults: FaultList) -> Response | None:
    """Return a response from the text of its file.

    Parameters
    ----------
    data : bytes
        CSV with a head row ``wavelength_um`` (or ``wavelength_nm``) and ``response``.
    path : str
        Name in messages.
    faults : FaultList
        Gets what is wrong with a row.

    Returns
    -------
    (wavelengths, responses) or None
        None where a fault was found. [m], [-]

    Raises
    ------
    SurveyFileError
        If the file as a whole cannot be used.
    """
    rows = read_rows(data, path, _SECTION, frozenset(), faults)
    before = faults.errors
    whole = Place(path)
    if not _FEWEST <= len(rows) <= _MOST:
        faults.add(
            whole, "", f"the response has {len(rows)} points",
            f"expected {_FEWEST} to {_MOST}, with the wavelength rising",
        )  # fmt: skip
        return None
    points: list[tuple[float, float]] = []
    for row in rows:
        values = {}
        for name, text in row.cells.items():
            key, unit, _ = _SECTION.spellings[name]
            raw = cell_value(key, text, decimal_comma=row.decimal_comma)
            try:
                value = unit.to_si(read_number(name, raw))
                check_range(key, unit, name, raw, value)
                values[key.name] = value
            except Problem as problem:
                faults.add(whole, name, problem.found, problem.expected, line=row.line)
        if faults.errors > before:
            return None
        if len(values) < 2:
            faults.add(
                whole, "", "a cell is empty", "expected wavelength and response", line=row.line
            )
            return None
        points.append((values["wavelength"], values["response"]))
        if len(points) > 1 and points[-1][0] <= points[-2][0]:
            faults.add(
                whole, "wavelength",
                f"{points[-1][0] * 1e6:g} µm follows {points[-2][0] * 1e6:g} µm",
                "expected the wavelength to rise from row to row", line=row.line,
            )  # fmt: skip
            return None
    if max(response for _, response in points) <= 0:
        faults.add(whole, "response", "the response is 0 everywhere", "expected some above 0")
        return None
    return tuple(wave for wave, _ in points), tuple(response for _, response in points)


def half_response_band(response: Response) -> tuple[float, float]:
    """Return the outermost wavelengths at which the response passes half of its largest. [m]"""
    waves, values = response
    half = max(values) / 2
    inside = [number for number, value in enumerate(values) if value >= half]
    first, last = inside[0], inside[-1]

    def crossing(outer: int, inner: int) -> float:
        share = (half - values[outer]) / (values[inner] - values[outer])
        return waves[outer] + share * (waves[inner] - waves[outer])

    lower = waves[0] if first == 0 else crossing(first - 1, first)
    upper = waves[-1] if last == len(waves) - 1 else crossing(last + 1, last)
    return lower, upper
