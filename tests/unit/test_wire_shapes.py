"""What a wrong shape is called: each mistake gets a place that exists, a sentence, and what to do about it."""

from __future__ import annotations

import copy
import time
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from service.errors import CaseError, SchemaViolation
from service.wire.pointers import parts, resolve

from .wire_helpers import issues, let_down, parse, refusal, shape


def changed(path: str, value: Any) -> dict[str, Any]:
    """The let-down case with one member set; `path` is a pointer without its #."""
    document = let_down()
    *way, last = parts(path)
    here: Any = document
    for step in way:
        here = here[int(step)] if isinstance(here, list) else here.setdefault(step, {})
    if isinstance(here, list):
        here.insert(int(last), value)
    else:
        here[last] = value
    return document


@pytest.mark.parametrize(
    ("path", "value", "pointer", "says"),
    [
        ("/streams/0/mas_flow", "3 kg/s", "#/streams/0/mas_flow", 'Did you mean "mass_flow"'),
        ("/streams/0/p", "3 bar", "#/streams/0/p", 'inside of "state"'),
        ("/streams/0/temperature", "3 K", "#/streams/0/temperature", "Allowed here"),
        ("/streams/0/state/temperature", "3 K", "#/streams/0/state/temperature", 'Did you mean "T"'),
        ("/streams/0/state/enthalpy", "3 kJ/kg", "#/streams/0/state/enthalpy", 'Did you mean "h"'),
        ("/streams/0/state/mass_flow", "3 kg/s", "#/streams/0/state/mass_flow", "belongs to the stream"),
        ("/streems", [], "#/streems", 'Did you mean "streams"'),
        ("/streams/0/state/p", 40, "#/streams/0/state/p", "carries its unit"),
        ("/streams/0/state/p", None, "#/streams/0/state/p", "not null"),
        ("/streams/0/state/p", ["4 bar"], "#/streams/0/state/p", "not a list"),
        ("/streams/0/state", "4 bar", "#/streams/0/state", "An object"),
        ("/streams/0/id", 4, "#/streams/0/id", "not a number"),
        ("/streams/0/id", "a b", "#/streams/0/id", "cannot be a name"),
        ("/streams/0/id", "a.b", "#/streams/0/id", "cannot be a name"),
        ("/streams/0/id", "inlet\n", "#/streams/0/id", "form"),
        ("/streams/0/id", "x" * 65, "#/streams/0/id", "64"),
        ("/streams/0/state/saturated", "steam", "#/streams/0/state/saturated", "liquid and vapour"),
        ("/streams", {}, "#/streams", "A list"),
        ("/streams", [], "#/streams", "At least 1"),
        ("/system", "steady-flow", "#/system", 'Did you mean "steady_flow"'),
        ("/system", "batch", "#/system", "Allowed here"),
        ("/transfers/0/kind", "haet", "#/transfers/0/kind", 'Did you mean "heat"'),
        ("/transfers/0/basis", "net", "#/transfers/0/basis", "Allowed here"),
        ("/transfers/0/UA", "3 W/K", "#/transfers/0/UA", 'inside of "law"'),
        ("/transfers/1", {"id": "f", "kind": "fuel", "basis": "nett"}, "#/transfers/1/basis", 'Did you mean "net"'),
        ("/relations/0", {"kind": "ratio", "of": ["a.b"], "value": 1}, "#/relations/0/of", "At least 2"),
        ("/relations/0", {"kind": "ratio", "of": ["a.b", "c.d"]}, "#/relations/0", '"value" is missing'),
        ("/relations/0", {"of": ["a.b", "c.d"]}, "#/relations/0", '"kind" is missing'),
        ("/relations/0", {"kind": "equal", "of": ["a.b", "c"]}, "#/relations/0/of/1", "is not an address"),
        ("/relations/0", {"kind": "lmtd_UA"}, "#/relations/0", "hot_in"),
        ("/relations/0", "equal", "#/relations/0", "An object"),
        ("/fluids/oil", {"kind": "constant_liquid", "density": "870 kg/m3"}, "#/fluids/oil", '"cp" is missing'),
        ("/fluids/oil", {"kind": "ideal"}, "#/fluids/oil/kind", 'Did you mean "ideal_gas"'),
        ("/fluids/bad name", {"kind": "humid_air"}, "#/fluids/bad%20name", "cannot be a name"),
        ("/answer/units", "metrics", "#/answer/units", 'Did you mean "metric"'),
        ("/answer/agreement", 0, "#/answer/agreement", "above 0"),
        ("/answer/coverage", 1, "#/answer/coverage", "below 1"),
        ("/site/atmospheric_pressure", 101325, "#/site/atmospheric_pressure", "carries its unit"),
        ("/limits/0/of", "outlet", "#/limits/0/of", "item.property"),
        ("/streams/0/side", {"form": "tube"}, "#/streams/0/side/form", 'Did you mean "from"'),
        ("/streams/0/state/T", {"value": 3, "unti": "K"}, "#/streams/0/state/T/unti", 'Did you mean "unit"'),
        ("/streams/0/state/T", {"value": 3, "unit": "K", "u": -1}, "#/streams/0/state/T/u", "at least 0"),
        ("/streams/0/state/T", {"unknown": False}, "#/streams/0/state/T/unknown", "Only true"),
        ("/title", "x" * 201, "#/title", "At most 200"),
    ],
)  # fmt: skip
def test_a_mistake_is_told_with_its_place_and_what_to_change(path: str, value: Any, pointer: str, says: str) -> None:
    document = changed(path, value)
    error = refusal(document)
    assert isinstance(error, SchemaViolation)
    told = issues(error)
    assert pointer in told
    assert says in told[pointer]
    for place in told:
        resolve(document, place)  # KeyError where a pointer leads nowhere


