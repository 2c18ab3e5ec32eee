"""Heat-transfer liquids and brines: consistent properties, ranges kept, names understood."""

from __future__ import annotations

import math

import iapws
import numpy as np
import pytest
from iapws.iapws08 import SeaWater

from service.errors import StateAmbiguous, StateOutOfRange, UnknownFluid
from service.fluids import incompressible
from service.fluids.incompressible_names import PURE, SOLUTIONS, code_of, names
from service.fluids.protocol import FluidSpec


def liquid(name: str, mass_fraction: float | None = None) -> incompressible.IncompressibleLiquid:
    return incompressible.build(FluidSpec(kind="brine", name=name, mass_fraction=mass_fraction))


GLYCOL = liquid("MEG", 0.35)
OIL = liquid("T66")


@pytest.mark.parametrize("code", names())
def test_every_listed_liquid_has_states_that_return_from_their_inputs(code):
    fraction = None
    if code in SOLUTIONS:
        low, high = incompressible.mass_fraction_range(code)
        fraction = 0.5 * (low + high)
    fluid = liquid(code, fraction)
    limits = fluid.limits
    for part in (0.1, 0.5, 0.9):
        T = limits.T_min + part * (limits.T_max - limits.T_min)
        p = max(2e5, 1.1 * (fluid.saturation(T=T) or 0.0))
        state = fluid.state(("p", "T"), (p, T)).values
        for other in ("h", "s", "u"):
            back = fluid.state(("p", other), (p, state[other])).values
            assert back["T"] == pytest.approx(T, rel=1e-10)


@pytest.mark.parametrize(("fluid", "T"), [(GLYCOL, 300.0), (OIL, 500.0)])
def test_enthalpy_entropy_and_volume_belong_together(fluid, T):
    """dh = T ds + v dp along T and along p."""
    p, dT, dp = 1e6, 0.01, 1e5
    near = {
        key: fluid.state(("p", "T"), point).values
        for key, point in {"T+": (p, T + dT), "T-": (p, T - dT), "p+": (p + dp, T), "p-": (p - dp, T)}.items()
    }
    dh, ds = (near["T+"][name] - near["T-"][name] for name in "hs")
    assert T * ds == pytest.approx(dh, rel=1e-7)
    dh, ds = (near["p+"][name] - near["p-"][name] for name in "hs")
    v = fluid.state(("p", "T"), (p, T)).values["v"]
    # h and s are of the order of 1e5 J/kg, differences of 100 J/kg: 1e-9 of rounding and of the fit's derivative
    assert dh - T * ds == pytest.approx(v * 2 * dp, rel=1e-5)


def test_glycol_at_no_glycol_is_water():
    # Melinder's fits start at water; IAPWS-95 from the independent library `iapws`
    water = iapws.IAPWS95(T=293.15, P=0.101325)
    state = liquid("MEG", 0.0).state(("p", "T"), (101_325.0, 293.15)).values
    assert state["rho"] == pytest.approx(water.rho, rel=2e-3)
    assert state["cp"] == pytest.approx(water.cp * 1e3, rel=5e-3)


def test_seawater_agrees_with_iapws_08():
    # IAPWS R13-08 from the independent library `iapws`, salinity 35 g/kg
    sea = SeaWater(T=293.15, P=0.101325, S=0.035)
    state = liquid("seawater", 0.035).state(("p", "T"), (101_325.0, 293.15)).values
    assert state["rho"] == pytest.approx(sea.rho, rel=1e-3)
    assert state["cp"] == pytest.approx(sea.cp * 1e3, rel=5e-3)


def test_inputs_by_density_return_the_temperature():
    state = OIL.state(("p", "T"), (3e5, 450.0)).values
    assert OIL.state(("p", "rho"), (3e5, state["rho"])).values["T"] == pytest.approx(450.0, rel=1e-9)
    assert OIL.state(("p", "v"), (3e5, state["v"])).values["T"] == pytest.approx(450.0, rel=1e-9)


