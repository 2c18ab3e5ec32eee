"""Whatever is put in, what comes out of a property model is a finite state within limits or one of our own errors."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from service.errors import CaseError
from service.fluids.pairs import PREFERENCE
from service.fluids.protocol import State
from service.fluids.simple_fluid import SimpleFluid
from tests.unit.fluid_models import EVAPORATING, SIMPLE, model

WIDE = st.one_of(
    st.floats(allow_nan=True, allow_infinity=True),
    st.floats(-1e7, 1e7),
    st.sampled_from([0.0, -0.0, 1.0, 273.15, 273.16, 647.096, 22.064e6, 101325.0, 1e-300, 1e300, 611.213, 1073.15]),
)


def sound(name: str, state: State) -> None:
    fluid = model(name)
    values = state.values
    for prop in ("p", "T", "h", "s", "u", "rho", "v"):
        assert math.isfinite(values[prop]), prop
    assert values["T"] <= fluid.limits.T_max * (1 + 1e-6)
    assert 0.0 < values["p"] <= fluid.limits.p_max * (1 + 1e-6)
    assert math.isnan(values["x"]) or 0.0 <= values["x"] <= 1.0


def try_state(name: str, pair: tuple[str, str], values: tuple[float, float]) -> None:
    refusal = ""
    try:
        sound(name, model(name).state(pair, values, ("cp", "superheat", "viscosity")))
    except CaseError as error:
        refusal = error.detail
    assert len(refusal) < 400


def pairs(name: str) -> list[tuple[str, str]]:
    fluid = model(name)
    return list(fluid.pairs if isinstance(fluid, SimpleFluid) else PREFERENCE)


@pytest.mark.parametrize("name", [*EVAPORATING, *SIMPLE])
@settings(max_examples=60, deadline=None)
@given(data=st.data())
def test_any_numbers_give_a_state_or_an_error_of_ours(name: str, data: st.DataObject) -> None:
    pair = data.draw(st.sampled_from(pairs(name)))
    try_state(name, pair, (data.draw(WIDE), data.draw(WIDE)))


@pytest.mark.parametrize("name", [*EVAPORATING, *SIMPLE])
@settings(max_examples=60, deadline=None)
@given(data=st.data())
def test_numbers_around_the_range_give_a_state_or_an_error_of_ours(name: str, data: st.DataObject) -> None:
    fluid = model(name)
    pair = data.draw(st.sampled_from(pairs(name)))
    values = []
    for prop in pair:
        low, high = fluid.bounds(prop)
        if prop in ("p", "rho", "v"):
            values.append(10 ** data.draw(st.floats(math.log10(low) - 0.5, math.log10(high) + 0.5)))
        else:
            values.append(data.draw(st.floats(low - 0.1 * (high - low), high + 0.1 * (high - low))))
    try_state(name, pair, (values[0], values[1]))


@pytest.mark.parametrize("name", [*EVAPORATING, *SIMPLE])
@settings(max_examples=15, deadline=None)
@given(data=st.data())
def test_columns_of_any_numbers_give_finite_rows_or_errors_of_ours(name: str, data: st.DataObject) -> None:
    pair = data.draw(st.sampled_from(pairs(name)[:6]))
    rows = data.draw(st.integers(1, 6))
    values = tuple(np.array(data.draw(st.lists(WIDE, min_size=rows, max_size=rows))) for _ in pair)
    columns, errors = model(name).columns(pair, values, ("T", "h", "rho"))
    for row in range(rows):
        finite = all(math.isfinite(column[row]) for column in columns.values())
        assert finite != (row in errors)
    assert all(isinstance(error, CaseError) for error in errors.values())


@pytest.mark.parametrize("name", EVAPORATING)
@settings(max_examples=30, deadline=None)
@given(value=WIDE)
def test_saturation_of_any_number_is_a_number_or_none(name: str, value: float) -> None:
    fluid = model(name)
    for found in (fluid.saturation(p=value), fluid.saturation(T=value)):
        assert found is None or (math.isfinite(found) and found > 0.0)
