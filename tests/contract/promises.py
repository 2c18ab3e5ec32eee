"""What the contract promises of every reply, and a case to send and to break."""

from __future__ import annotations

import copy
import json
from functools import cache
from pathlib import Path
from typing import Any

import jsonschema_rs
import yaml
from werkzeug.test import TestResponse

from service.wire.library import read_schemas, schema_directory
from service.wire.pointers import resolve

ROOT = Path(__file__).resolve().parents[2]
LARGEST_PROBLEM = 16_000

LET_DOWN: dict[str, Any] = {
    "title": "Let-down station",
    "system": "steady_flow",
    "boundaries": [{"id": "valve"}],
    "streams": [
        {"id": "inlet", "to": "valve", "fluid": "water", "mass_flow": "12 t/h",
         "state": {"p": "40 barg", "T": "400 degC"}},
        {"id": "outlet", "from": "valve", "state": {"p": "10 barg", "T": "? degC"}},
    ],
    "transfers": [{"id": "loss", "kind": "heat", "from": "valve", "rate": "15 kW"}],
}  # fmt: skip


def let_down() -> dict[str, Any]:
    """A fresh copy, to be changed."""
    return copy.deepcopy(LET_DOWN)


@cache
def contract() -> dict[str, Any]:
    """openapi.yaml as a document."""
    document: dict[str, Any] = yaml.safe_load((ROOT / "openapi.yaml").read_text(encoding="utf-8"))
    return document


@cache
def bundled() -> dict[str, Any]:
    """The contract with the JSON Schemas that it refers to inside of it, so that it stands alone."""
    schemas = {f"json-{name}": _rooted(schema, name) for name, schema in read_schemas(schema_directory()).items()}
    document = _pointed_inward(contract())
    document["components"]["schemas"].update(schemas)
    return dict(document)


def _rooted(schema: Any, name: str) -> Any:
    if isinstance(schema, dict):
        return {
            k: _place(v, name) if k == "$ref" else _rooted(v, name)
            for k, v in schema.items()
            if not (k in ("$id", "$schema") and isinstance(v, str))
        }
    return [_rooted(v, name) for v in schema] if isinstance(schema, list) else schema


def _place(reference: str, name: str) -> str:
    uri, _, fragment = reference.partition("#")
    return f"#/components/schemas/json-{uri.rpartition('/')[2] or name}{fragment}"


def _pointed_inward(part: Any) -> Any:
    if isinstance(part, dict):
        if str(part.get("$ref", "")).startswith("v1/schemas/"):
            return {"$ref": f"#/components/schemas/json-{part['$ref'].rpartition('/')[2]}"}
        return {k: _pointed_inward(v) for k, v in part.items()}
    return [_pointed_inward(v) for v in part] if isinstance(part, list) else part


@cache
def _validator(pointer: str) -> Any:
    return jsonschema_rs.Draft202012Validator({**bundled(), "$ref": pointer}, offline=True)


def assert_fits(document: Any, schema: dict[str, Any]) -> None:
    """The document is valid by a schema of the contract."""
    schema = _pointed_inward(schema)
    validator = (
        _validator(schema["$ref"])
        if "$ref" in schema
        else jsonschema_rs.Draft202012Validator({**bundled(), **schema}, offline=True)
    )
    faults = [f"{'/'.join(map(str, e.instance_path))}: {e.message}"[:300] for e in validator.iter_errors(document)]
    assert not faults, faults[:5]


def assert_promised(reply: TestResponse, path: str, method: str) -> Any:
    """The reply is one that the contract has for the call; returns its document (bytes where it is no JSON)."""
    replies = contract()["paths"][path][method]["responses"]
    stated = replies.get(str(reply.status_code), replies["default"])
    if "$ref" in stated:
        stated = contract()["components"]["responses"][stated["$ref"].rpartition("/")[2]]
    if "content" not in stated:
        assert reply.data == b""
        return None
    assert reply.mimetype in stated["content"], (reply.mimetype, reply.data[:300])
    if not (reply.mimetype or "").endswith("json"):
        return reply.data
    document = json.loads(reply.data)
    assert_fits(document, stated["content"][reply.mimetype]["schema"])
    return document


def assert_problem(reply: TestResponse, status: int, kind: str | None = None, request: Any = None) -> dict[str, Any]:
    """The reply is a problem document of the status (and type); its pointers resolve in the request."""
    assert reply.status_code == status, reply.data[:500]
    assert reply.mimetype == "application/problem+json"
    assert reply.headers["Cache-Control"] == "no-store"
    assert len(reply.data) <= LARGEST_PROBLEM
    problem: dict[str, Any] = json.loads(reply.data)
    assert_fits(problem, {"$ref": "v1/schemas/problem"})
    assert problem["status"] == status
    assert problem["type"] == ("about:blank" if kind is None else f"/problems/{kind}")
    for entry in problem.get("errors", ()):
        if request is not None:
            resolve(request, entry["pointer"])  # raises KeyError for a pointer to nothing
    return problem
