"""Quantities as a request writes them, into SI: "40 barg", "? degC", {"value", "unit", "u"}, {"unknown", "between"}.

A unit is looked up in the closed table and never parsed; a number is matched by a strict pattern and never guessed at.
"""

from __future__ import annotations

import math
from collections.abc import Mapping

from service.balance.case import STANDARD_ATMOSPHERE, Quantity
from service.errors import CaseError, SchemaViolation, StateOutOfRange, UnitNotUnderstood
from service.units import Unit, UnitTable, split_quantity
from service.wire.findings import Findings
from service.wire.suggest import quoted
from service.wire.vocabulary import EXAMPLES


class QuantityReader:
    """Reads quantities of one request; whatever is wrong with one goes to the findings, and None comes back.

    atmospheric_pressure [Pa] is what gauge pressures are counted from.
    """

    def __init__(self, units: UnitTable, findings: Findings, atmospheric_pressure: float = STANDARD_ATMOSPHERE) -> None:
        self.units = units
        self.findings = findings
        self.atmospheric_pressure = atmospheric_pressure

    def quantity(self, raw: object, kind: str, address: str, pointer: str) -> Quantity | None:
        """The quantity that `raw` writes: given or asked for."""
        if isinstance(raw, str):
            return self._from_text(raw, kind, address, pointer)
        if isinstance(raw, dict):
            return self._from_object(raw, kind, address, pointer)
        if isinstance(raw, (int, float)) and not isinstance(raw, bool):
            return self._bare(raw, kind, address, pointer)
        self._refuse(SchemaViolation, "This is not a quantity.", kind, address, pointer)
        return None

    def given(self, raw: object, kind: str, address: str, pointer: str) -> Quantity | None:
        """The quantity, where only a given one makes sense (a limit, the site, a fluid's data)."""
        found = self.quantity(raw, kind, address, pointer)
        if found is not None and found.value is None:
            self._refuse(SchemaViolation, "This has to be given; it cannot be an unknown.", kind, address, pointer)
            return None
        return found

    def _from_text(self, text: str, kind: str, address: str, pointer: str) -> Quantity | None:
        try:
            number, symbol, unknown = split_quantity(text)
            unit = self.units.unit(symbol, kind) if symbol else None
        except CaseError as error:
            self.findings.adopt(self._about_the_unit(text, kind) or error, pointer=pointer, address=address)
            return None
        if unknown:
            return Quantity(address, kind, wanted=True, unit=unit.symbol if unit else None, pointer=pointer)
        assert number is not None  # split_quantity finds a number where there is no "?"
        if unit is None and not self.units.kinds[kind].bare_number_allowed:
            self._refuse(UnitNotUnderstood, f"{quoted(text)} has no unit.", kind, address, pointer)
            return None
        value = self._to_si(number, unit, kind, address, pointer)
        if value is None:
            return None
        return Quantity(address, kind, value, unit=unit.symbol if unit else None, pointer=pointer)

    def _about_the_unit(self, text: str, kind: str) -> CaseError | None:
        """The table's refusal of a unit that begins with a digit, as 9**9**9 does; None where it is no such text."""
        number, _, symbol = text.strip().partition(" ")
        if "*" not in symbol or not number[-1:].isdigit():
            return None
        try:
            self.units.unit(symbol.strip(), kind)
        except CaseError as error:
            return error
        return None

    def _bare(self, raw: float, kind: str, address: str, pointer: str) -> Quantity | None:
        if not self.units.kinds[kind].bare_number_allowed:
            self._refuse(UnitNotUnderstood, f"The number {raw!r:.40} has no unit.", kind, address, pointer)
            return None
        value = self._to_si(raw, None, kind, address, pointer)
        return None if value is None else Quantity(address, kind, value, pointer=pointer)

    def _unit(self, symbol: str, kind: str, address: str, pointer: str) -> Unit | None:
        try:
            return self.units.unit(symbol, kind)
        except CaseError as error:
            self.findings.adopt(error, pointer=pointer, address=address)
            return None

    def _to_si(self, number: float, unit: Unit | None, kind: str, address: str, pointer: str) -> float | None:
        """[SI], or None with a finding where it is not finite or lies below the zero of its kind."""
        try:
            value = (
                float(number)
                if unit is None
                else float(self.units.to_si(float(number), unit, self.atmospheric_pressure))
            )
        except OverflowError:
            value = math.inf
        if not math.isfinite(value):
            self._refuse(SchemaViolation, "This number is not finite.", kind, address, pointer)
            return None
        if value <= 0.0 and self.units.kinds[kind].positive:
            self._impossible(number, value, unit, kind, address, pointer)
            return None
        return value

    def _impossible(
        self, number: float, value: float, unit: Unit | None, kind: str, address: str, pointer: str
    ) -> None:
        if unit is not None and kind == "temperature" and value < 0.0:
            zero = self.units.from_si(0.0, unit, self.atmospheric_pressure)
            detail = f"{number:.9g} {unit.symbol} lies below absolute zero, {zero:.9g} {unit.symbol}."
            self._below(detail, "Check the sign and the unit.", address, pointer)
        elif unit is not None and kind == "pressure" and value < 0.0:
            detail = f"{number:.9g} {unit.symbol} lies below a perfect vacuum."
            hint = (
                "Gauge units (barg, kPag, psig) count from the site's atmosphere; an absolute pressure is above zero."
            )
            self._below(detail, hint, address, pointer)
        else:
            try:
                self.units.require_possible(value, kind, address)
            except CaseError as error:
                self.findings.adopt(error, pointer=pointer, address=address)

    def _below(self, detail: str, hint: str, address: str, pointer: str) -> None:
        self.findings.add(StateOutOfRange, detail, pointer=pointer, address=address, hint=hint)

    def _refuse(self, error: type[CaseError], detail: str, kind: str, address: str, pointer: str) -> None:
        title = self.units.kinds[kind].title if kind in self.units.kinds else kind
        example = EXAMPLES.get(kind)
        hint = f"Write a {title} with its unit, for example {example}." if example else f"A {title} belongs here."
        self.findings.add(error, detail, pointer=pointer, address=address, hint=hint)

    def _from_object(self, raw: Mapping[str, object], kind: str, address: str, pointer: str) -> Quantity | None:
        if "table" in raw:
            detail = "A table over time has no place here."
            hint = "In a transient of the rate form, `mass_flow` of a stream and `rate` of a transfer can be one."
            self.findings.add(SchemaViolation, detail, pointer=f"{pointer}/table", address=address, hint=hint)
            return None
        if "unknown" in raw:
            return self._unknown(raw, kind, address, pointer)
        number = raw.get("value")
        if isinstance(number, bool) or not isinstance(number, (int, float)):
            self._refuse(SchemaViolation, "This object has neither a `value` nor `unknown`.", kind, address, pointer)
            return None
        for member in ("between", "near"):
            if member in raw:
                detail = f"`{member}` steers the search for an unknown; this quantity is given."
                hint = f"Remove `{member}`, or write `unknown` instead of `value`."
                self.findings.add(SchemaViolation, detail, pointer=f"{pointer}/{member}", address=address, hint=hint)
        symbol = raw.get("unit")
        unit: Unit | None = None
        if isinstance(symbol, str):
            unit = self._unit(symbol.strip(), kind, address, f"{pointer}/unit")
            if unit is None:
                return None
        elif not self.units.kinds[kind].bare_number_allowed:
            self._refuse(UnitNotUnderstood, f"The number {number!r:.40} has no unit.", kind, address, pointer)
            return None
        value = self._to_si(number, unit, kind, address, f"{pointer}/value")
        if value is None:
            return None
        u = self._uncertainty(raw, float(number), unit, address, pointer)
        return Quantity(address, kind, value, unit=unit.symbol if unit else None, u=u, pointer=pointer)

    def _uncertainty(
        self, raw: Mapping[str, object], number: float, unit: Unit | None, address: str, pointer: str
    ) -> float | None:
        """The standard uncertainty [SI] that `u`, `u_rel`, or `U` with `k` state; None where none does."""
        stated = [member for member in ("u", "u_rel", "U") if member in raw]
        if not stated:
            if "k" in raw:
                self._bad_uncertainty("`k` is a coverage factor and needs `U`.", "k", address, pointer)
            return None
        if len(stated) > 1:
            self._bad_uncertainty(
                f"The uncertainty is stated {len(stated)} times ({', '.join(stated)}).", stated[1], address, pointer
            )
            return None
        member = stated[0]
        size = self._plain(raw, member, address, pointer)
        if size is None:
            return None
        if member == "u_rel":
            size *= abs(number)
        elif member == "U":
            if "k" not in raw:
                self._bad_uncertainty(
                    "`U` is an expanded uncertainty and needs its coverage factor `k`, often 2.", "U", address, pointer
                )
                return None
            k = self._plain(raw, "k", address, pointer)
            if k is None or k == 0.0:
                if k == 0.0:
                    self._bad_uncertainty("A coverage factor of 0 has no meaning.", "k", address, pointer)
                return None
            size /= k
        elif "k" in raw:
            self._bad_uncertainty("`k` belongs to `U`; `u` is a standard uncertainty.", "k", address, pointer)
            return None
        factor = 1.0 if unit is None else self.units.difference_factor(unit)
        return size * factor

    def _plain(self, raw: Mapping[str, object], member: str, address: str, pointer: str) -> float | None:
        number = raw[member]
        if isinstance(number, bool) or not isinstance(number, (int, float)) or not _finite(number) or number < 0:
            self._bad_uncertainty(f"`{member}` has to be a number that is not negative.", member, address, pointer)
            return None
        return float(number)

    def _bad_uncertainty(self, detail: str, member: str, address: str, pointer: str) -> None:
        hint = 'Write {"value": 40, "unit": "barg", "u": 0.2}, or `u_rel`, or `U` together with `k`.'
        self.findings.add(SchemaViolation, detail, pointer=f"{pointer}/{member}", address=address, hint=hint)

    def _unknown(self, raw: Mapping[str, object], kind: str, address: str, pointer: str) -> Quantity | None:
        clash = next((m for m in ("value", "u", "u_rel", "U", "k") if m in raw), None)
        if clash is not None:
            detail = f"A quantity is either unknown or has a `{clash}`."
            hint = "Remove one of the two."
            self.findings.add(SchemaViolation, detail, pointer=f"{pointer}/{clash}", address=address, hint=hint)
            return None
        symbol = raw.get("unit")
        unit: Unit | None = None
        if isinstance(symbol, str):
            unit = self._unit(symbol.strip(), kind, address, f"{pointer}/unit")
            if unit is None:
                return None
        between, fine = self._between(raw, kind, address, pointer)
        near = None
        if "near" in raw:
            found = self.given(raw["near"], kind, address, f"{pointer}/near")
            near = found.value if found else None
            fine = fine and found is not None
        if not fine:
            return None
        return Quantity(
            address, kind, wanted=True, unit=unit.symbol if unit else None, between=between, near=near, pointer=pointer
        )

    def _between(
        self, raw: Mapping[str, object], kind: str, address: str, pointer: str
    ) -> tuple[tuple[float, float] | None, bool]:
        bounds = raw.get("between")
        if not isinstance(bounds, list) or len(bounds) != 2:
            return None, "between" not in raw
        low = self.given(bounds[0], kind, address, f"{pointer}/between/0")
        high = self.given(bounds[1], kind, address, f"{pointer}/between/1")
        if low is None or high is None or low.value is None or high.value is None:
            return None, False
        if low.value >= high.value:
            detail = "The first bound of `between` has to lie below the second."
            self.findings.add(
                SchemaViolation, detail, pointer=f"{pointer}/between", address=address, hint="Swap the two bounds."
            )
            return None, False
        return (low.value, high.value), True


def _finite(number: float) -> bool:
    try:
        return math.isfinite(number)
    except OverflowError:
        return False
