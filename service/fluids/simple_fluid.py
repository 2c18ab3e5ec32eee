"""What the models with constant properties have in common: closed formulas over (p, T), scalar or in columns.

A subclass writes its formulas once, over a namespace that has `exp` and `log`: `math` for one state, numpy for columns.
"""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping, Sequence
from types import ModuleType
from typing import Any, ClassVar

import numpy as np

from service.errors import CaseError, StateAmbiguous, StateOutOfRange
from service.fluids.columns import as_columns
from service.fluids.pairs import Pair, choose
from service.fluids.protocol import Column, Limits, Provenance, State
from service.fluids.refusals import literal, refusal
from service.fluids.slopes import Slope, combine

Number = Any
"""A float, or a column of floats."""

T_ZERO, P_ZERO = 273.15, 101325.0
"""Where h and s of these models are zero [K, Pa]."""


class SimpleFluid:
    """A fluid of closed formulas; see the module's text."""

    name: str
    kind: str
    dof = 2
    pressure_optional = True
    molar_mass: float | None
    properties: tuple[str, ...]
    limits: Limits
    provenance: Provenance

    pairs: ClassVar[tuple[Pair, ...]]
    phase: ClassVar[str]
    basic: ClassVar[tuple[str, ...]]

    def base(self, m: ModuleType, first: str, second: str, a: Number, b: Number) -> tuple[Number, Number]:
        """(p, T) [Pa, K] from a pair of `pairs`, in its order."""
        raise NotImplementedError

    def evaluate(self, m: ModuleType, p: Number, T: Number) -> dict[str, Number]:
        """Every property [SI] at p [Pa], T [K]."""
        raise NotImplementedError

    def base_slopes(self, p: float, T: float) -> dict[str, Slope]:
        """d(property)/d(p, T) of every property."""
        raise NotImplementedError

    def inputs(self, known: Collection[str]) -> tuple[str, ...] | None:
        """Which two of the known properties to start from; None where they do not fix a state."""
        return choose(known, self.pairs)

    def state(self, inputs: Sequence[str], values: Sequence[float], extras: Sequence[str] = ()) -> State:
        """The whole state [SI]. Raises StateOutOfRange, and StateAmbiguous for a pair that does not fix one."""
        given = dict(zip(inputs, values, strict=True))
        first, second = self._pair(inputs)
        for name, value in given.items():
            if not math.isfinite(value):
                raise refusal(StateOutOfRange, f"{name} of {literal(self.name)} is not a finite number.", of=name)
        try:
            p, T = self.base(math, first, second, given[first], given[second])
            inside = self.limits.T_min <= T <= self.limits.T_max and self.limits.p_min <= p <= self.limits.p_max
        except (OverflowError, ValueError, ZeroDivisionError):
            p, T, inside = math.nan, math.nan, False
        if not inside:
            raise self._outside(given, p, T)
        found = self.evaluate(math, p, T)
        found.update(given)
        for name in extras:
            found.setdefault(name, math.nan)
        return State(found, self.phase)

    def _pair(self, inputs: Sequence[str]) -> Pair:
        pair = choose(inputs, self.pairs)
        if pair is None or len(inputs) != 2:
            offers = "; ".join(", ".join(pair) for pair in self.pairs[:5])
            raise StateAmbiguous(
                f"{' and '.join(inputs)} do not fix a state of {self.name}.", hint=f"Give one of: {offers}."
            )
        return pair

    def _outside(self, given: Mapping[str, float], p: float, T: float) -> StateOutOfRange:
        limits, own = self.limits, literal(self.name)
        (first, a), (second, b) = given.items()
        amounts: tuple[tuple[str, float], ...] = (
            ("T", limits.T_min),
            ("T", limits.T_max),
            ("p", limits.p_min),
            ("p", limits.p_max),
        )
        text = f"{first} = {{0}} and {second} = {{1}} of {own} lie outside of what this model is used for"
        if math.isfinite(p) and math.isfinite(T):
            text += ", {2} to {3} and {4} to {5}: they give {6} and {7}."
            amounts = (*amounts, ("p", p), ("T", T))
        else:
            text += ", {2} to {3} and {4} to {5}: they give no state."
        hint = f"Check {first} and {second}, and their units; {self.provenance.reference_state}."
        return refusal(StateOutOfRange, text, (first, a), (second, b), *amounts, hint=hint, of=second)

    def columns(
        self, inputs: tuple[str, ...], values: tuple[Column, ...], wanted: tuple[str, ...]
    ) -> tuple[dict[str, Column], dict[int, CaseError]]:
        """The wanted properties as columns [SI], NaN in bad rows, and the reason of each bad row."""
        first, second = self._pair(inputs)
        columns = dict(zip(inputs, as_columns(values), strict=True))
        size = len(columns[first])
        limits = self.limits
        with np.errstate(all="ignore"):
            p, T = self.base(np, first, second, columns[first], columns[second])
            good = (limits.T_min <= T) & (limits.T_max >= T) & (p >= limits.p_min) & (p <= limits.p_max)
            for column in columns.values():
                good &= np.isfinite(column)
            found = self.evaluate(np, p, T) | columns
            out = {name: np.where(good, np.broadcast_to(found.get(name, math.nan), size), math.nan) for name in wanted}
        errors: dict[int, CaseError] = {}
        for row in np.flatnonzero(~good).tolist():
            try:
                self.state(inputs, tuple(float(columns[name][row]) for name in inputs))
            except CaseError as error:
                errors[row] = error
        return out, errors

    def partials(self, state: State, inputs: tuple[str, ...], of: tuple[str, ...]) -> dict[str, tuple[float, ...]]:
        """d(of)/d(each input), the other constant [SI]; exact. Raises StateAmbiguous for a pair that fixes no state."""
        slopes = self.base_slopes(state.values["p"], state.values["T"])
        nothing = (math.nan, math.nan)
        return combine({name: slopes.get(name, nothing) for name in {*inputs, *of}}, inputs, of, self.name)

    def saturation(self, *, p: float | None = None, T: float | None = None) -> float | None:
        """None: these fluids do not evaporate."""
        return None

    def bounds(self, name: str) -> tuple[float, float]:
        """Bounds [SI] of a property for a search."""
        limits = self.limits
        if name == "T":
            return limits.T_min, limits.T_max
        if name == "p":
            return limits.p_min, limits.p_max
        seen = [
            self.evaluate(math, p, T)[name] for p in (limits.p_min, limits.p_max) for T in (limits.T_min, limits.T_max)
        ]
        return min(seen), max(seen)
