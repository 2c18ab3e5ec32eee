"""Names in a request that lead nowhere are told with their place and the name that was meant."""

from __future__ import annotations

from typing import Any

import pytest

from service.errors import SchemaViolation
from service.wire.addresses import AddressBook, locate
from service.wire.pointers import nearest_existing, pointer, resolve

from .wire_helpers import issues, let_down, parse, refusal


def with_relations(*relations: dict[str, Any]) -> dict[str, Any]:
    document = let_down()
    document["relations"] = list(relations)
    return document


def test_a_stream_that_points_to_no_boundary_is_told_which_one_was_meant() -> None:
    document = let_down()
    document["streams"][0]["to"] = "vavle"
    error = refusal(document)
    assert isinstance(error, SchemaViolation)
    assert 'Did you mean "valve"' in issues(error)["#/streams/0/to"]


def test_a_stream_that_touches_no_boundary_is_told_what_to_add() -> None:
    document = let_down()
    del document["streams"][0]["to"]
    assert "valve" in issues(refusal(document))["#/streams/0"]


def test_a_stream_from_a_boundary_into_itself_crosses_nothing() -> None:
    document = let_down()
    document["streams"][0]["from"] = "valve"
    assert "crosses nothing" in issues(refusal(document))["#/streams/0/to"]


@pytest.mark.parametrize(
    ("group", "item", "place"),
    [
        ("boundaries", {"id": "valve"}, "#/boundaries/1/id"),
        ("streams", {"id": "inlet", "to": "valve"}, "#/streams/2/id"),
        ("streams", {"id": "loss", "to": "valve"}, "#/transfers/0/id"),
        ("transfers", {"id": "outlet", "kind": "heat", "to": "valve"}, "#/transfers/1/id"),
        ("relations", {"id": "inlet", "kind": "equal", "of": ["inlet.T", "outlet.T"]}, "#/relations/0/id"),
    ],
)
def test_an_id_that_is_used_twice_is_told_at_its_second_place(group: str, item: Any, place: str) -> None:
    document = let_down()
    document[group].append(item)
    assert "used twice" in issues(refusal(document))[place]


def test_relations_without_an_id_are_called_by_their_place() -> None:
    document = with_relations(
        {"kind": "difference", "of": ["inlet.T", "outlet.T"], "value": "? K"},
        {"kind": "equal", "of": ["inlet.mass_flow", "outlet.mass_flow"]},
    )
    assert [r.id for r in parse(document).relations] == ["relation-1", "relation-2"]


@pytest.mark.parametrize(
    ("relation", "place", "says"),
    [
        ({"kind": "equal", "of": ["inlt.T", "outlet.T"]}, "of/0", 'Did you mean "inlet"'),
        ({"kind": "equal", "of": ["inlet.T", "outlet.temp"]}, "of/1", 'Did you mean "T"'),
        ({"kind": "equal", "of": ["inlet.T", "valve.T"]}, "of/1", "no stream, content, transfer or relation"),
        ({"kind": "equal", "of": ["loss.UA", "loss.UA"]}, "of/0", "law"),
        ({"kind": "equal", "of": ["inlet.T", "inlet.T"]}, "of/1", "twice"),
        ({"kind": "equal", "of": ["inlet.T", "outlet.p"]}, "of", "one kind"),
        ({"kind": "ratio", "of": ["inlet.T", "loss.rate"], "value": "?"}, "of", "one kind"),
        ({"kind": "sum", "of": ["inlet.T", "outlet.T"], "value": "?"}, "of", "do not add up"),
        ({"kind": "sum", "of": ["relation-1.value", "loss.rate"], "value": "?"}, "of", "own value"),
        ({"kind": "isentropic_efficiency", "from": "inlet", "to": "outlt", "value": "?"}, "to", "outlet"),
        ({"kind": "restriction", "stream": "valve"}, "stream", "no stream"),
        ({"kind": "restriction", "stream": "inlet", "bore": "0 mm"}, "bore", "above zero"),
        ({"kind": "restriction", "stream": "inlet", "bore": "3 mm", "area": "1 cm2"}, "area", "said twice"),
        ({"kind": "difference", "of": ["inlet.T", "outlet.T"], "value": "5 degC"}, "value", "temperature difference"),
        ({"kind": "difference", "of": ["inlet.p", "outlet.p"], "value": "5 barg"}, "value", "pressure difference"),
        ({"kind": "ratio", "of": ["inlet.p", "outlet.p"], "value": "5 bar"}, "value", "dimensionless"),
        ({"kind": "sum", "of": ["inlet.mass_flow", "outlet.mass_flow"], "value": "5 kW"}, "value", "mass flow"),
    ],
)
def test_a_relation_that_cannot_be_meant_is_told_where(relation: dict[str, Any], place: str, says: str) -> None:
    document = with_relations(relation)
    told = issues(refusal(document))
    assert says in told[f"#/relations/0/{place}"]
    for where in told:
        resolve(document, where)


