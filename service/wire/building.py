"""From a document of the right shape to the domain objects.

marshmallow builds each item (7 microseconds an item where measured): its schemas have pass-through fields only, because
the JSON Schema has decided the types already and marshmallow's own coercions would be a second truth. Quantities are
read by plain functions driven by the vocabulary's tables: with a marshmallow field for each, all thirty properties that
a stream may have would be visited for the four that it has.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from contextlib import contextmanager
from contextvars import ContextVar
from typing import Any

from marshmallow import EXCLUDE, Schema, fields, missing, post_load

from service.balance.case import (
    STANDARD_ATMOSPHERE,
    AnswerOptions,
    Boundary,
    Case,
    Fluid,
    Limit,
    Quantity,
    Relation,
    Site,
    Stream,
    Transfer,
)
from service.errors import SchemaViolation
from service.units import UnitTable
from service.wire.addresses import AddressBook, item_id, items
from service.wire.contents import build_contents
from service.wire.findings import Findings
from service.wire.over_time import read_ending, read_history, read_tables, read_targets
from service.wire.pointers import token
from service.wire.quantities import QuantityReader
from service.wire.vocabulary import (
    FLOWS,
    FLUID,
    FOLLOWS_ADDRESSES,
    HEAT_LAW,
    OPENINGS,
    RELATION,
    RELATION_STREAMS,
    SATURATED,
    STATE,
    STREAM,
    SYSTEMS,
    TABLED,
    TRANSFER,
)

Body = Mapping[str, Any]


class _Reading:
    """What the schemas need to know of the request that they build from."""

    def __init__(self, reader: QuantityReader, book: AddressBook) -> None:
        self.reader = reader
        self.book = book
        self.base = ""
        self.id = ""

    def quantities(self, body: Body, table: Mapping[str, str], base: str) -> dict[str, Quantity]:
        """The quantities of the table that the body mentions, in the order of the request."""
        found: dict[str, Quantity] = {}
        for name, raw in body.items():
            kind = table.get(name)
            if kind is not None:
                quantity = self.reader.quantity(raw, kind, f"{self.id}.{name}", f"{base}/{name}")
                if quantity is not None and quantity.value is not None and quantity.value <= 0.0 and name in OPENINGS:
                    self.reader.findings.add(
                        SchemaViolation,
                        f"A {name} has to be above zero.",
                        pointer=quantity.pointer,
                        address=quantity.address,
                        hint="Leave it out where nothing is known of it.",
                    )
                elif quantity is not None:
                    found[name] = quantity
        return found


_READING: ContextVar[_Reading] = ContextVar("reading")


@contextmanager
def _during(reading: _Reading) -> Iterator[None]:
    """Let the schemas see what they build from."""
    token_of_before = _READING.set(reading)
    try:
        yield
    finally:
        _READING.reset(token_of_before)


class Plain(fields.Field[Any]):
    """A member taken as it is: the JSON Schema has decided its type, so that nothing is coerced or checked again."""

    def deserialize(self, value: Any, attr: str | None = None, data: Any = None, **_: Any) -> Any:
        return self.load_default if value is missing else value


class _ItemSchema(Schema):
    class Meta:
        unknown = EXCLUDE


class BoundarySchema(_ItemSchema):
    id = Plain()

    @post_load
    def build(self, data: Body, **_: Any) -> Boundary:
        return Boundary(data["id"], _READING.get().base)


_FLOW_KINDS = {name: STREAM[name] for name in FLOWS}


def _tabled(table: Mapping[str, str]) -> Mapping[str, str]:
    """The quantities of a transfer that may be tables over time."""
    return {name: kind for name, kind in TABLED.items() if name in table}


class StreamSchema(_ItemSchema):
    id = Plain()
    source = Plain(data_key="from", load_default=None)
    target = Plain(data_key="to", load_default=None)
    fluid = Plain(load_default=None)
    side = Plain(load_default=None)
    draws = Plain(load_default="mixed")

    @post_load(pass_original=True)
    def build(self, data: Body, original: Body, **_: Any) -> Stream:
        reading = _READING.get()
        body, tables = read_tables(original, _FLOW_KINDS, reading.id, reading.base, reading.reader)
        quantities = reading.quantities(body, STREAM, reading.base)
        state = original.get("state")
        if state:
            quantities |= reading.quantities(state, STATE, f"{reading.base}/state")
            if "saturated" in state:
                _saturated(reading, state, quantities)
        side = data["side"]
        leaves, enters = (side.get("from"), side.get("to")) if isinstance(side, dict) else (side, side)
        source, target = data["source"], data["target"]
        return Stream(
            data["id"], source, target, data["fluid"], quantities, leaves, enters, reading.base, data["draws"], tables
        )


def _saturated(reading: _Reading, state: Body, quantities: dict[str, Quantity]) -> None:
    place = f"{reading.base}/state/saturated"
    if "x" in state:
        reading.reader.findings.add(
            SchemaViolation,
            "`saturated` and `x` say the same thing twice.",
            pointer=place,
            address=f"{reading.id}.x",
            hint="Keep one of them: saturated liquid is x = 0, saturated vapour x = 1.",
        )
        return
    value = SATURATED.get(state["saturated"])
    if value is not None:
        quantities["x"] = Quantity(f"{reading.id}.x", "dimensionless", value, pointer=place)


class TransferSchema(_ItemSchema):
    id = Plain()
    kind = Plain()
    source = Plain(data_key="from", load_default=None)
    target = Plain(data_key="to", load_default=None)
    law = Plain(load_default=None)
    basis = Plain(load_default=None)

    @post_load(pass_original=True)
    def build(self, data: Body, original: Body, **_: Any) -> Transfer:
        reading = _READING.get()
        table = TRANSFER[data["kind"]]
        if "heating_value" in original:
            table = {**table, "heating_value": self._heating_value_kind(reading, original)}
        body, tables = read_tables(original, _tabled(table), reading.id, reading.base, reading.reader)
        quantities = reading.quantities(body, table, reading.base)
        law = data["law"]
        if law is not None:
            quantities |= reading.quantities(law, HEAT_LAW, f"{reading.base}/law")
        return Transfer(
            data["id"],
            data["kind"],
            data["source"],
            data["target"],
            quantities,
            law is not None,
            law.get("of") if law else None,
            data["basis"],
            reading.base,
            tables,
        )

    @staticmethod
    def _heating_value_kind(reading: _Reading, original: Body) -> str:
        return reading.book.properties(reading.id).get("heating_value", "specific_energy")


class RelationSchema(_ItemSchema):
    kind = Plain()
    of = Plain(load_default=())
    arrangement = Plain(load_default=None)

    @post_load(pass_original=True)
    def build(self, data: Body, original: Body, **_: Any) -> Relation:
        reading = _READING.get()
        kind = data["kind"]
        table = RELATION[kind]
        if table.get("value") == FOLLOWS_ADDRESSES:
            table = {"value": reading.book.value_kind(original) or "dimensionless"}
        quantities = reading.quantities(original, table, reading.base)
        streams = {role: original[role] for role in RELATION_STREAMS.get(kind, ()) if role in original}
        return Relation(reading.id, kind, quantities, tuple(data["of"]), streams, data["arrangement"], reading.base)


class AnswerOptionsSchema(_ItemSchema):
    units = Plain()
    detail = Plain()
    work_positive = Plain()
    agreement = Plain()
    coverage = Plain()

    @post_load
    def build(self, data: Body, **_: Any) -> AnswerOptions:
        return AnswerOptions(**data)


class FluidSchema(_ItemSchema):
    """A declared fluid; its numbers are quantities."""

    kind = Plain()
    name = Plain(load_default=None)
    model = Plain(load_default=None)

    @post_load(pass_original=True)
    def build(self, data: Body, original: Body, **_: Any) -> Fluid:
        reading = _READING.get()
        numbers: dict[str, float] = {}
        for name, kind in FLUID[data["kind"]].items():
            if name in original:
                found = reading.reader.given(original[name], kind, "", f"{reading.base}/{name}")
                if found is not None and found.value is not None:
                    numbers[name] = found.value
        return Fluid(
            reading.id, data["kind"], data["name"], data["model"], _mole_fractions(reading, original), **numbers
        )


def _mole_fractions(reading: _Reading, original: Body) -> Mapping[str, float] | None:
    stated = original.get("mole_fractions")
    if stated is None:
        return None
    fractions: dict[str, float] = {}
    for component, raw in stated.items():
        place = f"{reading.base}/mole_fractions/{token(component)}"
        found = reading.reader.given(raw, "dimensionless", "", place)
        if found is not None and found.value is not None:
            fractions[component] = found.value
    total = sum(fractions.values())
    if len(fractions) == len(stated) and (abs(total - 1.0) > 1e-4 or min(fractions.values(), default=0.0) < 0.0):
        reading.reader.findings.add(
            SchemaViolation,
            f"These mole fractions add up to {total:.6g}; they have to be positive and add up to 1.",
            pointer=f"{reading.base}/mole_fractions",
            hint="Correct the fractions, or add the component that is missing.",
        )
    return fractions


BOUNDARY, STREAM_ITEM, TRANSFER_ITEM = BoundarySchema(), StreamSchema(), TransferSchema()
RELATION_ITEM, ANSWER, FLUID_ITEM = RelationSchema(), AnswerOptionsSchema(), FluidSchema()


class CaseBuilder:
    """Builds the Case of one request; everything wrong goes to the findings.

    A document whose shape is wrong can be read too, once what is wrong with it is cut out: it then yields no case but
    the rest of the findings.
    """

    def __init__(self, units: UnitTable, findings: Findings) -> None:
        self.findings = findings
        self.reader = QuantityReader(units, findings)

    def site(self, document: Body) -> Site:
        """The surroundings; sets what gauge pressures count from."""
        stated = document.get("site") or {}
        pressure, ambient = STANDARD_ATMOSPHERE, None
        if "atmospheric_pressure" in stated:
            found = self.reader.given(stated["atmospheric_pressure"], "pressure", "", "#/site/atmospheric_pressure")
            if found is not None and found.value is not None:
                if self._gauge(found) or found.value <= 0.0:
                    self.findings.add(
                        SchemaViolation,
                        "The atmospheric pressure has to be an absolute pressure above zero.",
                        pointer="#/site/atmospheric_pressure",
                        hint='Write for example "1.002 bar".',
                    )
                else:
                    pressure = found.value
        if "ambient_temperature" in stated:
            found = self.reader.given(stated["ambient_temperature"], "temperature", "", "#/site/ambient_temperature")
            ambient = found.value if found is not None else None
        self.reader.atmospheric_pressure = pressure
        return Site(pressure, ambient, "atmospheric_pressure" in stated)

    def _gauge(self, quantity: Quantity) -> bool:
        return quantity.unit is not None and self.reader.units.unit(quantity.unit, "pressure").gauge

    def fluids(self, document: Body) -> dict[str, Fluid]:
        """The declared fluids by key."""
        reading = _Reading(self.reader, AddressBook(None))
        declared: dict[str, Fluid] = {}
        with _during(reading):
            for key, body in (document.get("fluids") or {}).items():
                if isinstance(body, dict) and body.get("kind") in FLUID:
                    reading.id, reading.base = key, f"#/fluids/{token(key)}"
                    declared[key] = FLUID_ITEM.load(body)
        return declared

    def answer(self, document: Body) -> AnswerOptions:
        stated = document.get("answer")
        return ANSWER.load(stated) if stated else AnswerOptions()

    def case(self, document: Body, book: AddressBook) -> Case:
        """The case (to be used only where nothing was found wrong)."""
        site, system = self.site(document), document.get("system", "steady_flow")
        fluids = self.fluids(document)
        reading = _Reading(self.reader, book)
        with _during(reading):
            boundaries = self._items(document, "boundaries", BOUNDARY, reading)
            streams = self._items(document, "streams", STREAM_ITEM, reading)
            transfers = self._items(document, "transfers", TRANSFER_ITEM, reading, TRANSFER)
            relations = self._items(document, "relations", RELATION_ITEM, reading, RELATION)
        return Case(
            document.get("title", ""),
            system if system in SYSTEMS else "steady_flow",
            site,
            fluids,
            boundaries,
            streams,
            transfers,
            relations,
            tuple(self._limits(document, book)),
            self.answer(document),
            tuple(build_contents(document, self.reader)),
            "integrated" if document.get("form") == "integrated" else "rate",
            read_ending(document, book, self.reader),
            tuple(read_targets(document, book, self.reader)),
            read_history(document),
        )

    @staticmethod
    def _items(
        document: Body, name: str, schema: Schema, reading: _Reading, kinds: Mapping[str, Any] | None = None
    ) -> tuple[Any, ...]:
        built = []
        for number, item in items(document, name):
            found = item_id(name, number, item)
            if found is not None and (kinds is None or item.get("kind") in kinds):
                reading.id, reading.base = found, f"#/{name}/{number}"
                built.append(schema.load(item))
        return tuple(built)

    def _limits(self, document: Body, book: AddressBook) -> Iterable[Limit]:
        for number, item in items(document, "limits"):
            of, base = item.get("of"), f"#/limits/{number}"
            kind = book.kind(of) if isinstance(of, str) else None
            if not isinstance(of, str) or kind is None:
                continue  # the check of references tells it
            bounds: list[Quantity | None] = []
            for name in ("min", "max"):
                raw = item.get(name)
                bounds.append(None if raw is None else self.reader.given(raw, kind, of, f"{base}/{name}"))
            if "min" not in item and "max" not in item:
                self.findings.add(
                    SchemaViolation,
                    "This limit has neither `min` nor `max`.",
                    pointer=base,
                    address=of,
                    hint='Give one of them, for example "max": "380 degC".',
                )
            yield Limit(of, bounds[0], bounds[1], str(item.get("why", "")), base)
