"""Which streams share a mass balance, and which fluid runs where."""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any

import pytest

from service.balance.case import AnswerOptions, Boundary, Case, Quantity, Site, Stream
from service.balance.network import circuits, dependent_circuits, fluid_keys, mass_only
from service.errors import SchemaViolation

WATER: Any = SimpleNamespace(kind="pure", name="water")
OIL: Any = SimpleNamespace(kind="constant_liquid", name="oil")
AIR: Any = SimpleNamespace(kind="humid_air", name="humid_air")


def stream(name: str, source: str | None, target: str | None, fluid: str | None = None, **sides: str) -> Stream:
    return Stream(name, source, target, fluid, {}, sides.get("side_source"), sides.get("side_target"))


def case(boundaries: str, *streams: Stream) -> Case:
    return Case(
        "", "steady_flow", Site(), {}, tuple(map(Boundary, boundaries.split())), streams, (), (), (), AnswerOptions()
    )


def names(case: Case, fluids: dict[str, Any]) -> list[str]:
    return [c.name for c in circuits(case, fluids)]


def test_a_stream_without_fluid_takes_the_only_one_of_its_boundary() -> None:
    c = case("a b", stream("s3", "b", None), stream("s2", "a", "b"), stream("s1", None, "a", "water"))
    assert fluid_keys(c) == {"s1": "water", "s2": "water", "s3": "water"}


def test_a_side_decides_the_fluid_where_the_boundary_has_two() -> None:
    c = case(
        "hx",
        stream("a", None, "hx", "water", side_target="tube"),
        stream("b", "hx", None, None, side_source="tube"),
        stream("c", None, "hx", "oil", side_target="shell"),
        stream("d", "hx", None, None, side_source="shell"),
    )
    assert fluid_keys(c) == {"a": "water", "b": "water", "c": "oil", "d": "oil"}


def test_the_end_with_one_fluid_decides_where_the_other_end_has_two() -> None:
    c = case(
        "pump hx",
        stream("a", None, "pump", "water"),
        stream("b", "pump", "hx"),
        stream("c", None, "hx", "oil"),
        stream("d", "hx", None, "oil"),
        stream("e", "hx", None, "water"),
    )
    assert fluid_keys(c)["b"] == "water"


def test_an_unclear_fluid_is_asked_for_by_name() -> None:
    c = case("hx", stream("a", None, "hx", "water"), stream("b", None, "hx", "oil"), stream("c", "hx", None))
    with pytest.raises(SchemaViolation, match="Stream c names no fluid") as error:
        fluid_keys(c)
    assert "oil, water" in error.value.issues[0].detail


def test_a_network_in_which_nobody_names_a_fluid_is_allowed() -> None:
    c = case("tee", stream("a", None, "tee"), stream("b", "tee", None))
    assert fluid_keys(c) == {"a": None, "b": None}
    assert mass_only(c) == {"tee"}


def test_two_circuits_of_one_fluid_balance_apart_by_side() -> None:
    c = case(
        "hx",
        stream("a", None, "hx", side_target="tube"),
        stream("b", "hx", None, side_source="tube"),
        stream("c", None, "hx", side_target="shell"),
        stream("d", "hx", None, side_source="shell"),
    )
    found = names(c, dict.fromkeys("abcd", WATER))
    assert found == ["mass balance of hx, tube", "mass balance of hx, shell"]


def test_a_side_label_of_the_other_end_does_not_split_a_pump() -> None:
    c = case("pump", stream("a", None, "pump", side_target="shell"), stream("b", "pump", None))
    assert names(c, dict.fromkeys("ab", WATER)) == ["mass balance of pump"]


def test_different_substances_balance_apart_without_a_side() -> None:
    c = case("hx", stream("a", None, "hx"), stream("b", "hx", None), stream("c", None, "hx"), stream("d", "hx", None))
    assert len(names(c, {"a": WATER, "b": WATER, "c": OIL, "d": OIL})) == 2


def test_humid_air_and_water_share_dry_air_and_water_balances() -> None:
    c = case("coil", stream("a", None, "coil"), stream("b", "coil", None), stream("drain", "coil", None))
    dry, water = circuits(c, {"a": AIR, "b": AIR, "drain": WATER})
    assert (dry.component, dry.inflows, dry.outflows) == ("dry air", (0,), (1,))
    assert (water.component, water.inflows, water.outflows) == ("water", (0,), (1, 2))


def test_one_balance_of_a_closed_ring_follows_from_the_others() -> None:
    ring = case("a b c", stream("1", "a", "b"), stream("2", "b", "c"), stream("3", "c", "a"))
    assert dependent_circuits(circuits(ring, dict.fromkeys("123", WATER))) == {2}


def test_a_ring_with_a_make_up_has_no_dependent_balance() -> None:
    ring = case("a b", stream("1", "a", "b"), stream("2", "b", "a"), stream("m", None, "a"), stream("d", "b", None))
    assert dependent_circuits(circuits(ring, dict.fromkeys("12md", WATER))) == set()


def test_a_water_loop_over_a_cooling_tower_is_open_through_the_air() -> None:
    c = case(
        "tower load",
        stream("hot", "load", "tower"), stream("cold", "tower", "load"),
        stream("in", None, "tower"), stream("out", "tower", None),
    )  # fmt: skip
    found = circuits(c, {"hot": WATER, "cold": WATER, "in": AIR, "out": AIR})
    assert dependent_circuits(found) == set()


def test_a_boundary_with_a_state_is_not_balanced_for_mass_only() -> None:
    told = Stream("s", None, "a", None, {"T": Quantity("s.T", "temperature", 300.0)})
    assert mass_only(case("a b", told, stream("t", "a", "b"), stream("u", "b", None))) == {"b"}
