"""Closed systems and totals over a period on the wire: contents, processes, addresses, and what is told of mistakes."""

from __future__ import annotations

import copy
from functools import cache
from typing import Any

import pytest
from jsonschema import Draft202012Validator
from referencing import Registry
from referencing.jsonschema import DRAFT202012

from service.balance.case import Stage
from service.errors import SchemaViolation, UnitOfWrongKind
from service.wire.addresses import AddressBook, locate
from service.wire.operations import Operations
from service.wire.readable import readable
from tests.unit.wire_helpers import issues, let_down, parse, refusal

PISTON: dict[str, Any] = {
    "title": "A piston",
    "system": "closed",
    "boundaries": [
        {"id": "cylinder", "contents": [
            {"id": "gas", "fluid": "nitrogen", "mass": "2 kg", "volume": "? L",
             "initial": {"p": "3 bar", "T": "20 degC"}, "final": {"T": "? degC", "p": "9 bar"},
             "process": {"kind": "polytropic", "n": 1.3}},
            {"id": "sleeve", "fluid": "steel", "mass": "5 kg", "initial": {"T": "20 degC"}, "final": {"T": "?"}},
        ]}
    ],
    "fluids": {"steel": {"kind": "solid", "density": "7850 kg/m3", "cp": "0.46 kJ/kg/K"}},
    "transfers": [{"id": "loss", "kind": "heat", "from": "cylinder", "energy": "? kJ"}],
    "relations": [{"kind": "equal", "of": ["gas.final.T", "sleeve.final.T"]}],
}  # fmt: skip

CHARGING: dict[str, Any] = {
    "system": "transient",
    "form": "integrated",
    "boundaries": [
        {"id": "receiver", "contents": [
            {"id": "air", "fluid": "air", "volume": "3 m3", "initial": {"p": "1 bar", "T": "20 degC"},
             "process": {"kind": "constant_volume"},
             "final": {"p": "8 bar", "T": "30 degC", "mass": "? kg"}},
        ]}
    ],
    "streams": [
        {"id": "inlet", "to": "receiver", "fluid": "air", "mass": "? kg", "state": {"p": "9 bar", "T": "40 degC"}},
    ],
    "transfers": [{"id": "cooling", "kind": "heat", "from": "receiver", "energy": "?"}],
}  # fmt: skip


def piston() -> dict[str, Any]:
    return copy.deepcopy(PISTON)


def charging() -> dict[str, Any]:
    return copy.deepcopy(CHARGING)


def changed(document: dict[str, Any], path: str, value: Any) -> dict[str, Any]:
    """The document with one member set; the path is written as in a pointer."""
    *parents, last = [int(part) if part.isdigit() else part for part in path.strip("/").split("/")]
    here: Any = document
    for part in parents:
        here = here.setdefault(part, {}) if isinstance(here, dict) else here[part]
    here[last] = value
    return document


def test_a_content_is_read_with_both_of_its_ends() -> None:
    case = parse(piston())
    gas = case.contents[0]
    assert (case.system, gas.id, gas.boundary, gas.fluid) == ("closed", "gas", "cylinder", "nitrogen")
    assert list(gas.quantities) == ["mass", "volume", "initial.p", "initial.T", "final.T", "final.p"]
    assert gas.quantities["initial.p"].value == pytest.approx(3e5, rel=1e-15)  # bar is 1e5 Pa
    assert gas.quantities["final.T"].wanted
    assert gas.quantities["final.T"].unit == "degC"
    assert gas.quantities["final.T"].address == "gas.final.T"
    assert gas.quantities["final.T"].pointer == "#/boundaries/0/contents/0/final/T"


def test_a_process_of_one_stage_has_its_quantities_under_process() -> None:
    (stage,) = parse(piston()).contents[0].process
    assert stage.kind == "polytropic"
    assert stage.quantities["n"].address == "gas.process.n"
    assert stage.quantities["n"].value == 1.3


def test_stages_are_numbered_and_the_last_one_ends_at_the_final_state() -> None:
    document = changed(piston(), "/boundaries/0/contents/0/process", [
        {"kind": "constant_volume", "until": {"p": "5 bar"}},
        {"kind": "polytropic", "n": "?", "until": {"volume": "200 L"}},
    ])  # fmt: skip
    first, last = parse(document).contents[0].process
    assert first.quantities["p"].address == "gas.stage-1.p"
    assert first.quantities["p"].pointer == "#/boundaries/0/contents/0/process/0/until/p"
    assert {q.address for q in last.quantities.values()} == {"gas.stage-2.n", "gas.final.volume"}


def test_a_list_of_one_stage_is_a_process_of_one_stage() -> None:
    document = changed(piston(), "/boundaries/0/contents/0/process", [{"kind": "polytropic", "n": "?"}])
    (stage,) = parse(document).contents[0].process
    assert stage.quantities["n"].address == "gas.process.n"


def test_a_content_without_a_process_has_end_states_only() -> None:
    assert parse(piston()).contents[1].process == ()
    assert parse(piston()).contents[0].process == (
        Stage("polytropic", parse(piston()).contents[0].process[0].quantities),
    )


