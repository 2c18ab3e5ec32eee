"""Request bodies: read with an own counter, since a cut body must never be taken for a whole one."""

from __future__ import annotations

from typing import Any

from flask import Request
from werkzeug.exceptions import UnsupportedMediaType

from service.errors import PayloadTooLarge
from service.wire.json_text import loads

PIECE = 65_536


def read_json(request: Request, largest: int) -> Any:
    """The JSON document of a request. Raises MalformedJson, PayloadTooLarge, or 415 for another media type."""
    if request.mimetype != "application/json":
        raise UnsupportedMediaType(
            "Send JSON, and say so in the header; with curl: -H 'Content-Type: application/json'."
        )
    if request.headers.get("Content-Encoding", "identity") != "identity":
        raise UnsupportedMediaType("Compressed bodies are not read; send the JSON as it is.")
    return loads(_read(request, largest))


def _read(request: Request, largest: int) -> bytes:
    declared = request.content_length
    if declared is not None and declared > largest:
        raise _too_large(largest)
    pieces, size = [], 0
    while piece := request.stream.read(PIECE):
        size += len(piece)
        if size > largest:
            raise _too_large(largest)
        pieces.append(piece)
    return b"".join(pieces)


def _too_large(largest: int) -> PayloadTooLarge:
    return PayloadTooLarge(
        f"The body is larger than {largest} bytes.", hint="Send fewer rows at a time, or use the command line."
    )
