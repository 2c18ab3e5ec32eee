"""Transients in their rate form: integrated in time from the first state to the time or the condition that ends it."""

from __future__ import annotations

from service.advisories import advise
from service.balance.accumulation import refuse_humid_air
from service.balance.builder import BuiltCase
from service.balance.case import Case
from service.balance.solution import Solution
from service.engine.execute import Run
from service.fluids.catalogue import FluidCatalogue
from service.solvers.pipeline import resolve_fluids
from service.solvers.rate_form import shooting
from service.solvers.rate_form.telling import tell


def solve(case: Case, catalogue: FluidCatalogue, deadline: float | None = None) -> Solution:
    """The solved case [SI]; see `service.solvers.rate_form`. `deadline` is a time.monotonic() value.

    Where a vessel freezes, empties or leaves its property model, the solution ends there and `transient.stopped` says
    when and why. Raises CaseError: TimeBudgetExceeded says how far the integration had come.
    """
    fluids = resolve_fluids(case, catalogue)
    refuse_humid_air(case, fluids)
    done = shooting.solve(case, fluids, deadline)
    solution = tell(case, fluids, done)
    # the rules look at the case, its states and its course over time; there is no model of equations behind these
    solution.advisories = advise(BuiltCase(case, fluids), Run([]), solution)
    return solution
