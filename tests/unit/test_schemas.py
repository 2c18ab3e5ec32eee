"""The JSON Schemas: valid, closed, bounded, self-contained, and in the same words as the code."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from service.balance.processes import PROCESS_KINDS
from service.errors import CaseError
from service.units import KINDS, UnitTable
from service.wire import vocabulary
from service.wire.findings import Findings
from service.wire.library import read_schemas, schema_directory
from service.wire.quantities import QuantityReader
from service.wire.shapes import Shape

SCHEMAS = read_schemas(schema_directory())
NAMES = sorted(SCHEMAS)
REQUESTS = ["case", "series-request", "states-request"]
DEFS: Mapping[str, Any] = SCHEMAS["case"]["$defs"]  # type: ignore[assignment]


def parts(schema: Any, path: str = "#") -> Iterator[tuple[str, Mapping[str, Any]]]:
    """Every subschema with its place."""
    if isinstance(schema, list):
        for number, inner in enumerate(schema):
            yield from parts(inner, f"{path}/{number}")
        return
    if not isinstance(schema, dict):
        return
    yield path, schema
    for word in ("properties", "$defs", "patternProperties"):
        for name, inner in schema.get(word, {}).items():
            yield from parts(inner, f"{path}/{word}/{name}")
    for word in ("items", "additionalProperties", "propertyNames", "if", "then", "allOf", "anyOf", "oneOf"):
        if word in schema:
            yield from parts(schema[word], f"{path}/{word}")


def members(name: str) -> set[str]:
    return set(DEFS[name]["properties"])


def kind_of(schema: Mapping[str, Any]) -> str:
    return str(schema["$ref"].rpartition("/")[2])


@pytest.mark.parametrize("name", NAMES)
def test_every_schema_is_a_valid_2020_12_schema(name: str) -> None:
    Draft202012Validator.check_schema(SCHEMAS[name])
    assert SCHEMAS[name]["$schema"] == "https://json-schema.org/draft/2020-12/schema"


@pytest.mark.parametrize("name", NAMES)
def test_every_schema_names_the_path_where_it_is_served(name: str) -> None:
    assert SCHEMAS[name]["$id"] == f"/v1/schemas/{name}"


@pytest.mark.parametrize("name", NAMES)
def test_every_object_is_closed_and_bounded(name: str) -> None:
    for path, schema in parts(SCHEMAS[name]):
        if "properties" in schema and "if" not in schema and not path.endswith("/if") and "allOf" not in schema:
            assert "additionalProperties" in schema, path
            assert schema["additionalProperties"] is not True, path
        elif schema.get("type") == "object" and "allOf" not in schema and "additionalProperties" in schema:
            assert "maxProperties" in schema, path


@pytest.mark.parametrize("name", NAMES)
def test_every_list_and_text_has_a_largest_size(name: str) -> None:
    for path, schema in parts(SCHEMAS[name]):
        types = schema.get("type", ())
        if "array" in types:
            assert "maxItems" in schema, path
        if "string" in types:
            assert "maxLength" in schema, path


@pytest.mark.parametrize("name", NAMES)
def test_no_schema_refers_to_anything_outside_of_the_service(name: str) -> None:
    for path, schema in parts(SCHEMAS[name]):
        reference = schema.get("$ref", "#/")
        assert reference.startswith(("#/", "/v1/schemas/")), path


@pytest.mark.parametrize("name", NAMES)
def test_no_schema_offers_alternatives_that_give_useless_errors(name: str) -> None:
    for path, schema in parts(SCHEMAS[name]):
        assert not {"oneOf", "anyOf", "not"} & set(schema), path


@pytest.mark.parametrize("name", REQUESTS)
def test_every_member_of_a_request_is_described(name: str) -> None:
    for path, schema in parts(SCHEMAS[name]):
        for member, inner in schema.get("properties", {}).items():
            if "const" in inner or path.endswith("/if"):
                continue
            target = inner
            while "description" not in target and "$ref" in target:
                root = SCHEMAS["case"] if target["$ref"].startswith("/v1/schemas/case") else SCHEMAS[name]
                target = root
                for part in inner["$ref"].partition("#")[2].split("/")[1:]:
                    target = target[part]
            assert target.get("description"), f"{path}/{member}"


def test_a_stream_has_the_members_that_the_code_knows() -> None:
    assert members("stream") == {*vocabulary.STREAM, "id", "from", "to", "fluid", "side", "state", "draws"}
    for name, kind in vocabulary.STREAM.items():
        assert kind_of(DEFS["stream"]["properties"][name]) == kind


def test_a_state_has_the_properties_that_the_code_knows() -> None:
    assert members("state") == {*vocabulary.STATE, "saturated"}
    for name, kind in vocabulary.STATE.items():
        assert kind_of(DEFS["state"]["properties"][name]) == kind
    assert DEFS["state"]["properties"]["saturated"]["enum"] == list(vocabulary.SATURATED)


def test_a_content_has_the_members_that_the_code_knows() -> None:
    assert members("content") == {*vocabulary.CONTENT, *vocabulary.ENDS, "id", "fluid", "process", "wall"}
    for name, kind in vocabulary.CONTENT.items():
        assert kind_of(DEFS["content"]["properties"][name]) == kind


@pytest.mark.parametrize(
    ("name", "quantities", "words"),
    [
        ("content_end", {**vocabulary.STATE, **vocabulary.SIZE}, {"saturated"}),
        ("wall", vocabulary.WALL, set()),
        ("stage", vocabulary.PROCESS, {"kind", "until"}),
        ("process", vocabulary.PROCESS, {"kind", "until"}),
    ],
)
def test_what_belongs_to_a_content_has_the_members_that_the_code_knows(
    name: str, quantities: Mapping[str, str], words: set[str]
) -> None:
    assert members(name) == {*quantities, *words}
    for quantity, kind in quantities.items():
        assert kind_of(DEFS[name]["properties"][quantity]) == kind


def test_the_processes_of_the_schema_are_those_of_the_solver() -> None:
    assert set(vocabulary.PROCESSES) == set(PROCESS_KINDS)
    for name in ("stage", "process"):
        assert DEFS[name]["properties"]["kind"]["enum"] == list(vocabulary.PROCESSES)


@pytest.mark.parametrize("kind", vocabulary.TRANSFER)
def test_a_transfer_has_the_members_that_the_code_knows(kind: str) -> None:
    extra = {"id", "kind", "from", "to"}
    extra |= {"law"} if kind == "heat" else set()
    extra |= {"basis"} if kind == "fuel" else set()
    assert members(kind) == {*vocabulary.TRANSFER[kind], *extra}


def test_a_heat_transfer_law_has_the_members_that_the_code_knows() -> None:
    assert set(DEFS["heat"]["properties"]["law"]["properties"]) == {*vocabulary.HEAT_LAW, "of"}


@pytest.mark.parametrize("kind", vocabulary.RELATION)
def test_a_relation_has_the_members_that_the_code_knows(kind: str) -> None:
    streams = vocabulary.RELATION_STREAMS.get(kind)
    extra = {"id", "kind", *(streams if streams else ("of",))}
    extra |= {"arrangement"} if kind in ("lmtd_UA", "effectiveness") else set()
    assert members(kind) == {*vocabulary.RELATION[kind], *extra}
    for name, quantity_kind in vocabulary.RELATION[kind].items():
        expected = "any_quantity" if quantity_kind == vocabulary.FOLLOWS_ADDRESSES else quantity_kind
        assert kind_of(DEFS[kind]["properties"][name]) == expected


@pytest.mark.parametrize("kind", vocabulary.FLUID)
def test_a_declared_fluid_has_the_quantities_that_the_code_knows(kind: str) -> None:
    words = {"kind", "name", "model", "mole_fractions"}
    assert members(kind) - words == set(vocabulary.FLUID[kind])


@pytest.mark.parametrize(
    ("place", "words"),
    [
        (DEFS["transfer"]["properties"]["kind"], vocabulary.TRANSFER),
        (DEFS["relation"]["properties"]["kind"], vocabulary.RELATION),
        (DEFS["fluid"]["properties"]["kind"], vocabulary.FLUID),
        (DEFS["lmtd_UA"]["properties"]["arrangement"], vocabulary.ARRANGEMENTS),
        (DEFS["fuel"]["properties"]["basis"], vocabulary.FUEL_BASES),
        (DEFS["pure"]["properties"]["model"], vocabulary.PURE_MODELS),
        (DEFS["gas_mixture"]["properties"]["model"], vocabulary.MIXTURE_MODELS),
        (DEFS["answer"]["properties"]["units"], vocabulary.UNIT_SYSTEMS),
        (DEFS["answer"]["properties"]["detail"], vocabulary.DETAILS),
        (DEFS["answer"]["properties"]["work_positive"], vocabulary.WORK_POSITIVE),
        (SCHEMAS["case"]["properties"]["system"], vocabulary.SYSTEMS),  # type: ignore[index]
        (SCHEMAS["case"]["properties"]["form"], vocabulary.FORMS),  # type: ignore[index]
        (DEFS["stream"]["properties"]["draws"], vocabulary.DRAWS),
        (DEFS["quantity"]["properties"]["table"]["properties"]["between"], vocabulary.BETWEEN),
    ],
)
def test_the_words_of_a_schema_are_those_of_the_code(place: Mapping[str, Any], words: Any) -> None:
    assert place["enum"] == list(words)


def test_every_quantity_of_the_schema_is_a_kind_of_the_unit_table() -> None:
    general = {"quantity", "quantity_or_number", "any_quantity"}
    named = {n for n, d in DEFS.items() if d.get("$ref", "").startswith("#/$defs/quantity") and n not in general}
    assert named <= set(KINDS)
    kinds = UnitTable.build().kinds
    bare = {name for name in named if DEFS[name]["$ref"].endswith("_or_number")}
    assert bare == {name for name in named if kinds[name].bare_number_allowed}


def test_the_examples_in_the_schema_are_quantities_of_their_kind() -> None:
    units, findings = UnitTable.build(), Findings()
    reader = QuantityReader(units, findings)
    count = 0
    for name, definition in DEFS.items():
        for example in definition.get("examples", ()):
            assert reader.quantity(example, name, "", "#") is not None, (name, example)
            count += 1
    for kind, text in vocabulary.EXAMPLES.items():
        for example in text.split(" or "):
            assert reader.quantity(json.loads(example), kind, "", "#") is not None, (kind, example)
    assert count > 20


def test_every_problem_type_of_the_code_is_named_in_the_schema_of_problems() -> None:
    told = SCHEMAS["problem"]["properties"]["type"]["description"]  # type: ignore[index]
    types = {error.problem_type for error in CaseError.__subclasses__()}
    assert {word.strip(" .") for word in told.partition(": ")[2].split(",")} == types


def test_every_kind_of_item_leads_to_its_own_branch() -> None:
    for name in ("transfer", "relation", "fluid"):
        branches = {rule["if"]["properties"]["kind"]["const"]: kind_of(rule["then"]) for rule in DEFS[name]["allOf"]}
        assert branches == {kind: kind for kind in DEFS[name]["properties"]["kind"]["enum"]}


def test_a_reference_that_leads_out_of_the_service_is_refused_when_compiling() -> None:
    broken = json.loads(json.dumps(SCHEMAS))
    broken["case"]["properties"]["title"] = {"$ref": "http://127.0.0.1:9/never-fetched"}
    with pytest.raises(Exception, match="never-fetched"):
        Shape("case", broken)
