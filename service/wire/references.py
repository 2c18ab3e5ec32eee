"""Whether the names in a request lead somewhere: ids, boundaries, streams, addresses. All that do not, at once."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from service.errors import SchemaViolation
from service.wire.addresses import AddressBook, contents, item_id, items
from service.wire.findings import Findings
from service.wire.suggest import did_you_mean, listed, quoted
from service.wire.systems import check_system
from service.wire.vocabulary import FOLLOWS_ADDRESSES, RELATION, RELATION_STREAMS


def check_references(document: object, book: AddressBook, findings: Findings) -> None:
    """Check every name of a request, reading the document as it was sent."""
    boundaries = _boundaries(document, findings)
    _unique_items(document, findings)
    check_system(document, findings)
    streams = {i: body for i, (name, _, body) in book.entries.items() if name == "streams"}
    for group in ("streams", "transfers"):
        for number, item in items(document, group):
            _ends(group, number, item, boundaries, findings)
    for number, item in items(document, "transfers"):
        law = item.get("law")
        if isinstance(law, dict) and isinstance(law.get("of"), str):
            _stream(law["of"], streams, f"#/transfers/{number}/law/of", findings)
    for number, item in items(document, "relations"):
        for role in RELATION_STREAMS.get(str(item.get("kind")), ()):
            name = item.get(role)
            if isinstance(name, str):
                _stream(name, streams, f"#/relations/{number}/{role}", findings)
        _tied(number, item, book, findings)
        if "bore" in item and "area" in item:
            findings.add(
                SchemaViolation,
                "The size of the opening is said twice, by `bore` and by `area`.",
                pointer=f"#/relations/{number}/area",
                hint="Keep one of them.",
            )
    for place, address in _named(document):
        if book.kind(address) is None:
            detail, hint = book.what_is_wrong(address)
            findings.add(SchemaViolation, detail, pointer=place, hint=hint)


def _named(document: object) -> Iterator[tuple[str, str]]:
    """(pointer, address) of every address that limits, conditions, targets and the history name."""
    until = document.get("until") if isinstance(document, dict) else None
    spoken = [(f"#/{group}", items(document, group)) for group in ("limits", "targets")]
    spoken.append(("#/until/conditions", items(until, "conditions")))
    for base, found in spoken:
        for number, item in found:
            if isinstance(item.get("of"), str):
                yield f"{base}/{number}/of", str(item["of"])
    history = document.get("history") if isinstance(document, dict) else None
    columns = history.get("columns") if isinstance(history, dict) else None
    for number, address in enumerate(columns if isinstance(columns, list) else ()):
        if isinstance(address, str):
            yield f"#/history/columns/{number}", address


def _boundaries(document: object, findings: Findings) -> Mapping[str, int]:
    names: dict[str, int] = {}
    for number, item in items(document, "boundaries"):
        name = item.get("id")
        if not isinstance(name, str):
            continue
        if name in names:
            _twice(name, f"#/boundaries/{names[name]}", f"#/boundaries/{number}/id", findings)
        names.setdefault(name, number)
    return names


def _unique_items(document: object, findings: Findings) -> None:
    """Streams, contents, transfers and relations share one space of names, since addresses begin with them."""
    seen: dict[str, str] = {}
    for group in ("streams", "transfers", "relations"):
        for number, item in items(document, group):
            name = item_id(group, number, item)
            if name is None:
                continue
            place = f"#/{group}/{number}"
            if name in seen:
                _twice(name, seen[name], f"{place}/id" if "id" in item else place, findings)
            seen.setdefault(name, place)
    for boundary, number, content in contents(document):
        held, base = content.get("id"), f"#/boundaries/{boundary}/contents/{number}"
        if isinstance(held, str):
            if held in seen:
                _twice(held, seen[held], f"{base}/id", findings)
            seen.setdefault(held, base)


def _twice(name: str, first: str, second: str, findings: Findings) -> None:
    findings.add(
        SchemaViolation,
        f"The id {quoted(name)} is used twice; it names {first} already.",
        pointer=second,
        hint="Give every stream, content, transfer, relation and boundary a name of its own.",
    )


def _ends(
    group: str, number: int, item: Mapping[str, object], boundaries: Mapping[str, int], findings: Findings
) -> None:
    what, shown = group.removesuffix("s"), quoted(item.get("id"))
    source, target = item.get("from"), item.get("to")
    for end, name in (("from", source), ("to", target)):
        if isinstance(name, str) and name not in boundaries:
            findings.add(
                SchemaViolation,
                f"The {what} {shown} points to a boundary {quoted(name)} that does not exist.",
                pointer=f"#/{group}/{number}/{end}",
                hint=did_you_mean(name, boundaries),
            )
    if source is None and target is None:
        findings.add(
            SchemaViolation,
            f"The {what} {shown} touches no boundary.",
            pointer=f"#/{group}/{number}",
            hint=f'Say where it comes from or goes to: "from" or "to", one of {listed(list(boundaries))}. '
            "The end that is left out is the surroundings.",
        )
    elif source is not None and source == target:
        findings.add(
            SchemaViolation,
            f"The {what} {shown} leaves and enters the same boundary, so that it crosses nothing.",
            pointer=f"#/{group}/{number}/to",
            hint="Change `from` or `to`, or split the boundary in two.",
        )


def _stream(name: str, streams: Mapping[str, object], place: str, findings: Findings) -> None:
    if name not in streams:
        findings.add(
            SchemaViolation, f"There is no stream {quoted(name)}.", pointer=place, hint=did_you_mean(name, streams)
        )


def _tied(number: int, item: Mapping[str, object], book: AddressBook, findings: Findings) -> None:
    """The addresses of a relation: each exists, and they are of one kind."""
    of = item.get("of")
    if not isinstance(of, list):
        return
    base, kinds = f"#/relations/{number}", {}
    for position, address in enumerate(of):
        if not isinstance(address, str):
            continue
        kind = book.kind(address)
        if kind is None:
            detail, hint = book.what_is_wrong(address)
            findings.add(SchemaViolation, detail, pointer=f"{base}/of/{position}", hint=hint)
        else:
            kinds[address] = kind
        if of.index(address) < position:
            findings.add(
                SchemaViolation,
                f"{address} stands in this relation twice.",
                pointer=f"{base}/of/{position}",
                hint="Name each quantity once.",
            )
    found = set(kinds.values())
    if len(found) > 1:
        told = listed([f"{address} is a {kind.replace('_', ' ')}" for address, kind in kinds.items()])
        findings.add(
            SchemaViolation,
            f"A relation `{item.get('kind')}` ties quantities of one kind, but {told}.",
            pointer=f"{base}/of",
            hint="Tie quantities of one kind, or write the physics as a stream or transfer.",
        )
    elif item.get("kind") == "sum" and "temperature" in found:
        findings.add(
            SchemaViolation,
            "Temperatures do not add up to anything.",
            pointer=f"{base}/of",
            hint="Use `difference`, or sum flows or rates.",
        )
    if (
        RELATION.get(str(item.get("kind")), {}).get("value") == FOLLOWS_ADDRESSES
        and f"{item_id('relations', number, item)}.value" in of
    ):
        findings.add(
            SchemaViolation,
            "This relation speaks of its own value.",
            pointer=f"{base}/of",
            hint="Name other quantities.",
        )
