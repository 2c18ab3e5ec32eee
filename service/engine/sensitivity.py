"""Sensitivities of everything found to what was given: tangents carried through the plan, blocks differentiated
implicitly."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np
import numpy.typing as npt

from service.engine.execute import Run
from service.engine.plan import Closing, EquationCloses, Lookup, MemberCloses, Plan, Rearranged, Step

Tangent = npt.NDArray[np.float64]
Row = dict[int, float]
"""Coefficients of one linearised equation: Σ coefficient · d(variable) = 0."""


def sensitivities(plan: Plan, done: Run, inputs: Sequence[int]) -> dict[int, Tangent]:
    """For each variable found: its derivative with respect to each input, in SI, at the solution of a scalar run."""
    zero = np.zeros(len(inputs))
    tangents: dict[int, Tangent] = dict.fromkeys(plan.model.given, zero)
    for position, variable in enumerate(inputs):
        unit = zero.copy()
        unit[position] = 1.0
        tangents[variable] = unit
    for step in plan.steps:
        rows = list(_rows(plan, done, step))
        unknown = [v for v in _found(step) if v not in tangents]
        _solve_rows(rows, unknown, tangents)
    return tangents


def _found(step: Step) -> Sequence[int]:
    if isinstance(step, Rearranged):
        return (step.variable,)
    return [v for _, v in step.found] if isinstance(step, Lookup) else step.variables


def _solve_rows(rows: list[Row], unknown: list[int], tangents: dict[int, Tangent]) -> None:
    """Solve the linearised equations for the tangents of the unknowns (least squares where they are dependent)."""
    if not unknown:
        return
    place = {v: i for i, v in enumerate(unknown)}
    size = len(next(iter(tangents.values())))
    matrix = np.zeros((len(rows), len(unknown)))
    right = np.zeros((len(rows), size))
    for r, row in enumerate(rows):
        largest = max(map(abs, row.values())) or 1.0
        for variable, coefficient in row.items():
            if variable in place:
                matrix[r, place[variable]] += coefficient / largest
            else:
                right[r] -= coefficient / largest * tangents[variable]
    scale = np.max(np.abs(matrix), axis=0)
    scale[scale == 0.0] = 1.0
    solved = np.linalg.lstsq(matrix / scale, right, rcond=None)[0] / scale[:, None]
    for variable, i in place.items():
        tangents[variable] = solved[i]


def _rows(plan: Plan, done: Run, step: Step) -> Iterator[Row]:
    if isinstance(step, Rearranged):
        yield plan.model.equations[step.equation].partials(done.values)
    elif isinstance(step, Lookup):
        members = tuple(name for name, _ in step.found)
        yield from _member_rows(plan, done, step.node, step.inputs, dict(step.found), members)
    else:
        for inner in step.inner:
            yield from _rows(plan, done, inner)
        for closing in step.closings:
            yield from _closing_rows(plan, done, closing)


def _closing_rows(plan: Plan, done: Run, closing: Closing) -> Iterator[Row]:
    if isinstance(closing, EquationCloses):
        yield plan.model.equations[closing.equation].partials(done.values)
    else:
        assert isinstance(closing, MemberCloses)
        members = (closing.member,)
        yield from _member_rows(plan, done, closing.node, closing.inputs, {closing.member: closing.variable}, members)


def _member_rows(
    plan: Plan, done: Run, number: int, inputs: tuple[str, ...], variables: dict[str, int], of: tuple[str, ...]
) -> Iterator[Row]:
    node = plan.model.nodes[number]
    arguments = tuple(float(done.values[node.members[name]]) for name in inputs)
    for member, slopes in node.partials(inputs, arguments, of).items():
        row: Row = {variables[member]: 1.0}
        for name, slope in zip(inputs, slopes, strict=True):
            row[node.members[name]] = row.get(node.members[name], 0.0) - slope
        yield row
