"""Columns of states equal the same states one by one, and a bad row costs only its own row."""

from __future__ import annotations

import math

import numpy as np
import pytest

from service.errors import CaseError, StateAmbiguous, StateOutOfRange
from service.fluids.columns import first_of_each
from service.fluids.if97_limits import boiling_temperature
from service.fluids.protocol import Fluid
from tests.unit.fluid_models import EVAPORATING, SIMPLE, WET, model

BASIC = ("p", "T", "h", "s", "u", "rho", "v", "x")
RNG_SEED = 20


def places(name: str, rows: int) -> tuple[np.ndarray, np.ndarray]:
    fluid, rng = model(name), np.random.default_rng(RNG_SEED)
    low, high = fluid.limits.T_min, fluid.limits.T_max
    T = rng.uniform(low + 0.02 * (high - low), low + 0.6 * (high - low), rows)
    return 10 ** rng.uniform(4.0, 7.2, rows), T


def by_hand(fluid: Fluid, pair: tuple[str, str], a: float, b: float, wanted: tuple[str, ...]) -> list[float] | None:
    try:
        values = fluid.state(pair, (a, b), wanted).values
    except CaseError:
        return None
    return [values.get(name, math.nan) for name in wanted]


@pytest.mark.parametrize("name", [*EVAPORATING, *SIMPLE])
@pytest.mark.parametrize("pair", [("p", "T"), ("T", "p"), ("p", "h"), ("h", "p"), ("p", "s"), ("p", "u"), ("h", "s")])
def test_columns_equal_states_row_by_row(name: str, pair: tuple[str, str]) -> None:
    fluid = model(name)
    p, T = places(name, 12 if pair == ("h", "s") else 40)
    start, _ = fluid.columns(("p", "T"), (p, T), BASIC)
    if pair == ("p", "h"):  # into the wet region too
        start["p"] = start["p"] * 0.5
    wanted = (*BASIC, "cp")
    columns, errors = fluid.columns(pair, (start[pair[0]], start[pair[1]]), wanted)
    assert set(columns) == set(wanted)
    for row in range(len(p)):
        expected = by_hand(fluid, pair, start[pair[0]][row], start[pair[1]][row], wanted)
        found = [columns[n][row] for n in wanted]
        assert (row in errors) == (expected is None)
        if expected is None:
            assert all(math.isnan(value) for value in found)
        else:
            # T from h of IF97 by the same steps in other order: 1e-9 of some 500 K
            assert found == pytest.approx(expected, rel=1e-9, abs=1e-6, nan_ok=True)


@pytest.mark.parametrize("name", [*EVAPORATING, *SIMPLE])
def test_a_bad_row_costs_only_its_own_row(name: str) -> None:
    fluid = model(name)
    p = np.array([2e5, math.nan, 2e5, -1.0, 2e5, 2e5])
    T = np.array([340.0, 340.0, 1e6, 340.0, math.inf, 341.0])
    for pair, values in ((("p", "T"), (p, T)), (("T", "p"), (T, p))):
        columns, errors = fluid.columns(pair, values, ("h", "rho"))
        assert sorted(errors) == [1, 2, 3, 4]
        assert all(isinstance(error, StateOutOfRange) for error in errors.values())
        assert np.isfinite(columns["h"]).tolist() == [True, False, False, False, False, True]
        assert np.isfinite(columns["rho"]).tolist() == [True, False, False, False, False, True]


@pytest.mark.parametrize("name", EVAPORATING)
def test_a_row_on_the_saturation_line_is_ambiguous_in_columns_too(name: str) -> None:
    fluid = model(name)
    p0 = WET[name][0][0]
    T0 = fluid.state(("p", "x"), (p0, 0.5)).values["T"]
    p, T = np.full(3, p0), np.array([T0 + 20.0, T0, T0 - 20.0])
    _, errors = fluid.columns(("p", "T"), (p, T), ("h",))
    assert list(errors) == [1]
    assert isinstance(errors[1], StateAmbiguous)


