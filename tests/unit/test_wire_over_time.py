"""The rate form on the wire: tables, walls, endings, targets and histories, and how what happened is told."""

from __future__ import annotations

import copy
from typing import Any

import numpy as np
import pytest

from service.balance.case import Case, Table
from service.balance.solution import TransientResult
from service.errors import UnitNotUnderstood, UnitOfWrongKind
from service.wire.addresses import AddressBook, locate
from service.wire.presenting import Presenter
from service.wire.readable import readable
from service.wire.shapes import Shape
from service.wire.transient_part import TransientPart
from tests.unit.test_wire_contents import changed
from tests.unit.wire_helpers import issues, parse, refusal, shape, table

BLOWDOWN: dict[str, Any] = {
    "title": "Blowdown of a nitrogen vessel",
    "system": "transient",
    "boundaries": [
        {"id": "vessel", "contents": [
            {"id": "gas", "fluid": "nitrogen", "volume": "2 m3", "initial": {"p": "20 barg", "T": "20 degC"},
             "final": {"T": "? degF"},
             "wall": {"mass": "800 kg", "cp": "0.48 kJ/kg/K", "area": "9 m2", "h_inside": "20 W/m2/K",
                      "minimum_temperature": "-29 degC"}},
        ]}
    ],
    "streams": [
        {"id": "vent", "from": "vessel", "fluid": "nitrogen", "draws": "vapour"},
        {"id": "purge", "to": "vessel", "fluid": "nitrogen", "state": {"p": "25 barg", "T": "20 degC"},
         "mass_flow": {"table": {"unit": "kg/h", "time_unit": "min", "times": [0, 1, 5], "values": [0, 36, 0],
                                 "between": "steps"}}},
    ],
    "transfers": [
        {"id": "trace", "kind": "heat", "to": "vessel",
         "rate": {"table": {"unit": "kW", "time_unit": "s", "times": [0, 60], "values": [1, 2]}}},
    ],
    "relations": [{"id": "orifice", "kind": "restriction", "stream": "vent", "bore": "20 mm"}],
    "until": {"time": "30 min", "conditions": [{"of": "gas.p", "reaches": "2 barg"}]},
    "targets": [{"of": "gas.T", "value": "-20 degC", "at": "90 s"}],
    "history": {"columns": ["gas.p", "gas.wall.T", "vent.mass_flow"], "points": 61},
}  # fmt: skip

GAS = "/boundaries/0/contents/0"


def blowdown() -> dict[str, Any]:
    return copy.deepcopy(BLOWDOWN)


def test_a_rate_form_is_read_whole() -> None:
    case = parse(blowdown())
    assert (case.system, case.form) == ("transient", "rate")
    assert case.until.time is not None
    assert case.until.time.value == pytest.approx(1800.0, rel=1e-15)
    ((of, quantity),) = case.until.conditions
    assert of == "gas.p"
    assert quantity.value == pytest.approx(2e5 + 101_325.0, rel=1e-15)  # gauge, on the standard atmosphere
    (target,) = case.targets
    assert (target.of, target.at, target.pointer) == ("gas.T", 90.0, "#/targets/0")
    assert case.history.columns == ("gas.p", "gas.wall.T", "vent.mass_flow")
    assert case.history.points == 61


def test_a_table_of_a_stream_is_read_into_seconds_and_kilograms_a_second() -> None:
    stream = parse(blowdown()).streams[1]
    assert "mass_flow" not in stream.quantities
    assert stream.table["mass_flow"] == Table((0.0, 60.0, 300.0), (0.0, pytest.approx(0.01), 0.0), "steps")  # type: ignore[arg-type]


def test_a_table_of_a_transfer_is_read_as_lines_where_nothing_else_is_said() -> None:
    assert parse(blowdown()).transfers[0].table["rate"] == Table((0.0, 60.0), (1000.0, 2000.0), "linear")


def test_a_wall_is_read_into_the_quantities_of_its_content() -> None:
    quantities = parse(blowdown()).contents[0].quantities
    assert quantities["wall.h_inside"].value == 20.0
    assert quantities["wall.minimum_temperature"].value == pytest.approx(244.15, rel=1e-15)
    assert quantities["wall.cp"].address == "gas.wall.cp"


def test_the_rate_form_is_what_a_transient_has_when_nothing_is_said() -> None:
    assert parse({**blowdown(), "form": "rate"}) == parse(blowdown())


def test_an_evacuated_vessel_begins_with_no_mass() -> None:
    document = changed(blowdown(), f"{GAS}/mass", "0 kg")
    assert parse(document).contents[0].quantities["mass"].value == 0.0


def test_the_end_can_be_asked_for_where_a_condition_ends_it() -> None:
    time = parse(changed(blowdown(), "/until/time", "? min")).until.time
    assert time is not None
    assert time.wanted
    assert time.unit == "min"
    assert time.address == "until.time"


def without(document: dict[str, Any], member: str) -> dict[str, Any]:
    del document[member]
    return document


