"""What boundaries hold, from JSON to the domain; and which members belong to which system."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from service.balance.case import Content, Quantity, Stage
from service.errors import SchemaViolation
from service.wire.addresses import contents, items, stages
from service.wire.findings import Findings
from service.wire.quantities import QuantityReader
from service.wire.suggest import quoted
from service.wire.vocabulary import CONTENT, ENDS, IN_TOTAL, OVER_TIME, PROCESS, SATURATED, SIZE, STATE, SYSTEMS

Body = Mapping[str, Any]


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


def _read(
    body: Body, table: Mapping[str, str], item: str, prefix: str, base: str, reader: QuantityReader
) -> dict[str, Quantity]:
    """The quantities that the body mentions, by their name with the prefix."""
    found: dict[str, Quantity] = {}
    for name, raw in body.items():
        if name in table:
            quantity = reader.quantity(raw, table[name], f"{item}.{prefix}{name}", f"{base}/{name}")
            if quantity is not None:
                found[f"{prefix}{name}"] = quantity
    word = body.get("saturated")
    if isinstance(word, str) and word in SATURATED and "T" in table and "x" not in body:
        address = f"{item}.{prefix}x"
        found[f"{prefix}x"] = Quantity(address, "dimensionless", SATURATED[word], pointer=f"{base}/saturated")
    return found


def check_system(document: object, findings: Findings) -> None:
    """Members that belong to another system than the one that the case names, and what is missing for it."""
    if not isinstance(document, dict) or document.get("system") not in SYSTEMS:
        return  # told by the check of shapes
    steady = document.get("system") == "steady_flow"
    _check_whole(document, steady, findings)
    for group in ("streams", "transfers"):
        for number, item in items(document, group):
            for member in item:
                place = f"#/{group}/{number}/{member}"
                if steady and member in IN_TOTAL:
                    text = f"`{member}` is a total over a period; in steady flow there are rates."
                    findings.add(SchemaViolation, text, pointer=place, hint=f"Give `{IN_TOTAL[member]}`.")
                elif not steady and member in OVER_TIME:
                    total = next((t for t, rate in IN_TOTAL.items() if rate == member), None)
                    hint = f"Give `{total}`, the total over the period." if total else "Give totals over the period."
                    text = f"`{member}` is a rate; this case is a balance between two states."
                    findings.add(SchemaViolation, text, pointer=place, hint=hint)


def _check_whole(document: Body, steady: bool, findings: Findings) -> None:
    system = document.get("system")
    if steady and not document.get("streams"):
        hint = "In steady flow something has to flow. Without streams, choose the system `closed`."
        findings.add(SchemaViolation, 'The member "streams" is missing.', pointer="#", hint=hint)
    if system == "closed" and document.get("streams"):
        text = "Nothing flows into or out of a closed system."
        hint = 'Take `streams` out, or choose "system": "transient", "form": "integrated".'
        findings.add(SchemaViolation, text, pointer="#/streams", hint=hint)
    if system == "transient" and document.get("form") != "integrated":
        text = "This version solves transients in their integrated form only."
        findings.add(SchemaViolation, text, pointer="#/form", hint='Add "form": "integrated".')
    if "form" in document and system != "transient":
        findings.add(SchemaViolation, "`form` belongs to a transient.", pointer="#/form", hint="Take it out.")
    for place, boundary in items(document, "boundaries"):
        if steady and boundary.get("contents"):
            text = "In steady flow what a boundary holds does not matter."
            hint = "Take `contents` out, or choose the system `closed` or `transient`."
            findings.add(SchemaViolation, text, pointer=f"#/boundaries/{place}/contents", hint=hint)
        elif not steady and not boundary.get("contents") and not _is_crossed(document, boundary.get("id")):
            text = f"The boundary {quoted(boundary.get('id'))} holds nothing, and nothing crosses it."
            hint = 'Add "contents": [{"id": ..., "fluid": ..., "mass": ..., "initial": {...}, "final": {...}}].'
            findings.add(SchemaViolation, text, pointer=f"#/boundaries/{place}", hint=hint)


def _is_crossed(document: Body, name: object) -> bool:
    crossing = (item for group in ("streams", "transfers") for _, item in items(document, group))
    return any(name in (item.get("from"), item.get("to")) for item in crossing)
