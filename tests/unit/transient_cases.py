"""Small rate-form cases for tests, built without the wire."""

from __future__ import annotations

from collections.abc import Mapping

from service.balance.case import (
    AnswerOptions,
    Boundary,
    Case,
    Content,
    Ending,
    Fluid,
    History,
    Quantity,
    Relation,
    Site,
    Stream,
    Table,
    Target,
    Transfer,
)
from service.balance.properties import CONTENT, RELATION, STATE, STREAM, TRANSFER
from service.balance.solution import LedgerAccount, Solution
from service.fluids.catalogue import FluidCatalogue
from service.solvers import transient

CATALOGUE = FluidCatalogue()
R_MOLAR = 8.31446261815324  # [J/(mol K)] exact

Value = float | str | None | tuple[float, float]


def gas(R: float = 287.0, k: float = 1.4) -> Fluid:
    """An ideal gas by its gas constant [J/(kg K)] and ratio of heat capacities."""
    return Fluid("gas", "ideal_gas", molar_mass=R_MOLAR / R, cp=k * R / (k - 1.0))


def quantity(item: str, name: str, value: Value) -> Quantity:
    """A value [SI], "?", or bounds of an unknown."""
    last = name.rpartition(".")[2]
    tables = (STATE, STREAM, CONTENT, TRANSFER, RELATION)
    kind = next((t[last].kind for t in tables if last in t), "dimensionless")
    address = f"{item}.{name}"
    if isinstance(value, tuple):
        return Quantity(address, kind, wanted=True, between=value)
    if isinstance(value, str):
        return Quantity(address, kind, wanted=True)
    return Quantity(address, kind, value)


def quantities(item: str, values: Mapping[str, Value]) -> dict[str, Quantity]:
    return {name: quantity(item, name, value) for name, value in values.items()}


def vessel(name: str, fluid: str = "gas", **values: Value) -> Content:
    """A content; names with two underscores for dots: initial__p."""
    plain = {key.replace("__", "."): value for key, value in values.items()}
    return Content(name, f"{name}-room", fluid, quantities(name, plain))


def stream(
    name: str,
    source: str | None = None,
    target: str | None = None,
    draws: str = "mixed",
    table: Table | None = None,
    **values: Value,
) -> Stream:
    """A stream between contents, by their names."""
    ends = [f"{end}-room" if end else None for end in (source, target)]
    tables = {"mass_flow": table} if table is not None else {}
    found = quantities(name, values)
    return Stream(name, ends[0], ends[1], None, found, draws=draws, table=tables)  # type: ignore[arg-type]


def heat(
    name: str, source: str | None = None, target: str | None = None, kind: str = "heat", law: bool = False,
    table: Table | None = None, **values: Value,
) -> Transfer:  # fmt: skip
    """A transfer between contents, by their names."""
    ends = [f"{end}-room" if end else None for end in (source, target)]
    tables = {"rate": table} if table is not None else {}
    found = quantities(name, values)
    return Transfer(name, kind, ends[0], ends[1], found, has_law=law, table=tables)  # type: ignore[arg-type]


def orifice(name: str, of: str, **values: Value) -> Relation:
    return Relation(name, "restriction", quantities(name, values), streams={"stream": of})


def case(
    contents: list[Content],
    streams: list[Stream] | None = None,
    transfers: list[Transfer] | None = None,
    relations: list[Relation] | None = None,
    fluids: list[Fluid] | None = None,
    time: float | str | None = None,
    conditions: Mapping[str, float] | None = None,
    targets: list[tuple[str, float, float | None]] | None = None,
    columns: tuple[str, ...] = (),
    points: int = 11,
    ambient: float | None = None,
) -> Case:
    """A whole case in the rate form."""
    ends = Ending(
        quantity("until", "time", time) if time is not None else None,
        tuple((of, quantity(*_split(of), value)) for of, value in (conditions or {}).items()),
    )
    return Case(
        title="", system="transient", site=Site(ambient_temperature=ambient),
        fluids={f.key: f for f in fluids if f.key} if fluids is not None else {"gas": gas()},
        boundaries=tuple(Boundary(c.boundary) for c in contents), streams=tuple(streams or ()),
        transfers=tuple(transfers or ()), relations=tuple(relations or ()), limits=(), answer=AnswerOptions(),
        contents=tuple(contents), until=ends,
        targets=tuple(Target(of, quantity(*_split(of), value), at) for of, value, at in targets or ()),
        history=History(columns, points),
    )  # fmt: skip


def _split(address: str) -> tuple[str, str]:
    item, _, name = address.partition(".")
    return item, name


def solve(what: Case, deadline: float | None = None) -> Solution:
    return transient.solve(what, CATALOGUE, deadline)


def end(solution: Solution, name: str, prop: str) -> float:
    """A property [SI] of a content's final state."""
    (state,) = (s for s in solution.states if s.stream == f"{name}.final")
    return state.flows[prop] if prop in state.flows else state.properties[prop]


def account(solution: Solution, name: str, of: str) -> LedgerAccount:
    (found,) = (a for a in solution.ledger if a.boundary == f"{name}-room" and a.of == of)
    return found
