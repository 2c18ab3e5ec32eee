"""Request bodies: read with an own counter, since a cut body must never be taken for a whole one."""

from __future__ import annotations

from typing import Any

from flask import Request
from werkzeug.exceptions import BadRequest, HTTPException, UnsupportedMediaType

from service.errors import PayloadTooLarge
from service.wire.json_text import loads

PIECE = 65_536
MEDIA_TYPE = "application/json"


class CompressedBody(UnsupportedMediaType):
    """415 for a Content-Encoding; the reply says in Accept-Encoding what is read (RFC 9110, 12.5.3)."""

    def get_headers(self, *_: Any) -> list[tuple[str, str]]:
        return [("Accept-Encoding", "identity")]


class OtherMediaType(UnsupportedMediaType):
    """415 for a Content-Type; the reply says in Accept what is read (RFC 9110, 15.5.16)."""

    def get_headers(self, *_: Any) -> list[tuple[str, str]]:
        return [("Accept", MEDIA_TYPE)]


def read_json(request: Request, largest: int) -> Any:
    """The JSON document of a request. Raises MalformedJson, PayloadTooLarge, or 415 for another media type."""
    if request.mimetype != MEDIA_TYPE:
        sent = request.mimetype[:60] or "nothing"
        raise OtherMediaType(
            f"The body is declared as {sent}. Send it as JSON with its header: -H 'Content-Type: {MEDIA_TYPE}' "
            "(curl -d alone declares a form; curl --json is short for both)."
        )
    if request.headers.get("Content-Encoding", "identity").lower() != "identity":
        raise CompressedBody("Compressed bodies are not read; send the JSON as it is, without Content-Encoding.")
    return loads(_read(request, largest))


def _read(request: Request, largest: int) -> bytes:
    """The whole body, counted while it comes: request.get_data() would cut a chunked one at the limit, silently."""
    declared = request.content_length
    if declared is not None and declared > largest:
        raise _too_large(largest)
    pieces, size = [], 0
    while piece := _piece(request):
        size += len(piece)
        if size > largest:
            raise _too_large(largest)
        pieces.append(piece)
    return b"".join(pieces)


def _piece(request: Request) -> bytes:
    try:
        return request.stream.read(PIECE)
    except HTTPException:
        raise
    except Exception as error:  # the server's own errors about a broken transfer have no common base
        raise BadRequest("The body broke off, or its chunks are malformed.") from error


def _too_large(largest: int) -> PayloadTooLarge:
    return PayloadTooLarge(
        f"The body is larger than {largest} bytes.",
        hint="Send fewer rows at a time, or use the command line: python -m service series.",
    )
