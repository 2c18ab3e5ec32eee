"""Replies: JSON bodies, problem documents, and static texts that a client may keep."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from typing import Any

from flask import Response, request

from service.wire.json_text import dumps

JSON = "application/json"
PROBLEM = "application/problem+json"


@dataclass(frozen=True, slots=True)
class Page:
    """A body that changes only with the version of the service, and the tag that names it."""

    body: bytes
    content_type: str
    tag: str

    @classmethod
    def of(cls, body: bytes, content_type: str) -> Page:
        """The page of a text, tagged with its hash."""
        return cls(body, content_type, hashlib.sha256(body).hexdigest()[:32])

    @classmethod
    def of_document(cls, document: Any, content_type: str = JSON) -> Page:
        """The page of a JSON document."""
        return cls.of(dumps(document), content_type)

    def reply(self) -> Response:
        """The page, or 304 for a client that has it (If-None-Match)."""
        reply = Response(self.body, content_type=self.content_type)
        reply.set_etag(self.tag)
        reply.headers["Cache-Control"] = "public, max-age=300"
        reply.make_conditional(request)
        return reply


def json_reply(document: Any, status: int = 200) -> Response:
    """A computed answer."""
    return Response(dumps(document), status, content_type=JSON)


def problem_reply(document: dict[str, Any], status: int) -> Response:
    """A problem document; never stored."""
    reply = Response(dumps(document), status, content_type=PROBLEM)
    reply.headers["Cache-Control"] = "no-store"
    return reply
