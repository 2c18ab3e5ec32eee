"""What the engine works on: variables, equations between them, and nodes.

    Variable    one number (or one column of numbers), with physical bounds and a scale
    Polynomial  a sum of monomials that has to vanish: rearranged for any variable by itself
    Function    any other residual, with the explicit forms that somebody wrote for it
    Node        a set of variables of which a fixed number fixes all the others (a surface of that dimension)

A value is a float, or a numpy column when the plan is run over many rows; equations are written so that both work.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Protocol, TypeAlias

import numpy as np
import numpy.typing as npt

from service.errors import CaseError

Column: TypeAlias = npt.NDArray[np.float64]
Value: TypeAlias = Any  # float | Column; Any keeps the arithmetic below free of casts
Values: TypeAlias = list[Value]
Show: TypeAlias = Callable[[int], str]

TINY = 1e-300


@dataclass(slots=True)
class Variable:
    """name: the address; scale: a typical magnitude; lower, upper: physical bounds for a search; all in SI.

    zero_is_trivial: nothing flowing satisfies many balances, and is taken for an answer only where there is no other.
    steered: the user says where to search for it (bounds or a value near), so that it should be the one searched for.
    """

    name: str
    scale: float = 1.0
    lower: float = -float("inf")
    upper: float = float("inf")
    near: float | None = None
    start: float | None = None
    zero_is_trivial: bool = False
    steered: bool = False


class Equation(Protocol):
    """A residual over some variables."""

    @property
    def name(self) -> str: ...

    @property
    def variables(self) -> tuple[int, ...]: ...

    def residual(self, values: Values) -> Value:
        """The amount by which the equation fails to hold."""

    def scale(self, values: Values) -> Value:
        """The magnitude against which the residual counts as large or small (> 0)."""

    def can_solve(self, variable: int) -> bool:
        """Whether the equation can be rearranged for the variable."""

    def is_direct(self, variable: int) -> bool:
        """Whether the rearranged form has one value for any values of the others (no root to be taken)."""

    def solve(self, variable: int, values: Values) -> Value:
        """The variable's value from all the others."""

    def partials(self, values: Values) -> dict[int, float]:
        """Derivative of the residual with respect to each variable (scalar values only)."""

    def text(self, show: Show, solved_for: int | None = None, values: Values | None = None) -> str:
        """The equation as a person writes it, rearranged when `solved_for` says so.

        values: the solution, where the form of the equation depends on it.
        """


@dataclass(frozen=True, slots=True)
class Term:
    """coefficient · Π variable^exponent; `symbol` is how the coefficient is written (empty for ±1)."""

    coefficient: float
    factors: tuple[tuple[int, int], ...]
    symbol: str = ""
    label: str = ""
    of: str = ""

    def value(self, values: Values) -> Value:
        result: Value = self.coefficient
        for variable, exponent in self.factors:
            v = values[variable]
            result = result * (v if exponent == 1 else v**exponent)
        return result

    def without(self, variable: int, values: Values) -> Value:
        """The term with the variable's power divided out."""
        result: Value = self.coefficient
        for other, exponent in self.factors:
            if other != variable:
                v = values[other]
                result = result * (v if exponent == 1 else v**exponent)
        return result

    def text(self, show: Show, leave_out: int | None = None) -> str:
        """The term without its sign."""
        parts = [self.symbol] if self.symbol else []
        for variable, exponent in self.factors:
            if variable != leave_out:
                parts.append(show(variable) if exponent == 1 else f"{_bracketed(show(variable))}{_POWER[exponent]}")
        return "·".join(parts) or "1"


_POWER = {2: "²", 3: "³"}


def _root(square: Value) -> Value:
    """The positive square root; NaN where there is none."""
    if isinstance(square, np.ndarray):
        return np.sqrt(square, out=np.full(square.shape, math.nan), where=square >= 0)
    return math.sqrt(square) if square >= 0 else math.nan


def _bracketed(text: str) -> str:
    return f"({text})" if " " in text else text