@pytest.mark.parametrize("name", [*EVAPORATING, *SIMPLE])
def test_rows_that_repeat_are_right_too(name: str) -> None:
    fluid = model(name)
    p = np.array([2e5, 2e5, 2e5, 3e5, 3e5, 2e5])
    T = np.array([340.0, 340.0, 341.0, 341.0, 341.0, 340.0])
    columns, errors = fluid.columns(("p", "T"), (p, T), ("h", "s"))
    assert not errors
    for row in range(6):
        values = fluid.state(("p", "T"), (p[row], T[row])).values
        assert columns["s"][row] == pytest.approx(values["s"], rel=1e-12)


@pytest.mark.parametrize("name", ["water", "IF97"])
def test_errors_of_repeated_rows_stand_at_every_row(name: str) -> None:
    h = np.array([5e5, 1e9, 1e9, 5e5, 1e9])
    columns, errors = model(name).columns(("p", "h"), (np.full(5, 1e6), h), ("T",))
    assert sorted(errors) == [1, 2, 4]
    assert np.isnan(columns["T"]).tolist() == [False, True, True, False, True]


@pytest.mark.parametrize("name", [*EVAPORATING, *SIMPLE])
def test_no_rows_give_no_rows(name: str) -> None:
    empty = np.empty(0)
    columns, errors = model(name).columns(("p", "T"), (empty, empty), ("h", "x"))
    assert {n: len(c) for n, c in columns.items()} == {"h": 0, "x": 0}
    assert not errors
    columns, _ = model(name).columns(("p", "h"), (empty, empty), ("T",))
    assert len(columns["T"]) == 0


@pytest.mark.parametrize("name", EVAPORATING)
def test_superheat_comes_in_columns(name: str) -> None:
    fluid = model(name)
    p0 = WET[name][0][0]
    columns, errors = fluid.columns(("p", "superheat"), (np.full(2, p0), np.array([5.0, -5.0])), ("T", "superheat"))
    assert columns["T"][0] == pytest.approx(fluid.state(("p", "superheat"), (p0, 5.0)).values["T"], rel=1e-12)
    assert columns["superheat"][0] == 5.0
    assert list(errors) == [1]


def test_the_inputs_are_left_alone() -> None:
    for name in ("water", "IF97", "ideal gas"):
        p, T = np.full(3, 1e5), np.array([300.0, 310.0, 320.0])
        columns, _ = model(name).columns(("p", "T"), (p, T), ("p", "T", "h"))
        columns["T"][0] = 0.0
        columns["p"][0] = 0.0
        assert T.tolist() == [300.0, 310.0, 320.0]
        assert p.tolist() == [1e5, 1e5, 1e5]


def test_if97_temperature_from_enthalpy_is_that_of_the_forward_equations() -> None:
    """The library's own (p, h) is off by up to 25 mK; a state has to come back from its enthalpy."""
    rng = np.random.default_rng(RNG_SEED)
    T, p = rng.uniform(273.2, 2200.0, 3000), 10 ** rng.uniform(2.8, 7.69, 3000)
    forward, errors = model("IF97").columns(("p", "T"), (p, T), ("h",))
    assert not errors
    back, errors = model("IF97").columns(("p", "h"), (p, forward["h"]), ("T",))
    assert not errors
    assert np.abs(back["T"] - T).max() < 1e-6  # [K], of 300 to 2200


@pytest.mark.parametrize(
    ("p", "T"),
    [(0.1e6, 0.372755919e3), (1e6, 0.453035632e3), (10e6, 0.584149488e3)],  # IAPWS R7-97(2012), Table 36
)
def test_boiling_temperature_matches_the_release(p: float, T: float) -> None:
    assert boiling_temperature(np.array([p]))[0] == pytest.approx(T, rel=1e-8)
    assert model("IF97").saturation(p=p) == pytest.approx(T, rel=1e-8)


def test_rows_that_differ_from_the_row_before_are_found() -> None:
    rows, belongs = first_of_each((np.array([1.0, 1.0, 2.0, math.nan, math.nan]), np.array([1.0, 1.0, 1.0, 1.0, 1.0])))
    assert rows.tolist() == [0, 2, 3, 4]
    assert belongs.tolist() == [0, 0, 1, 2, 3]
