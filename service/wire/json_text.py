"""JSON text in and out, strictly: what is ambiguous, not finite or hostile is refused, with its line and column.

The standard library's parser does the work. It takes NaN, 1e999, repeated members and halves of surrogate pairs, and
gives up on deep nesting with a RecursionError; here each of them is refused, and a scan of the tokens finds the place.
"""

from __future__ import annotations

import json
import math
import re
from typing import Any, NamedTuple

from service.errors import MalformedJson

DEEPEST = 60
"""Levels of nesting; a case needs eight."""
LONGEST_INTEGER = 400
LARGEST_EXACT = 2**53
LONGEST_SHOWN = 40

# One alternative a token. Strings are closed by the end of the text too, so that a scan is linear whatever is sent.
_TOKEN = re.compile(r'"[^"\\]*+(?:\\.[^"\\]*+)*+(?:"|\\?\Z)|-?(?:[0-9][0-9.eE+-]*|Infinity)|NaN|[{}\[\],]', re.DOTALL)
_STRING = re.compile(r'"[^"\\]*+(?:\\.[^"\\]*+)*+(?:"|\\?\Z)', re.DOTALL)
_NOT_BRACKETS = re.compile(r"[^\[\]{}]+")
_SURROGATE = re.compile(r"\\u[dD][89a-fA-F]")

_FINITE = "Every number must be finite."


class _Suspect(Exception):
    """The parser met something that JSON allows or Python accepts, and we do not."""


class _Fault(NamedTuple):
    position: int
    detail: str
    hint: str


def loads(raw: bytes) -> Any:
    """The document of a text. Integers beyond 2^53 become floats, as other readers of JSON have them.

    Raises MalformedJson for what is not UTF-8 or not JSON, repeats a member in one object, holds a number that is not
    finite or half of a surrogate pair, or nests deeper than any case does.
    """
    text = _decoded(raw)
    if _too_deep(text):
        raise _explained(text)
    try:
        document = json.loads(
            text, object_pairs_hook=_members, parse_constant=_constant, parse_float=_float, parse_int=_integer
        )
    except json.JSONDecodeError as error:
        raise MalformedJson(
            f"{error.msg.removesuffix(' at')} (line {error.lineno}, column {error.colno}).",
            hint="Check the text around this place.",
        ) from error
    except _Suspect as error:
        raise _explained(text) from error
    if _SURROGATE.search(text) and (fault := _first_fault(text)):
        raise _at(text, fault)
    return document


def dumps(document: Any) -> bytes:
    """The document as compact UTF-8 JSON, members in their order. Raises ValueError for a number that is not finite."""
    return json.dumps(document, ensure_ascii=False, allow_nan=False, separators=(",", ":")).encode("utf-8")


def _decoded(raw: bytes) -> str:
    try:
        text = raw.decode("utf-8")
    except UnicodeDecodeError as error:
        raise MalformedJson(f"The body is not UTF-8 text (byte {error.start}).", hint="Send JSON as UTF-8.") from error
    if text.startswith("\ufeff"):
        raise MalformedJson("The body starts with a byte order mark.", hint="Send JSON as UTF-8 without it.")
    if not text.strip(" \t\r\n"):
        raise MalformedJson("The body is empty.", hint="Send a JSON object.")
    return text


# -- what the parser is asked to look at ---------------------------------------------------------------------------


def _members(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    members = dict(pairs)
    if len(members) < len(pairs):
        raise _Suspect
    return members


def _constant(_: str) -> Any:
    raise _Suspect


def _float(text: str) -> float:
    value = float(text)
    if not math.isfinite(value):
        raise _Suspect
    return value


def _integer(text: str) -> int | float:
    if len(text) <= 15:
        return int(text)
    if len(text) > LONGEST_INTEGER:
        raise _Suspect
    value = int(text)
    return value if abs(value) <= LARGEST_EXACT else _float(text)


def _too_deep(text: str) -> bool:
    """Whether brackets nest too deep; looked at before the parser, which recurses, sees the text."""
    if text.count("[") + text.count("{") <= DEEPEST:
        return False
    depth = 0
    for bracket in _NOT_BRACKETS.sub("", _STRING.sub("", text)):
        depth += 1 if bracket in "[{" else -1
        if depth > DEEPEST:
            return True
    return False


# -- where it stands -----------------------------------------------------------------------------------------------


def _explained(text: str) -> MalformedJson:
    fault = _first_fault(text)
    if fault is None:
        return MalformedJson("The body is not acceptable JSON.", hint="See RFC 7493 (I-JSON).")
    return _at(text, fault)


def _at(text: str, fault: _Fault) -> MalformedJson:
    line = text.count("\n", 0, fault.position) + 1
    column = fault.position - text.rfind("\n", 0, fault.position)
    return MalformedJson(f"{fault.detail} (line {line}, column {column}).", hint=fault.hint)


def _first_fault(text: str) -> _Fault | None:
    """The first token at fault, in the order of the text; None where there is none."""
    open_names: list[set[str] | None] = []  # the names seen in each open object; None for an array
    name_is_next = False
    for match in _TOKEN.finditer(text):
        token, at = match[0], match.start()
        if token in "{[":
            open_names.append(set() if token == "{" else None)
            name_is_next = token == "{"
            if len(open_names) > DEEPEST:
                return _Fault(at, f"The body nests deeper than {DEEPEST} levels", "A case needs eight.")
        elif token in "}]":
            if open_names:
                open_names.pop()
        elif token == ",":
            name_is_next = bool(open_names) and open_names[-1] is not None
        elif token[0] == '"':
            names = open_names[-1] if open_names and name_is_next else None
            if fault := _fault_of_string(token, at, names):
                return fault
            name_is_next = False
        elif fault := _fault_of_number(token, at):
            return fault
    return None


def _fault_of_string(token: str, at: int, names: set[str] | None) -> _Fault | None:
    try:
        value = json.loads(token)
    except json.JSONDecodeError:
        return None  # the parser says more about a string that is not one
    try:
        value.encode("utf-8")
    except UnicodeEncodeError:
        return _Fault(at, "A text holds half of a surrogate pair", "Escape the whole character, as two halves.")
    if names is None:
        return None
    if value in names:
        shown = value if len(value) <= LONGEST_SHOWN else value[:LONGEST_SHOWN] + "…"
        return _Fault(at, f'The member "{shown}" stands twice in one object', "Keep one of the two.")
    names.add(value)
    return None


def _fault_of_number(token: str, at: int) -> _Fault | None:
    if token in ("NaN", "Infinity", "-Infinity"):
        return _Fault(at, f"{token} is not a JSON number", f'{_FINITE} Write "?" for what is to be found.')
    try:
        too_large = not math.isfinite(float(token)) or (token.lstrip("-").isdigit() and len(token) > LONGEST_INTEGER)
    except ValueError:
        return None  # the parser says more about a number that is not one
    shown = token if len(token) <= LONGEST_SHOWN else f"of {len(token)} characters"
    return _Fault(at, f"The number {shown} is too large", _FINITE) if too_large else None
