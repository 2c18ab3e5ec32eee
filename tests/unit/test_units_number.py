"""Quantities as text: what is a number with a unit, and what is refused and why."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from service.errors import SchemaViolation
from service.units import split_quantity
from service.units.number import MAX_TEXT


@pytest.mark.parametrize(
    ("text", "value", "unit"),
    [
        ("40 barg", 40.0, "barg"),
        ("40barg", 40.0, "barg"),
        ("  40   barg  ", 40.0, "barg"),
        ("40\u00a0barg", 40.0, "barg"),  # no-break blank, as word processors write it
        ("40\u202fbarg", 40.0, "barg"),
        ("12.5 t/h", 12.5, "t/h"),
        ("-3.2e-4 m", -3.2e-4, "m"),
        ("+5 K", 5.0, "K"),
        (".5 m", 0.5, "m"),
        ("5. m", 5.0, "m"),
        ("1E6 Pa", 1e6, "Pa"),
        ("1e6Pa", 1e6, "Pa"),
        ("3e m", 3.0, "e m"),  # no exponent: the unit is then not found
        ("0.35", 0.35, ""),
        ("0.35 -", 0.35, "-"),
        ("85 %", 85.0, "%"),
        ("85%", 85.0, "%"),
        ("0 degC", 0.0, "degC"),
        ("-0.0 degC", 0.0, "degC"),
        ("0e5 m", 0.0, "m"),
        ("2.1 kJ/(kg K)", 2.1, "kJ/(kg K)"),
        ("20 °C", 20.0, "°C"),
        ("5e-324 m", 5e-324, "m"),  # the smallest double
        ("1.7976931348623157e308 m", 1.7976931348623157e308, "m"),  # the largest
        ("0x10 bar", 0.0, "x10 bar"),  # no hexadecimal: the unit is then not found
    ],
)
def test_a_number_with_a_unit_is_taken_apart(text: str, value: float, unit: str) -> None:
    assert split_quantity(text) == (value, unit, False)


@pytest.mark.parametrize(
    ("text", "unit"), [("?", ""), ("? degC", "degC"), ("?degC", "degC"), (" ?  kW ", "kW"), ("? -", "-")]
)
def test_a_question_mark_is_an_unknown(text: str, unit: str) -> None:
    assert split_quantity(text) == (None, unit, True)


@pytest.mark.parametrize(
    ("text", "hint"),
    [
        ("12,5 bar", "decimal point"),
        ("12,500 kg/h", "decimal point"),
        ("1.234,5 bar", "40 barg"),
        ("12 500 kg/h", "without signs or blanks"),
        ("12\u202f500 kg/h", "without signs or blanks"),
        ("12_500 kg/h", "without signs or blanks"),
        ("12'500 kg/h", "without signs or blanks"),
        ("\u22125 degC", "plain hyphen"),
        ("\u20135 degC", "plain hyphen"),
        ("nan bar", "finite"),
        ("NaN", "finite"),
        ("inf bar", "finite"),
        ("-Infinity", "finite"),
        ("1e999 bar", "40 barg"),
        ("-1e400 bar", "40 barg"),
        ("1e-400 bar", "40 barg"),  # would be zero
        ("\u0664\u0660 bar", "0 to 9"),  # Arabic-Indic 40
        ("\uff14\uff10 bar", "0 to 9"),  # full-width 40
        ("4\u0660 bar", "0 to 9"),
        ("1.2.3 bar", "40 barg"),
        ("1-2 bar", "40 barg"),
        ("1/2 in", "40 barg"),
        ("1e5.5 bar", "40 barg"),
        ("--5 bar", "40 barg"),
        ("5 -bar", "40 barg"),
        ("?? bar", "40 barg"),
        ("? 40 bar", "40 barg"),
        ("40 ? bar", "40 barg"),
        ("bar", "40 barg"),
        ("", "40 barg"),
        ("   ", "40 barg"),
        (".", "40 barg"),
        ("e5", "40 barg"),
        ("40 bar\n", "40 barg"),
        ("40\nbar", "40 barg"),
        ("9" * 400, "40 barg"),
        ("1" + " " * 100_000 + "bar", "40 barg"),
        ("40 " + "b" * MAX_TEXT, "40 barg"),
    ],
    ids=lambda value: ascii(value)[:30],
)
def test_what_is_no_number_with_a_unit_is_refused_with_a_reason(text: str, hint: str) -> None:
    with pytest.raises(SchemaViolation) as caught:
        split_quantity(text, "inlet.p")
    issue = caught.value.issues[0]
    assert issue.address == "inlet.p"
    assert hint in issue.hint
    assert (caught.value.detail + issue.hint).isprintable()
    assert len(caught.value.detail + issue.hint) < 600


@pytest.mark.parametrize("text", [None, 4, 4.0, True, ["4 bar"], b"4 bar"])
def test_what_is_no_text_is_refused(text: object) -> None:
    with pytest.raises(SchemaViolation):
        split_quantity(text)  # type: ignore[arg-type]


@given(value=st.floats(allow_nan=False, allow_infinity=False), unit=st.sampled_from(["", "barg", "kJ/(kg K)", "%"]))
def test_any_finite_number_comes_back_as_it_was_written(value: float, unit: str) -> None:
    assert split_quantity(f"{value!r} {unit}") == (value, unit, False)


@given(text=st.text(max_size=MAX_TEXT + 5))
def test_any_text_is_a_finite_number_an_unknown_or_refused(text: str) -> None:
    try:
        value, unit, unknown = split_quantity(text)
    except SchemaViolation:
        return
    assert unknown == (value is None)
    assert unit == unit.strip(" \u00a0\u202f")
    assert value is None or abs(value) < float("inf")


@given(text=st.text(alphabet="0123456789.eE+-?, _%bar", max_size=20))
def test_text_made_of_the_letters_of_numbers_never_hides_a_digit(text: str) -> None:
    """What is read as a number is all of the digits in front; the unit never starts with more of them."""
    try:
        _, unit, _ = split_quantity(text)
    except SchemaViolation:
        return
    assert unit == "-" or not unit[:1] or unit[0] not in "0123456789.,_+-?'/"
