"""Every error that a user can cause, as one small tree.

    CaseError                       what it says is meant for the user
    ├── MalformedJson           400 malformed-json
    ├── SchemaViolation         422 schema-violation
    ├── UnitNotUnderstood       422 unit-not-understood
    ├── UnitOfWrongKind         422 unit-of-wrong-kind
    ├── UnknownFluid            422 unknown-fluid
    ├── UnderSpecified          422 under-specified
    ├── OverSpecified           422 over-specified
    ├── Contradictory           422 contradictory
    ├── StateOutOfRange         422 state-out-of-range
    ├── StateAmbiguous          422 state-ambiguous
    ├── NoSolution              422 no-solution
    ├── NotConverged            422 not-converged
    ├── TimeBudgetExceeded      503 time-budget-exceeded
    ├── PayloadTooLarge         413 payload-too-large
    ├── Unauthorized            401 unauthorized
    ├── RateLimited             429 rate-limited
    └── NotFound                404 not-found

Inside the program an error speaks of quantities by their address (`outlet.T`); the wire floor turns
addresses into JSON Pointers. Nothing here knows of HTTP beyond the number that each class carries.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import ClassVar


@dataclass(frozen=True, slots=True)
class Issue:
    """One thing that is wrong: where (address or JSON Pointer), what, and what to do about it.

    address: `item.property` of the quantity at fault, or "" where none is.
    pointer: RFC 6901 pointer in fragment form into the request, where it is known already, else "".
    amounts: (quantity kind or address, value [SI]) for each {0}, {1} ... in the detail, for the reader's own units.
    """

    detail: str
    address: str = ""
    hint: str = ""
    pointer: str = ""
    amounts: tuple[tuple[str, float], ...] = ()

    def told(self, show: Callable[[str, float], str]) -> str:
        """The detail with its amounts written by `show(kind, value)`."""
        if not self.amounts:
            return self.detail
        return self.detail.format(*(show(kind, value) for kind, value in self.amounts))


class CaseError(Exception):
    """Base of the tree. `detail` is one sentence for the user; `issues` lists every place at fault."""

    problem_type: ClassVar[str] = "about:blank"
    status: ClassVar[int] = 422
    title: ClassVar[str] = "The case could not be solved"

    def __init__(self, detail: str, issues: Iterable[Issue] = (), *, address: str = "", hint: str = "") -> None:
        super().__init__(detail)
        self.detail = detail
        self.issues: tuple[Issue, ...] = tuple(issues)
        if not self.issues and (address or hint):
            self.issues = (Issue(detail, address, hint),)


class MalformedJson(CaseError):
    """The body is not UTF-8 JSON, repeats a member, nests too deep, or holds a number that is not finite."""

    problem_type, status, title = "malformed-json", 400, "The body is not valid JSON"


class SchemaViolation(CaseError):
    """A member is missing, misspelt or of the wrong type, or a reference points to nothing."""

    problem_type, title = "schema-violation", "The request does not have the shape of a case"


class UnitNotUnderstood(CaseError):
    """The unit is not in the closed table of symbols; nearby spellings are suggested."""

    problem_type, title = "unit-not-understood", "A unit is not known"


class UnitOfWrongKind(CaseError):
    """The unit belongs to another kind of quantity than the one that stands here."""

    problem_type, title = "unit-of-wrong-kind", "A unit does not fit its quantity"


class UnknownFluid(CaseError):
    """No property model goes by this name."""

    problem_type, title = "unknown-fluid", "A fluid is not known"


class UnderSpecified(CaseError):
    """Something is asked that the given values do not determine; what to add is named."""

    problem_type, title = "under-specified", "Something is missing"


class OverSpecified(CaseError):
    """More is given than can be compared."""

    problem_type, title = "over-specified", "Too much is given"


class Contradictory(CaseError):
    """Two ways to the same quantity disagree by more than the case allows; both values are shown."""

    problem_type, title = "contradictory", "Given values disagree"


class StateOutOfRange(CaseError):
    """A state lies outside the limits of validity of the property model, or outside of physics."""

    problem_type, title = "state-out-of-range", "A state lies outside what the property model covers"


class StateAmbiguous(CaseError):
    """The properties given do not fix a state, for example p with T on the saturation line."""

    problem_type, title = "state-ambiguous", "The given properties do not fix the state"


class NoSolution(CaseError):
    """The equations have no solution with the values given; the nearest miss is told where there is one."""

    problem_type, title = "no-solution", "No state satisfies the case"


class NotConverged(CaseError):
    """The iteration gave up before the equations were satisfied; a start or bounds would help."""

    problem_type, title = "not-converged", "The iteration did not converge"


class TimeBudgetExceeded(CaseError):
    """The solution took longer than the service allows."""

    problem_type, status, title = "time-budget-exceeded", 503, "The time budget is used up"


class PayloadTooLarge(CaseError):
    """The request body is larger than the service reads."""

    problem_type, status, title = "payload-too-large", 413, "The request is too large"


class Unauthorized(CaseError):
    """The request carries no valid key."""

    problem_type, status, title = "unauthorized", 401, "A valid key is needed"


class RateLimited(CaseError):
    """This client asks more often than it may."""

    problem_type, status, title = "rate-limited", 429, "Too many requests"


class NotFound(CaseError):
    """There is no such resource."""

    problem_type, status, title = "not-found", 404, "There is nothing here"
