"""Quantities of a request into SI."""

from __future__ import annotations

import math
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from service.balance.case import Quantity
from service.errors import CaseError, SchemaViolation, StateOutOfRange, UnitNotUnderstood, UnitOfWrongKind
from service.units import KINDS

from .wire_helpers import reader, table

ATMOSPHERE = 100_200.0  # [Pa] a site's own, 1.002 bar


def read(raw: Any, kind: str, pressure: float = 101_325.0) -> Quantity:
    r = reader(pressure)
    found = r.quantity(raw, kind, "a.b", "#/a/b")
    assert found is not None, r.findings.found
    return found


def refused(raw: Any, kind: str) -> tuple[type[CaseError], str, str, str]:
    """(error, pointer, detail, hint) of a quantity that is refused with one finding."""
    r = reader()
    assert r.quantity(raw, kind, "a.b", "#/a/b") is None or r.findings
    ((error, issue),) = r.findings.found
    return error, issue.pointer, issue.detail, issue.hint


@pytest.mark.parametrize(
    ("raw", "kind", "si"),
    [
        ("40 barg", "pressure", 40e5 + ATMOSPHERE),  # gauge: on top of the site's 1.002 bar
        ("40 bar", "pressure", 40e5),
        ("4.1 MPa", "pressure", 4.1e6),
        ("12 t/h", "mass_flow", 12_000 / 3600),
        ("1e3 kg/h", "mass_flow", 1000 / 3600),
        ("-2 kg/s", "mass_flow", -2.0),
        ("400 degC", "temperature", 673.15),  # 0 degC is 273.15 K by definition
        ("-40 degF", "temperature", 233.15),  # the two scales meet at -40
        ("5 K", "temperature_difference", 5.0),
        ("9 delta_degF", "temperature_difference", 5.0),  # 9/5
        ("85 %", "dimensionless", 0.85),
        ("0.85", "dimensionless", 0.85),
        (0.85, "dimensionless", 0.85),
        (1, "dimensionless", 1.0),
        ("8 g/kg", "humidity_ratio", 0.008),
        (0.008, "humidity_ratio", 0.008),
        ("40barg", "pressure", 40e5 + ATMOSPHERE),
        ("  40   barg ", "pressure", 40e5 + ATMOSPHERE),
    ],
)
def test_a_given_quantity_is_read_into_si(raw: Any, kind: str, si: float) -> None:
    found = read(raw, kind, ATMOSPHERE)
    assert found.value == pytest.approx(si, rel=1e-14)
    assert not found.wanted
    assert (found.address, found.kind, found.pointer) == ("a.b", kind, "#/a/b")


@pytest.mark.parametrize(("raw", "unit"), [("?", None), ("? degC", "degC"), ("?degC", "degC"), (" ? K ", "K")])
def test_a_question_asks_for_a_quantity_and_may_choose_the_unit(raw: str, unit: str | None) -> None:
    found = read(raw, "temperature")
    assert (found.wanted, found.value, found.unit) == (True, None, unit)


@pytest.mark.parametrize(
    ("raw", "u"),
    [
        ({"value": 40, "unit": "barg", "u": 0.2}, 0.2e5),
        ({"value": 40, "unit": "barg", "u_rel": 0.005}, 0.2e5),  # 0.5 % of the 40 that is stated
        ({"value": 40, "unit": "barg", "U": 0.4, "k": 2}, 0.2e5),
        ({"value": 40, "unit": "barg"}, None),
        ({"value": 40, "unit": "barg", "u": 0}, 0.0),
    ],
)
def test_an_uncertainty_is_told_in_each_of_its_three_forms(raw: Any, u: float | None) -> None:
    assert read(raw, "pressure").u == (None if u is None else pytest.approx(u, rel=1e-14))


def test_the_uncertainty_of_a_temperature_has_no_zero() -> None:
    assert read({"value": 68, "unit": "degF", "u": 1.8}, "temperature").u == pytest.approx(1.0, rel=1e-14)  # 1.8 degF


def test_an_unknown_is_steered_by_bounds_and_a_start() -> None:
    raw = {"unknown": True, "unit": "degC", "between": ["20 degC", "363.15 K"], "near": "60 degC"}
    found = read(raw, "temperature")
    assert found.wanted
    assert found.unit == "degC"
    assert found.between == pytest.approx((293.15, 363.15), rel=1e-14)
    assert found.near == pytest.approx(333.15, rel=1e-14)


