"""The solvers behind the one case language; `case.system` picks one."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
import numpy.typing as npt

from service.balance.case import Case
from service.balance.solution import SeriesResult, Solution, StructureReport
from service.errors import SchemaViolation
from service.fluids.catalogue import FluidCatalogue
from service.solvers import steady_flow


def solve(case: Case, catalogue: FluidCatalogue, deadline: float | None = None) -> Solution:
    """The solved case [SI]. Raises CaseError; `deadline` is a time.monotonic() value."""
    _only_steady_flow(case)
    return steady_flow.solve(case, catalogue, deadline)


def check(case: Case, catalogue: FluidCatalogue) -> StructureReport:
    """The structural count of a case: what can be found, what stays open, what is given twice."""
    _only_steady_flow(case)
    return steady_flow.check(case, catalogue)


def series(
    case: Case,
    catalogue: FluidCatalogue,
    readings: Mapping[str, npt.NDArray[np.float64]],
    report: Sequence[str],
    deadline: float | None = None,
) -> SeriesResult:
    """The case over columns of readings [SI]; see `steady_flow.series`."""
    _only_steady_flow(case)
    return steady_flow.series(case, catalogue, readings, report, deadline)


def _only_steady_flow(case: Case) -> None:
    if case.system != "steady_flow":
        raise SchemaViolation(
            f"This version solves steady-flow cases only, not {case.system}.", hint='Use "system": "steady_flow".'
        )
