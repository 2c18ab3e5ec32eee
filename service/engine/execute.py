"""Running a plan on one set of numbers (`columns` runs it on many)."""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

import numpy as np

from service.engine.affine import is_algebraic, solve_affine
from service.engine.model import TINY, Column, Model, Values
from service.engine.plan import Closing, EquationCloses, Iterated, Lookup, Plan, Rearranged, Step
from service.engine.roots import ACCEPTED, Nearest, bracketed_root, damped_newton
from service.errors import CaseError, Issue, NoSolution, NotConverged, TimeBudgetExceeded, UnderSpecified


@dataclass(slots=True)
class Run:
    """What a run found. values: one entry a variable (NaN where undetermined); lookups: node → all its members."""

    values: Values
    lookups: dict[int, Mapping[str, float]] = field(default_factory=dict)
    residuals: dict[int, float] = field(default_factory=dict)
    """Step number → relative residual of an iterated step."""
    used: dict[int, Iterated] = field(default_factory=dict)
    """Step number → the other way of tearing its block, where that one found the solution."""
    failures: dict[int, CaseError] = field(default_factory=dict)
    """Row → why it has no answer (column runs only)."""


class Executor:
    """Executes steps on one shared list of values; `deadline` is a time.monotonic() value or None."""

    def __init__(self, model: Model, values: Values, deadline: float | None) -> None:
        self.model = model
        self.values = values
        self.deadline = deadline
        self.lookups: dict[int, Mapping[str, float]] = {}
        self.warm: dict[int, float] = {}
        self.used: dict[int, Iterated] = {}

    def step(self, step: Step) -> float:
        """Do one step on scalars; returns its relative residual (0 where nothing was iterated)."""
        if isinstance(step, Lookup):
            self.lookup(step)
        elif isinstance(step, Rearranged):
            self.values[step.variable] = self._rearranged(step)
        else:
            return self.iterate(step)
        return 0.0

    def lookup(self, step: Lookup) -> None:
        node = self.model.nodes[step.node]
        members = node.members
        found = node.evaluate(step.inputs, tuple(self.values[members[name]] for name in step.inputs))
        self.lookups[step.node] = found
        for name, variable in step.found:
            self.values[variable] = found[name]

    def _rearranged(self, step: Rearranged) -> float:
        equation = self.model.equations[step.equation]
        try:
            value = float(equation.solve(step.variable, self.values))
        except ZeroDivisionError:
            value = math.nan
        if not math.isfinite(value):
            name = self.model.variables[step.variable].name
            raise NoSolution(
                f"{name} cannot be found from the {equation.name}: with the numbers given, the equation "
                f"{equation.text(self._name, None, self.values)} has no finite, real solution.",
                address=name,
                hint="Check the quantities in this equation; one of them is zero, or has the wrong size or direction.",
            )
        return value

    def _name(self, variable: int) -> str:
        return self.model.variables[variable].name

    def closing(self, closing: Closing) -> tuple[float, float]:
        """(residual, scale) of a closing with the present values."""
        if isinstance(closing, EquationCloses):
            equation = self.model.equations[closing.equation]
            return float(equation.residual(self.values)), float(equation.scale(self.values))
        looked_up = self.lookups[closing.node][closing.member]
        held = self.values[closing.variable]
        return looked_up - held, max(abs(looked_up), abs(held), TINY)

    def iterate(self, step: Iterated) -> float:
        if self.deadline is not None and time.monotonic() > self.deadline:
            raise TimeBudgetExceeded("The time budget was used up before the case was solved.")
        if not (is_algebraic(step) and self._linear(step)):
            if len(step.assumed) > 1:
                self._simultaneous(step)
            elif step.instead is None:
                self._bracketed(step)
            else:
                return self._either(step, step.instead)
        return self._settled(step)

    def _either(self, step: Iterated, instead: Iterated) -> float:
        """The block torn in its first way, and in the other where that finds nothing."""
        try:
            self._bracketed(step)
        except NoSolution as failure:
            try:
                self._bracketed(instead)
            except NoSolution:
                raise failure from None
            self.used[id(step)] = instead
            return self._settled(instead)
        return self._settled(step)

    def _settled(self, step: Iterated) -> float:
        """Remember what was assumed, for the next row; returns the residual."""
        residual = 0.0
        for closing in step.closings:
            r, scale = self.closing(closing)
            residual = max(residual, abs(r) / scale)
        for variable in step.assumed:
            self.warm[variable] = self.values[variable]
        return residual

    def _linear(self, step: Iterated) -> bool:
        """Try the block as a linear one; leaves floats behind where it succeeds."""
        try:
            holds = bool(solve_affine(self.model, step, self.values, 1)[0])
        except ZeroDivisionError:
            return False
        if holds:
            for variable in step.variables:
                self.values[variable] = float(np.asarray(self.values[variable]).item())
            if len(step.assumed) == 1 and step.assumed[0] not in self.warm:
                root = self.values[step.assumed[0]]
                self._require_influence(step, self._missing(step), root)
                self._missing(step)(root)
        return holds

    def _missing(self, step: Iterated) -> Callable[[float], float]:
        """What the closing of a block with one assumed variable lacks, as a function of that variable."""

        def function(x: float) -> float:
            self.values[step.assumed[0]] = x
            return self._evaluate(step)[0]

        return function

    def _evaluate(self, step: Iterated) -> list[float]:
        if self.deadline is not None and time.monotonic() > self.deadline:
            raise _OutOfTime
        for inner in step.inner:
            self.step(inner)
        out = []
        for closing in step.closings:
            residual, scale = self.closing(closing)
            out.append(residual / scale)
        return out

    def _start(self, variable: int) -> float | None:
        v = self.model.variables[variable]
        return self.warm.get(variable, v.near if v.near is not None else v.start)

    def _bracketed(self, step: Iterated) -> None:
        (variable,) = step.assumed
        v = self.model.variables[variable]
        function = self._missing(step)
        start, warm = self._start(variable), variable in self.warm
        width = (0.01 if warm else 0.05) * v.scale
        trivial = 1e-9 * v.scale if v.zero_is_trivial else -1.0
        try:
            root = bracketed_root(function, v.lower, v.upper, start, width, trivial, self._distance(step, function))
            if isinstance(root, Nearest):
                raise self._no_root(step, v.name, root)
            if not warm:
                self._require_influence(step, function, root)
        except _OutOfTime:
            raise _budget(v.name) from None
        function(root)

    def _distance(self, step: Iterated, function: Callable[[float], float]) -> Callable[[float], float] | None:
        """How far a solution is from what the user expects of the variables that the block finds on the way."""
        steered = [v for v in step.variables if v not in step.assumed and self.model.variables[v].steered]
        if not steered:
            return None

        def distance(root: float) -> float:
            function(root)
            total = 0.0
            for number in steered:
                v, value = self.model.variables[number], self.values[number]
                if not v.lower <= value <= v.upper:
                    return math.inf
                total += abs(value - v.near) / v.scale if v.near is not None else 0.0
            return total

        return distance

    def _require_influence(self, step: Iterated, function: Callable[[float], float], root: float) -> None:
        """Raise UnderSpecified where another value, a hundredth away, satisfies the equation as well."""
        v = self.model.variables[step.assumed[0]]
        away = 0.01 * (abs(root) or v.scale)
        for other in (root - away, root + away):
            if not v.lower <= other <= v.upper:
                continue
            try:
                flat = abs(function(other)) <= ACCEPTED
            except CaseError:
                continue
            if flat:
                what = self._what(step.closings[0])
                detail = f"{v.name} cannot be found: the {what} holds for other values of it too."
                hint = "Give its value, or something that depends on it."
                raise UnderSpecified(detail, [Issue(detail, v.name, hint)])

    def _what(self, closing: Closing) -> str:
        if isinstance(closing, EquationCloses):
            return self.model.equations[closing.equation].name
        return self.model.nodes[closing.node].name

    def _no_root(self, step: Iterated, name: str, nearest: Nearest) -> NoSolution:
        what = self._what(step.closings[0])
        if math.isnan(nearest.argument):
            reason = nearest.refusal.detail if nearest.refusal else "nowhere could the equations be evaluated."
            return NoSolution(f"No value of {name} satisfies the {what}: {reason}", address=name)
        summary = f"No value of {name} satisfies the {what}."
        near = (
            f"{summary} The nearest miss is at {{0}}, where the equation is still off by {nearest.residual:.3g} of its "
            "largest term."
        )
        if nearest.refusal is not None:
            refused = nearest.refusal.detail.replace("{", "{{").replace("}", "}}")
            near += f" Elsewhere the search met: {refused}"
        hint = "The given values ask for more than physics allows here: relax one, or bound the search with `between`."
        return NoSolution(summary, [Issue(near, name, hint, amounts=((name, nearest.argument),))])

    def _simultaneous(self, step: Iterated) -> None:
        variables = [self.model.variables[v] for v in step.assumed]

        def function(point: Column) -> Column:
            for variable, x in zip(step.assumed, point, strict=True):
                self.values[variable] = float(x)
            return np.array(self._evaluate(step))

        start = np.array([self._first_guess(v) for v in step.assumed])
        lower = np.array([v.lower for v in variables])
        upper = np.array([v.upper for v in variables])
        scale = np.array([v.scale for v in variables])
        try:
            point, residual = damped_newton(function, start, lower, upper, scale)
            if residual <= ACCEPTED:
                function(point)
        except _OutOfTime:
            raise _budget(variables[0].name) from None
        if residual > ACCEPTED:
            names = ", ".join(v.name for v in variables)
            raise NotConverged(
                f"The equations that tie {names} together were not satisfied; the best point found is still off by "
                f"{residual:.3g} of the largest term.",
                [
                    Issue("assumed while solving", v.name, "Give `near` or `between` for this quantity.")
                    for v in variables
                ],
            )

    def _first_guess(self, variable: int) -> float:
        start = self._start(variable)
        if start is not None:
            return start
        v = self.model.variables[variable]
        return 0.5 * (v.lower + v.upper) if math.isfinite(v.lower) and math.isfinite(v.upper) else v.scale


