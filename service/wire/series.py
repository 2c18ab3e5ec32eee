"""A series: one case over columns of readings. Columns are converted as columns; a bad cell costs its row only."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Callable, Iterable, Mapping, Sequence
from typing import Any

import numpy as np
import numpy.typing as npt

from service.balance.case import Case, Content, Quantity, Relation, Stream, Transfer
from service.balance.solution import SeriesResult
from service.errors import CaseError, SchemaViolation, StateOutOfRange, UnderSpecified, UnitNotUnderstood
from service.units import Unit, UnitTable
from service.wire.addresses import AddressBook
from service.wire.findings import Findings
from service.wire.pointers import pointer
from service.wire.presenting import DIGITS, Presenter

Column = npt.NDArray[np.float64]
SOLVED = "solved"
MOST_DETAILS = 20


@dataclasses.dataclass(frozen=True, slots=True)
class ColumnPlan:
    """What a column of readings is: its address, its kind, and the unit its numbers are in (None: bare)."""

    address: str
    kind: str
    unit: Unit | None


def column_plan(
    address: str, symbol: str | None, book: AddressBook, units: UnitTable, findings: Findings, place: str
) -> ColumnPlan | None:
    """The plan of one column, or None with a finding."""
    kind = book.kind(address)
    if kind is None:
        detail, hint = book.what_is_wrong(address)
        findings.add(SchemaViolation, detail, pointer=place, address=address, hint=hint)
        return None
    if symbol is None:
        if units.kinds[kind].bare_number_allowed:
            return ColumnPlan(address, kind, None)
        examples = ", ".join(units.kinds[kind].symbols[:4])
        findings.add(
            UnitNotUnderstood,
            f"The column {address} has no unit.",
            pointer=place,
            address=address,
            hint=f"Give the unit of its values, for example one of {examples}.",
        )
        return None
    try:
        return ColumnPlan(address, kind, units.unit(symbol.strip(), kind))
    except CaseError as error:
        findings.adopt(error, pointer=place, address=address)
        return None


def columns_to_si(
    plans: Sequence[ColumnPlan], values: Mapping[str, Column], units: UnitTable, atmospheric_pressure: float
) -> tuple[dict[str, Column], dict[int, str]]:
    """(columns in SI, row → why a reading in it cannot be). Impossible readings become NaN."""
    converted: dict[str, Column] = {}
    impossible: dict[int, str] = {}
    for plan in plans:
        column = values[plan.address]
        si = column if plan.unit is None else units.to_si(column, plan.unit, atmospheric_pressure)
        if units.kinds[plan.kind].positive:
            bad = si <= 0.0
            if bad.any():
                si = np.where(bad, np.nan, si)
                title = units.kinds[plan.kind].title
                unit = f" {plan.unit.symbol}" if plan.unit is not None else ""
                for row in np.flatnonzero(bad):
                    why = f"{plan.address}: a {title} of {column[row]:.9g}{unit} cannot exist."
                    impossible.setdefault(int(row), why)
        converted[plan.address] = si
    return converted, impossible


def with_columns(case: Case, columns: Mapping[str, tuple[str, Column]], reported: Iterable[tuple[str, str]]) -> Case:
    """The case with every column's address given (by its first finite value) and every reported address mentioned."""
    extra: dict[str, dict[str, Quantity]] = {}
    for address, (kind, column) in columns.items():
        finite = column[np.isfinite(column)]
        item, _, name = address.partition(".")
        value = float(finite[0]) if len(finite) else 1.0
        extra.setdefault(item, {})[name] = Quantity(address, kind, value)
    for address, kind in reported:
        item, _, name = address.partition(".")
        extra.setdefault(item, {}).setdefault(name, Quantity(address, kind))

    def added(item: Any) -> Any:
        new = extra.get(item.id)
        if new is None:
            return item
        given = {n: q for n, q in new.items() if q.value is not None}
        return dataclasses.replace(item, quantities={**new, **item.quantities, **given})

    streams: tuple[Stream, ...] = tuple(added(s) for s in case.streams)
    transfers: tuple[Transfer, ...] = tuple(added(t) for t in case.transfers)
    relations: tuple[Relation, ...] = tuple(added(r) for r in case.relations)
    contents: tuple[Content, ...] = tuple(added(c) for c in case.contents)
    return dataclasses.replace(case, streams=streams, transfers=transfers, relations=relations, contents=contents)


