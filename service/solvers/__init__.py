"""The solvers behind the one case language; `case.system` picks one."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
import numpy.typing as npt

from service.balance.case import Case
from service.balance.solution import SeriesResult, Solution, StructureReport
from service.errors import SchemaViolation
from service.fluids.catalogue import FluidCatalogue
from service.solvers import pipeline, transient


def solve(case: Case, catalogue: FluidCatalogue, deadline: float | None = None) -> Solution:
    """The solved case [SI]. Raises CaseError; `deadline` is a time.monotonic() value."""
    if _is_rate_form(case):
        return transient.solve(case, catalogue, deadline)
    return pipeline.solve(case, catalogue, deadline)


def check(case: Case, catalogue: FluidCatalogue) -> StructureReport:
    """The structural count of a case: what can be found, what stays open, what is given twice."""
    _no_rate_form(case)
    return pipeline.check(case, catalogue)


def series(
    case: Case,
    catalogue: FluidCatalogue,
    readings: Mapping[str, npt.NDArray[np.float64]],
    report: Sequence[str],
    deadline: float | None = None,
) -> SeriesResult:
    """The case over columns of readings [SI]; see `pipeline.series`."""
    _no_rate_form(case)
    return pipeline.series(case, catalogue, readings, report, deadline)


def _is_rate_form(case: Case) -> bool:
    return case.system == "transient" and case.form == "rate"


def _no_rate_form(case: Case) -> None:
    if _is_rate_form(case):
        raise SchemaViolation(
            "This cannot be done for a transient in its rate form.",
            hint='Use "form": "integrated", or solve it as one case.',
        )
