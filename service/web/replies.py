"""Replies: JSON bodies, problem documents, and static texts that a client may keep."""

from __future__ import annotations

import hashlib
from typing import Any

from flask import Response, request

from service.wire.json_text import dumps


def json_reply(document: Any, status: int = 200) -> Response:
    return Response(dumps(document), status, content_type="application/json")


def problem_reply(document: dict[str, Any], status: int) -> Response:
    reply = Response(dumps(document), status, content_type="application/problem+json")
    reply.headers["Cache-Control"] = "no-store"
    return reply


def kept_reply(body: bytes, content_type: str) -> Response:
    """A body that changes only with the version: with its ETag, and 304 for a client that has it."""
    reply = Response(body, content_type=content_type)
    reply.set_etag(hashlib.sha256(body).hexdigest()[:32])
    reply.headers["Cache-Control"] = "public, max-age=300"
    reply.make_conditional(request)
    return reply