@pytest.mark.parametrize(
    ("relation", "kind", "si"),
    [
        ({"kind": "difference", "of": ["inlet.T", "outlet.T"], "value": "5 K"}, "temperature_difference", 5.0),
        ({"kind": "difference", "of": ["inlet.p", "outlet.p"], "value": "5 bar"}, "pressure_difference", 5e5),
        ({"kind": "difference", "of": ["inlet.h", "outlet.h"], "value": "5 kJ/kg"}, "specific_energy", 5e3),
        ({"kind": "ratio", "of": ["inlet.p", "outlet.p"], "value": 4}, "dimensionless", 4.0),
        ({"kind": "sum", "of": ["inlet.mass_flow", "outlet.mass_flow"], "value": "3.6 t/h"}, "mass_flow", 1.0),
        ({"kind": "lmtd_UA", "hot_in": "inlet", "hot_out": "outlet", "cold_in": "inlet", "cold_out": "outlet",
          "arrangement": "counterflow", "value": "12 kW/K"}, "conductance", 12e3),
    ],
)  # fmt: skip
def test_the_value_of_a_relation_has_the_kind_that_its_addresses_give(relation: Any, kind: str, si: float) -> None:
    (quantity,) = parse(with_relations(relation)).relations[0].quantities.values()
    assert quantity.kind == kind
    assert quantity.value == pytest.approx(si, rel=1e-14)


def test_a_heating_value_is_by_mass_or_by_normal_volume_as_the_fuel_is() -> None:
    document = let_down()
    document["transfers"] = [
        {"id": "oil", "kind": "fuel", "to": "valve", "mass_flow": "1 kg/s", "heating_value": "42 MJ/kg"},
        {"id": "gas", "kind": "fuel", "to": "valve", "normal_volume_flow": "1 Nm3/s", "heating_value": "36 MJ/Nm3"},
    ]
    oil, gas = parse(document).transfers[:2]
    assert oil.quantities["heating_value"].kind == "specific_energy"
    assert gas.quantities["heating_value"].kind == "volumetric_heating_value"


def test_saturated_stands_for_the_quality() -> None:
    document = let_down()
    document["streams"][0]["state"] = {"p": "10 bar", "saturated": "vapour"}
    x = parse(document).streams[0].quantities["x"]
    assert (x.value, x.pointer) == (1.0, "#/streams/0/state/saturated")


def test_saturated_beside_a_quality_is_refused() -> None:
    document = let_down()
    document["streams"][0]["state"] = {"x": 1, "saturated": "vapour"}
    assert "same thing twice" in issues(refusal(document))["#/streams/0/state/saturated"]


def test_a_limit_without_bounds_is_refused() -> None:
    document = let_down()
    document["limits"] = [{"of": "outlet.T"}]
    assert "neither" in issues(refusal(document))["#/limits/0"]


def test_mole_fractions_have_to_add_up() -> None:
    document = let_down()
    document["fluids"] = {"flue": {"kind": "gas_mixture", "mole_fractions": {"N2": 0.7, "CO2": "20 %"}}}
    assert "0.9" in issues(refusal(document))["#/fluids/flue/mole_fractions"]


def test_an_atmospheric_pressure_cannot_be_counted_from_itself() -> None:
    document = let_down()
    document["site"]["atmospheric_pressure"] = "0 barg"
    assert "absolute" in issues(refusal(document))["#/site/atmospheric_pressure"]


@pytest.mark.parametrize(
    ("address", "place"),
    [
        ("inlet.p", "#/streams/0/state/p"),
        ("inlet.mass_flow", "#/streams/0/mass_flow"),
        ("outlet.h", "#/streams/1/state"),  # not in the request: the state it would stand in
        ("outlet.velocity", "#/streams/1"),
        ("loss.rate", "#/transfers/0/rate"),
        ("loss.UA", "#/transfers/0"),
        ("outlet", "#/streams/1"),
        ("valve", "#/boundaries/0"),
        ("valve.T", "#/boundaries/0"),
        ("nobody.T", "#"),
        ("", "#"),
    ],
)
def test_an_address_is_located_or_the_nearest_parent_that_exists(address: str, place: str) -> None:
    document = let_down()
    assert locate(document, address) == place
    resolve(document, place)


def test_an_address_of_a_series_is_located_in_its_case_or_its_column() -> None:
    document = {"case": let_down(), "readings": {"inlet.p": {"values": [1]}}}
    assert locate(document, "outlet.T") == "#/case/streams/1/state/T"
    assert locate(document, "inlet.p") == "#/readings/inlet.p"


@pytest.mark.parametrize("key", ["plain", "a/b", "m~n", "with space", "ü", "%41", "#", '"', "a.b [bar]"])
def test_a_pointer_leads_back_to_what_it_was_made_from(key: str) -> None:
    document = {"list": [0, {key: "here"}]}
    place = pointer(("list", 1, key))
    assert resolve(document, place) == "here"
    assert place.isascii()
    assert " " not in place


def test_the_escapes_of_a_pointer_are_those_of_rfc_6901() -> None:
    assert pointer(("a/b", "m~n", "c%d", " ")) == "#/a~1b/m~0n/c%25d/%20"  # RFC 6901, sections 5 and 6


def test_a_pointer_into_nothing_falls_back_to_its_parent() -> None:
    assert nearest_existing({"a": [1]}, "#/a/7/b") == "#/a"


@pytest.mark.parametrize("document", [None, [], {"streams": 3}, {"streams": [3, {"id": 4}]}])
def test_the_address_book_reads_any_document(document: Any) -> None:
    book = AddressBook(document)
    assert book.kind("a.b") is None
    assert book.locate("a.b") == "#"


def test_relations_over_values_of_relations_do_not_go_round_in_circles() -> None:
    document = with_relations(
        {"id": "a", "kind": "sum", "of": ["b.value", "c.value"], "value": "?"},
        {"id": "b", "kind": "sum", "of": ["a.value", "c.value"], "value": "?"},
        {"id": "c", "kind": "difference", "of": ["inlet.T", "outlet.T"], "value": "?"},
    )
    kinds = {r.id: r.quantities["value"].kind for r in parse(document).relations}
    assert kinds["c"] == "temperature_difference"
