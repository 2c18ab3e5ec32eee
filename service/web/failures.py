"""Every failure leaves as a problem document; what nobody foresaw shows a number to ask for, nothing of the inside."""

from __future__ import annotations

import logging
import uuid

from flask import Flask, Response, request
from werkzeug.exceptions import HTTPException
from werkzeug.exceptions import NotFound as NoRoute

from service.errors import CaseError, NotFound
from service.web.replies import problem_reply
from service.wire.problems import BLANK, bare_problem, problem

log = logging.getLogger("service.web")

LONGEST_PATH = 100


def install(app: Flask) -> None:
    """Register the handlers on the application."""
    app.register_error_handler(CaseError, _case_error)
    app.register_error_handler(NoRoute, _no_route)
    app.register_error_handler(HTTPException, _http_error)
    app.register_error_handler(Exception, _unforeseen)


def _case_error(error: CaseError) -> Response:
    return problem_reply(problem(error), error.status)


def _no_route(_: HTTPException) -> Response:
    return _case_error(NotFound(f"There is nothing at {_path()}. What there is stands at /docs."))


def _http_error(error: HTTPException) -> Response:
    status = error.code or 500
    detail = error.description or error.name
    if status == 405:
        detail = f"{request.method[:20]} is not served at {_path()}; the Allow header says what is."
    reply = problem_reply(bare_problem(BLANK, error.name, status, detail), status)
    for name, value in error.get_headers(None, None):
        if name.lower() not in ("content-type", "content-length"):
            reply.headers[name] = value
    return reply


def _unforeseen(error: Exception) -> Response:
    instance = f"urn:uuid:{uuid.uuid4()}"
    log.error("unforeseen failure", exc_info=error, extra={"told": {"instance": instance, "path": request.path}})
    detail = "Something went wrong inside the service. It has been logged; ask for it by the number under `instance`."
    return problem_reply(bare_problem(BLANK, "Internal Server Error", 500, detail, instance), 500)


def _path() -> str:
    return request.path if len(request.path) <= LONGEST_PATH else request.path[:LONGEST_PATH] + "…"
