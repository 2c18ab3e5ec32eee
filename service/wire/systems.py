"""Which members belong to which system, and to which form of a transient; what is missing for it. All at once."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any, Literal, TypeAlias

from service.errors import SchemaViolation
from service.wire.addresses import contents, items
from service.wire.findings import Findings
from service.wire.over_time import is_table
from service.wire.suggest import quoted
from service.wire.vocabulary import IN_TOTAL, OVER_TIME, SYSTEMS

Body = Mapping[str, Any]
Form: TypeAlias = Literal["steady", "period", "rate"]
Problem: TypeAlias = tuple[str, str, str]
"""(pointer, detail, hint)"""


def form_of(document: object) -> Form | None:
    """Rates in steady flow, totals over a period (closed, integrated), or the rate form; None where it is not said."""
    if not isinstance(document, dict) or document.get("system") not in SYSTEMS:
        return None
    if document["system"] == "steady_flow":
        return "steady"
    return "rate" if document["system"] == "transient" and document.get("form", "rate") != "integrated" else "period"


def check_system(document: Any, findings: Findings) -> None:
    """Members that belong to another system or form than the case has, and what is missing for it."""
    form = form_of(document)
    if form is None:
        return  # told by the check of shapes
    problems = [*_whole(document, form), *_held(document, form), *_crossing(document, form)]
    if form == "rate":
        problems += _rate_form(document)
    for place, detail, hint in problems:
        findings.add(SchemaViolation, detail, pointer=place, hint=hint)


def _whole(document: Body, form: Form) -> Iterator[Problem]:
    system = document["system"]
    if form == "steady" and "streams" not in document:
        hint = "In steady flow something has to flow. Without streams, choose the system `closed`."
        yield "#", 'The member "streams" is missing.', hint
    if system == "closed" and document.get("streams"):
        hint = 'Take `streams` out, or choose "system": "transient", "form": "integrated".'
        yield "#/streams", "Nothing flows into or out of a closed system.", hint
    if "form" in document and system != "transient":
        yield "#/form", "`form` belongs to a transient.", "Take it out."
    for member in ("until", "targets", "history"):
        if member in document and form != "rate":
            hint = "Take it out" + (", or choose the rate form." if system == "transient" else ".")
            yield f"#/{member}", f"`{member}` belongs to the rate form of a transient.", hint


def _held(document: Body, form: Form) -> Iterator[Problem]:
    """What the boundaries hold."""
    for place, boundary in items(document, "boundaries"):
        base, held = f"#/boundaries/{place}", boundary.get("contents")
        if form == "steady":
            if held:
                hint = "Take `contents` out, or choose the system `closed` or `transient`."
                yield f"{base}/contents", "In steady flow what a boundary holds does not matter.", hint
        elif not held and (form == "rate" or not _is_crossed(document, boundary.get("id"))):
            none = "" if form == "rate" else ", and nothing crosses it"
            hint = 'Add "contents": [{"id": ..., "fluid": ..., "volume": ..., "initial": {...}}].'
            yield base, f"The boundary {quoted(boundary.get('id'))} holds nothing{none}.", hint
        elif form == "rate" and isinstance(held, list) and len(held) > 1:
            hint = "Give each vessel a boundary of its own, and join them by streams or heat transfers."
            yield f"{base}/contents/1", "In the rate form a boundary holds one content.", hint
    if form == "period":
        for place, number, content in contents(document):
            if "wall" in content:
                hint = "Add the wall's metal as a second content, a solid with its mass."
                base = f"#/boundaries/{place}/contents/{number}/wall"
                yield base, "`wall` belongs to the rate form of a transient.", hint


def _is_crossed(document: Body, name: object) -> bool:
    crossing = (item for group in ("streams", "transfers") for _, item in items(document, group))
    return any(name in (item.get("from"), item.get("to")) for item in crossing)


def _crossing(document: Body, form: Form) -> Iterator[Problem]:
    """Rates where there are totals, totals where there are rates, tables and draws outside of the rate form."""
    for group in ("streams", "transfers"):
        for number, item in items(document, group):
            for member, raw in item.items():
                place = f"#/{group}/{number}/{member}"
                if form == "period" and member in OVER_TIME:
                    yield place, *_a_rate(member)
                elif form != "period" and member in IN_TOTAL and not (form == "rate" and asked(raw)):
                    what = "in steady flow there are rates" if form == "steady" else "the rate form integrates rates"
                    hint = f"Give `{IN_TOTAL[member]}`" + ("." if form == "steady" else ', or ask for it ("?").')
                    yield place, f"`{member}` is a total over a period; {what}.", hint
                elif form == "steady" and is_table(raw):
                    hint = 'Post columns of readings to /v1/balances/series, or choose the system "transient".'
                    yield f"{place}/table", "In steady flow nothing changes over time.", hint
                elif member == "draws" and form != "rate":
                    yield place, "`draws` belongs to the rate form of a transient.", "Give the stream a `state`."


def _a_rate(member: str) -> tuple[str, str]:
    total = next((t for t, rate in IN_TOTAL.items() if rate == member), None)
    detail = f"`{member}` is a rate; this case is a balance between two states."
    if member == "law":
        detail = "A `law` gives a rate; this case is a balance between two states."
    hint = f"Give `{total}`, the total over the period." if total else "Give totals over the period."
    return detail, hint


def asked(raw: object) -> bool:
    """Whether a quantity is written as a question."""
    return (isinstance(raw, str) and raw.strip().startswith("?")) or (isinstance(raw, dict) and "unknown" in raw)


def _rate_form(document: Body) -> Iterator[Problem]:
    until = document.get("until")
    if until is None:
        hint = 'Add "until": {"time": "30 min"}, or {"conditions": [{"of": "tank.p", "reaches": "2 barg"}]}.'
        yield "#", 'The member "until" is missing.', f"Say when the transient ends. {hint}"
    elif isinstance(until, dict) and "conditions" not in until and asked(until.get("time")):
        hint = 'Give the time, or add "conditions": [{"of": "tank.p", "reaches": "2 barg"}].'
        yield "#/until/time", "Nothing ends the transient, so its end cannot be found.", hint
    yield from _rate_contents(document)
    for number, item in items(document, "streams"):
        if "draws" in item and "from" not in item:
            hint = "Give the stream a `state`, such as `saturated`."
            yield f"#/streams/{number}/draws", "`draws` belongs to a stream that leaves a vessel.", hint
    for number, item in items(document, "relations"):
        if isinstance(item.get("kind"), str) and item["kind"] != "restriction":
            detail = f"The relation {quoted(item['kind'])} is not followed in time; only `restriction` is."
            yield f"#/relations/{number}/kind", detail, "Leave it out, or use the integrated form."
    for number, item in items(document, "transfers"):
        if item.get("kind") == "expansion_work":
            detail = "Vessels of the rate form are rigid or open; expansion work is not followed in time."
            yield f"#/transfers/{number}/kind", detail, "Use the integrated form."


def _rate_contents(document: Body) -> Iterator[Problem]:
    for place, number, content in contents(document):
        base = f"#/boundaries/{place}/contents/{number}"
        for member in ("process", "expansion_work"):
            if member in content:
                hint = "Leave it out, or use the integrated form."
                yield f"{base}/{member}", f"`{member}` belongs to closed systems and the integrated form.", hint
        final = content.get("final")
        for name, raw in final.items() if isinstance(final, dict) else ():
            if not asked(raw):
                hint = 'Ask for it ("?"), end at it with a condition under `until`, or make it a target.'
                yield f"{base}/final/{name}", "In the rate form the end follows from the integration.", hint
