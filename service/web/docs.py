"""The contract as it is (`/openapi.yaml`), the same for reading (`/docs`), and the meaning of each problem type."""

from __future__ import annotations

import json
from typing import Any

import yaml
from flask import Blueprint, Response, render_template

from service.errors import CaseError, NotFound
from service.web.replies import json_reply, kept_reply

METHODS = ("get", "post", "put", "patch", "delete")


def docs(contract: bytes) -> Blueprint:
    """contract: the text of openapi.yaml."""
    pages = Blueprint("docs", __name__, template_folder="templates")
    document = yaml.safe_load(contract)

    @pages.get("/openapi.yaml")
    def openapi() -> Response:
        return kept_reply(contract, "application/yaml")

    @pages.get("/docs")
    def reference() -> Response:
        page = render_template("docs.html", info=document["info"], calls=_calls(document), problems=_problem_types())
        return kept_reply(page.encode("utf-8"), "text/html; charset=utf-8")

    @pages.get("/problems/<name>")
    def problem_type(name: str) -> Response:
        for kind in _problem_types():
            if kind["type"] == name:
                return json_reply(kind)
        raise NotFound(f"There is no problem type {name[:60]!r}.")

    return pages


def _calls(document: dict[str, Any]) -> list[dict[str, Any]]:
    """Every call of the contract, in its order, with the example of its request where it has one."""
    calls = []
    for path, item in document["paths"].items():
        for method in METHODS:
            if method in item:
                calls.append({"method": method.upper(), "path": path, **item[method], "sample": _sample(item[method])})
    return calls


def _sample(operation: dict[str, Any]) -> str:
    content = operation.get("requestBody", {}).get("content", {}).get("application/json", {})
    examples = [e["value"] for e in content.get("examples", {}).values()]
    if "example" in content:
        examples.insert(0, content["example"])
    return json.dumps(examples[0], indent=2, ensure_ascii=False) if examples else ""


def _problem_types() -> list[dict[str, Any]]:
    return [
        {"type": kind.problem_type, "status": kind.status, "title": kind.title, "meaning": kind.__doc__ or kind.title}
        for kind in CaseError.__subclasses__()
    ]
