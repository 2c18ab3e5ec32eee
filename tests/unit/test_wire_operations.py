"""Operations from document to document, on the real solver: what a client sends and gets."""

from __future__ import annotations

import copy
from functools import cache
from typing import Any

import pytest
from jsonschema import Draft202012Validator
from referencing import Registry, Resource

from service.errors import (
    CaseError,
    Contradictory,
    Issue,
    NoSolution,
    NotFound,
    SchemaViolation,
    StateOutOfRange,
    UnderSpecified,
    UnknownFluid,
)
from service.wire.addresses import AddressBook
from service.wire.library import read_examples, read_schemas, schema_directory
from service.wire.operations import Operations
from service.wire.pointers import resolve
from service.wire.presenting import Presenter
from service.wire.telling import told

from .recompute import in_unit, recompute_steps, recomputed
from .wire_helpers import issues, let_down, table

EXAMPLES = read_examples(schema_directory())


@cache
def operations() -> Operations:
    return Operations.build()


def refused(call: Any, document: Any) -> CaseError:
    """The error of an operation; every pointer of it leads somewhere in the document."""
    with pytest.raises(CaseError) as caught:
        call(document)
    for issue in caught.value.issues:
        resolve(document, issue.pointer)
    return caught.value


def schema_errors(name: str, document: Any) -> list[str]:
    schemas = read_schemas(schema_directory())
    resources = [(str(s["$id"]), Resource.from_contents(s)) for s in schemas.values()]
    registry: Registry[Any] = Registry().with_resources(resources)
    validator = Draft202012Validator(schemas[name], registry=registry)
    return [f"{list(e.absolute_path)}: {e.message[:200]}" for e in validator.iter_errors(document)]


def pump() -> dict[str, Any]:
    """A pump with given efficiency; bores, heights and a motor."""
    return {
        "title": "Circulation pump",
        "system": "steady_flow",
        "boundaries": [{"id": "pump"}],
        "streams": [
            {"id": "suction", "to": "pump", "fluid": "water", "mass_flow": "20 t/h", "bore": "100 mm",
             "elevation": "1 m", "state": {"p": "2 bar", "T": "60 degC"}},
            {"id": "discharge", "from": "pump", "bore": "65 mm", "elevation": "4 m", "state": {"p": "9 bar", "T": "?"}},
        ],
        "transfers": [{"id": "shaft", "kind": "shaft_work", "to": "pump", "rate": "? kW"}],
        "relations": [{"id": "eff", "kind": "isentropic_efficiency", "from": "suction", "to": "discharge",
                       "value": "72 %"}],
    }  # fmt: skip


@pytest.mark.parametrize("units", ["metric", "SI", "US"])
@pytest.mark.parametrize("case", [let_down, pump])
def test_a_solved_case_recomputes_from_what_is_printed(case: Any, units: str) -> None:
    document = {**case(), "answer": {"units": units}}
    answer = operations().solve(document)
    assert schema_errors("answer", answer) == []
    assert recompute_steps(answer) > 0
    for boundary in answer["ledger"]:
        for account in [*boundary["mass"], boundary["energy"]]:
            largest = max(abs(entry["value"]) for entry in account["lines"])
            for entry in account["lines"]:
                # each factor is printed to 9 digits
                assert in_unit(recomputed(entry["numbers"]), entry["unit"]) == pytest.approx(entry["value"], rel=3e-8)
            assert abs(sum(entry["value"] for entry in account["lines"])) <= 1e-9 * largest
            assert account["closure"] < 1e-9


def test_the_unit_system_changes_the_units_and_not_the_answer() -> None:
    values = []
    for units in ("metric", "SI", "US"):
        found = operations().solve({**pump(), "answer": {"units": units}})["answers"]["discharge.T"]
        unit = table().unit(found["unit"], "temperature")
        values.append(table().to_si(found["value"], unit, 101_325.0))
    assert values[1:] == pytest.approx([values[0]] * 2, rel=1e-11)


def test_the_order_of_streams_does_not_change_the_answers() -> None:
    document = pump()
    turned = copy.deepcopy(document)
    turned["streams"].reverse()
    one, other = operations().solve(document), operations().solve(turned)
    assert one["answers"]["shaft.rate"]["value"] == pytest.approx(other["answers"]["shaft.rate"]["value"], rel=1e-9)


def test_the_same_request_gives_the_same_bytes() -> None:
    assert operations().solve(pump()) == operations().solve(pump())


def test_a_check_counts_without_solving() -> None:
    found = operations().check(let_down())
    assert schema_errors("check-answer", found) == []
    assert "outlet.T" in found["unknowns"]


def test_a_missing_outlet_pressure_is_told_as_missing() -> None:
    document = let_down()
    del document["streams"][1]["state"]["p"]
    error = refused(operations().solve, document)
    assert isinstance(error, UnderSpecified)
    assert "outlet.p" in " ".join(issues(error).values())