def _signed_sum(parts: Sequence[tuple[float, str]]) -> str:
    """Join (sign, text) pairs into `a + b − c`."""
    out = ""
    for sign, text in parts:
        if out:
            out += " − " if sign < 0 else " + "
        elif sign < 0:
            out += "−"
        out += text
    return out or "0"


@dataclass(frozen=True, slots=True)
class Polynomial:
    """Σ terms = 0."""

    name: str
    terms: tuple[Term, ...]
    variables: tuple[int, ...]

    @classmethod
    def of(cls, name: str, terms: Sequence[Term]) -> Polynomial:
        seen: dict[int, None] = {}
        for term in terms:
            for variable, _ in term.factors:
                seen[variable] = None
        return cls(name, tuple(terms), tuple(seen))

    def residual(self, values: Values) -> Value:
        total: Value = 0.0
        for term in self.terms:
            total = total + term.value(values)
        return total

    def scale(self, values: Values) -> Value:
        largest: Value = TINY
        for term in self.terms:
            size = abs(term.value(values))
            columns = isinstance(size, np.ndarray) or isinstance(largest, np.ndarray)
            largest = np.maximum(largest, size) if columns else max(largest, size)
        return largest

    def _exponent(self, variable: int) -> int | None:
        """The one exponent with which the variable occurs, None where it occurs with several."""
        found = {exponent for term in self.terms for v, exponent in term.factors if v == variable}
        return found.pop() if len(found) == 1 else None

    def _is_common_factor(self, variable: int) -> bool:
        """Whether every one of several terms has it: the equation then only says that it is zero, or says nothing."""
        return len(self.terms) > 1 and all(any(v == variable for v, _ in term.factors) for term in self.terms)

    def can_solve(self, variable: int) -> bool:
        return self._exponent(variable) in (1, 2) and not self._is_common_factor(variable)

    def is_direct(self, variable: int) -> bool:
        return self._exponent(variable) == 1 and not self._is_common_factor(variable)

    def solve(self, variable: int, values: Values) -> Value:
        rest: Value = 0.0
        factor: Value = 0.0
        exponent = 1
        for term in self.terms:
            for v, n in term.factors:
                if v == variable:
                    factor = factor + term.without(variable, values)
                    exponent = n
                    break
            else:
                rest = rest + term.value(values)
        quotient = -rest / factor
        return quotient if exponent == 1 else _root(quotient)

    def partials(self, values: Values) -> dict[int, float]:
        result = dict.fromkeys(self.variables, 0.0)
        for term in self.terms:
            for variable, exponent in term.factors:
                rest = term.without(variable, values)
                result[variable] += rest if exponent == 1 else rest * exponent * values[variable] ** (exponent - 1)
        return result

    def text(self, show: Show, solved_for: int | None = None, values: Values | None = None) -> str:
        if solved_for is None:
            return _signed_sum([(t.coefficient, t.text(show)) for t in self.terms]) + " = 0"
        with_it = [t for t in self.terms if any(v == solved_for for v, _ in t.factors)]
        rest = [t for t in self.terms if t not in with_it]
        sign = -1.0 if with_it[0].coefficient > 0 else 1.0
        top = _signed_sum([(sign * t.coefficient, t.text(show)) for t in rest])
        bottom = _signed_sum([(-sign * t.coefficient, t.text(show, solved_for)) for t in with_it])
        if bottom != "1":
            top = f"({top})" if len(rest) > 1 else top
            plain = len(with_it) == 1 and len(with_it[0].factors) == 2 and not with_it[0].symbol
            top = f"{top}/{bottom}" if plain and " " not in bottom else f"{top}/({bottom})"
        return f"√({top})" if self._exponent(solved_for) == 2 else top


@dataclass(frozen=True, slots=True)
class OtherForm:
    """How a function is written where `applies(values)` holds."""

    applies: Callable[[Values], bool]
    template: str
    forms: Mapping[int, str]