def test_a_brine_below_its_freezing_point_is_refused():
    with pytest.raises(StateOutOfRange, match=r"T = -23\.15 degC lies outside -18\.84"):
        GLYCOL.state(("p", "T"), (1e5, 250.0))


def test_an_oil_below_its_vapour_pressure_is_refused():
    with pytest.raises(StateOutOfRange, match="would boil"):
        OIL.state(("p", "T"), (1e5, 650.0))
    boiling = OIL.saturation(p=1e5)
    assert boiling is not None
    assert OIL.saturation(T=boiling) == pytest.approx(1e5, rel=1e-9)


def test_a_brine_without_a_vapour_pressure_says_so():
    assert GLYCOL.saturation(T=350.0) is None
    assert GLYCOL.saturation(p=1e5) is None


@pytest.mark.parametrize(
    ("inputs", "values"),
    [
        (("p", "T"), (1e5, 1000.0)),
        (("p", "T"), (1e9, 300.0)),
        (("p", "T"), (-1e5, 300.0)),
        (("p", "T"), (math.nan, 300.0)),
        (("p", "h"), (1e5, 1e9)),
        (("p", "h"), (1e5, -1e9)),
        (("p", "rho"), (1e5, 5000.0)),
    ],
)
def test_states_outside_the_range_are_refused(inputs, values):
    with pytest.raises(StateOutOfRange):
        OIL.state(inputs, values)


def test_temperature_and_enthalpy_do_not_fix_the_pressure_of_a_liquid():
    assert OIL.inputs({"T", "h"}) is None
    with pytest.raises(StateAmbiguous):
        OIL.state(("T", "h"), (400.0, 2e5))


@pytest.mark.parametrize(
    ("name", "fraction", "says"),
    [
        ("MEG", None, "is missing"),
        ("MEG", 0.9, "out of range"),
        ("MEG", -0.1, "out of range"),
        ("T66", 0.3, "one composition only"),
        ("MEGG", 0.3, "no brine"),
        ("x" * 1000, None, "no brine"),
    ],
)
def test_liquids_that_cannot_be_built_are_refused_in_words(name, fraction, says):
    with pytest.raises(UnknownFluid, match=says) as caught:
        liquid(name, fraction)
    assert len(caught.value.detail) < 200
    assert caught.value.issues[0].hint


def test_names_do_not_mind_case_or_everyday_words():
    assert code_of("meg") == code_of("ethylene glycol") == code_of("Ethylene-Glycol") == "MEG"
    assert code_of("water") is None
    assert not set(SOLUTIONS) & set(PURE)


def test_columns_equal_states_and_keep_a_bad_row_apart():
    T = np.array([300.0, 5000.0, 350.0])
    columns, errors = GLYCOL.columns(("p", "T"), (np.full(3, 2e5), T), ("h", "rho"))
    assert set(errors) == {1}
    assert columns["h"][2] == GLYCOL.state(("p", "T"), (2e5, 350.0)).values["h"]
    assert np.isnan(columns["rho"][1])


def test_partial_derivative_of_enthalpy_is_the_heat_capacity():
    state = GLYCOL.state(("p", "T"), (2e5, 300.0))
    slope = GLYCOL.partials(state, ("p", "T"), ("h",))["h"][1]
    # the fit of rho(T) adds - T p d2v/dT2, some 1e-5 of cp at 2 bar
    assert slope == pytest.approx(state.values["cp"], rel=1e-4)
    assert GLYCOL.partials(state, ("p", "h"), ("T",))["T"][1] == pytest.approx(1.0 / slope, rel=1e-9)


def test_search_bounds_hold_the_state():
    state = OIL.state(("p", "T"), (3e5, 450.0)).values
    for name in ("p", "T", "h", "s", "u", "rho", "v"):
        low, high = OIL.bounds(name)
        assert low <= state[name] <= high
