"""Problem details (RFC 9457): one shape for every error of every route."""

from __future__ import annotations

from typing import Any

from service.errors import CaseError, Issue

MOST_ERRORS = 20
LONGEST_TEXT = 500
BLANK = "about:blank"
PREFIX = "/problems/"


def problem(error: CaseError, instance: str | None = None) -> dict[str, Any]:
    """The problem document of an error: type, title, status, detail, and where it is known `errors`.

    Each entry of `errors` has a `pointer` (RFC 6901, in fragment form), a `detail`, and mostly a `hint`. At most 20
    are told; `errors_truncated` says that there were more.
    """
    body = bare_problem(PREFIX + error.problem_type, error.title, error.status, error.detail, instance)
    if error.issues:
        body["errors"] = [_entry(issue) for issue in error.issues[:MOST_ERRORS]]
        if len(error.issues) > MOST_ERRORS:
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


def _entry(issue: Issue) -> dict[str, str]:
    entry = {"pointer": issue.pointer or "#", "detail": cut(issue.detail)}
    if issue.hint:
        entry["hint"] = cut(issue.hint)
    return entry
