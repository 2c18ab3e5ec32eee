"""Whole balances against independent programs: iapws and seuif97 for water, Cantera for mixtures of ideal gases.

The programs share published equations with ours, and no code. Tolerances, each for what is left between formulations:

EXACT  relative, on answers that follow from enthalpy differences: IAPWS-95 against IAPWS-95, or IF97 against IF97; the
       programs invert their equations and find saturation to about 1e-8, which differences make a few times more.
IF97   relative, IAPWS-95 against IAPWS-IF97: the industrial formulation is a fit to the scientific one; enthalpies
       differ by up to 0.2 kJ/kg in steam and some 0.02 kJ/kg in cold water, on differences of 500 and 80 kJ/kg here.
NASA   relative, ideal-gas enthalpies of our components' own equations of state against the NASA polynomials of
       GRI-Mech 3.0: heat capacities that differ by up to 0.14 % between 300 and 500 K, less above (found by comparing).
"""

from __future__ import annotations

import math
from functools import cache
from typing import Any

import cantera
import pytest
import seuif97
from iapws import IAPWS95, IAPWS97
from scipy.optimize import brentq

from service.wire.operations import Operations
from tests.published.steady_cases import case, efficiency, heat, stream, tie, work

EXACT, IF97, NASA = 1e-7, 5e-4, 1.5e-3
C = 273.15


@cache
def operations() -> Operations:
    return Operations.build()


def solved(document: dict[str, Any], model: str = "helmholtz") -> dict[str, float]:
    """Answers [SI], with water by one of its two models."""
    fluids = {"water-model": {"kind": "pure", "name": "water", "model": model}, **document.get("fluids", {})}
    streams = [{**s, "fluid": "water-model"} if s.get("fluid") == "water" else s for s in document["streams"]]
    answer = operations().solve({**document, "fluids": fluids, "streams": streams})
    return {address: found["value"] for address, found in answer["answers"].items()}


class Water95:
    """iapws: IAPWS-95. h [J/kg], s [J/(kg K)] of p [Pa], T [K]."""

    model = "helmholtz"
    tolerance = EXACT

    def h(self, p: float, T: float) -> float:
        return IAPWS95(P=p / 1e6, T=T).h * 1e3

    def s(self, p: float, T: float) -> float:
        return IAPWS95(P=p / 1e6, T=T).s * 1e3

    def saturated(self, p: float, x: float) -> float:
        return IAPWS95(P=p / 1e6, x=x).h * 1e3

    def h_ps(self, p: float, s: float) -> float:
        boiling = IAPWS95(P=p / 1e6, x=0.5).T
        liquid, vapour = (IAPWS95(P=p / 1e6, x=x) for x in (0.0, 1.0))
        if liquid.s * 1e3 <= s <= vapour.s * 1e3:
            x = (s / 1e3 - liquid.s) / (vapour.s - liquid.s)
            return (liquid.h + x * (vapour.h - liquid.h)) * 1e3
        wet = s < liquid.s * 1e3
        ends = (273.2, boiling - 1e-6) if wet else (boiling + 1e-6, 1200.0)
        T = brentq(lambda t: self.s(p, t) - s, *ends, xtol=1e-10)
        return self.h(p, T)

    def T_ph(self, p: float, h: float) -> float:
        boiling = IAPWS95(P=p / 1e6, x=0.5).T
        ends = (273.2, boiling - 1e-6) if h < self.saturated(p, 0.0) else (boiling + 1e-6, 1200.0)
        return float(brentq(lambda t: self.h(p, t) - h, *ends, xtol=1e-10))


