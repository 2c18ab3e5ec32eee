"""What an answer tells of a transient: how it ended, the history as columns, events, extremes and the method."""

from __future__ import annotations

import math
from typing import Any

from service.balance.case import Case
from service.balance.solution import TransientResult
from service.units import Unit
from service.wire.presenting import DIGITS, Presenter, rounded
from service.wire.series import numbers

SHORT, LONG = 300.0, 10_800.0
"""Up to five minutes a time is told in seconds, from three hours on in hours, and in minutes in between."""


def time_unit(case: Case, presenter: Presenter, end: float) -> Unit:
    """The unit of all times of an answer: the case's own where it has one, else by the length of the whole [s]."""
    stated = case.until.time
    if stated is not None and stated.unit is not None:
        return presenter.unit("time", stated.unit)
    if presenter.system == "SI" or not end > SHORT:
        return presenter.unit("time", "s")
    return presenter.unit("time", "min" if end < LONG else "h")


def asked_units(case: Case) -> dict[str, str]:
    """Address → the unit in which the case asks for it."""
    wanted = [*case.quantities(), *([case.until.time] if case.until.time is not None else [])]
    return {quantity.address: quantity.unit for quantity in wanted if quantity.wanted and quantity.unit}


def units_of_columns(case: Case) -> dict[str, str]:
    """Address → the unit in which the case itself speaks of it: asked of its end, a condition, a target, a limit."""
    found: dict[str, str] = {}
    spoken = [(limit.of, q) for limit in case.limits for q in (limit.maximum, limit.minimum)]
    spoken += [(target.of, target.value) for target in case.targets]
    spoken += [(address, quantity) for address, quantity in case.until.conditions]
    for address, quantity in spoken:
        if quantity is not None and quantity.unit:
            found[address] = quantity.unit
    return found | {address.replace(".final.", ".", 1): unit for address, unit in asked_units(case).items()}


class TransientPart:
    """Writes one TransientResult."""

    def __init__(self, case: Case, result: TransientResult, presenter: Presenter) -> None:
        self.case, self.result, self.presenter = case, result, presenter
        self.time = time_unit(case, presenter, result.end_time)
        self.units = units_of_columns(case)

    def document(self) -> dict[str, Any]:
        """The member `transient` of the answer."""
        result = self.result
        reason = self._reworded(result.end_reason.removeprefix("condition "))
        out: dict[str, Any] = {"end": {"reason": reason, "time": self._time(result.end_time)}}
        if result.stopped:
            out["stopped"] = result.stopped
        out["history"] = {
            "time": {"unit": self.time.symbol, "values": numbers(result.times / self.time.factor)},
            "columns": {address: self._column(address) for address in result.columns},
        }
        out["events"] = [{"time": self._time(time), "event": self._reworded(text)} for time, text in result.events]
        out["extremes"] = {
            address: {"least": self._extreme(address, low, at_low), "largest": self._extreme(address, high, at_high)}
            for address, (low, at_low, high, at_high) in result.extremes.items()
        }
        out["method"] = {name: self._plain(value) for name, value in result.method.items()}
        return out

    def _reworded(self, text: str) -> str:
        """The text; of a condition that was reached, with its value as the case writes it."""
        if text == "time":
            return "the time that the case gives is over"
        reached = [q for of, q in self.case.until.conditions if text.startswith(f"{of} reaches ")]
        if len(reached) != 1 or reached[0].value is None:
            return text
        shown = self.presenter.quantity(reached[0].value, reached[0].kind, reached[0].unit)
        return f"{reached[0].address} reaches {shown['value']:.9g} {shown['unit']}".removesuffix(" -")

    def _time(self, value: float) -> dict[str, object]:
        return self.presenter.quantity(value, "time", self.time.symbol, "it was not reached")

    def _kind(self, address: str) -> str:
        return self.result.kinds.get(address, "dimensionless")

    def _column(self, address: str) -> dict[str, Any]:
        unit = self.presenter.unit(self._kind(address), self.units.get(address))
        values = self.presenter.units.from_si(self.result.columns[address], unit, self.presenter.atmospheric_pressure)
        return {"unit": unit.symbol, "values": numbers(values)}

    def _extreme(self, address: str, value: float, time: float) -> dict[str, Any]:
        shown: dict[str, Any] = self.presenter.quantity(value, self._kind(address), self.units.get(address))
        return {**shown, "at": self._time(time)}

    @staticmethod
    def _plain(value: float | int | str) -> float | int | str | None:
        if isinstance(value, float):
            return rounded(value, DIGITS) if math.isfinite(value) else None
        return value
