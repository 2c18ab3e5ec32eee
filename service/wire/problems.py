"""Problem details (RFC 9457): one shape for every error of every route."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from typing import Any

from service.errors import CaseError, Issue
from service.wire.json_text import dumps

MOST_ERRORS = 20
LONGEST_TEXT = 500
LONGEST_ADDRESS = 130
LARGEST_ERRORS = 14_000
"""Bytes of all entries of `errors` together, so that a problem document stays below 16 kB."""
BLANK = "about:blank"
PREFIX = "/problems/"


def problem(
    error: CaseError, instance: str | None = None, locate: Callable[[str], str] | None = None
) -> dict[str, Any]:
    """The problem document of an error: type, title, status, detail, and where it is known `errors`.

    Each entry of `errors` has a `pointer` (RFC 6901, in fragment form), a `detail`, and mostly a `hint` and the
    `address` of the quantity. The pointer is the issue's own, else where `locate` finds its address, else the whole
    request (`#`). At most 20 are told; `errors_truncated` says that there were more.
    """
    body = bare_problem(PREFIX + error.problem_type, error.title, error.status, error.detail, instance)
    if error.issues:
        body["errors"] = _entries(error.issues, locate)
        if len(body["errors"]) < len(error.issues):
            body["errors_truncated"] = True
    return body


def bare_problem(kind: str, title: str, status: int, detail: str, instance: str | None = None) -> dict[str, Any]:
    """A problem document without `errors`."""
    body: dict[str, Any] = {"type": kind, "title": title, "status": status, "detail": cut(detail)}
    if instance:
        body["instance"] = instance
    return body


def cut(text: str) -> str:
    """The text, shortened where it is longer than a reader or a log would want."""
    return text if len(text) <= LONGEST_TEXT else text[: LONGEST_TEXT - 1] + "…"


def _entries(issues: Iterable[Issue], locate: Callable[[str], str] | None) -> list[dict[str, str]]:
    entries: list[dict[str, str]] = []
    size = 0
    for issue in issues:
        entry = _entry(issue, locate)
        size += len(dumps(entry))
        if len(entries) == MOST_ERRORS or (entries and size > LARGEST_ERRORS):
            break
        entries.append(entry)
    return entries


def _entry(issue: Issue, locate: Callable[[str], str] | None) -> dict[str, str]:
    pointer = issue.pointer or (locate(issue.address) if locate and issue.address else "")
    entry = {"pointer": pointer or "#", "detail": cut(issue.detail)}
    if issue.hint:
        entry["hint"] = cut(issue.hint)
    if issue.address:
        entry["address"] = issue.address[:LONGEST_ADDRESS]
    return entry