class Water97:
    """seuif97: IAPWS-IF97. Its backward equations are corrected to its forward ones by brentq on T."""

    model = "IF97"
    tolerance = EXACT

    def h(self, p: float, T: float) -> float:
        return seuif97.pt2h(p / 1e6, T - C) * 1e3

    def s(self, p: float, T: float) -> float:
        return seuif97.pt2s(p / 1e6, T - C) * 1e3

    def saturated(self, p: float, x: float) -> float:
        return seuif97.px2h(p / 1e6, x) * 1e3

    def h_ps(self, p: float, s: float) -> float:
        low, high = seuif97.px2s(p / 1e6, 0.0) * 1e3, seuif97.px2s(p / 1e6, 1.0) * 1e3
        if low <= s <= high:
            x = (s - low) / (high - low)
            return (1 - x) * self.saturated(p, 0.0) + x * self.saturated(p, 1.0)
        boiling = seuif97.px2t(p / 1e6, 0.5) + C
        ends = (273.2, boiling - 1e-6) if s < low else (boiling + 1e-6, 1073.0)
        return self.h(p, brentq(lambda t: self.s(p, t) - s, *ends, xtol=1e-10))

    def T_ph(self, p: float, h: float) -> float:
        boiling = seuif97.px2t(p / 1e6, 0.5) + C
        ends = (273.2, boiling - 1e-6) if h < self.saturated(p, 0.0) else (boiling + 1e-6, 1073.0)
        return float(brentq(lambda t: self.h(p, t) - h, *ends, xtol=1e-10))


class Water95AgainstIf97(Water97):
    """Our IAPWS-95 against IF97 of the other program: the difference of the formulations."""

    model = "helmholtz"
    tolerance = IF97


PROGRAMS = [Water95(), Water97(), Water95AgainstIf97()]
by_every_program = pytest.mark.parametrize("water", PROGRAMS, ids=lambda program: type(program).__name__)


# --- water -----------------------------------------------------------------------------------------------------------


@by_every_program
@pytest.mark.parametrize(("p1", "T1", "p2"), [(8e6, 753.15, 8e3), (4e6, 673.15, 4e5), (1e6, 473.15, 2e4)])
def test_power_of_a_steam_turbine(water, p1, T1, p2):
    document = case(
        [
            stream("inlet", None, "turbine", "water", p=f"{p1!r} Pa", T=f"{T1!r} K", mass_flow="10 kg/s"),
            stream("exit", "turbine", None, None, p=f"{p2!r} Pa", h="?"),
        ],
        transfers=[work("shaft", "turbine")],
        relations=[efficiency("eta", "inlet", "exit", 0.82)],
    )
    expected = 10.0 * 0.82 * (water.h(p1, T1) - water.h_ps(p2, water.s(p1, T1)))
    assert solved(document, water.model)["shaft.rate"] == pytest.approx(expected, rel=water.tolerance)


@by_every_program
def test_temperature_behind_a_let_down_valve(water):
    document = case(
        [
            stream("inlet", None, "valve", "water", p="4.1 MPa", T="673.15 K", mass_flow="3 kg/s"),
            stream("outlet", "valve", None, None, p="1.1 MPa", T="?"),
        ],
        transfers=[heat("loss", "valve", rate="15 kW")],
    )
    expected = water.T_ph(1.1e6, water.h(4.1e6, 673.15) - 5e3)
    # 0.2 kJ/kg are 0.1 K of superheated steam; the tolerance is one of the whole temperature
    assert solved(document, water.model)["outlet.T"] == pytest.approx(expected, rel=water.tolerance)


@by_every_program
def test_spray_of_a_desuperheater(water):
    document = case(
        [
            stream("steam", None, "mixer", "water", p="1.1 MPa", T="640 K", mass_flow="3 kg/s"),
            stream("spray", None, "mixer", "water", p="2.6 MPa", T="378 K", mass_flow="?"),
            stream("out", "mixer", None, "water", p="1.08 MPa", T="466 K"),
        ]
    )
    steam, spray, out = water.h(1.1e6, 640.0), water.h(2.6e6, 378.0), water.h(1.08e6, 466.0)
    expected = 3.0 * (steam - out) / (out - spray)
    assert solved(document, water.model)["spray.mass_flow"] == pytest.approx(expected, rel=2 * water.tolerance)


@by_every_program
def test_cooling_water_of_a_condensate_cooler(water):
    document = case(
        [
            stream("hot", None, "shell", "water", p="5 bar", T="369 K", mass_flow="5 kg/s"),
            stream("cooled", "shell", None, None, p="4.7 bar", T="328 K"),
            stream("cold", None, "tubes", "water", p="4 bar", T="297 K", mass_flow="?"),
            stream("warm", "tubes", None, None, p="3.5 bar", T="316 K"),
        ],
        transfers=[heat("duty", "shell", "tubes")],
    )
    released = 5.0 * (water.h(5e5, 369.0) - water.h(4.7e5, 328.0))
    expected = released / (water.h(3.5e5, 316.0) - water.h(4e5, 297.0))
    assert solved(document, water.model)["cold.mass_flow"] == pytest.approx(expected, rel=water.tolerance)


