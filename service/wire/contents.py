"""What boundaries hold, from JSON to the domain: contents with their ends, processes and walls."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from service.balance.case import Content, Quantity, Stage
from service.errors import SchemaViolation
from service.wire.addresses import contents, items, stages
from service.wire.quantities import QuantityReader
from service.wire.vocabulary import CONTENT, ENDS, PROCESS, SATURATED, SIZE, STATE, WALL

Body = Mapping[str, Any]

ABOVE_ZERO = frozenset({"volume", "cp", "area"})
NOT_BELOW_ZERO = frozenset({"mass", "h_inside", "h_outside"})
"""Quantities of a content or its wall that have no sign."""


def build_contents(document: object, reader: QuantityReader) -> Iterator[Content]:
    """The contents of a request (to be used only where nothing was found wrong)."""
    names = {place: boundary.get("id") for place, boundary in items(document, "boundaries")}
    for place, number, body in contents(document):
        name, fluid, boundary = body.get("id"), body.get("fluid"), names[place]
        if isinstance(name, str) and isinstance(fluid, str) and isinstance(boundary, str):
            base = f"#/boundaries/{place}/contents/{number}"
            yield _content(name, fluid, boundary, body, base, reader)


def _content(name: str, fluid: str, boundary: str, body: Body, base: str, reader: QuantityReader) -> Content:
    quantities = _read(body, CONTENT, name, "", base, reader)
    for end in ENDS:
        told = body.get(end)
        if isinstance(told, dict):
            quantities |= _read(told, {**STATE, **SIZE}, name, f"{end}.", f"{base}/{end}", reader)
    wall = body.get("wall")
    if isinstance(wall, dict):
        quantities |= _read(wall, WALL, name, "wall.", f"{base}/wall", reader)
    found = []
    several = isinstance(body.get("process"), list)
    for number, (label, told) in enumerate(stages(body)):
        place = f"{base}/process/{number}" if several else f"{base}/process"
        read = _read(told, PROCESS, f"{name}.{label}", "", place, reader)
        until = told.get("until")
        if isinstance(until, dict):
            end = "final" if number == len(stages(body)) - 1 else label
            read |= _read(until, {**STATE, "volume": "volume"}, f"{name}.{end}", "", f"{place}/until", reader)
        found.append(Stage(str(told.get("kind")), read))
    return Content(name, boundary, fluid, quantities, tuple(found), base)


def _can_be(name: str, quantity: Quantity, reader: QuantityReader) -> bool:
    """Whether a size is one; a mass may be zero (an evacuated vessel), a volume or the cp of a wall may not."""
    value = quantity.value
    may_be_zero = name in NOT_BELOW_ZERO and not quantity.address.endswith(".wall.mass")
    if value is None or value > 0.0 or (value == 0.0 and may_be_zero) or name not in ABOVE_ZERO | NOT_BELOW_ZERO:
        return True
    text = f"{quantity.address} " + ("cannot be below zero." if may_be_zero else "has to be above zero.")
    hint = "Leave it out where nothing is known of it."
    reader.findings.add(SchemaViolation, text, pointer=quantity.pointer, address=quantity.address, hint=hint)
    return False


def _read(
    body: Body, table: Mapping[str, str], item: str, prefix: str, base: str, reader: QuantityReader
) -> dict[str, Quantity]:
    """The quantities that the body mentions, by their name with the prefix."""
    found: dict[str, Quantity] = {}
    for name, raw in body.items():
        if name in table:
            quantity = reader.quantity(raw, table[name], f"{item}.{prefix}{name}", f"{base}/{name}")
            if quantity is not None and _can_be(name, quantity, reader):
                found[f"{prefix}{name}"] = quantity
    word = body.get("saturated")
    if isinstance(word, str) and word in SATURATED and "T" in table:
        address, place = f"{item}.{prefix}x", f"{base}/saturated"
        if "x" in body:
            text, hint = "`saturated` and `x` say the same thing twice.", "Keep one of them."
            reader.findings.add(SchemaViolation, text, pointer=place, address=address, hint=hint)
        else:
            found[f"{prefix}x"] = Quantity(address, "dimensionless", SATURATED[word], pointer=place)
    return found
