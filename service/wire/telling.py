"""An error of the floors below, told in the reader's terms: amounts in the case's units, places as JSON Pointers."""

from __future__ import annotations

from typing import TypeVar

from service.errors import CaseError, Issue
from service.wire.addresses import AddressBook
from service.wire.pointers import nearest_existing
from service.wire.presenting import Presenter

Error = TypeVar("Error", bound=CaseError)


def told(error: Error, book: AddressBook, presenter: Presenter) -> Error:
    """The same error with every issue's amounts written out and its pointer found."""
    issues = [
        Issue(issue.told(presenter.text), issue.address, issue.hint, _place(issue, book)) for issue in error.issues
    ]
    detail = issues[0].detail if len(issues) == 1 and error.issues[0].amounts else error.detail
    renewed = type(error)(detail, issues)
    renewed.__cause__ = error.__cause__
    return renewed


def _place(issue: Issue, book: AddressBook) -> str:
    if issue.pointer:
        return nearest_existing(book.document, issue.pointer)
    return book.locate(issue.address)
