"""Is the process alive, and ready to serve: for load balancers and orchestration."""

from __future__ import annotations

from typing import Any

from flask import Blueprint, Response, request

from service.errors import CaseError
from service.web.replies import json_reply, problem_reply
from service.wire.operations import Operations
from service.wire.problems import BLANK, bare_problem

PROBE = {"fluid": "water", "state": {"p": "1 bar", "T": "20 degC"}}


def health(operations: Operations) -> Blueprint:
    """`/livez` checks nothing but that the process answers; `/readyz` finds one state, and with ?verbose says more."""
    pages = Blueprint("health", __name__)

    @pages.get("/livez")
    def live() -> Response:
        return _unstored(json_reply({"status": "alive"}))

    @pages.get("/readyz")
    def ready() -> Response:
        try:
            operations.states(PROBE)
        except CaseError as error:
            detail = f"A state of water could not be found: {error.detail}"
            return problem_reply(bare_problem(BLANK, "Service Unavailable", 503, detail), 503)
        answer: dict[str, Any] = {"status": "ready"}
        if "verbose" in request.args:
            answer["checks"] = [
                {"name": "state of water", "status": "found"},
                {"name": "schemas", "status": "read", "count": len(operations.schemas()["schemas"])},
                {"name": "examples", "status": "read", "count": len(operations.examples()["examples"])},
            ]
        return _unstored(json_reply(answer))

    return pages


def _unstored(reply: Response) -> Response:
    reply.headers["Cache-Control"] = "no-store"
    return reply
