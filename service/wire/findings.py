"""Everything that is wrong with one request, gathered before anything is said."""

from __future__ import annotations

from service.errors import (
    CaseError,
    Issue,
    NotFound,
    SchemaViolation,
    StateAmbiguous,
    StateOutOfRange,
    UnitNotUnderstood,
    UnitOfWrongKind,
    UnknownFluid,
)

PRECEDENCE: tuple[type[CaseError], ...] = (
    SchemaViolation,
    UnitNotUnderstood,
    UnitOfWrongKind,
    UnknownFluid,
    StateOutOfRange,
    StateAmbiguous,
    NotFound,
)
"""Which problem type names a request in which several kinds of things are wrong: the first of these."""

MOST_ISSUES = 100
"""Issues kept; a problem document shows 20 of them."""


class Findings:
    """A list of issues, each with the class of error it amounts to."""

    def __init__(self) -> None:
        self.found: list[tuple[type[CaseError], Issue]] = []
        self.count = 0

    def __bool__(self) -> bool:
        return bool(self.found)

    @property
    def full(self) -> bool:
        return len(self.found) >= MOST_ISSUES

    def add(self, error: type[CaseError], detail: str, *, pointer: str, address: str = "", hint: str = "") -> None:
        """Note one thing that is wrong."""
        self.count += 1
        if not self.full:
            self.found.append((error, Issue(detail, address, hint, pointer)))

    def adopt(self, error: CaseError, *, pointer: str, address: str = "") -> None:
        """Note an error raised elsewhere, at a place that is known here."""
        hint = error.issues[0].hint if error.issues else ""
        self.add(type(error), error.detail, pointer=pointer, address=address, hint=hint)

    def raise_any(self) -> None:
        """Raise the most fitting CaseError for what was found; return where nothing was."""
        if not self.found:
            return
        rank = {error: number for number, error in enumerate(PRECEDENCE)}
        ordered = sorted(self.found, key=lambda pair: rank.get(pair[0], len(rank)))
        error, first = ordered[0]
        issues = [issue for _, issue in ordered]
        detail = first.detail if len(issues) == 1 else f"{self.count} things in the request need a change."
        raise error(detail, issues)
