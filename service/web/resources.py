"""The resources. A view has three steps: parse, solve, dump."""

from __future__ import annotations

import time
from collections.abc import Callable
from functools import lru_cache
from typing import Any

from flask import Blueprint, Response, request

from service.web.bodies import read_json
from service.web.replies import JSON, Page, json_reply
from service.wire.operations import Operations

Document = dict[str, Any]

SCHEMA = "application/schema+json"
MOST_PAGES = 256
"""Pages of single fluids, schemas and examples kept; there are about 200."""


def balances(operations: Operations, largest_body: int) -> Blueprint:
    """What is computed: POST with a JSON document, answer with a JSON document. largest_body [bytes]."""
    pages = Blueprint("balances", __name__, url_prefix="/v1")

    def computed(work: Callable[[Any], Document]) -> Response:
        begun = time.perf_counter()
        document = read_json(request, largest_body)
        parsed = time.perf_counter()
        answer = work(document)
        solved = time.perf_counter()
        reply = json_reply(answer)
        dumped = time.perf_counter()
        spans = (("parse", parsed - begun), ("solve", solved - parsed), ("dump", dumped - solved))
        reply.headers["Server-Timing"] = ", ".join(f"{name};dur={span * 1e3:.2f}" for name, span in spans)
        return reply

    @pages.post("/balances")
    def solve() -> Response:
        return computed(operations.solve)

    @pages.post("/balances/check")
    def check() -> Response:
        return computed(operations.check)

    @pages.post("/balances/series")
    def series() -> Response:
        return computed(operations.series)

    @pages.post("/states")
    def states() -> Response:
        return computed(operations.states)

    return pages


def references(operations: Operations) -> Blueprint:
    """What can be looked up: fluids, units, schemas, examples. Each page is written once and kept."""
    pages = Blueprint("references", __name__, url_prefix="/v1")

    lists: dict[str, Callable[[], Document]] = {
        "fluids": operations.fluids,
        "units": operations.units,
        "schemas": operations.schemas,
        "examples": operations.examples,
    }
    singles: dict[str, tuple[Callable[[str], Document], str]] = {
        "fluids": (operations.fluid, JSON),
        "schemas": (operations.schema, SCHEMA),
        "examples": (operations.example, JSON),
    }

    @lru_cache(maxsize=MOST_PAGES)
    def page(kind: str, name: str | None) -> Page:
        if name is None:
            return Page.of_document(lists[kind]())
        describe, content_type = singles[kind]
        return Page.of_document(describe(name), content_type)

    @pages.get("/fluids")
    def fluids() -> Response:
        return page("fluids", None).reply()

    @pages.get("/fluids/<name>")
    def fluid(name: str) -> Response:
        return page("fluids", name).reply()

    @pages.get("/units")
    def units() -> Response:
        return page("units", None).reply()

    @pages.get("/schemas")
    def schemas() -> Response:
        return page("schemas", None).reply()

    @pages.get("/schemas/<name>")
    def schema(name: str) -> Response:
        return page("schemas", name).reply()

    @pages.get("/examples")
    def examples() -> Response:
        return page("examples", None).reply()

    @pages.get("/examples/<name>")
    def example(name: str) -> Response:
        return page("examples", name).reply()

    return pages