def test_two_values_that_disagree_are_both_told_in_the_units_of_the_case() -> None:
    document = {**let_down(), "answer": {"units": "US"}}
    document["streams"][1]["mass_flow"] = "13 t/h"
    error = refused(operations().solve, document)
    assert isinstance(error, Contradictory)
    told = " ".join(issues(error).values())
    assert "26455.47 lb/h" in told  # 12 t/h over 0.45359237 kg/lb
    assert "28660.09 lb/h" in told  # 13 t/h


def test_an_unknown_fluid_is_told_where_it_is_named() -> None:
    document = let_down()
    document["streams"][0]["fluid"] = "watr"
    error = refused(operations().solve, document)
    assert isinstance(error, UnknownFluid)
    assert "#/streams/0/fluid" in issues(error)


def test_a_temperature_below_the_triple_point_is_out_of_range() -> None:
    document = let_down()
    document["streams"][0]["state"]["T"] = "-40 degC"
    error = refused(operations().solve, document)
    assert isinstance(error, StateOutOfRange)
    assert any(place.startswith("#/streams/0/state") for place in issues(error))


def test_a_state_out_of_range_is_told_in_the_units_of_the_case_at_the_property_that_is_wrong() -> None:
    document = {**let_down(), "answer": {"units": "US"}}
    document["streams"][0]["state"]["T"] = "3000 degC"
    told = issues(refused(operations().solve, document))
    assert "5432 degF" in told["#/streams/0/state/T"]  # 3000 degC


def test_a_case_without_a_solution_tells_its_nearest_miss_in_units() -> None:
    document = pump()
    del document["transfers"][0]["rate"]
    document["transfers"][0]["rate"] = "1 kW"  # less than the ideal pump needs: 3.9 kW
    document["relations"] = []
    document["streams"][1]["state"] = {"p": "9 bar", "T": {"unknown": True, "between": ["200 degC", "300 degC"]}}
    error = refused(operations().solve, document)
    assert isinstance(error, NoSolution)
    assert "degC" in " ".join(issues(error).values())


def test_an_amount_told_by_an_address_is_shown_in_the_unit_of_its_kind() -> None:
    issue = Issue("The nearest misses are {0}, {1} and {2}.", "outlet.T", amounts=(
        ("outlet.T", 300.0), ("eff.hot_out_limit_h", 1000.0), ("pressure", 1e5),
    ))  # fmt: skip
    error = told(NoSolution("none", [issue]), AddressBook(let_down()), Presenter(table()))
    assert error.issues[0].detail == "The nearest misses are 26.85 degC, 1 kJ/kg and 1 bar."
    assert error.issues[0].pointer == "#/streams/1/state/T"


def test_a_state_is_told_whole() -> None:
    found = operations().states({"fluid": "water", "state": {"p": "1.01325 bar", "saturated": "vapour"}})
    assert schema_errors("state-answer", found) == []
    assert found["state"]["T"]["value"] == pytest.approx(99.974, abs=0.001)  # IAPWS-95: boiling point at 1 atm
    assert found["state"]["x"]["value"] == 1.0


@pytest.mark.parametrize(
    ("document", "error", "place"),
    [
        ({"fluid": "water", "state": {"p": "1 bar"}}, UnderSpecified, "#/state/p"),
        ({"fluid": "water", "state": {}}, UnderSpecified, "#/state"),
        ({"fluid": "watr", "state": {"p": "1 bar", "T": "20 degC"}}, UnknownFluid, "#/fluid"),
        ({"fluid": "water", "state": {"p": "1 bar", "T": "? degC"}}, SchemaViolation, "#/state/T"),
        ({"fluid": "water", "state": {"p": "1 bar", "wet_bulb": "9 degC"}}, SchemaViolation, "#/state/wet_bulb"),
        ({"fluid": "water", "state": {"p": "1 bar", "T": "20 degC", "x": 0}}, Contradictory, "#/state/T"),
        ({"fluid": "water", "stat": {}}, SchemaViolation, "#/stat"),
        ({"fluid": "water", "state": {"x": 0, "saturated": "liquid"}}, SchemaViolation, "#/state/saturated"),
        ([], SchemaViolation, "#"),
    ],
)
def test_a_state_that_cannot_be_found_is_told_where(document: Any, error: type[CaseError], place: str) -> None:
    found = refused(operations().states, document)
    assert type(found) is error
    assert place in issues(found)


def test_a_fluid_that_hardly_feels_pressure_takes_that_of_the_site_and_says_so() -> None:
    oil = {"kind": "constant_liquid", "density": "870 kg/m3", "cp": "2.1 kJ/kg/K"}
    document = {
        "fluid": "oil",
        "fluids": {"oil": oil},
        "state": {"T": "80 degC"},
        "site": {"atmospheric_pressure": "0.95 bar"},
    }
    found = operations().states(document)
    assert found["state"]["p"] == {"value": 0.95, "unit": "bar"}
    assert "0.95 bar" in found["assumptions"][0]


