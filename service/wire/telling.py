"""An error of the floors below, told in the reader's terms: amounts in the case's units, places as JSON Pointers."""

from __future__ import annotations

from collections.abc import Callable
from typing import TypeVar

from service.errors import CaseError, Issue
from service.wire.addresses import AddressBook
from service.wire.pointers import nearest_existing
from service.wire.presenting import Presenter
from service.wire.vocabulary import KIND_OF_MEMBER

Error = TypeVar("Error", bound=CaseError)


def told(error: Error, book: AddressBook, presenter: Presenter) -> Error:
    """The same error with every issue's amounts written out and its pointer found."""

    show = amounts_shown(book, presenter)
    issues = [Issue(issue.told(show), issue.address, issue.hint, _place(issue, book)) for issue in error.issues]
    detail = issues[0].detail if len(issues) == 1 and error.issues[0].amounts else error.detail
    renewed = type(error)(detail, issues)
    renewed.__cause__ = error.__cause__
    return renewed


def _place(issue: Issue, book: AddressBook) -> str:
    if issue.pointer:
        return nearest_existing(book.document, issue.pointer)
    return book.locate(issue.address)


def amounts_shown(book: AddressBook, presenter: Presenter) -> Callable[[str, float], str]:
    """How an issue's amounts are written: (kind or address, value [SI]) → `40 bar`."""
    return lambda what, value: presenter.text(_kind(what, book, presenter), value)


def _kind(what: str, book: AddressBook, presenter: Presenter) -> str:
    """The quantity kind of an amount that is told by its kind, or by an address (also of an auxiliary quantity)."""
    if what in presenter.units.kinds:
        return what
    member = what.rpartition(".")[2]
    return (
        book.kind(what) or KIND_OF_MEMBER.get(member) or KIND_OF_MEMBER.get(member.rpartition("_")[2], "dimensionless")
    )
