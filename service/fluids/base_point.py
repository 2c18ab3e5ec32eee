"""What the gas mixtures, the incompressible liquids and humid air have in common.

Each of these models is written for one *base point*: (p, T), and for humid air (p, T, humidity_ratio). A subclass says
how to find the base point from any pair of inputs and how to evaluate properties there; whole states, columns and
partial derivatives follow here, the same for all.

    d(of)/d(inputs) = J(of) J(inputs)^-1,  J(y) = dy/d(base point)
"""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping, Sequence
from typing import ClassVar

import numpy as np
from numpy.typing import NDArray

from service.errors import CaseError, StateAmbiguous, StateOutOfRange
from service.fluids.protocol import Limits, Provenance, State
from service.fluids.refusals import KINDS, literal, refusal

Array = NDArray[np.float64]
Point = tuple[float, ...]

KIND = {
    **KINDS,
    "humidity_ratio": "humidity_ratio",
    "relative_humidity": "dimensionless",
    "wet_bulb": "temperature",
    "dew_point": "temperature",
}
"""Property -> kind of quantity, for the amounts in messages."""


class BasePointFluid:
    """A fluid whose states are all reached through one base point; see the module's text."""

    name: str
    kind: str
    molar_mass: float | None
    dof: int
    properties: tuple[str, ...]
    limits: Limits
    provenance: Provenance
    pressure_optional: bool

    base: ClassVar[tuple[str, ...]]
    basic: ClassVar[tuple[str, ...]]  # what every state carries
    extras: ClassVar[tuple[str, ...]] = ()  # what a state carries only when asked
    pairs: ClassVar[tuple[tuple[str, ...], ...]]  # inputs that fix a state, the best conditioned first
    phase: ClassVar[str]
    steps: ClassVar[Mapping[str, float]] = {"p": 1e-4, "T": 1e-5, "humidity_ratio": 1e-4}  # relative, for slopes

    def point(self, inputs: Sequence[str], values: Sequence[float]) -> Point:
        """The base point that has these values [SI]. Raises StateOutOfRange or StateAmbiguous."""
        raise NotImplementedError

    def evaluate(self, point: Point, wanted: Collection[str]) -> dict[str, float]:
        """The wanted properties [SI] at a base point that lies within the limits."""
        raise NotImplementedError

    def inputs(self, known: Collection[str]) -> tuple[str, ...] | None:
        """Which of the known properties to start from, best conditioned first; None where they do not suffice."""
        have = set(known)
        return next((pair for pair in self.pairs if have.issuperset(pair)), None)

    def state(self, inputs: Sequence[str], values: Sequence[float], extras: Sequence[str] = ()) -> State:
        """All basic properties [SI] and the asked extras. Raises StateOutOfRange, StateAmbiguous."""
        point = self.point(inputs, values)
        found = self.evaluate(point, (*self.basic, *extras))
        # what was given is what the state says, to the last bit
        found.update(zip(inputs, values, strict=True))
        return State(found, self.phase)

    def columns(
        self, inputs: Sequence[str], values: Sequence[Array], wanted: Sequence[str]
    ) -> tuple[dict[str, Array], dict[int, CaseError]]:
        """Columns of the wanted properties [SI]; a bad row is NaN and has its error, and costs only its own row."""
        rows = len(values[0])
        out = {name: np.full(rows, math.nan) for name in wanted}
        errors: dict[int, CaseError] = {}
        lists = [np.asarray(column, dtype=float).tolist() for column in values]
        for row, given in enumerate(zip(*lists, strict=True)):
            try:
                found = self.evaluate(self.point(inputs, given), wanted)
            except CaseError as error:
                errors[row] = error
                continue
            for name in wanted:
                out[name][row] = found[name]
        return out, errors

    def partials(self, state: State, inputs: Sequence[str], of: Sequence[str]) -> dict[str, tuple[float, ...]]:
        """d(of)/d(inputs) [SI] at a state, by central differences about its base point."""
        point = tuple(state.values[name] for name in self.base)
        slopes = self.slopes(point, tuple(dict.fromkeys((*inputs, *of))))
        matrix = np.array([slopes[name] for name in inputs])
        # rows scaled to one, so that Pa and K weigh the same when the matrix is judged singular
        scale = np.abs(matrix).max(axis=1, keepdims=True)
        if not np.all(scale > 0.0):
            raise StateAmbiguous(
                f"{' and '.join(inputs)} do not fix a state of {self.name}: one of them does not vary."
            )
        try:
            inverse = np.linalg.inv(matrix / scale) / scale.T
        except np.linalg.LinAlgError as exc:
            raise StateAmbiguous(f"{' and '.join(inputs)} are not independent for {self.name}.") from exc
        return {name: tuple(float(x) for x in np.array(slopes[name]) @ inverse) for name in of}

    def slopes(self, point: Point, names: Sequence[str]) -> dict[str, tuple[float, ...]]:
        """d(name)/d(base point) [SI] by central differences, one-sided where a limit is near."""
        unit = {name: tuple(float(name == other) for other in self.base) for name in self.base}
        rest = [name for name in names if name not in unit]
        if not rest:
            return {name: unit[name] for name in names}
        by_base = []
        for index, coordinate in enumerate(self.base):
            low, high = self._neighbours(point, index, coordinate)
            below, above = self._inside(low, rest), self._inside(high, rest)
            if below is None or above is None:
                middle = self.evaluate(point, rest)
                low, below = (point, middle) if below is None else (low, below)
                high, above = (point, middle) if above is None else (high, above)
            width = high[index] - low[index]
            if width == 0.0:
                raise StateOutOfRange(f"No derivative of a state of {self.name} at its limit of validity.")
            by_base.append({name: (above[name] - below[name]) / width for name in rest})
        return {name: unit.get(name) or tuple(column[name] for column in by_base) for name in names}

    def _neighbours(self, point: Point, index: int, coordinate: str) -> tuple[Point, Point]:
        step = self.steps[coordinate] * (abs(point[index]) or 1e-3)
        low = tuple(x - step if i == index else x for i, x in enumerate(point))
        high = tuple(x + step if i == index else x for i, x in enumerate(point))
        return low, high

    def _inside(self, point: Point, names: Sequence[str]) -> dict[str, float] | None:
        try:
            return self.evaluate(self.point(self.base, point), names)
        except CaseError:
            return None

    def require_finite(self, names: Sequence[str], values: Sequence[float]) -> None:
        """Raises StateOutOfRange for an input that is not a finite number."""
        for name, value in zip(names, values, strict=True):
            if not math.isfinite(value):
                raise StateOutOfRange(f"{name} of {self.name} is not a finite number.")

    def outside(self, name: str, value: float, low: float, high: float, hint: str = "") -> StateOutOfRange:
        """The error for a property [SI] beyond its limits."""
        kind = KIND[name]
        return refusal(
            StateOutOfRange,
            f"{literal(self.name)}: {name} = {{0}} lies outside {{1}} to {{2}}.",
            (kind, value),
            (kind, low),
            (kind, high),
            hint=hint,
            of=name,
        )

    def unsupported(self, inputs: Sequence[str]) -> StateAmbiguous:
        """The error for inputs that do not fix a state of this fluid."""
        offers = "; ".join(", ".join(pair) for pair in self.pairs[:6])
        return StateAmbiguous(
            f"{', '.join(inputs)} do not fix a state of {self.name}.", hint=f"Give one of these instead: {offers}."
        )
