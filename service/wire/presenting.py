"""Numbers as an answer shows them: in the reader's units, rounded to digits that mean something, never NaN."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from typing import TypeAlias

from service.balance.case import STANDARD_ATMOSPHERE
from service.units import System, Unit, UnitTable

Shown: TypeAlias = dict[str, object]

DIGITS = 12
"""Significant digits of a value: lines as printed still add up to 1e-11, and floating-point noise is cut off."""

FORMULA_DIGITS = 9
"""Significant digits of a number inside a formula: after the difference of two close enthalpies six are left."""

NO_MEANING = "it has no meaning for this state"
SINGLE_PHASE = "the state has a single phase"


def rounded(value: float, digits: int = DIGITS) -> float:
    """The value to so many significant digits; −0.0 becomes 0.0."""
    return float(f"{value:.{digits}g}") + 0.0


class Presenter:
    """Shows SI values in one unit system. atmospheric_pressure [Pa] is what gauge units count from.

    Makes its conversions once a kind, so that showing a number costs about a microsecond.
    """

    def __init__(
        self, units: UnitTable, system: System = "metric", atmospheric_pressure: float = STANDARD_ATMOSPHERE
    ) -> None:
        self.units = units
        self.system: System = system
        self.atmospheric_pressure = atmospheric_pressure
        self._formula: dict[str, tuple[float, float, str]] = {}
        self._display: dict[str, tuple[float, float, str]] = {}

    def zero_and_factor(self, unit: Unit) -> tuple[float, float]:
        """(zero, factor) such that value [SI] = zero + factor · value [unit]."""
        return (self.atmospheric_pressure if unit.gauge else unit.offset), unit.factor

    def unit(self, kind: str, symbol: str | None = None) -> Unit:
        """The unit of that symbol, or the one in which the unit system shows the kind."""
        return self.units.unit(symbol, kind) if symbol else self.units.display(kind, self.system)

    def quantity(self, value: float, kind: str, symbol: str | None = None, reason: str = NO_MEANING) -> Shown:
        """{"value", "unit"}; a value that is not finite becomes null with a reason."""
        if symbol is None:
            known = self._display.get(kind)
            if known is None:
                unit = self.units.display(kind, self.system)
                known = self._display[kind] = (*self.zero_and_factor(unit), unit.symbol)
            zero, factor, shown = known
        else:
            unit = self.unit(kind, symbol)
            zero, factor = self.zero_and_factor(unit)
            shown = unit.symbol
        if not math.isfinite(value):
            return {"value": None, "unit": shown, "reason": reason}
        return {"value": float(f"{(value - zero) / factor:.{DIGITS}g}") + 0.0, "unit": shown}

    def difference(self, value: float, kind: str, symbol: str | None = None) -> float:
        """A difference or uncertainty [SI] in the unit of the kind, without the unit's zero."""
        return rounded(value / self.units.difference_factor(self.unit(kind, symbol)))

    def text(self, kind: str, value: float, digits: int = 7) -> str:
        """`40 bar`, for sentences."""
        if not math.isfinite(value):
            return "not a number"
        unit = self.units.display(kind, self.system)
        zero, factor = self.zero_and_factor(unit)
        return f"{rounded((value - zero) / factor, digits):.{digits}g} {unit.symbol}".removesuffix(" -")

    def in_formula(self, value: float, kind: str) -> str:
        """`(3.33333333 kg/s)`: a number with a unit that multiplies out with the others of its system."""
        known = self._formula.get(kind)
        if known is None:
            unit = self.units.coherent(kind, self.system)
            known = self._formula[kind] = (*self.zero_and_factor(unit), "" if unit.symbol == "-" else unit.symbol)
        zero, factor, symbol = known
        shown = f"{(value - zero) / factor:.{FORMULA_DIGITS}g}"
        if symbol:
            return f"({shown} {symbol})"
        return f"({shown})" if shown[0] == "-" else shown

    def numbers(self, values: Sequence[float], kinds: Sequence[str]) -> Callable[[int], str]:
        """How a rendering shows its variables as numbers."""
        shown: dict[int, str] = {}

        def show(variable: int) -> str:
            text = shown.get(variable)
            if text is None:
                text = shown[variable] = self.in_formula(values[variable], kinds[variable])
            return text

        return show