@pytest.mark.parametrize(
    ("path", "value", "place", "words"),
    [
        ("/until/time", "0 s", "#/until/time", "above zero"),
        ("/until/conditions/0/of", "gas.pp", "#/until/conditions/0/of", "no quantity"),
        ("/until/conditions/0/of", "vessel.p", "#/until/conditions/0/of", "say gas.p"),
        ("/until/conditions/0/reaches", "?", "#/until/conditions/0/reaches", "cannot be an unknown"),
        ("/targets/0/of", "gas.density", "#/targets/0/of", "rho"),
        ("/targets/0/value", "3 bar", "#/targets/0/value", "temperature"),
        ("/targets/0/at", "start", "#/targets/0/at", "not a number"),
        ("/history/columns/2", "vent.flow", "#/history/columns/2", "mass_flow"),
        ("/history/points", 1, "#/history/points", "at least 2"),
        (f"{GAS}/process", {"kind": "isothermal"}, f"#{GAS}/process", "integrated form"),
        (f"{GAS}/final/T", "3 degC", f"#{GAS}/final/T", "follows from the integration"),
        (f"{GAS}/wall/thickness", "3 mm", f"#{GAS}/wall/thickness", "Allowed here"),
        (f"{GAS}/volume", "0 m3", f"#{GAS}/volume", "above zero"),
        (f"{GAS}/wall/cp", "0 J/kg/K", f"#{GAS}/wall/cp", "above zero"),
        (f"{GAS}/wall/mass", "0 kg", f"#{GAS}/wall/mass", "above zero"),
        (f"{GAS}/mass", "-1 kg", f"#{GAS}/mass", "below zero"),
        ("/streams/0/mass", "3 kg", "#/streams/0/mass", "Give `mass_flow`"),
        ("/streams/1/draws", "liquid", "#/streams/1/draws", "leaves a vessel"),
        ("/transfers/0/energy", "3 kJ", "#/transfers/0/energy", "Give `rate`"),
        ("/relations/0", {"kind": "equal", "of": ["gas.T", "gas.wall.T"]}, "#/relations/0/kind", "only `restriction`"),
        ("/streams/1/mass_flow/table/times", [0, 5, 1], "#/streams/1/mass_flow/table/times", "rise"),
        ("/streams/1/mass_flow/table/times", [0, 1], "#/streams/1/mass_flow/table/values", "2 times and 3 values"),
        ("/streams/1/mass_flow/table/values", [0, 1, "2"], "#/streams/1/mass_flow/table/values/2", "A number belongs"),
        ("/streams/1/mass_flow/table/values", [0, 1, 10**400], "#/streams/1/mass_flow/table/values", "not finite"),
        ("/streams/1/bore", {"table": {"times": [0], "values": [1]}}, "#/streams/1/bore/table", "no place here"),
    ],
)
def test_a_mistake_in_the_rate_form_is_told_with_its_place_and_what_to_write(
    path: str, value: Any, place: str, words: str
) -> None:
    told = issues(refusal(changed(blowdown(), path, value)))
    assert words in told[place], told


@pytest.mark.parametrize(
    ("path", "value", "error"),
    [
        ("/streams/1/mass_flow/table/unit", "kg", UnitOfWrongKind),
        ("/streams/1/mass_flow/table/time_unit", "fortnightly", UnitNotUnderstood),
    ],
)
def test_a_unit_of_a_table_is_looked_up_like_every_other(path: str, value: str, error: type[Exception]) -> None:
    refused = refusal(changed(blowdown(), path, value))
    assert isinstance(refused, error)
    assert [issue.pointer for issue in refused.issues] == [f"#{path}"]


def test_a_table_without_units_is_told_which_are_missing() -> None:
    document = changed(blowdown(), "/transfers/0/rate", {"table": {"times": [0, 1], "values": [1, 2]}})
    told = issues(refusal(document))["#/transfers/0/rate/table"]
    assert '"time_unit"' in told
    assert '"unit"' in told


def test_a_transient_without_an_end_is_refused() -> None:
    assert "until" in issues(refusal(without(blowdown(), "until")))["#"]


def test_an_end_that_is_asked_for_needs_a_condition() -> None:
    document = changed(blowdown(), "/until", {"time": "?"})
    assert "Nothing ends" in issues(refusal(document))["#/until/time"]


def test_two_contents_in_one_boundary_are_refused_in_the_rate_form() -> None:
    document = blowdown()
    document["boundaries"][0]["contents"].append({"id": "other", "fluid": "water"})
    assert "boundary of its own" in issues(refusal(document))["#/boundaries/0/contents/1"]