@dataclass(frozen=True, slots=True)
class Function:
    """Any residual. `template` writes it with {0}, {1} ... for the variables in their order.

    forms maps a variable to (its explicit formula, the template of that formula). `otherwise` has other templates for
    values on the other side of a switch (an expansion instead of a compression).
    """

    name: str
    variables: tuple[int, ...]
    function: Callable[[Values], Value]
    magnitude: Callable[[Values], Value]
    template: str
    forms: Mapping[int, tuple[Callable[[Values], Value], str]] = field(default_factory=dict)
    otherwise: OtherForm | None = None

    def residual(self, values: Values) -> Value:
        return self.function(values)

    def scale(self, values: Values) -> Value:
        return abs(self.magnitude(values)) + TINY

    def can_solve(self, variable: int) -> bool:
        return variable in self.forms

    def is_direct(self, variable: int) -> bool:
        return variable in self.forms

    def solve(self, variable: int, values: Values) -> Value:
        return self.forms[variable][0](values)

    def partials(self, values: Values) -> dict[int, float]:
        """Central differences: every function here is cheap algebra, smooth away from its switching points."""
        result: dict[int, float] = {}
        work = list(values)
        for variable in self.variables:
            centre = values[variable]
            step = 6e-6 * max(abs(centre), 1e-9)
            work[variable] = centre + step
            above = self.function(work)
            work[variable] = centre - step
            below = self.function(work)
            work[variable] = centre
            result[variable] = (above - below) / (2 * step)
        return result

    def text(self, show: Show, solved_for: int | None = None, values: Values | None = None) -> str:
        template, forms = self.template, {v: text for v, (_, text) in self.forms.items()}
        if self.otherwise is not None and values is not None and self.otherwise.applies(values):
            template, forms = self.otherwise.template, dict(self.otherwise.forms)
        chosen = template if solved_for is None else forms[solved_for]
        return chosen.format(*(show(v) for v in self.variables))


class Node(Protocol):
    """A surface: `dof` independent members fix all the others."""

    @property
    def name(self) -> str: ...

    @property
    def members(self) -> Mapping[str, int]:
        """Member name to variable."""

    @property
    def dof(self) -> int: ...

    def choose(self, known: Collection[str]) -> tuple[str, ...] | None:
        """The members to start from, out of the known ones; None where they do not suffice."""

    def is_steep(self, inputs: tuple[str, ...]) -> bool:
        """Whether the members hardly change along some way on the surface that the inputs do not tell apart well."""

    def is_blind(self, inputs: tuple[str, ...]) -> bool:
        """Whether there are points of the surface that the inputs cannot tell."""

    def evaluate(self, inputs: tuple[str, ...], values: tuple[float, ...]) -> Mapping[str, float]:
        """Every member's value. Raises CaseError where the surface does not reach."""

    def evaluate_columns(
        self, inputs: tuple[str, ...], values: tuple[Column, ...], wanted: tuple[str, ...]
    ) -> tuple[Mapping[str, Column], Mapping[int, CaseError]]:
        """The wanted members as columns, and the rows that could not be found."""

    def partials(
        self, inputs: tuple[str, ...], values: tuple[float, ...], of: tuple[str, ...]
    ) -> Mapping[str, tuple[float, ...]]:
        """d(of)/d(each input)."""

    def text(self, member: str, inputs: tuple[str, ...], show: Show) -> str:
        """The look-up as a person writes it: h(p, T)."""


@dataclass(slots=True)
class Model:
    """A system to solve: `given` maps variables to values, `wanted` are those that must be found."""

    variables: list[Variable] = field(default_factory=list)
    equations: list[Equation] = field(default_factory=list)
    nodes: list[Node] = field(default_factory=list)
    given: dict[int, Value] = field(default_factory=dict)
    wanted: set[int] = field(default_factory=set)
    implied: list[Equation] = field(default_factory=list)
    """Equations that follow from the others by construction: checked at the end, never counted."""
    index: dict[str, int] = field(default_factory=dict)

    def variable(self, name: str, **traits: Any) -> int:
        """The index of the variable of that name, made when it is new."""
        found = self.index.get(name)
        if found is None:
            found = self.index[name] = len(self.variables)
            self.variables.append(Variable(name, **traits))
        return found