def test_the_unchanged_case_is_accepted() -> None:
    assert len(parse(let_down()).streams) == 2


@pytest.mark.parametrize("document", [None, [], "case", 3, True, {}])
def test_anything_but_a_case_is_told_so(document: Any) -> None:
    error = refusal(document)
    assert isinstance(error, SchemaViolation)
    assert error.issues


@pytest.mark.parametrize("member", ["system", "boundaries", "streams"])
def test_a_missing_member_is_named(member: str) -> None:
    document = let_down()
    del document[member]
    assert f'The member "{member}" is missing.' in issues(refusal(document))["#"]


def test_a_misspelt_required_member_is_told_as_both_missing_and_unknown() -> None:
    document = let_down()
    document["sytem"] = document.pop("system")
    told = issues(refusal(document))
    assert 'Did you mean "system"' in told["#/sytem"]
    assert "misspelling" in told["#"]


def test_everything_wrong_is_told_at_once_whatever_kind_it_is() -> None:
    document = let_down()
    document["streams"][0]["mas_flow"] = "3 kg/s"
    document["streams"][0]["state"] = {"p": "12 kg/s", "T": "-300 degC"}
    document["streams"][1]["to"] = "vlave"
    document["streams"][1]["state"]["p"] = "10 brag"
    document["limits"][0]["of"] = "oulet.T"
    error = refusal(document)
    assert isinstance(error, SchemaViolation)
    assert set(issues(error)) == {
        "#/streams/0/mas_flow",
        "#/streams/0/state/p",
        "#/streams/0/state/T",
        "#/streams/1/to",
        "#/streams/1/state/p",
        "#/limits/0/of",
    }
    assert "6 things" in error.detail


def test_a_wrong_boundary_does_not_make_every_stream_look_wrong() -> None:
    document = let_down()
    document["boundaries"] = ["valve"]
    assert set(issues(refusal(document))) == {"#/boundaries/0"}


