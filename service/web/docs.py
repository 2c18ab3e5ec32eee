"""The contract as it is (`/openapi.yaml`), the same for reading (`/docs`), and the meaning of each problem type."""

from __future__ import annotations

import json
import re
from collections.abc import Iterator
from typing import Any

import yaml
from flask import Blueprint, Response, render_template
from markupsafe import Markup, escape

from service.errors import CaseError, NotFound
from service.web.replies import Page

SCHEMAS = "v1/schemas/"
METHODS = ("get", "post", "put", "patch", "delete")
POLICY = "default-src 'none'; style-src 'unsafe-inline'; base-uri 'none'; form-action 'none'"
_CODE = re.compile(r"`([^`]+)`")


def docs(contract: bytes) -> Blueprint:
    """contract: the text of openapi.yaml."""
    pages = Blueprint("docs", __name__, template_folder="templates")
    document = yaml.safe_load(contract)
    types = {kind["type"]: kind for kind in problem_types()}
    raw = Page.of(contract, "application/yaml")

    @pages.get("/openapi.yaml")
    def openapi() -> Response:
        return raw.reply()

    @pages.get("/docs")
    def reference() -> Response:
        text = render_template(
            "docs.html", info=document["info"], groups=_groups(document), problems=types.values(), prose=_prose
        )
        reply = Page.of(text.encode("utf-8"), "text/html; charset=utf-8").reply()
        reply.headers["Content-Security-Policy"] = POLICY
        return reply

    @pages.get("/problems/<name>")
    def problem_type(name: str) -> Response:
        if name not in types:
            raise NotFound(f"There is no problem type {name[:60]!r}.", hint="They are listed at /docs.")
        return Page.of_document(types[name]).reply()

    return pages


def problem_types() -> list[dict[str, Any]]:
    """Every problem type with its status, its title and its meaning in a sentence, as the tree of errors has them."""
    return [
        {"type": kind.problem_type, "status": kind.status, "title": kind.title, "meaning": kind.__doc__ or kind.title}
        for kind in CaseError.__subclasses__()
    ]


def _groups(document: dict[str, Any]) -> list[dict[str, Any]]:
    """The calls of the contract under their tags, in its order."""
    calls = list(_calls(document))
    return [{**tag, "calls": [c for c in calls if tag["name"] in c["tags"]]} for tag in document["tags"]]


def _calls(document: dict[str, Any]) -> Iterator[dict[str, Any]]:
    for path, item in document["paths"].items():
        for method in METHODS:
            if method in item:
                operation = item[method]
                content = operation.get("requestBody", {}).get("content", {}).get("application/json", {})
                yield {
                    **operation,
                    "method": method.upper(),
                    "path": path,
                    "accepts": _schema_name(content),
                    "sample": _sample(content),
                    "answers": [_answer(document, status, a) for status, a in operation["responses"].items()],
                }


def _answer(document: dict[str, Any], status: str, answer: dict[str, Any]) -> dict[str, Any]:
    if "$ref" in answer:
        answer = document["components"]["responses"][answer["$ref"].rpartition("/")[2]]
    media: dict[str, Any] = answer.get("content", {})
    names = [_schema_name(content) for content in media.values()]
    return {"status": status, "text": answer["description"], "media": "".join(media), "schema": "".join(names)}


def _schema_name(content: dict[str, Any]) -> str:
    """The name of the JSON Schema that a content refers to; "" where the contract spells it out itself."""
    reference = str(content.get("schema", {}).get("$ref", ""))
    return reference.removeprefix(SCHEMAS) if reference.startswith(SCHEMAS) else ""


def _sample(content: dict[str, Any]) -> str:
    return json.dumps(content["example"], indent=2, ensure_ascii=False) if "example" in content else ""


def _prose(text: str | None) -> Markup:
    """Paragraphs and `code`, escaped for HTML."""
    paragraphs = (text or "").strip().split("\n\n")
    return Markup("").join(
        Markup("<p>{}</p>").format(Markup(_CODE.sub(r"<code>\1</code>", str(escape(p))))) for p in paragraphs if p
    )
