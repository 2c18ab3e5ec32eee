"""Addresses, `item.property`: what each may name in a request, of what kind it is, and where it stands."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from service.wire.pointers import nearest_existing, pointer, token
from service.wire.suggest import did_you_mean, listed, quoted
from service.wire.vocabulary import (
    ALONG,
    CONTENT,
    DIFFERENCE_OF,
    ENDS,
    FOLLOWS_ADDRESSES,
    HEAT_LAW,
    PROCESS,
    RELATION,
    SIZE,
    STATE,
    STREAM_ALL,
    TRANSFER,
    WALL,
)

LISTS = ("streams", "transfers", "relations")
CONTENTS = "contents"
WHAT = {"streams": "stream", "transfers": "transfer", "relations": "relation", CONTENTS: "content"}
UNTIL_TIME = "until.time"
"""Address of the time at which a transient ends."""

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


def contents(document: object) -> Iterator[tuple[int, int, Mapping[str, object]]]:
    """The contents of every boundary, with the positions of boundary and content."""
    for place, boundary in items(document, "boundaries"):
        for number, content in items(boundary, CONTENTS):
            yield place, number, content


def stages(content: Mapping[str, object]) -> list[tuple[str, Mapping[str, object]]]:
    """(name, stage) for the process of a content: `process` for one stage, `stage-1`, `stage-2` ... for a list."""
    process = content.get("process")
    if isinstance(process, dict):
        return [("process", process)]
    found = process if isinstance(process, list) else []
    if len(found) == 1 and isinstance(found[0], dict):
        return [("process", found[0])]
    return [(f"stage-{i + 1}", stage) for i, stage in enumerate(found) if isinstance(stage, dict)]


def in_rate_form(document: object) -> bool:
    """Whether the request is a transient that is integrated in time."""
    return isinstance(document, dict) and document.get("system") == "transient" and document.get("form") != "integrated"


def content_properties(content: Mapping[str, object], over_time: bool = False) -> dict[str, str]:
    """Every quantity of a content, by its address without the content's id → quantity kind.

    over_time: those that the rate form has, `p` and `wall.T` at any time beside `initial.p` and `final.p`.
    """
    table = dict(CONTENT)
    if over_time:
        table |= ALONG
        for end in ENDS:
            table |= {f"{end}.{name}": kind for name, kind in {**STATE, **SIZE}.items()}
        if isinstance(content.get("wall"), dict):
            table |= {"wall.T": "temperature", "final.wall.T": "temperature"}
            table |= {f"wall.{name}": kind for name, kind in WALL.items()}
        del table["expansion_work"]
        return table
    named = stages(content)
    between = [name for name, _ in named[:-1]]
    for end in (*ENDS, *between):
        table |= {f"{end}.{name}": kind for name, kind in {**STATE, **SIZE}.items()}
    for name, _ in named:
        table |= {f"{name}.{quantity}": kind for quantity, kind in PROCESS.items()}
        table[f"{name}.expansion_work"] = CONTENT["expansion_work"]
    return table


class AddressBook:
    """The items of one request by id. Reads the document as it was sent, so that it serves broken requests as well."""

    def __init__(self, document: object) -> None:
        self.document = document
        self.over_time = in_rate_form(document)
        self.entries: dict[str, tuple[str, int, Mapping[str, object]]] = {}
        self._value_kinds: dict[str, str] = {}  # found once each: sums of sums refer to one another
        for name in LISTS:
            for number, item in items(document, name):
                found = item_id(name, number, item)
                if found is not None:
                    self.entries.setdefault(found, (name, number, item))
        self.boundary_of: dict[str, int] = {}
        for place, number, content in contents(document):
            held = content.get("id")
            if isinstance(held, str):
                self.entries.setdefault(held, (CONTENTS, number, content))
                self.boundary_of.setdefault(held, place)

    def properties(self, item: str) -> Mapping[str, str]:
        """Every property that an item can have → its quantity kind; {} for an unknown item."""
        entry = self.entries.get(item)
        if entry is None:
            return {}
        name, _, body = entry
        if name == "streams":
            return STREAM_ALL
        if name == CONTENTS:
            return content_properties(body, self.over_time)
        kind = body.get("kind")
        if name == "transfers":
            table = TRANSFER.get(kind, {}) if isinstance(kind, str) else {}
            if kind == "heat" and "law" in body:
                return {**table, **HEAT_LAW}
            by_volume = "normal_volume_flow" in body or "normal_volume" in body
            if kind == "fuel" and by_volume and not {"mass_flow", "mass"} & set(body):
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
        if address == UNTIL_TIME and self.over_time:
            return "time"
        item, dot, name = address.partition(".")
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
        item, _, name = address.partition(".")
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
        item, dot, name = address.partition(".")
        if not dot:
            hint = "An address is `item.property`, for example outlet.T."
            if address in self.entries:
                example = next(iter(self.properties(address)), "value")
                hint = f"Say which quantity of it is meant, for example {address}.{example}."
            return f"{quoted(address)} is not an address.", hint
        if item not in self.entries:
            known = "no stream, content, transfer or relation of the case"
            detail = f"{quoted(address)} speaks of {quoted(item)}, which is {known}."
            return detail, self._held_there(item, name) or did_you_mean(item, self.entries)
        options = self.properties(item)
        what = WHAT[self.entries[item][0]]
        detail = f"The {what} {quoted(item)} has no quantity {quoted(name)}."
        if what == "transfer" and name in HEAT_LAW and self.entries[item][2].get("kind") == "heat":
            return detail, f'It exists only where the transfer follows a law: add "law": {{"{name}": ...}}.'
        if what == "content" and name in ALONG:
            return detail, f"Say at which end: {item}.initial.{name} or {item}.final.{name}."
        if what == "content" and name.startswith("wall.") and not any(option.startswith("wall.") for option in options):
            return detail, "It has no `wall`."
        if what == "relation" and not options:
            return detail, "A relation of this kind has no quantity of its own."
        return detail, did_you_mean(name, options)

    def _held_there(self, boundary: str, name: str) -> str:
        """A hint for an address that begins with the boundary instead of what it holds."""
        for place, item in items(self.document, "boundaries"):
            held = [c for c, at in self.boundary_of.items() if at == place]
            if item.get("id") == boundary and held:
                return f"That is a boundary; of what it holds say {listed([f'{c}.{name}' for c in held], 'or')}."
        return ""

    def locate(self, address: str) -> str:
        """The pointer of an address: the quantity itself, or where it would stand, cut to what exists."""
        if not address:
            return "#"
        if address == UNTIL_TIME and self.over_time:
            return nearest_existing(self.document, "#/until/time")
        item, _, name = address.partition(".")
        entry = self.entries.get(item)
        if entry is None:
            entry, name = self.entries.get(address), ""
        if entry is None:
            return self._boundary(address if item == "" else item)
        group, number, body = entry
        if group == CONTENTS:
            return self._in_content(item, number, body, name)
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

    def _in_content(self, item: str, number: int, body: Mapping[str, object], name: str) -> str:
        """The pointer of a content's quantity: `final.T`, `process.n`, `stage-1.p`."""
        base = pointer(("boundaries", self.boundary_of[item], CONTENTS, number))
        if not name:
            return base
        end, _, inner = name.rpartition(".")
        state = body.get(end)
        if inner == "x" and isinstance(state, dict) and "x" not in state and "saturated" in state:
            inner = "saturated"
        if self.over_time and not end and inner not in body:
            return nearest_existing(self.document, f"{base}/initial/{token(inner)}")
        if end.startswith("stage-"):
            place = f"process/{int(end.removeprefix('stage-')) - 1}" + ("" if inner in PROCESS else "/until")
        else:
            place = end
        return nearest_existing(self.document, f"{base}/{place}/{token(inner)}" if place else f"{base}/{token(inner)}")

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
