"""The strict reader of JSON, and the writer."""

from __future__ import annotations

import json
import math
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from service.errors import MalformedJson
from service.wire.json_text import DEEPEST, dumps, loads

documents = st.recursive(
    st.none() | st.booleans() | st.integers(-(2**53), 2**53) | st.floats(allow_nan=False, allow_infinity=False)
    | st.text(st.characters(exclude_categories=["Cs"])),
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.text(max_size=4), inner, max_size=4),
    max_leaves=20,
)  # fmt: skip


@given(documents)
def test_what_is_written_is_read_back_the_same(document: Any) -> None:
    assert loads(dumps(document)) == document


@given(documents)
def test_strict_json_reads_as_the_standard_library_reads_it(document: Any) -> None:
    text = json.dumps(document, indent=1)
    assert loads(text.encode()) == json.loads(text)


@given(st.text(alphabet='{}[]",:\\u d8e+-.019NaIft\n\ufeff', max_size=60))
def test_any_text_is_either_read_as_the_standard_library_does_or_refused(text: str) -> None:
    try:
        document = loads(text.encode())
    except MalformedJson:
        return
    assert document == json.loads(text, parse_int=float)  # 1 == 1.0; large integers are floats here


PLACES = [
    (b'{"a": 1, "b": 2, "a": 3}', "line 1, column 18"),
    (b'{"a": {"b": 1,\n"b": 2}}', "line 2, column 1"),
    (b'{"a": "{[", "b": ["a", "a"], "b": 1}', "line 1, column 30"),
    (b'{"\\u0061": 1, "a": 2}', "line 1, column 15"),
    (b"[1,\n 2,\n  NaN]", "line 3, column 3"),
    (b"[-Infinity]", "line 1, column 2"),
    (b'["\\ud83d\\ude00", "\\ude00"]', "line 1, column 18"),
    (b"[1, 1e999]", "line 1, column 5"),
    (b"[1, -" + b"9" * 400 + b"]", "line 1, column 5"),
    (b"[" * 59 + b'["]]]", [0]]' + b"]" * 59, f"line 1, column {DEEPEST + 8}"),
    (b'{"a": tru}', "line 1, column 7"),
    (b'{"a": 1', "line 1, column 8"),
]  # counted by hand


@pytest.mark.parametrize(("text", "place"), PLACES)
def test_the_place_of_what_is_wrong_is_told(text: bytes, place: str) -> None:
    with pytest.raises(MalformedJson) as caught:
        loads(text)
    assert f"({place})." in caught.value.detail


def test_a_document_may_nest_as_deep_as_the_limit() -> None:
    assert dumps(loads(b"[" * DEEPEST + b"]" * DEEPEST)) == b"[" * DEEPEST + b"]" * DEEPEST


def test_brackets_inside_of_texts_do_not_count_as_nesting() -> None:
    text = "[" * 5_000
    assert loads(dumps([text, text])) == [text, text]


def test_many_shallow_members_are_not_deep() -> None:
    assert loads(dumps([[], {}] * 1_000)) == [[], {}] * 1_000


def test_texts_that_never_end_take_no_longer_than_they_are_long() -> None:
    for text in (b'"' + b'\\"' * 300_000, b'["' + b"[" * 300_000, b"[" * 70 + b'\\"' * 300_000):
        with pytest.raises(MalformedJson):
            loads(text)  # a scan that starts again at every quote would take minutes here


@pytest.mark.parametrize("text", ["9007199254740993", "123456789012345678901234567890", "-18446744073709551616"])
def test_an_integer_that_no_double_holds_becomes_the_nearest_one(text: str) -> None:
    value = loads(text.encode())
    assert isinstance(value, float)
    assert value == float(text)


@pytest.mark.parametrize("text", ["0", "-7", "9007199254740992", "999999999999999"])
def test_an_integer_that_a_double_holds_stays_an_integer(text: str) -> None:
    value = loads(text.encode())
    assert isinstance(value, int)
    assert value == int(text)


def test_a_long_fraction_is_a_number_like_any_other() -> None:
    assert loads(b"0." + b"3" * 2_000) == pytest.approx(1 / 3, rel=1e-15)


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_a_number_that_is_not_finite_is_never_written(value: float) -> None:
    with pytest.raises(ValueError, match="JSON compliant"):
        dumps({"value": value})


def test_members_are_written_compactly_in_their_order_and_unescaped() -> None:
    assert dumps({"b": 1, "a": "−°"}) == '{"b":1,"a":"−°"}'.encode()