class _OutOfTime(Exception):
    """The deadline passed inside of an iteration."""


def _budget(name: str) -> TimeBudgetExceeded:
    return TimeBudgetExceeded(
        f"The time budget was used up while {name} was being iterated.", address=name,
        hint="Start nearer (`near`), bound the search (`between`), or ask for less at once.",
    )  # fmt: skip


def run(plan: Plan, deadline: float | None = None) -> Run:
    """Execute the plan on the scalars that the model gives. Raises CaseError where a step cannot be done."""
    values: Values = [math.nan] * len(plan.model.variables)
    for variable, value in plan.model.given.items():
        values[variable] = value
    executor = Executor(plan.model, values, deadline)
    residuals = {}
    for number, step in enumerate(plan.steps):
        residual = executor.step(step)
        if isinstance(step, Iterated):
            residuals[number] = residual
    used = {i: executor.used[id(step)] for i, step in enumerate(plan.steps) if id(step) in executor.used}
    return Run(values, executor.lookups, residuals, used=used)


def surplus_residuals(plan: Plan, done: Run) -> list[tuple[Closing, float]]:
    """Relative disagreement of everything that is given more than once (scalar runs)."""
    executor = Executor(plan.model, done.values, None)
    executor.lookups = done.lookups
    out = []
    for closing in plan.surplus:
        residual, scale = executor.closing(closing)
        out.append((closing, abs(residual) / scale))
    return out
