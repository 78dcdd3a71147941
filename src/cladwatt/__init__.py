"""From infrared frames of lagged pipes to losses, damaged stretches and honest intervals.

>>> import cladwatt
>>> survey = cladwatt.read_survey("sample_data")  # doctest: +SKIP
>>> assessment = cladwatt.assess(survey)  # doctest: +SKIP
>>> cladwatt.regions_table(assessment)  # doctest: +SKIP

Importing the package loads nothing heavy; every name below is loaded when it is first used.
"""

import sys
from importlib import import_module
from types import ModuleType
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from cladwatt.assess import assess
    from cladwatt.errors import CladwattError, Fault
    from cladwatt.report.html_report import write_report
    from cladwatt.report.tables import (
        assumptions_table,
        components_table,
        left_out_table,
        lines_table,
        regions_table,
        stations_table,
        stretches_table,
    )
    from cladwatt.results.assessment import Assessment, Settings
    from cladwatt.results.store import read_results, write_results
    from cladwatt.survey.checking import check_survey
    from cladwatt.survey.survey import Survey
    from cladwatt.survey.survey_file import read_survey
    from cladwatt.synthetic.sample import write_sample

    __version__: str

__all__ = [
    "Assessment",
    "CladwattError",
    "Fault",
    "Settings",
    "Survey",
    "__version__",
    "assess",
    "assumptions_table",
    "check_survey",
    "components_table",
    "left_out_table",
    "lines_table",
    "read_results",
    "read_survey",
    "regions_table",
    "stations_table",
    "stretches_table",
    "write_report",
    "write_results",
    "write_sample",
]

_HOMES = {
    "Assessment": "cladwatt.results.assessment",
    "CladwattError": "cladwatt.errors",
    "Fault": "cladwatt.errors",
    "Settings": "cladwatt.results.assessment",
    "Survey": "cladwatt.survey.survey",
    "assess": "cladwatt.assess",
    "assumptions_table": "cladwatt.report.tables",
    "check_survey": "cladwatt.survey.checking",
    "components_table": "cladwatt.report.tables",
    "left_out_table": "cladwatt.report.tables",
    "lines_table": "cladwatt.report.tables",
    "read_results": "cladwatt.results.store",
    "read_survey": "cladwatt.survey.survey_file",
    "regions_table": "cladwatt.report.tables",
    "stations_table": "cladwatt.report.tables",
    "stretches_table": "cladwatt.report.tables",
    "write_report": "cladwatt.report.html_report",
    "write_results": "cladwatt.results.store",
    "write_sample": "cladwatt.synthetic.sample",
}


def __getattr__(name: str) -> object:
    if name == "__version__":
        from importlib.metadata import version

        value: object = version("cladwatt")
    elif name in _HOMES:
        value = getattr(import_module(_HOMES[name]), name)
    else:
        raise AttributeError(f"module 'cladwatt' has no attribute {name!r}")
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted(set(globals()) | set(__all__))


class _Package(ModuleType):
    """The package itself; a public function wins over the module of the same name.

    The import system binds every submodule to its package, so importing ``cladwatt.assess`` would
    put a module where ``cladwatt.assess(survey)`` expects the function.
    """

    def __setattr__(self, name: str, value: object) -> None:
        if not (name in _HOMES and isinstance(value, ModuleType)):
            super().__setattr__(name, value)


sys.modules[__name__].__class__ = _Package