def reported_addresses(
    asked: Sequence[str] | None, case: Case, columns: Iterable[str], book: AddressBook, findings: Findings
) -> list[tuple[str, str]]:
    """(address, kind) of what a series reports: what it names, else what the case asks with "?"."""
    if asked is None:
        overridden = set(columns)
        found = [(q.address, q.kind) for q in case.quantities() if q.wanted and q.address not in overridden]
        if not found:
            findings.add(
                SchemaViolation,
                "Nothing is asked for.",
                pointer="#",
                hint='Name addresses in "report", or mark unknowns "?" in the case.',
            )
        return found
    found = []
    for number, address in enumerate(asked):
        kind = book.kind(address)
        if kind is None:
            detail, hint = book.what_is_wrong(address)
            findings.add(SchemaViolation, detail, pointer=pointer(("report", number)), address=address, hint=hint)
        elif address not in dict(found):
            found.append((address, kind))
    return found


@dataclasses.dataclass(frozen=True, slots=True)
class SeriesAnswer:
    """columns: address → values in the unit told by `units`; status: one word a row; unsolved: the first bad rows."""

    rows: int
    units: Mapping[str, Unit]
    columns: Mapping[str, Column]
    status: Sequence[str]
    unsolved: Sequence[Mapping[str, Any]]


Solve = Callable[[Case, Mapping[str, Column], Sequence[str]], SeriesResult]


class SeriesRun:
    """One case made ready for columns; `run` may be called again and again, with as many rows as memory allows."""

    def __init__(
        self,
        case: Case,
        plans: Sequence[ColumnPlan],
        reported: Sequence[tuple[str, str]],
        presenter: Presenter,
        solve: Solve,
    ) -> None:
        self.case = case
        self.plans = plans
        self.reported = reported
        self.presenter = presenter
        self.solve = solve
        asked = {q.address: q.unit for q in case.quantities() if q.unit}
        read = {plan.address: plan.unit.symbol for plan in plans if plan.unit is not None}
        self.units = {a: presenter.unit(kind, read.get(a) or asked.get(a)) for a, kind in reported}

    def run(self, values: Mapping[str, Column]) -> SeriesAnswer:
        """The answer for columns in the units of their plans; NaN where there is no reading."""
        refused = _missing(values)
        pressure, table = self.case.site.atmospheric_pressure, self.presenter.units
        si, impossible = columns_to_si(self.plans, values, table, pressure)
        for row, why in impossible.items():
            refused.setdefault(row, (StateOutOfRange.problem_type, why))
        kinds = {plan.address: plan.kind for plan in self.plans}
        full = with_columns(self.case, {a: (kinds[a], c) for a, c in si.items()}, self.reported)
        result = self.solve(full, si, [address for address, _ in self.reported])
        status = [SOLVED] * result.rows
        for row, problem_type in result.problems.items():
            status[row] = problem_type or SOLVED
        for row, (problem_type, _) in refused.items():
            status[row] = problem_type
        columns = {
            address: table.from_si(np.asarray(result.columns[address]), unit, pressure)
            for address, unit in self.units.items()
        }
        return SeriesAnswer(result.rows, self.units, columns, status, _unsolved(result, refused, status))


def _missing(values: Mapping[str, Column]) -> dict[int, tuple[str, str]]:
    """Rows in which a reading is missing."""
    found: dict[int, tuple[str, str]] = {}
    for address, column in values.items():
        for row in np.flatnonzero(np.isnan(column)):
            found.setdefault(int(row), (UnderSpecified.problem_type, f"{address} has no reading in this row."))
    return found


def _unsolved(
    result: SeriesResult, refused: Mapping[int, tuple[str, str]], status: Sequence[str]
) -> list[dict[str, Any]]:
    out = []
    for row in sorted({*result.problems, *refused}):
        if status[row] != SOLVED:
            detail = refused[row][1] if row in refused else result.details.get(row, "")
            out.append({"row": row, "status": status[row], "detail": detail})
        if len(out) >= MOST_DETAILS:
            break
    return out


def numbers(column: Column) -> list[float | None]:
    """A column for JSON: twelve significant digits, null where there is no value."""
    return [float(f"{v:.{DIGITS}g}") + 0.0 if math.isfinite(v) else None for v in column.tolist()]
