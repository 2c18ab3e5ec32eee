"""Columns over time, read from the path, and the extremes on the way, which do not depend on the points reported."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from scipy.optimize import minimize_scalar

from service.balance.case import Case
from service.balance.properties import CONTENT, STATE, STREAM, TOTAL, TRANSFER, Trait
from service.errors import CaseError, Issue, SchemaViolation
from service.solvers.rate_form.integrate import Course
from service.solvers.rate_form.path import Path
from service.solvers.rate_form.plant import Moment, Plant, Vector

Extreme = tuple[float, float, float, float]

PER_STEP = 3
"""Points within a step at which extremes are looked for, beside its ends."""


def kind_of(plant: Plant, address: str) -> str:
    """The quantity kind of an address over time. Raises SchemaViolation for one that does not exist."""
    item, _, name = address.partition(".")
    table: Mapping[str, Trait] = {}
    if item in {v.id for v in plant.vessels} | {v.boundary for v in plant.vessels}:
        name = name.removeprefix("final.")
        table = {**STATE, **CONTENT, "wall.T": STATE["T"]}
        known = name in table and name != "expansion_work"
        known = known and (name != "wall.T" or bool(plant.walls))
    elif item in {f.id for f in plant.flows}:
        table = {**STATE, **STREAM, **TOTAL}
        known = name in table
    else:
        table = TRANSFER
        known = item in {e.id for e in plant.exchanges} and name in ("rate", "energy")
    if not known:
        text = f"{address} is no quantity that changes with time in this case."
        hint = "There are tank.p, tank.T, tank.mass, tank.x, tank.wall.T, stream.mass_flow, stream.mass, transfer.rate."
        raise SchemaViolation(text, [Issue(text, address, hint)])
    return table[name].kind


def columns_of(case: Case, plant: Plant) -> tuple[str, ...]:
    """The columns asked for; where none are, those that tell most."""
    if case.history.columns:
        return case.history.columns
    found: list[str] = []
    for vessel in plant.vessels:
        rigid = vessel.volume is not None
        found += [f"{vessel.id}.{name}" for name in (("p", "T", "mass") if rigid else ("T", "mass"))]
        found += [f"{vessel.id}.wall.T"] if vessel.wall is not None else []
    found += [f"{flow.id}.mass_flow" for flow in plant.flows]
    return (*found, *(f"{exchange.id}.rate" for exchange in plant.exchanges))


@dataclass(slots=True)
class History:
    """times [s] and columns [SI], and the extremes of each address with their times."""

    times: Vector
    columns: dict[str, Vector]
    extremes: dict[str, Extreme]


def history(case: Case, plant: Plant, course: Course, columns: Sequence[str]) -> History:
    """Reads the path at equally spaced times, and looks for extremes over all its steps."""
    # extremes first: what is found next is told from where the last throat was, to a part in 1e10
    extremes = _extremes(plant, course, list(dict.fromkeys((*columns, *_always(plant)))))
    times = np.linspace(0.0, course.t, max(case.history.points, 2))
    moments = [_moment(plant, course, float(t)) for t in times]
    found = {address: np.array([plant.value(address, moment, y) for moment, y in moments]) for address in columns}
    return History(times, found, extremes)


def _always(plant: Plant) -> list[str]:
    """What is watched for extremes even where it is no column."""
    out = [f"{v.id}.{name}" for v in plant.vessels for name in ("p", "T", "mass")]
    return out + [f"{v.id}.wall.T" for v in plant.vessels if v.wall is not None]


def _moment(plant: Plant, course: Course, t: float) -> tuple[Moment, Vector]:
    if not course.path.pieces or t >= course.t:
        y, within = course.y, course.path.pieces[-1].within if course.path.pieces else plant.within
    else:
        y, within = course.path.at(t)
    return plant.moment(t, y, within), y


def _extremes(plant: Plant, course: Course, addresses: Sequence[str]) -> dict[str, Extreme]:
    times = _grid(course.path) or [0.0]
    rows = []
    for t in times:
        try:
            moment, y = _moment(plant, course, t)
            rows.append([plant.value(address, moment, y) for address in addresses])
        except CaseError:  # a polynomial strays out of the range between two good ends
            rows.append([math.nan] * len(addresses))
    table = np.array(rows)
    found = {}
    for i, address in enumerate(addresses):
        column = table[:, i]
        if not np.isfinite(column).any():
            continue
        low = _refined(plant, course, address, times, column, 1.0)
        high = _refined(plant, course, address, times, column, -1.0)
        found[address] = (*low, *high)
    return found


def _grid(path: Path) -> list[float]:
    out: list[float] = []
    for piece in path.pieces:
        width = (piece.t1 - piece.t0) / (PER_STEP + 1)
        out += [piece.t0 + k * width for k in range(PER_STEP + 1)]
    return [*out, path.end] if out else []


def _refined(
    plant: Plant, course: Course, address: str, times: Sequence[float], column: Vector, sign: float
) -> tuple[float, float]:
    """(value [SI], time [s]) of the least (sign 1) or largest (−1); between the points where it lies there."""
    place = int(np.nanargmin(sign * column))
    best = float(column[place]), float(times[place])
    if not 0 < place < len(times) - 1 or not np.isfinite(column[place - 1 : place + 2]).all():
        return best
    if column[place - 1] == column[place] == column[place + 1]:
        return best

    def height(t: float) -> float:
        try:
            moment, y = _moment(plant, course, t)
        except CaseError:
            return math.inf
        return sign * plant.value(address, moment, y)

    bounds = (times[place - 1], times[place + 1])
    if not bounds[0] < bounds[1]:
        return best
    found = minimize_scalar(height, bounds=bounds, method="bounded", options={"xatol": 1e-6 * (bounds[1] - bounds[0])})
    return (sign * float(found.fun), float(found.x)) if found.fun < sign * best[0] else best