@pytest.mark.parametrize(
    ("address", "place", "kind"),
    [
        ("gas.p", f"#{GAS}/initial/p", "pressure"),
        ("gas.wall.T", f"#{GAS}/wall", "temperature"),
        ("gas.wall.mass", f"#{GAS}/wall/mass", "mass"),
        ("gas.final.T", f"#{GAS}/final/T", "temperature"),
        ("gas.initial.p", f"#{GAS}/initial/p", "pressure"),
        ("until.time", "#/until/time", "time"),
        ("gas.expansion_work", f"#{GAS}/initial", None),
        ("orifice.bore", "#/relations/0/bore", "length"),
    ],
)
def test_an_address_over_time_has_a_kind_and_a_place(address: str, place: str, kind: str | None) -> None:
    assert AddressBook(blowdown()).kind(address) == kind
    assert locate(blowdown(), address) == place


# -- telling -----------------------------------------------------------------------------------------------------------


def result(end: float = 90.0, **changes: Any) -> TransientResult:
    """Made by hand: 21 bar falls to 3.01325 bar, a wall cools."""
    told: dict[str, Any] = {
        "end_reason": "condition gas.p reaches 3.01325 bar",
        "end_time": end,
        "stopped": "",
        "times": np.array([0.0, end]),
        "columns": {"gas.p": np.array([21.01325e5, 3.01325e5]), "gas.T": np.array([293.15, np.nan])},
        "kinds": {"gas.p": "pressure", "gas.T": "temperature", "gas.wall.T": "temperature"},
        "events": [(end, "gas.p reaches 3.01325 bar"), (0.5 * end, "half way")],
        "extremes": {"gas.wall.T": (263.15, 0.5 * end, 293.15, 0.0)},
        "method": {"integrator": "made by hand", "steps": 12, "relative tolerance": 1e-7},
    }
    return TransientResult(**{**told, **changes})


def shown(case: Case, found: TransientResult, system: Any = "metric") -> dict[str, Any]:
    return TransientPart(case, found, Presenter(table(), system)).document()


def test_a_condition_that_was_reached_is_told_as_the_case_writes_it() -> None:
    told = shown(parse(blowdown()), result())
    assert told["end"] == {"reason": "gas.p reaches 2 barg", "time": {"value": 1.5, "unit": "min"}}
    assert [event["event"] for event in told["events"]] == ["gas.p reaches 2 barg", "half way"]


def test_columns_are_in_the_units_in_which_the_case_speaks() -> None:
    history = shown(parse(blowdown()), result())["history"]
    assert history["columns"]["gas.p"] == {"unit": "barg", "values": [20.0, 2.0]}  # 21.01325 and 3.01325 bar
    assert history["columns"]["gas.T"] == {"unit": "degF", "values": [68.0, None]}  # 20 degC is 68 degF
    assert history["time"] == {"unit": "min", "values": [0.0, 1.5]}


def test_extremes_carry_their_times() -> None:
    extremes = shown(parse(blowdown()), result())["extremes"]
    assert extremes["gas.wall.T"]["least"] == {"value": -10.0, "unit": "degC", "at": {"value": 0.75, "unit": "min"}}


@pytest.mark.parametrize(
    ("end", "system", "unit", "value"),
    [
        (90.0, "metric", "s", 90.0),
        (1800.0, "metric", "min", 30.0),
        (1800.0, "US", "min", 30.0),
        (1800.0, "SI", "s", 1800.0),
        (18_000.0, "metric", "h", 5.0),
    ],
)
def test_times_are_told_in_a_unit_that_fits_their_length(end: float, system: str, unit: str, value: float) -> None:
    case = parse(changed(blowdown(), "/until", {"conditions": [{"of": "gas.p", "reaches": "2 barg"}]}))
    assert shown(case, result(end), system)["end"]["time"] == {"value": value, "unit": unit}


def test_why_it_had_to_stop_is_told_only_where_it_had_to() -> None:
    assert "stopped" not in shown(parse(blowdown()), result())
    assert shown(parse(blowdown()), result(stopped="gas is empty"))["stopped"] == "gas is empty"


def test_a_terminal_shows_the_end_the_extremes_and_some_rows_of_the_history() -> None:
    part = shown(parse(blowdown()), result(stopped="the gas froze"))
    answer: dict[str, Any] = {
        "status": "solved", "answers": {}, "states": {}, "ledger": [], "assumptions": [], "transient": part,
        "checks": {"entropy": [], "surplus": []}, "advisories": {"items": [], "deference": ""},
    }  # fmt: skip
    text = readable(answer)
    for words in (
        "ended after 1.5 min: gas.p reaches 2 barg",
        "the gas froze",
        "gas.p [barg]",
        "-10 degC (at 0.75 min)",
    ):
        assert words in text


def test_what_is_told_of_a_transient_has_the_shape_of_the_schema() -> None:
    schema = Shape.__new__(Shape)  # only the registry of the compiled schemas is needed
    schema.__dict__.update(shape("case").__dict__)
    part = {"$ref": "/v1/schemas/answer#/$defs/transient"}
    pair = schema._pair({"$schema": "https://json-schema.org/draft/2020-12/schema", "$id": "/part", **part})
    for found in (result(), result(stopped="why"), result(end=float("nan"))):
        assert [e.message for e in pair.explains.iter_errors(shown(parse(blowdown()), found))] == []