@pytest.mark.parametrize(
    "wrong",
    [
        {"x" * 100_000: 1},
        {f"member-{n}": n for n in range(20_000)},
        {"title": ["y" * 1_000_000]},
        {"streams": [{"id": "s", "to": "valve", "flow": 1}] * 3000},
        {"streams": ["z"] * 100_000},
        {"relations": [{"kind": "k" * 100_000}] * 2000},
        {"fluids": {f"f{n}": {"kind": "nonsense"} for n in range(5000)}},
    ],
)
def test_a_hostile_shape_is_refused_shortly_and_in_few_words(wrong: dict[str, Any]) -> None:
    document = {**let_down(), **wrong}
    before = time.perf_counter()
    error = refusal(document)
    assert time.perf_counter() - before < 5.0  # a hang, not slowness: quadratic checks took minutes on such bodies
    assert 0 < len(error.issues) <= 20
    assert sum(len(i.detail) + len(i.hint) for i in error.issues) < 16_000


def test_a_deeply_nested_value_is_refused_and_not_followed() -> None:
    deep: Any = "4 bar"
    for _ in range(300):
        deep = {"value": deep}
    document = let_down()
    document["streams"][0]["state"]["p"] = deep
    assert isinstance(refusal(document), SchemaViolation)


def test_a_series_request_is_explained_inside_of_its_case_too() -> None:
    case = let_down()
    case["streams"][0]["mas_flow"] = "3 kg/s"
    faults = shape("series-request").faults({"case": case, "readings": {"inlet.p": {"valus": [1]}}})
    assert {fault.path for fault in faults} == {
        ("case", "streams", 0, "mas_flow"),
        ("readings", "inlet.p"),
        ("readings", "inlet.p", "valus"),
    }


WORDS = ["p", "T", "id", "kind", "of", "value", "unit", "between", "law", "state", "saturated", "x", "to", "from", "u"]
SCRAPS = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats(allow_nan=False, allow_infinity=False)
    | st.sampled_from(["? degC", "40 barg", "valve", "inlet", "outlet.T", "liquid", "heat", "sum", "fuel", "1e999 K"])
    | st.text(st.characters(exclude_categories=["Cs"]), max_size=12),
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.sampled_from(WORDS), inner, max_size=4),
    max_leaves=8,
)  # fmt: skip
SEED = {
    **let_down(),
    "fluids": {"oil": {"kind": "constant_liquid", "density": "870 kg/m3", "cp": "2.1 kJ/kg/K"}},
    "relations": [
        {"kind": "ratio", "of": ["inlet.p", "outlet.p"], "value": "?"},
        {"id": "eff", "kind": "isentropic_efficiency", "from": "inlet", "to": "outlet", "value": {"value": 0.8}},
        {"id": "hole", "kind": "restriction", "stream": "inlet", "bore": "3 mm", "discharge_coefficient": 0.8},
    ],
}


def places(value: Any, here: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
    inner = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    return [here] * bool(here) + [place for key, item in inner for place in places(item, (*here, key))]


@settings(max_examples=200, suppress_health_check=[HealthCheck.too_slow])
@given(st.lists(st.tuples(st.sampled_from(places(SEED)), SCRAPS), min_size=1, max_size=4))
def test_whatever_is_wrong_with_a_case_is_told_at_places_that_exist(scraps: list[tuple[tuple[Any, ...], Any]]) -> None:
    document: Any = copy.deepcopy(SEED)
    for place, scrap in scraps:
        here = document
        for key in place[:-1]:
            here = here[key] if reaches(here, key) else None
        if reaches(here, place[-1]):
            here[place[-1]] = scrap
    told = ()
    try:
        parse(document)
    except CaseError as error:
        told = error.issues
    for issue in told:
        resolve(document, issue.pointer)
        assert issue.detail
        assert len(issue.detail) + len(issue.hint) < 1500


def reaches(value: Any, key: Any) -> bool:
    if isinstance(value, dict):
        return key in value
    return isinstance(value, list) and key in range(len(value))