@by_every_program
def test_steam_from_a_flash_drum(water):
    document = case(
        [
            stream("blowdown", None, "drum", "water", p="4.5 MPa", saturated="liquid", mass_flow="1 kg/s"),
            stream("steam", "drum", None, "water", p="1.3 bar", saturated="vapour", mass_flow="?"),
            stream("liquid", "drum", None, "water", p="1.3 bar", saturated="liquid", mass_flow="?"),
        ]
    )
    low, high = water.saturated(1.3e5, 0.0), water.saturated(1.3e5, 1.0)
    expected = (water.saturated(4.5e6, 0.0) - low) / (high - low)
    assert solved(document, water.model)["steam.mass_flow"] == pytest.approx(expected, rel=water.tolerance)


@pytest.mark.parametrize("water", PROGRAMS[:2], ids=["IAPWS-95", "IF97"])
def test_power_of_a_feed_pump(water):
    """The rise of a pump is small beside its enthalpies: 1e-9 of them is 1e-6 of it."""
    document = case(
        [
            stream("suction", None, "pump", "water", p="1.7 bar", T="378 K", mass_flow="9 kg/s"),
            stream("discharge", "pump", None, None, p="53 bar"),
        ],
        transfers=[work("shaft", None, "pump")],
        relations=[efficiency("eta", "suction", "discharge", 0.68)],
    )
    h1 = water.h(1.7e5, 378.0)
    expected = 9.0 * (water.h_ps(5.3e6, water.s(1.7e5, 378.0)) - h1) / 0.68
    assert solved(document, water.model)["shaft.rate"] == pytest.approx(expected, rel=2e-6)


def test_a_closed_steam_plant_by_the_industrial_formulation():
    """The efficiency of a ring of four machines, against iapws's own IF97."""
    relations = [
        efficiency("turbine-eta", "live", "exhaust", 0.8),
        efficiency("pump-eta", "condensate", "feed", 0.6),
        tie("net", "difference", "shaft.rate", "pump-shaft.rate"),
        tie("efficiency", "ratio", "net.value", "boiler-heat.rate"),
    ]
    document = case(
        [
            stream("live", "boiler", "turbine", "water", p="60 bar", T="480 degC", mass_flow="10 kg/s"),
            stream("exhaust", "turbine", "condenser", "water", p="0.08 bar"),
            stream("condensate", "condenser", "pump", "water", p="0.08 bar", saturated="liquid"),
            stream("feed", "pump", "boiler", "water", p="66 bar"),
        ],
        transfers=[
            heat("boiler-heat", None, "boiler"), work("shaft", "turbine"), heat("rejected", "condenser"),
            work("pump-shaft", None, "pump"),
        ],
        relations=relations,
    )  # fmt: skip
    live, condensate = IAPWS97(P=6.0, T=480 + C), IAPWS97(P=0.008, x=0)
    ideal_exhaust = IAPWS97(P=0.008, s=live.s)
    drop = 0.8 * (live.h - ideal_exhaust.h)
    rise = (IAPWS97(P=6.6, s=condensate.s).h - condensate.h) / 0.6
    expected = (drop - rise) / (live.h - condensate.h - rise)
    # iapws takes T(p,s) from backward equations: 25 mK (R7-97), 0.1 kJ/kg in a pump's rise of 11 and a drop of 1000
    assert solved(document, "IF97")["efficiency.value"] == pytest.approx(expected, rel=2e-4)


# --- mixtures of ideal gases -----------------------------------------------------------------------------------------

SPECIES = {"nitrogen": "N2", "oxygen": "O2", "carbon dioxide": "CO2", "water": "H2O", "methane": "CH4", "argon": "AR"}
FLUE = {"nitrogen": 0.72, "carbon dioxide": 0.09, "water": 0.15, "oxygen": 0.04}
FRESH = {"nitrogen": 0.78, "oxygen": 0.21, "argon": 0.01}
LEAN = {"methane": 0.05, "nitrogen": 0.75, "oxygen": 0.20}


@cache
def gri() -> cantera.Solution:
    return cantera.Solution("gri30.yaml")


