"""The rate form of a transient, from JSON to the domain: tables, walls, when it ends, targets and the history."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from itertools import pairwise
from typing import Any

import numpy as np

from service.balance.case import Ending, History, Quantity, Table, Target
from service.errors import CaseError, SchemaViolation, UnitNotUnderstood
from service.units import Unit
from service.wire.addresses import AddressBook, items
from service.wire.quantities import QuantityReader

Body = Mapping[str, Any]
END = "end"


def is_table(raw: object) -> bool:
    """Whether a quantity is written as a table over time."""
    return isinstance(raw, dict) and isinstance(raw.get("table"), dict)


def read_tables(
    body: Body, kinds: Mapping[str, str], item: str, base: str, reader: QuantityReader
) -> tuple[Body, dict[str, Table]]:
    """(the body without its tables, the tables [SI] by property); `kinds` are the properties that may be tables."""
    named = [name for name in kinds if is_table(body.get(name))]
    if not named:
        return body, {}
    tables = {}
    for name in named:
        found = _TableReader(body[name]["table"], f"{item}.{name}", f"{base}/{name}/table", reader).read(kinds[name])
        if found is not None:
            tables[name] = found
    return {name: raw for name, raw in body.items() if name not in named}, tables


class _TableReader:
    """Reads one table; what is wrong with it goes to the findings."""

    def __init__(self, raw: Body, address: str, place: str, reader: QuantityReader) -> None:
        self.raw, self.address, self.place, self.reader = raw, address, place, reader
        self.fine = True

    def read(self, kind: str) -> Table | None:
        """The table [s, SI], or None where something is wrong with it."""
        times, values = self._column("times", "time_unit", "time"), self._column("values", "unit", kind)
        if self.fine and len(times) != len(values):
            self._refuse(f"There are {len(times)} times and {len(values)} values.", "values", "Give one value a time.")
        if self.fine and any(later <= sooner for sooner, later in pairwise(times)):
            self._refuse("The times of a table have to rise.", "times", "Put the points in order, each time once.")
        return Table(times, values, self.raw.get("between", "linear")) if self.fine else None

    def _column(self, member: str, unit_member: str, kind: str) -> tuple[float, ...]:
        unit = self._unit(unit_member, kind)
        numbers = self.raw.get(member)
        if unit is None or not isinstance(numbers, list):
            self.fine = False
            return ()
        try:
            column = np.array([float(number) for number in numbers])
        except (OverflowError, TypeError, ValueError):
            column = np.array([math.inf])
        si = self.reader.units.to_si(column, unit, self.reader.atmospheric_pressure)
        if not np.isfinite(si).all():
            self._refuse("A number of this column is not finite.", member, "Check the column.")
        return tuple(float(number) for number in si)

    def _unit(self, member: str, kind: str) -> Unit | None:
        symbol = self.raw.get(member)
        units = self.reader.units
        if not isinstance(symbol, str):
            some = ", ".join(units.kinds[kind].symbols[:4])
            what = "times" if kind == "time" else "values"
            self._refuse(f"The {what} of this table have no unit.", "", f'Add "{member}", one of {some} ...', True)
            return None
        try:
            return units.unit(symbol.strip(), kind)
        except CaseError as error:
            self.reader.findings.adopt(error, pointer=f"{self.place}/{member}", address=self.address)
            return None

    def _refuse(self, detail: str, member: str, hint: str, unit: bool = False) -> None:
        self.fine = False
        place = f"{self.place}/{member}" if member else self.place
        error = UnitNotUnderstood if unit else SchemaViolation
        self.reader.findings.add(error, detail, pointer=place, address=self.address, hint=hint)


def read_ending(document: Body, book: AddressBook, reader: QuantityReader) -> Ending:
    """When a transient ends. Addresses without a kind are left to the check of references."""
    until = document.get("until")
    if not isinstance(until, dict):
        return Ending()
    time = None
    if "time" in until:
        time = reader.quantity(until["time"], "time", "until.time", "#/until/time")
        if time is not None and time.value is not None and time.value <= 0.0:
            _not_positive(time, reader)
    conditions = []
    for number, item in items(until, "conditions"):
        of = item.get("of")
        kind = book.kind(of) if isinstance(of, str) else None
        if isinstance(of, str) and kind is not None and "reaches" in item:
            found = reader.given(item["reaches"], kind, of, f"#/until/conditions/{number}/reaches")
            if found is not None:
                conditions.append((of, found))
    return Ending(time, tuple(conditions))


def _not_positive(time: Quantity, reader: QuantityReader) -> None:
    reader.findings.add(
        SchemaViolation,
        "The time has to be above zero.",
        pointer=time.pointer,
        address=time.address,
        hint='Write for example "30 min".',
    )


def read_targets(document: Body, book: AddressBook, reader: QuantityReader) -> Iterator[Target]:
    """The targets of a transient; `at` [s] is None for its end."""
    for number, item in items(document, "targets"):
        of, base = item.get("of"), f"#/targets/{number}"
        kind = book.kind(of) if isinstance(of, str) else None
        if not isinstance(of, str) or kind is None or "value" not in item:
            continue
        value = reader.given(item["value"], kind, of, f"{base}/value")
        at = None
        if item.get("at", END) != END:
            time = reader.given(item["at"], "time", "", f"{base}/at")
            at = time.value if time is not None else None
            if time is not None and at is not None and at <= 0.0:
                _not_positive(time, reader)
        if value is not None:
            yield Target(of, value, at, base)


def read_history(document: Body) -> History:
    """What to report over time."""
    stated = document.get("history")
    if not isinstance(stated, dict):
        return History()
    columns = stated.get("columns")
    named = tuple(dict.fromkeys(c for c in columns if isinstance(c, str))) if isinstance(columns, list) else ()
    points = stated.get("points")
    return History(named, points) if isinstance(points, int) and not isinstance(points, bool) else History(named)