def test_everything_wrong_with_a_state_request_is_told_at_once() -> None:
    document = {"fluid": "water", "state": {"p": "1 kg", "T": "-300 degC", "q": 1}, "answer": {"units": "metrics"}}
    assert set(issues(refused(operations().states, document))) == {
        "#/state/p", "#/state/T", "#/state/q", "#/answer/units",
    }  # fmt: skip


def test_a_series_gives_what_single_cases_give() -> None:
    readings = {"inlet.T": {"unit": "degC", "values": [400.0, 420.0]}, "inlet.p": {"unit": "barg", "values": [40, 38]}}
    found = operations().series({"case": let_down(), "readings": readings, "report": ["outlet.T", "outlet.h"]})
    assert schema_errors("series-answer", found) == []
    assert found["status"] == ["solved", "solved"]
    for row in (0, 1):
        document = let_down()
        document["streams"][0]["state"] = {
            "T": f"{readings['inlet.T']['values'][row]} degC",
            "p": f"{readings['inlet.p']['values'][row]} barg",
        }
        single = operations().solve(document)
        for address, expected in (
            ("outlet.T", single["answers"]["outlet.T"]),
            ("outlet.h", single["states"]["outlet"]["h"]),
        ):
            assert found["columns"][address]["values"][row] == pytest.approx(expected["value"], rel=1e-9)
            assert found["columns"][address]["unit"] == expected["unit"]


@pytest.mark.parametrize(
    ("change", "place"),
    [
        ({"readings": {"inlet.T": {"unit": "degC", "values": [1]}, "inlet.p": {"unit": "bar", "values": [1, 2]}}},
         "#/readings"),
        ({"readings": {"inlet.T": {"unit": "bar", "values": [1]}}}, "#/readings/inlet.T"),
        ({"readings": {"inlet.T": {"values": [1]}}}, "#/readings/inlet.T"),
        ({"readings": {"inlt.T": {"unit": "degC", "values": [1]}}}, "#/readings/inlt.T"),
        ({"readings": {"inlet.T": {"unit": "degC", "values": [10**400]}}}, "#/readings/inlet.T/values"),
        ({"report": ["outlet.Q"]}, "#/report/0"),
        ({"readings": {}}, "#/readings"),
        ({"case": {}}, "#/case"),
    ],
)  # fmt: skip
def test_a_series_request_that_cannot_be_served_is_told_where(change: dict[str, Any], place: str) -> None:
    document = {
        "case": let_down(),
        "readings": {"inlet.T": {"unit": "degC", "values": [400]}},
        "report": ["outlet.T"],
        **change,
    }
    assert place in issues(refused(operations().series, document))


def test_an_error_inside_of_the_case_of_a_series_points_into_it() -> None:
    case = let_down()
    case["streams"][0]["state"]["p"] = "40 kg"
    document = {"case": case, "readings": {"inlet.T": {"unit": "degC", "values": [400]}}}
    assert "#/case/streams/0/state/p" in issues(refused(operations().series, document))


def test_every_unit_is_listed_with_its_kind() -> None:
    kinds = {kind["name"]: kind for kind in operations().units()["kinds"]}
    assert set(kinds) == set(table().kinds)
    assert "barg" in [unit["symbol"] for unit in kinds["pressure"]["units"]]


def test_a_fluid_is_described_with_its_limits_and_its_source() -> None:
    found = operations().fluid("water")
    assert found["models"] == ["helmholtz", "IF97"]
    assert found["limits"]["T_critical"]["value"] == pytest.approx(373.946, abs=0.001)  # IAPWS R6-95: 647.096 K
    assert found["citation"]
    assert "water" in operations().fluids()["fluids"]


def test_a_fluid_that_is_not_there_is_not_found() -> None:
    with pytest.raises(NotFound) as caught:
        operations().fluid("watr")
    assert "water" in caught.value.issues[0].hint


def test_every_schema_is_served_by_its_name() -> None:
    names = [entry["name"] for entry in operations().schemas()["schemas"]]
    assert {"case", "series-request", "states-request", "answer", "problem"} <= set(names)
    for name in names:
        assert operations().schema(name)["$id"] == f"/v1/schemas/{name}"


@pytest.mark.parametrize("what", ["schema", "example", "fluid"])
def test_a_name_that_is_not_there_is_not_found(what: str) -> None:
    with pytest.raises(NotFound, match="nothing-like-it"):
        getattr(operations(), what)("nothing-like-it")


@pytest.mark.parametrize("name", sorted(EXAMPLES))
def test_an_example_has_the_shape_of_a_case_and_its_steps_recompute(name: str) -> None:
    document = EXAMPLES[name]
    assert schema_errors("case", document) == []
    answer = operations().solve(document)
    assert schema_errors("answer", answer) == []
    recompute_steps(answer)
