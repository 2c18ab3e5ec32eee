"""The shape of requests: jsonschema_rs decides in microseconds, Python's jsonschema explains what it refused.

A schema that dispatches on `kind` by if/then is explained branch by branch: first the document without what is inside
of its lists, then each refused item against the one branch that its `kind` names. So an error speaks of what was meant.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import islice
from typing import Any

import jsonschema_rs
from jsonschema import Draft202012Validator
from jsonschema.exceptions import ValidationError
from referencing import Registry, Resource
from referencing.jsonschema import DRAFT202012

from service.errors import SchemaViolation
from service.wire.findings import Findings
from service.wire.pointers import pointer
from service.wire.wording import explain

SchemaDocument = Mapping[str, Any]
Path = tuple[str | int, ...]
MOST_ERRORS = 20


@dataclass(frozen=True, slots=True)
class Fault:
    """One place where the shape is wrong. cut: the paths whose removal leaves the rest readable."""

    path: Path
    detail: str
    hint: str
    cut: tuple[Path, ...]


class _Pair:
    """One schema compiled twice: to decide, and to explain."""

    def __init__(self, schema: Any, rs_registry: Any, registry: Registry[Any]) -> None:
        self.decides = jsonschema_rs.Draft202012Validator(schema, registry=rs_registry, offline=True)
        self.explains = Draft202012Validator(schema, registry=registry)


class Shape:
    """One request schema, compiled. Thread-safe."""

    def __init__(self, name: str, schemas: Mapping[str, SchemaDocument]) -> None:
        # Both registries are closed: a reference to anything else is an error, and nothing is ever fetched.
        resources = [(str(s["$id"]), dict(s)) for s in schemas.values()]
        self._rs_registry = jsonschema_rs.Registry(resources)
        self._registry: Registry[Any] = Registry().with_resources(
            [(uri, Resource.from_contents(s, default_specification=DRAFT202012)) for uri, s in resources]
        )
        self._schemas = schemas
        self._case_uri = str(schemas["case"]["$id"])
        schema = schemas[name]
        self._whole = self._pair(schema)
        self._outline, self._places = self._take_apart(schema, schema)
        if name != "case" and "case" in schema["properties"]:
            self._outline["properties"]["case"] = {"type": "object"}
            self._inner: Shape | None = Shape("case", schemas)
        else:
            self._inner = None
        self._outlined = self._pair(self._outline)

    def _pair(self, schema: Any) -> _Pair:
        return _Pair(schema, self._rs_registry, self._registry)

    def _resolve(self, schema: Any, root: SchemaDocument) -> tuple[Any, SchemaDocument]:
        """A schema behind its $ref (within the file, or into the case's), and the file that it stands in."""
        while "$ref" in schema:
            uri, _, fragment = schema["$ref"].partition("#")
            root = self._schemas["case"] if uri == self._case_uri else root
            schema = root
            for part in fragment.split("/")[1:]:
                schema = schema[part]
        return schema, root

    def _take_apart(
        self, schema: SchemaDocument, root: SchemaDocument
    ) -> tuple[dict[str, Any], dict[str, dict[str, _Pair]]]:
        """(the schema without its items, member → branches of its items by kind; one branch "" without kinds)."""
        outline = {**schema, "$id": f"{schema['$id']}/outline", "properties": dict(schema["properties"])}
        places: dict[str, dict[str, _Pair]] = {}
        for name, stated in schema["properties"].items():
            member, file = self._resolve(stated, root)
            inside = member.get("items") or member.get("additionalProperties")
            if not isinstance(inside, dict) or member.get("type") not in ("array", "object"):
                continue
            opened, file = self._resolve(inside, file)
            if opened.get("type") != "object":
                continue
            key = "items" if "items" in member else "additionalProperties"
            outline["properties"][name] = {**member, key: True}
            places[name] = self._branches(opened, file)
        return outline, places

    def _branches(self, item: SchemaDocument, file: SchemaDocument) -> dict[str, _Pair]:
        def at_home(schema: SchemaDocument) -> dict[str, Any]:
            # a branch keeps its place in its file, so that "#/$defs/..." inside of it goes on to resolve
            return {**schema, "$id": f"{file['$id']}/branch", "$defs": file.get("$defs", {})}

        if "allOf" not in item:
            return {"": self._pair(at_home(item))}
        plain = {k: v for k, v in item.items() if k != "allOf"}
        found = {"": self._pair(at_home(plain))}
        for rule in item["allOf"]:
            kind = rule["if"]["properties"]["kind"]["const"]
            branch, _ = self._resolve(rule["then"], file)
            needed = list(dict.fromkeys([*item.get("required", ()), *branch.get("required", ())]))
            found[kind] = self._pair(at_home({**branch, "required": needed}))
        return found

    def fits(self, document: object) -> bool:
        """Whether the document has the shape."""
        return bool(self._whole.decides.is_valid(document))

    def faults(self, document: object) -> list[Fault]:
        """Up to 20 places where the shape is wrong; [] where it is right."""
        if self.fits(document):
            return []
        found = list(islice(self._faults(document), MOST_ERRORS))
        return found or [self._fallback(document)]

    def _faults(self, document: object) -> Iterator[Fault]:
        yield from _told(self._outlined.explains, document, ())
        if not isinstance(document, dict):
            return
        for name, branches in self._places.items():
            value = document.get(name)
            if not isinstance(value, list if self._outline["properties"][name]["type"] == "array" else dict):
                continue  # told already
            for key, item in _entries(value):
                kind = item.get("kind") if isinstance(item, dict) else None
                pair = branches.get(kind, branches[""]) if isinstance(kind, str) else branches[""]
                if not pair.decides.is_valid(item):
                    yield from _told(pair.explains, item, (name, key))
        if self._inner is not None and isinstance(document.get("case"), dict):
            for fault in self._inner.faults(document["case"]):
                yield Fault(("case", *fault.path), fault.detail, fault.hint, tuple(("case", *c) for c in fault.cut))

    def _fallback(self, document: object) -> Fault:
        """For what only the deciding validator refuses (a newline at the end of a name)."""
        error = next(self._whole.decides.iter_errors(document))
        path = tuple(error.instance_path)
        return Fault(path, "This does not have the form that belongs here.", "See GET /v1/schemas.", (path,))


def _entries(value: object) -> Iterator[tuple[str | int, object]]:
    if isinstance(value, list):
        yield from enumerate(value)
    elif isinstance(value, dict):
        yield from value.items()


def _told(validator: Draft202012Validator, instance: object, base: Path) -> Iterator[Fault]:
    for error in validator.iter_errors(instance):
        yield from _fault(error, base)


def _fault(error: ValidationError, base: Path) -> Iterator[Fault]:
    path: Path = (*base, *error.absolute_path)
    for told in explain(error):
        at = path if told.member is None else (*path, told.member)
        cut: Sequence[Path] = () if told.keep else (at,)
        yield Fault(path if told.at_parent else at, told.detail, told.hint, tuple(cut))


def report(faults: Sequence[Fault], findings: Findings) -> None:
    """Put the faults of a request among its findings."""
    for fault in faults:
        findings.add(SchemaViolation, fault.detail, pointer=pointer(fault.path), hint=fault.hint)


def pruned(document: Any, faults: Sequence[Fault]) -> Any:
    """A copy of the document without what is at fault: list items become {}, so that positions stay."""
    cut = {path for fault in faults for path in fault.cut}
    return _copy(document, (), cut) if () not in cut else {}


def _copy(value: Any, here: Path, cut: set[Path]) -> Any:
    if len(here) >= max(map(len, cut), default=0):
        return value
    if isinstance(value, dict):
        return {k: _copy(v, (*here, k), cut) for k, v in value.items() if (*here, k) not in cut}
    if isinstance(value, list):
        return [{} if (*here, i) in cut else _copy(v, (*here, i), cut) for i, v in enumerate(value)]
    return value
