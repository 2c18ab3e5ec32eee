"""Is the process alive, and ready to serve: for load balancers and orchestration."""

from __future__ import annotations

from flask import Blueprint, Response

from service.errors import CaseError
from service.web.replies import json_reply
from service.wire.operations import Operations

PROBE = {"fluid": "water", "state": {"p": "1 bar", "T": "20 degC"}}


def health(operations: Operations) -> Blueprint:
    pages = Blueprint("health", __name__)

    @pages.get("/livez")
    def live() -> Response:
        return _unstored(json_reply({"status": "alive"}))

    @pages.get("/readyz")
    def ready() -> Response:
        try:
            operations.states(PROBE)
        except CaseError as error:
            return _unstored(json_reply({"status": "not ready", "reason": error.detail}, 503))
        return _unstored(json_reply({"status": "ready"}))

    return pages


def _unstored(reply: Response) -> Response:
    reply.headers["Cache-Control"] = "no-store"
    return reply
