"""Requests that a person gets wrong: each is refused with its type, at its place, with something to do about it."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest
from flask.testing import FlaskClient

from service.app import create_app
from service.settings import Settings
from tests.contract.promises import assert_problem, let_down

Change = Callable[[dict[str, Any]], Any]


def state(stream: int, **given: Any) -> Change:
    return lambda case: case["streams"][stream].update(state=given)


def member(place: str, number: int, **given: Any) -> Change:
    return lambda case: case[place][number].update(given)


WRONG: dict[str, tuple[Change, str, str]] = {
    "a misspelt property": (state(1, pressure="10 barg", T="? degC"), "schema-violation", "#/streams/1/state"),
    "a misspelt member": (member("streams", 0, mas_flow="12 t/h"), "schema-violation", "#/streams/0/mas_flow"),
    "a unit of another kind": (state(0, p="40 kg/s", T="400 degC"), "unit-of-wrong-kind", "#/streams/0/state/p"),
    "a unit that is none": (state(0, p="40 barq", T="400 degC"), "unit-not-understood", "#/streams/0/state/p"),
    "a tower of powers": (state(0, p="40 9**9**9", T="400 degC"), "unit-not-understood", "#/streams/0/state/p"),
    "a number without unit": (state(0, p=40, T="400 degC"), "", "#/streams/0/state/p"),
    "a missing outlet pressure": (state(1, T="? degC"), "under-specified", "#/streams/1/state"),
    "two values that disagree": (state(1, p="10 barg", T="300 degC"), "contradictory", ""),
    "a temperature below the triple point": (
        state(0, p="40 barg", T="-20 degC"), "state-out-of-range", "#/streams/0/state/T",
    ),
    "a temperature below absolute zero": (state(0, p="40 barg", T="-300 degC"), "", "#/streams/0/state/T"),
    "p and T on the saturation line": (
        state(0, p="101.41797792 kPa", T="100 degC"), "state-ambiguous", "#/streams/0/state",  # IAPWS-95 at 100 degC
    ),
    "a heat loss beyond what there is": (member("transfers", 0, rate="100 MW"), "", ""),
    "a stream that leads nowhere": (member("streams", 1, **{"from": "vale"}), "schema-violation", "#/streams/1/from"),
    "a fluid that is none": (member("streams", 0, fluid="watre"), "unknown-fluid", "#/streams/0/fluid"),
    "an id that stands twice": (member("streams", 1, id="inlet"), "schema-violation", "#/streams/1/id"),
    "a system that is none": (lambda case: case.update(system="steady"), "schema-violation", "#/system"),
}  # fmt: skip


@pytest.mark.parametrize("name", WRONG)
def test_what_people_get_wrong_is_told_where_and_with_a_remedy(client: FlaskClient, name: str) -> None:
    change, kind, place = WRONG[name]
    case = let_down()
    change(case)
    reply = client.post("/v1/balances", json=case)
    told = reply.get_json()
    problem = assert_problem(reply, 422, kind or told["type"].rpartition("/")[2], case)
    assert problem["errors"]
    assert any(entry.get("hint") for entry in problem["errors"])
    if place:
        assert any(entry["pointer"].startswith(place) for entry in problem["errors"]), problem["errors"]


def test_a_misspelt_name_is_answered_with_the_one_that_was_meant(client: FlaskClient) -> None:
    for change, meant in (
        (member("streams", 0, mas_flow="12 t/h"), "mass_flow"),
        (member("streams", 1, **{"from": "vale"}), "valve"),
        (member("streams", 0, fluid="watre"), "water"),
        (state(0, p="40 barq", T="400 degC"), "barg"),
    ):
        case = let_down()
        change(case)
        hints = " ".join(entry.get("hint", "") for entry in client.post("/v1/balances", json=case).get_json()["errors"])
        assert meant in hints


def test_surplus_data_that_agree_are_compared_and_not_refused(client: FlaskClient) -> None:
    case = let_down()
    case["streams"][1]["mass_flow"] = "12 t/h"
    answer = client.post("/v1/balances", json=case).get_json()
    assert answer["status"] == "solved"
    assert len(answer["checks"]["surplus"]) == 1


def test_a_solution_beyond_the_time_budget_is_given_up_and_told() -> None:
    impatient = create_app(Settings(time_budget=0.001)).test_client()
    values = [40.0 + 0.001 * row for row in range(5_000)]
    request = {"case": let_down(), "readings": {"inlet.p": {"unit": "barg", "values": values}}}
    problem = assert_problem(impatient.post("/v1/balances/series", json=request), 503, "time-budget-exceeded")
    assert problem["title"] == "The time budget is used up"
