"""One integration of a case from its start to what ends it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from service.balance.case import Case
from service.errors import Issue, UnderSpecified
from service.fluids.protocol import Fluid
from service.solvers.rate_form.assembly import assemble
from service.solvers.rate_form.events import watches
from service.solvers.rate_form.history import kind_of
from service.solvers.rate_form.integrate import RTOL, Course, Integration
from service.solvers.rate_form.plant import Plant
from service.solvers.rate_form.reading import Reader

LONGEST = 1e9
"""[s] about thirty years: where only conditions are given, the integration gives up there, and says so."""


@dataclass(slots=True)
class Done:
    """An integration with the plant it is of."""

    plant: Plant
    reader: Reader
    course: Course
    end: float
    trials: int = 1


def end_time(case: Case) -> float:
    """How long to integrate [s]. Raises UnderSpecified where nothing ends the case."""
    time = case.until.time
    if time is not None and time.value is not None:
        return time.value
    if case.until.conditions:
        return LONGEST
    text = "Nothing says when the transient ends."
    raise UnderSpecified(text, [Issue(text, "until.time", "Give a time or a condition under until.", "#/until")])


def integrate(
    case: Case,
    fluids: Mapping[str, Fluid | None],
    trial: Mapping[str, float],
    deadline: float | None,
    until: float | None = None,
    rtol: float = RTOL,
) -> Done:
    """Integrate with trial values [SI] of the unknown constants, to what ends the case or at most to `until` [s]."""
    plant, reader = assemble(case, fluids, trial, deadline)
    if plant is None:
        raise _open(reader, trial)
    for of, _ in case.until.conditions:
        kind_of(plant, of)
    end = end_time(case) if until is None else until
    breaks = [t for flow in plant.flows for t in flow.course.breaks]
    breaks += [t for exchange in plant.exchanges for t in exchange.course.breaks]
    course = Integration(plant, watches(case, plant), end, breaks, rtol).run()
    if course.ended_by == "time" and end == LONGEST and until is None and not _timed(case):
        course.ended_by = "stop"
        course.text = f"none of the conditions under until was reached within {LONGEST:g} s"
    return Done(plant, reader, course, end)


def _timed(case: Case) -> bool:
    return case.until.time is not None and case.until.time.value is not None


def _open(reader: Reader, trial: Mapping[str, float]) -> UnderSpecified:
    missing = [a for a in reader.unknowns if a not in trial]
    text = f"{', '.join(missing)} cannot be found: no target says what it has to achieve."
    hint = 'Give one entry under `targets` for it, for example {"of": "tank.T", "value": "80 degC", "at": "end"}.'
    return UnderSpecified(text, [Issue(text, missing[0] if missing else "", hint)])