@pytest.mark.parametrize(
    ("raw", "kind", "error", "pointer", "says"),
    [
        ("12 kg/s", "pressure", UnitOfWrongKind, "", "mass flow"),
        ("40 brag", "pressure", UnitNotUnderstood, "", "barg"),
        ("40 9**9**9**9", "pressure", UnitNotUnderstood, "", "not a unit"),
        ("40", "pressure", UnitNotUnderstood, "", "no unit"),
        ("12,5 t/h", "mass_flow", SchemaViolation, "", "decimal point"),
        ("12 500 t/h", "mass_flow", SchemaViolation, "", "number"),
        ("1_000 t/h", "mass_flow", SchemaViolation, "", "number"),
        ("t/h", "mass_flow", SchemaViolation, "", "number"),
        ("", "mass_flow", SchemaViolation, "", "number"),
        ("NaN kPa", "pressure", SchemaViolation, "", "finite"),
        ("-inf kPa", "pressure", SchemaViolation, "", "finite"),
        ("1e999 kPa", "pressure", SchemaViolation, "", "number"),
        ("1e308 bar", "pressure", SchemaViolation, "", "finite"),
        ("-300 degC", "temperature", StateOutOfRange, "", "-273.15 degC"),
        ("-1 K", "temperature", StateOutOfRange, "", "absolute zero"),
        ("-500 degF", "temperature", StateOutOfRange, "", "-459.67 degF"),
        ("-2 barg", "pressure", StateOutOfRange, "", "vacuum"),
        ("0 bar", "pressure", StateOutOfRange, "", "above zero"),
        ({"value": 40}, "pressure", UnitNotUnderstood, "", "no unit"),
        ({"value": "40", "unit": "bar"}, "pressure", SchemaViolation, "", "value"),
        ({"value": True, "unit": "bar"}, "pressure", SchemaViolation, "", "value"),
        ({"unit": "bar"}, "pressure", SchemaViolation, "", "value"),
        ({"value": 10**400, "unit": "bar"}, "pressure", SchemaViolation, "/value", "finite"),
        ({"value": 40, "unit": "kg"}, "pressure", UnitOfWrongKind, "/unit", "pressure"),
        ({"value": 40, "unit": "bar", "u": -1}, "pressure", SchemaViolation, "/u", "not negative"),
        ({"value": 40, "unit": "bar", "u": math.nan}, "pressure", SchemaViolation, "/u", "not negative"),
        ({"value": 40, "unit": "bar", "u": 1, "u_rel": 0.1}, "pressure", SchemaViolation, "/u_rel", "2 times"),
        ({"value": 40, "unit": "bar", "U": 1}, "pressure", SchemaViolation, "/U", "coverage factor"),
        ({"value": 40, "unit": "bar", "U": 1, "k": 0}, "pressure", SchemaViolation, "/k", "no meaning"),
        ({"value": 40, "unit": "bar", "k": 2}, "pressure", SchemaViolation, "/k", "needs `U`"),
        ({"value": 40, "unit": "bar", "near": "3 bar"}, "pressure", SchemaViolation, "/near", "given"),
        ({"unknown": True, "value": 3}, "pressure", SchemaViolation, "/value", "either"),
        ({"unknown": True, "between": ["9 bar", "2 bar"]}, "pressure", SchemaViolation, "/between", "below"),
        ({"unknown": True, "between": ["2 bar", "9 kg"]}, "pressure", UnitOfWrongKind, "/between/1", "pressure"),
        ({"unknown": True, "between": ["2 bar", "?"]}, "pressure", SchemaViolation, "/between/1", "given"),
        ({"unknown": True, "near": "2 kW"}, "pressure", UnitOfWrongKind, "/near", "pressure"),
        (None, "pressure", SchemaViolation, "", "quantity"),
        ([], "pressure", SchemaViolation, "", "quantity"),
        (True, "dimensionless", SchemaViolation, "", "quantity"),
    ],
)  # fmt: skip
def test_a_wrong_quantity_is_told_with_its_place_and_what_to_write(
    raw: Any, kind: str, error: type[CaseError], pointer: str, says: str
) -> None:
    found, place, detail, hint = refused(raw, kind)
    assert found is error
    assert place == f"#/a/b{pointer}"
    assert says in f"{detail} {hint}"
    assert hint
    assert len(detail) < 400


def test_something_that_must_be_given_cannot_be_asked_for() -> None:
    r = reader()
    assert r.given("? bar", "pressure", "a.b", "#/a/b") is None
    assert r.findings.found[0][0] is SchemaViolation


@given(st.text(max_size=80), st.sampled_from(KINDS))
def test_no_text_whatever_breaks_the_reader(text: str, kind: str) -> None:
    r = reader()
    found = r.quantity(text, kind, "a.b", "#/a/b")
    assert (found is None) == bool(r.findings)
    if found is not None and found.value is not None:
        assert math.isfinite(found.value)


@given(st.floats(1e-6, 1e9), st.sampled_from(sorted(KINDS)))
def test_every_display_unit_reads_back_what_it_shows(value: float, kind: str) -> None:
    for system in ("metric", "SI", "US"):
        unit = table().display(kind, system)
        shown = table().from_si(value, unit, 101_325.0)
        found = read({"value": shown, "unit": unit.symbol}, kind)
        scale = max(abs(value), abs(unit.offset), 101_325.0 if unit.gauge else 0.0)
        assert found.value == pytest.approx(value, abs=1e-12 * scale)