def test_a_saturated_end_is_a_quality() -> None:
    document = changed(piston(), "/boundaries/0/contents/0/initial", {"p": "3 bar", "saturated": "vapour"})
    assert parse(document).contents[0].quantities["initial.x"].value == 1.0


def test_saturated_beside_a_quality_is_told() -> None:
    document = changed(piston(), "/boundaries/0/contents/0/initial", {"p": "3 bar", "x": 1, "saturated": "vapour"})
    assert "twice" in issues(refusal(document))["#/boundaries/0/contents/0/initial/saturated"]


def test_the_integrated_form_has_totals_of_streams() -> None:
    case = parse(charging())
    assert (case.system, case.form) == ("transient", "integrated")
    assert case.streams[0].quantities["mass"].wanted
    assert case.transfers[0].quantities["energy"].kind == "energy"


MISTAKES = [
    (piston(), "/transfers/0/rate", "15 kW", "#/transfers/0/rate", "Give `energy`"),
    (piston(), "/transfers/0/law", {"UA": "3 W/K"}, "#/transfers/0/law", "gives a rate"),
    (piston(), "/streams", [{"id": "in", "to": "cylinder"}], "#/streams", "Nothing flows into or out of a closed"),
    (piston(), "/form", "integrated", "#/form", "belongs to a transient"),
    (piston(), "/until", {"time": "30 min"}, "#/until", "belongs to the rate form"),
    (piston(), "/targets", [{"of": "gas.final.T", "value": "3 K"}], "#/targets", "belongs to the rate form"),
    (piston(), "/boundaries/0/contents/0/wall", {"mass": "3 kg"}, "#/boundaries/0/contents/0/wall", "second content"),
    (piston(), "/boundaries/0/contents/1/id", "gas", "#/boundaries/0/contents/1/id", "used twice"),
    (piston(), "/boundaries/0/contents/0/process/kind", "isobaric", "#/boundaries/0/contents/0/process/kind",
     "constant_pressure"),
    (piston(), "/boundaries/0/contents/0/final/t", "9 K", "#/boundaries/0/contents/0/final/t", 'Did you mean "T"'),
    (piston(), "/boundaries/0/contents/0/mass", 2, "#/boundaries/0/contents/0/mass", "250 kg"),
    (piston(), "/relations/0/of/0", "gas.T", "#/relations/0/of/0", "gas.initial.T or gas.final.T"),
    (piston(), "/relations/0/of/0", "cylinder.final.T", "#/relations/0/of/0", "gas.final.T or sleeve.final.T"),
    (piston(), "/relations/0/of/0", "gas.final.temp", "#/relations/0/of/0", "final.T"),
    (charging(), "/streams/0/mass_flow", "3 kg/s", "#/streams/0/mass_flow", "Give `mass`"),
    (charging(), "/streams/0/draws", "liquid", "#/streams/0/draws", "rate form"),
    (charging(), "/streams/0/mass", {"table": {"times": [0], "values": [1]}}, "#/streams/0/mass/table", "no place"),
    (let_down(), "/transfers/0/energy", "15 kJ", "#/transfers/0/energy", "Give `rate`"),
    (let_down(), "/boundaries/0/contents", [{"id": "w", "fluid": "water"}], "#/boundaries/0/contents", "steady flow"),
    (let_down(), "/streams/0/mass_flow",
     {"table": {"unit": "kg/s", "time_unit": "s", "times": [0, 1], "values": [1, 2]}},
     "#/streams/0/mass_flow/table", "series"),
]  # fmt: skip


@pytest.mark.parametrize(("document", "path", "value", "place", "words"), MISTAKES, ids=lambda v: str(v)[:40])
def test_a_member_of_another_system_is_told_with_its_place_and_what_to_write(
    document: dict[str, Any], path: str, value: Any, place: str, words: str
) -> None:
    told = issues(refusal(changed(copy.deepcopy(document), path, value)))
    assert words in told[place], told


def test_everything_that_is_wrong_is_told_at_once() -> None:
    document = changed(piston(), "/transfers/0/rate", "15 kW")
    changed(document, "/boundaries/0/contents/0/mass", "2 bar")
    changed(document, "/boundaries/0/contents/1/final/T", "x degC")
    found = issues(refusal(document))
    places = {"#/transfers/0/rate", "#/boundaries/0/contents/0/mass", "#/boundaries/0/contents/1/final/T"}
    assert places <= set(found)


def test_a_unit_of_the_wrong_kind_is_told_of_a_content() -> None:
    error = refusal(changed(piston(), "/boundaries/0/contents/0/volume", "2 kg"))
    assert isinstance(error, UnitOfWrongKind)
    assert [issue.address for issue in error.issues] == ["gas.volume"]


def test_a_boundary_that_holds_nothing_is_told() -> None:
    document = piston()
    document["boundaries"].append({"id": "empty"})
    error = refusal(document)
    assert isinstance(error, SchemaViolation)
    assert "holds nothing" in issues(error)["#/boundaries/1"]


