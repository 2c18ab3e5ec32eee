"""Addresses, `item.property`: what each may name in a request, of what kind it is, and where it stands."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from service.wire.pointers import nearest_existing, pointer, token
from service.wire.suggest import did_you_mean, quoted
from service.wire.vocabulary import (
    DIFFERENCE_OF,
    FOLLOWS_ADDRESSES,
    HEAT_LAW,
    RELATION,
    STATE,
    STREAM_ALL,
    TRANSFER,
)

LISTS = ("streams", "transfers", "relations")
DEEPEST_RELATION = 20
"""Relations over values of relations, one inside the other."""


def items(document: object, name: str) -> Iterator[tuple[int, Mapping[str, object]]]:
    """The objects of a list of the request, with their positions; nothing where it is no list."""
    found = document.get(name) if isinstance(document, dict) else None
    if isinstance(found, list):
        for number, item in enumerate(found):
            if isinstance(item, dict):
                yield number, item


def item_id(name: str, number: int, item: Mapping[str, object]) -> str | None:
    """The id of an item; a relation without one is called by its place."""
    found = item.get("id")
    if isinstance(found, str):
        return found
    return f"relation-{number + 1}" if name == "relations" and found is None else None


class AddressBook:
    """The items of one request by id. Reads the document as it was sent, so that it serves broken requests as well."""

    def __init__(self, document: object) -> None:
        self.document = document
        self.entries: dict[str, tuple[str, int, Mapping[str, object]]] = {}
        self._value_kinds: dict[str, str] = {}  # found once each: sums of sums refer to one another
        for name in LISTS:
            for number, item in items(document, name):
                found = item_id(name, number, item)
                if found is not None:
                    self.entries.setdefault(found, (name, number, item))

    def properties(self, item: str) -> Mapping[str, str]:
        """Every property that an item can have → its quantity kind; {} for an unknown item."""
        entry = self.entries.get(item)
        if entry is None:
            return {}
        name, _, body = entry
        if name == "streams":
            return STREAM_ALL
        kind = body.get("kind")
        if name == "transfers":
            table = TRANSFER.get(kind, {}) if isinstance(kind, str) else {}
            if kind == "heat" and "law" in body:
                return {**table, **HEAT_LAW}
            if kind == "fuel" and "normal_volume_flow" in body and "mass_flow" not in body:
                return {**table, "heating_value": "volumetric_heating_value"}
            return table
        table = RELATION.get(kind, {}) if isinstance(kind, str) else {}
        if table.get("value") == FOLLOWS_ADDRESSES:
            if item not in self._value_kinds:
                self._value_kinds[item] = self.value_kind(body) or "dimensionless"
            return {"value": self._value_kinds[item]}
        return table

    def kind(self, address: str) -> str | None:
        """The quantity kind of an address; None where no such quantity can exist."""
        item, dot, name = address.rpartition(".")
        return self.properties(item).get(name) if dot else None

    def value_kind(self, relation: Mapping[str, object], depth: int = 0, seen: set[int] | None = None) -> str | None:
        """The kind of `value` of a difference or a sum, from the first address whose kind is known.

        Each relation is looked at once (`seen`), so that a ring of them, which has no kind, is left at once too.
        """
        seen = set() if seen is None else seen
        if id(relation) in seen or depth > DEEPEST_RELATION:
            return None
        seen.add(id(relation))
        of = relation.get("of")
        for address in of if isinstance(of, list) else ():
            kind = self._kind_of_member(address, depth, seen) if isinstance(address, str) else None
            if kind is not None:
                return DIFFERENCE_OF.get(kind, kind) if relation.get("kind") == "difference" else kind
        return None

    def _kind_of_member(self, address: str, depth: int, seen: set[int]) -> str | None:
        item, _, name = address.rpartition(".")
        entry = self.entries.get(item)
        if entry is not None and entry[0] == "relations":
            body = entry[2]
            kind = body.get("kind")
            table = RELATION.get(kind, {}) if isinstance(kind, str) else {}
            if table.get("value") == FOLLOWS_ADDRESSES:
                return self.value_kind(body, depth + 1, seen) if name == "value" else None
            return table.get(name)
        return self.kind(address)

    def what_is_wrong(self, address: str) -> tuple[str, str]:
        """(detail, hint) for an address that has no kind here."""
        item, dot, name = address.rpartition(".")
        if not dot:
            hint = "An address is `item.property`, for example outlet.T."
            if address in self.entries:
                example = next(iter(self.properties(address)), "value")
                hint = f"Say which quantity of it is meant, for example {address}.{example}."
            return f"{quoted(address)} is not an address.", hint
        if item not in self.entries:
            detail = (
                f"{quoted(address)} speaks of {quoted(item)}, which is no stream, transfer or relation of the case."
            )
            return detail, did_you_mean(item, self.entries)
        options = self.properties(item)
        what = {"streams": "stream", "transfers": "transfer", "relations": "relation"}[self.entries[item][0]]
        detail = f"The {what} {quoted(item)} has no quantity {quoted(name)}."
        if what == "transfer" and name in HEAT_LAW and self.entries[item][2].get("kind") == "heat":
            return detail, f'It exists only where the transfer follows a law: add "law": {{"{name}": ...}}.'
        if what == "relation" and not options:
            return detail, "A relation of this kind has no quantity of its own."
        return detail, did_you_mean(name, options)

    def locate(self, address: str) -> str:
        """The pointer of an address: the quantity itself, or where it would stand, cut to what exists."""
        if not address:
            return "#"
        item, _, name = address.rpartition(".")
        entry = self.entries.get(item)
        if entry is None:
            entry, name = self.entries.get(address), ""
        if entry is None:
            return self._boundary(address if item == "" else item)
        group, number, body = entry
        base = pointer((group, number))
        if not name:
            return base
        if group == "streams" and name in STATE:
            state = body.get("state")
            if name == "x" and isinstance(state, dict) and "x" not in state and "saturated" in state:
                name = "saturated"
            return nearest_existing(self.document, f"{base}/state/{token(name)}")
        if group == "transfers" and name in HEAT_LAW:
            return nearest_existing(self.document, f"{base}/law/{token(name)}")
        return nearest_existing(self.document, f"{base}/{token(name)}")

    def _boundary(self, name: str) -> str:
        for number, item in items(self.document, "boundaries"):
            if item.get("id") == name:
                return pointer(("boundaries", number))
        if isinstance(self.document, dict):
            fluids = self.document.get("fluids")
            if isinstance(fluids, dict) and name in fluids:
                return pointer(("fluids", name))
        return "#"


def locate(document: object, address: str) -> str:
    """The JSON Pointer (fragment form) of an address in a request, or of its nearest parent that exists.

    A series request is searched in its `case`.
    """
    if isinstance(document, dict) and isinstance(document.get("case"), dict) and "streams" not in document:
        inside = AddressBook(document["case"]).locate(address)
        readings = document.get("readings")
        if isinstance(readings, dict) and address in readings:
            return pointer(("readings", address))
        return "#/case" + inside[1:]
    return AddressBook(document).locate(address)
