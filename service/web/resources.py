"""The resources. A view has three steps: parse, solve, dump."""

from __future__ import annotations

import time
from collections.abc import Callable
from typing import Any

from flask import Blueprint, Response, request

from service.web.bodies import read_json
from service.web.replies import json_reply, kept_reply
from service.wire.json_text import dumps
from service.wire.operations import Operations


def balances(operations: Operations, largest_body: int) -> Blueprint:
    """What is computed: POST with a JSON document, answer with a JSON document."""
    pages = Blueprint("balances", __name__, url_prefix="/v1")

    def computed(work: Callable[[Any], dict[str, Any]]) -> Response:
        begun = time.perf_counter()
        document = read_json(request, largest_body)
        parsed = time.perf_counter()
        answer = work(document)
        solved = time.perf_counter()
        reply = json_reply(answer)
        dumped = time.perf_counter()
        spans = (("read", parsed - begun), ("solve", solved - parsed), ("write", dumped - solved))
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
    """What can be looked up: fluids, units, schemas, examples."""
    pages = Blueprint("references", __name__, url_prefix="/v1")

    def kept(document: dict[str, Any], content_type: str = "application/json") -> Response:
        return kept_reply(dumps(document), content_type)

    @pages.get("/fluids")
    def fluids() -> Response:
        return kept(operations.fluids())

    @pages.get("/fluids/<name>")
    def fluid(name: str) -> Response:
        return kept(operations.fluid(name))

    @pages.get("/units")
    def units() -> Response:
        return kept(operations.units())

    @pages.get("/schemas")
    def schemas() -> Response:
        return kept(operations.schemas())

    @pages.get("/schemas/<name>")
    def schema(name: str) -> Response:
        return kept(operations.schema(name), "application/schema+json")

    @pages.get("/examples")
    def examples() -> Response:
        return kept(operations.examples())

    @pages.get("/examples/<name>")
    def example(name: str) -> Response:
        return kept(operations.example(name))

    return pages
