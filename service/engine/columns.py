"""Running a plan on columns of numbers: algebra in numpy, look-ups by column calls, iterations row by row."""

from __future__ import annotations

import math
import time
from collections.abc import Mapping, Sequence

import numpy as np

from service.engine.affine import is_algebraic, solve_affine
from service.engine.execute import Executor, Run
from service.engine.model import TINY, Column, Model, Value, Values
from service.engine.plan import EquationCloses, Iterated, Lookup, Plan, Rearranged, Step
from service.errors import CaseError, TimeBudgetExceeded

PIECE = 2_000
"""Rows looked up between two looks at the clock: some tenths of a second where a flash is slow."""


def run_columns(plan: Plan, columns: Mapping[int, Column], rows: int, deadline: float | None = None) -> Run:
    """Execute the plan with some given variables replaced by columns; a bad row costs only its own row."""
    values: Values = [math.nan] * len(plan.model.variables)
    for variable, value in plan.model.given.items():
        values[variable] = value
    for variable, column in columns.items():
        values[variable] = column
    done = Run(values)
    runner = _ColumnRunner(plan.model, done, rows, deadline)
    for step in plan.steps:
        runner.step(step)
    return done


class _ColumnRunner:
    """Steps on columns: algebra in numpy, look-ups by the node's own column call, iterations row by row."""

    def __init__(self, model: Model, done: Run, rows: int, deadline: float | None) -> None:
        self.model = model
        self.done = done
        self.values = done.values
        self.rows = rows
        self.deadline = deadline

    def step(self, step: Step) -> None:
        if isinstance(step, Lookup):
            self._lookup(step.node, step.inputs, step.found)
        elif isinstance(step, Rearranged):
            with np.errstate(all="ignore"):
                self.values[step.variable] = self._solve(step)
        else:
            self._iterate(step)

    def _solve(self, step: Rearranged) -> Value:
        try:
            return self.model.equations[step.equation].solve(step.variable, self.values)
        except ZeroDivisionError:
            return math.nan

    def _lookup(self, number: int, inputs: Sequence[str], found: Sequence[tuple[str, int]]) -> None:
        node = self.model.nodes[number]
        arguments = [self.values[node.members[name]] for name in inputs]
        if not any(isinstance(a, np.ndarray) for a in arguments):
            try:
                result = node.evaluate(tuple(inputs), tuple(float(a) for a in arguments))
            except CaseError as failure:
                for row in range(self.rows):
                    self.done.failures.setdefault(row, failure)
                result = dict.fromkeys((name for name, _ in found), math.nan)
            for name, variable in found:
                self.values[variable] = result[name]
            return
        columns = tuple(np.broadcast_to(np.asarray(a, dtype=float), (self.rows,)) for a in arguments)
        wanted = tuple(name for name, _ in found)
        if not wanted:
            return
        results: dict[str, Column] = {name: np.full(self.rows, math.nan) for name in wanted}
        for first in range(0, self.rows, PIECE):
            if self.deadline is not None and time.monotonic() > self.deadline:
                raise TimeBudgetExceeded(
                    f"The time budget was used up at row {first} of {self.rows}.",
                    hint="Send fewer rows at a time, or use the command line.",
                )
            piece = slice(first, first + PIECE)
            part, failures = node.evaluate_columns(tuple(inputs), tuple(c[piece] for c in columns), wanted)
            for row, problem in failures.items():
                self.done.failures.setdefault(first + row, problem)
            for name in wanted:
                results[name][piece] = part[name]
        for name, variable in found:
            self.values[variable] = results[name]

    def _iterate(self, step: Iterated) -> None:
        todo = list(range(self.rows))
        outputs = {v: np.full(self.rows, math.nan) for v in step.variables}
        if is_algebraic(step):
            holds = solve_affine(self.model, step, self.values, self.rows) > 0
            outputs = {v: np.where(holds, self.values[v], math.nan) for v in step.variables}
            todo = np.flatnonzero(~holds).tolist()
        row_values: Values = list(self.values)
        varying = [(v, a) for v, a in enumerate(self.values) if isinstance(a, np.ndarray)]
        executor = Executor(self.model, row_values, self.deadline)
        for row in todo:
            if row in self.done.failures:
                continue
            for v, column in varying:
                row_values[v] = float(column[row])
            try:
                executor.iterate(step)
            except TimeBudgetExceeded:
                raise
            except CaseError as failure:
                self.done.failures.setdefault(row, failure)
                executor.warm.clear()
                continue
            for v, out in outputs.items():
                out[row] = row_values[v]
        for v, out in outputs.items():
            self.values[v] = out


def agreement_columns(plan: Plan, done: Run, rows: int) -> Column:
    """Largest relative disagreement per row among the surplus equations (NaN rows stay NaN)."""
    worst = np.zeros(rows)
    with np.errstate(all="ignore"):
        for closing in plan.surplus:
            if isinstance(closing, EquationCloses):
                equation = plan.model.equations[closing.equation]
                relative = abs(equation.residual(done.values)) / equation.scale(done.values)
            else:
                relative = _member_disagreement(plan.model, closing.node, closing.inputs, closing.member, done, rows)
            worst = np.fmax(worst, np.broadcast_to(relative, (rows,)))
    return worst


def _member_disagreement(
    model: Model, number: int, inputs: tuple[str, ...], member: str, done: Run, rows: int
) -> Column:
    node = model.nodes[number]
    arguments = tuple(
        np.broadcast_to(np.asarray(done.values[node.members[name]], dtype=float), (rows,)) for name in inputs
    )
    found, _ = node.evaluate_columns(inputs, arguments, (member,))
    held = done.values[node.members[member]]
    size = np.maximum(np.maximum(np.abs(found[member]), np.abs(held)), TINY)
    return np.asarray(np.abs(found[member] - held) / size, dtype=float)