def gas(fractions: dict[str, float], p: float, T: float) -> cantera.Solution:
    """Cantera's mixture at a state; one object, to be read at once."""
    mixture = gri()
    mixture.TPX = T, p, {SPECIES[name]: x for name, x in fractions.items()}
    return mixture


def declared(fractions: dict[str, float]) -> dict[str, Any]:
    return {"gas": {"kind": "gas_mixture", "model": "ideal_gas", "mole_fractions": fractions}}


@pytest.mark.parametrize("fractions", [FLUE, FRESH, LEAN], ids=["flue gas", "air", "lean gas"])
@pytest.mark.parametrize(("T1", "T2"), [(300.0, 500.0), (400.0, 1200.0)])
def test_heating_of_a_gas_mixture(fractions, T1, T2):
    document = case(
        [
            stream("cold", None, "heater", "gas", p="1 bar", T=f"{T1} K", mass_flow="2 kg/s"),
            stream("hot", "heater", None, None, p="1 bar", T=f"{T2} K"),
        ],
        transfers=[heat("duty", None, "heater")],
        fluids=declared(fractions),
    )
    expected = 2.0 * (gas(fractions, 1e5, T2).enthalpy_mass - gas(fractions, 1e5, T1).enthalpy_mass)
    assert solved(document)["duty.rate"] == pytest.approx(expected, rel=NASA)


def test_mixing_of_two_flows_of_one_gas_mixture():
    document = case(
        [
            stream("hot", None, "duct", "gas", p="1 bar", T="900 K", mass_flow="1 kg/s"),
            stream("cold", None, "duct", "gas", p="1 bar", T="320 K", mass_flow="2.5 kg/s"),
            stream("mixed", "duct", None, "gas", p="1 bar", T="?"),
        ],
        fluids=declared(FLUE),
    )
    h = (gas(FLUE, 1e5, 900.0).enthalpy_mass + 2.5 * gas(FLUE, 1e5, 320.0).enthalpy_mass) / 3.5
    mixture = gri()
    mixture.HP = h, 1e5
    rise = mixture.T - 320.0
    assert solved(document)["mixed.T"] - 320.0 == pytest.approx(rise, rel=NASA)


@pytest.mark.parametrize(("p2", "eta"), [(4e5, 0.8), (1.5e6, 0.85)])
def test_compression_of_a_gas_mixture(p2, eta):
    document = case(
        [
            stream("suction", None, "compressor", "gas", p="1 bar", T="300 K", mass_flow="1 kg/s"),
            stream("delivery", "compressor", None, None, p=f"{p2!r} Pa", T="?"),
        ],
        transfers=[work("shaft", None, "compressor")],
        relations=[efficiency("eta", "suction", "delivery", eta)],
        fluids=declared(FRESH),
    )
    mixture = gas(FRESH, 1e5, 300.0)
    h1, s1 = mixture.enthalpy_mass, mixture.entropy_mass
    mixture.SP = s1, p2
    rise = (mixture.enthalpy_mass - h1) / eta
    found = solved(document)
    assert found["shaft.rate"] == pytest.approx(rise, rel=NASA)
    mixture.HP = h1 + rise, p2
    assert found["delivery.T"] - 300.0 == pytest.approx(mixture.T - 300.0, rel=NASA)


def test_choked_flow_of_an_ideal_gas_through_an_orifice():
    """The mass flux of an ideal gas of constant heat capacity at the sonic throat, in closed form."""
    document = case(
        [
            stream("feed", None, "vessel", "gas", p="8 bar", T="300 K"),
            stream("leak", "vessel", None, "gas", p="8 bar", T="300 K", mass_flow="?"),
        ],
        fluids={"gas": {"kind": "ideal_gas", "molar_mass": "28 g/mol", "cp": "1040 J/kg/K"}},
        relations=[
            {"id": "hole", "kind": "restriction", "stream": "leak", "bore": "5 mm", "discharge_coefficient": 0.8,
             "downstream_pressure": "1 bar"}
        ],
    )  # fmt: skip
    r = 8.314462618 / 0.028
    k = 1040.0 / (1040.0 - r)
    flux = 8e5 * math.sqrt(k / (r * 300.0) * (2 / (k + 1)) ** ((k + 1) / (k - 1)))
    expected = 0.8 * math.pi / 4 * 0.005**2 * flux
    assert solved(document)["leak.mass_flow"] == pytest.approx(expected, rel=1e-9)