@pytest.mark.parametrize(
    ("address", "place", "kind"),
    [
        ("gas.mass", "#/boundaries/0/contents/0/mass", "mass"),
        ("gas.final.T", "#/boundaries/0/contents/0/final/T", "temperature"),
        ("gas.final.s", "#/boundaries/0/contents/0/final", "specific_entropy"),
        ("gas.process.n", "#/boundaries/0/contents/0/process/n", "dimensionless"),
        ("gas.process.external_pressure", "#/boundaries/0/contents/0/process", "pressure"),
        ("gas.initial.volume", "#/boundaries/0/contents/0/initial", "volume"),
        ("sleeve.expansion_work", "#/boundaries/0/contents/1", "energy"),
        ("loss.energy", "#/transfers/0/energy", "energy"),
        ("gas", "#/boundaries/0/contents/0", None),
        ("gas.process.m", "#/boundaries/0/contents/0/process", None),
        ("gas.wall.T", "#/boundaries/0/contents/0", None),
    ],
)
def test_an_address_of_a_content_has_a_kind_and_a_place(address: str, place: str, kind: str | None) -> None:
    assert AddressBook(piston()).kind(address) == kind
    assert locate(piston(), address) == place


# -- whole calls -------------------------------------------------------------------------------------------------------


@cache
def operations() -> Operations:
    return Operations.build()


def test_an_answer_lists_each_state_of_a_content_and_totals_in_the_ledger() -> None:
    answer = operations().solve(piston())
    assert list(answer["states"]) == ["gas.initial", "gas.final", "sleeve.initial", "sleeve.final"]
    assert answer["states"]["gas.final"]["mass"] == {"value": 2.0, "unit": "kg"}
    assert answer["answers"]["gas.volume"]["unit"] == "L"
    energy = answer["ledger"][0]["energy"]
    assert {line["unit"] for line in energy["lines"]} == {"kJ"}
    assert answer["checks"]["closure"][0]["energy"] < 1e-12  # relative to the largest line, of rounding only
    Draft202012Validator(operations().schema("answer"), registry=registry()).validate(answer)
    assert "States\n  gas.initial" in readable(answer)


def registry() -> Registry[Any]:
    schemas = [operations().schema(s["name"]) for s in operations().schemas()["schemas"]]
    found: Registry[Any] = Registry().with_resources([(s["$id"], DRAFT202012.create_resource(s)) for s in schemas])
    return found


def test_a_series_runs_over_the_ends_of_contents_and_over_their_processes() -> None:
    document = piston()
    ask = {"gas.process.n": {"values": [1.1, 1.3]}, "gas.final.p": {"unit": "bar", "values": [9, 9]}}
    found = operations().series({"case": document, "readings": ask})
    alone = operations().solve(document)["answers"]
    assert found["status"] == ["solved", "solved"]
    assert set(found["columns"]) == set(alone)
    for address, column in found["columns"].items():
        # the row with the case's own numbers is the case's answer, to the twelve digits that are told
        assert column["unit"] == alone[address]["unit"]
        assert column["values"][1] == pytest.approx(alone[address]["value"], rel=1e-11)
        if address != "gas.volume":  # fixed by mass and initial state
            assert column["values"][0] != pytest.approx(column["values"][1], rel=1e-3)


def test_a_series_keeps_a_surplus_reading_within_its_agreement() -> None:
    volume = operations().solve(piston())["answers"]["gas.volume"]["value"]
    ask = {"gas.initial.volume": {"unit": "L", "values": [volume, 1.1 * volume]}}
    found = operations().series({"case": piston(), "readings": ask, "report": ["gas.final.T"]})
    assert found["status"] == ["solved", "contradictory"]


def test_a_series_runs_over_totals_of_the_integrated_form() -> None:
    ask = {"air.final.p": {"unit": "bar", "values": [1.0, 8.0]}, "air.final.T": {"unit": "degC", "values": [20, 30]}}
    found = operations().series({"case": charging(), "readings": ask, "report": ["inlet.mass"]})
    masses = found["columns"]["inlet.mass"]["values"]
    assert masses[0] == pytest.approx(0.0, abs=1e-9)  # kg, of some 3.6 kg held: nothing changes, nothing came in
    assert masses[1] > 20.0  # 3 m3 at 8 bar hold about 28 kg, p V/(R T); 3.6 kg were there


def test_the_rate_form_is_refused_by_series_and_check_with_a_way_out() -> None:
    document = {"system": "transient", "boundaries": [{"id": "b", "contents": [{"id": "gas", "fluid": "nitrogen",
                "volume": "1 m3", "initial": {"p": "2 bar", "T": "20 degC"}}]}], "until": {"time": "1 s"}}  # fmt: skip
    with pytest.raises(SchemaViolation) as caught:
        operations().series({"case": document, "readings": {"gas.initial.p": {"unit": "bar", "values": [1]}}})
    assert '"integrated"' in issues(caught.value)["#/case/system"]
    with pytest.raises(SchemaViolation) as caught:
        operations().check(document)
    assert '"integrated"' in issues(caught.value)["#/system"]
