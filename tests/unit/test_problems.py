"""Problem documents from errors."""

from __future__ import annotations

from typing import Any

import pytest

from service.errors import CaseError, Issue, UnderSpecified
from service.wire.json_text import dumps
from service.wire.problems import LONGEST_TEXT, MOST_ERRORS, PREFIX, bare_problem, problem


def test_an_error_becomes_a_document_with_type_title_status_detail_and_places() -> None:
    error = UnderSpecified("Nothing fixes outlet.p.", address="outlet.p", hint="State the outlet pressure.")
    assert problem(error, locate={"outlet.p": "#/streams/1/state"}.__getitem__) == {
        "type": "/problems/under-specified",
        "title": "Something is missing",
        "status": 422,
        "detail": "Nothing fixes outlet.p.",
        "errors": [
            {
                "pointer": "#/streams/1/state",
                "detail": "Nothing fixes outlet.p.",
                "hint": "State the outlet pressure.",
                "address": "outlet.p",
            }
        ],
    }


def test_a_pointer_that_is_known_is_kept_and_an_unknown_one_is_the_whole_request() -> None:
    error = CaseError("Wrong.", [Issue("here", address="a.p", pointer="#/a"), Issue("somewhere")])
    entries = problem(error, locate=lambda _: "#/elsewhere")["errors"]
    assert [entry["pointer"] for entry in entries] == ["#/a", "#"]


def test_an_error_without_places_has_no_list_of_them() -> None:
    assert "errors" not in problem(CaseError("Wrong."))


def test_an_instance_is_told_where_there_is_one() -> None:
    assert problem(CaseError("Wrong."), "urn:uuid:1")["instance"] == "urn:uuid:1"
    assert "instance" not in bare_problem("about:blank", "Gone", 410, "Gone.")


@pytest.mark.parametrize("count", [MOST_ERRORS, MOST_ERRORS + 1])
def test_no_more_than_twenty_places_are_told_and_the_rest_is_announced(count: int) -> None:
    document = problem(CaseError("Wrong.", [Issue(f"fault {n}") for n in range(count)]))
    assert len(document["errors"]) == MOST_ERRORS
    assert document.get("errors_truncated", False) is (count > MOST_ERRORS)


@pytest.mark.parametrize("text", ["x" * 3_000_000, "€" * 10_000, "😀" * 10_000])
def test_no_text_of_a_request_makes_a_long_document(text: str) -> None:
    document = problem(CaseError(text, [Issue(text, address=text, hint=text)] * 50))
    assert len(document["detail"]) == LONGEST_TEXT
    assert document["errors"][0]["detail"].endswith("…")
    assert document["errors_truncated"]
    assert len(dumps(document)) <= 16_000


def tree(kind: type[CaseError]) -> list[type[CaseError]]:
    return [kind, *(k for child in kind.__subclasses__() for k in tree(child))]


def test_every_error_has_a_type_of_its_own_a_status_and_a_sentence_of_meaning() -> None:
    kinds: list[Any] = tree(CaseError)[1:]
    assert len({kind.problem_type for kind in kinds}) == len(kinds)
    for kind in kinds:
        assert 400 <= kind.status < 600
        assert kind.__doc__
        assert kind.__doc__.endswith(".")
        assert problem(kind("Wrong."))["type"] == PREFIX + kind.problem_type
