"""JSON text in and out, strictly: what is ambiguous, not finite or hostile is refused with its place."""

from __future__ import annotations

import json
import math
from typing import Any, NoReturn

from service.errors import MalformedJson

DEEPEST = 60
"""Levels of nesting; a case needs six."""
LONGEST_INTEGER = 400


def loads(raw: bytes) -> Any:
    """The document. Raises MalformedJson for text that is not UTF-8 JSON, repeats a member, is not finite, or nests
    deeper than any case can."""
    try:
        text = raw.decode("utf-8")
    except UnicodeDecodeError as error:
        raise MalformedJson(f"The body is not UTF-8 text (byte {error.start}).", hint="Send JSON as UTF-8.") from error
    if text.startswith("\ufeff"):
        raise MalformedJson("The body starts with a byte order mark.", hint="Send JSON as UTF-8 without it.")
    if not text.strip():
        raise MalformedJson("The body is empty.", hint="Send a JSON object.")
    _refuse_depth(text)
    try:
        document = json.loads(
            text, object_pairs_hook=_members, parse_constant=_constant, parse_float=_float, parse_int=_integer
        )
    except json.JSONDecodeError as error:
        raise MalformedJson(
            f"{error.msg} at line {error.lineno}, column {error.colno}.", hint="Check the text around this place."
        ) from error
    if "\\u" in text:
        _refuse_surrogates(document)
    return document


def dumps(document: Any) -> bytes:
    """The document as compact UTF-8 JSON, members in their order. Raises ValueError for a number that is not finite."""
    return json.dumps(document, ensure_ascii=False, allow_nan=False, separators=(",", ":")).encode("utf-8")


def _members(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    members = dict(pairs)
    if len(members) < len(pairs):
        seen: set[str] = set()
        twice = next(name for name, _ in pairs if name in seen or seen.add(name))  # type: ignore[func-returns-value]
        raise MalformedJson(f'The member "{twice[:80]}" stands twice in one object.', hint="Keep one of the two.")
    return members


def _constant(name: str) -> NoReturn:
    raise MalformedJson(f"{name} is not a JSON number.", hint='Every number must be finite; for an unknown write "?".')


def _float(text: str) -> float:
    value = float(text)
    if not math.isfinite(value):
        raise MalformedJson(f"The number {text[:40]} is too large.", hint="Every number must be finite.")
    return value


def _integer(text: str) -> int | float:
    if len(text) > LONGEST_INTEGER:
        raise MalformedJson(f"An integer of {len(text)} digits is too large.", hint="Every number must be finite.")
    value = int(text)
    if abs(value) > 2**53:
        return _float(text)
    return value


def _refuse_depth(text: str) -> None:
    """Count brackets outside of strings; cheap, and before the recursive parser sees the text."""
    if text.count("[") + text.count("{") <= DEEPEST:
        return
    depth = 0
    in_string = escaped = False
    for character in text:
        if in_string:
            if escaped:
                escaped = False
            elif character == "\\":
                escaped = True
            elif character == '"':
                in_string = False
        elif character == '"':
            in_string = True
        elif character in "[{":
            depth += 1
            if depth > DEEPEST:
                raise MalformedJson(f"The body nests deeper than {DEEPEST} levels.", hint="A case needs six.")
        elif character in "]}":
            depth -= 1


def _refuse_surrogates(document: Any) -> None:
    if isinstance(document, str):
        if any("\ud800" <= c <= "\udfff" for c in document):
            raise MalformedJson("A text holds half of a surrogate pair.", hint="Escape the whole character.")
    elif isinstance(document, dict):
        for name, value in document.items():
            _refuse_surrogates(name)
            _refuse_surrogates(value)
    elif isinstance(document, list):
        for value in document:
            _refuse_surrogates(value)
