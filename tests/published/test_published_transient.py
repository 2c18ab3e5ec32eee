"""Published and closed-form transients, integrated in time, and integrations by an independent program (Cantera).

A vessel held isothermal is one with a heat transfer so good (UA = 1e9 W/K) that its temperature strays by 2e-5 K.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Collection, Sequence
from functools import cache
from typing import Any

import cantera
import pytest

from service.balance.case import Case, Fluid
from service.balance.restriction import mass_flux
from service.balance.solution import Solution
from service.fluids.protocol import Limits, Provenance, State
from service.solvers.rate_form import shooting
from service.solvers.rate_form.telling import tell
from tests.published import checks
from tests.unit.transient_cases import (
    account,
    case,
    end,
    gas,
    heat,
    orifice,
    solve,
    stream,
    vessel,
)

ISOTHERMAL = 1e9  # [W/K]


def given(check: str) -> dict[str, float]:
    return checks.given(check)


def filling(p1: float, T1: float, p2: float, T_in: float, k: float) -> Solution:
    """A vessel filled from a line at p2 through an orifice until it is full; p1 = 0 begins evacuated."""
    first = {"initial__p": p1, "initial__T": T1} if p1 else {"initial__mass": 0.0}
    return solve(
        case(
            [vessel("tank", volume=0.3, **first)],
            [stream("line", None, "tank", p=p2, T=T_in)],
            relations=[orifice("hole", "line", area=2e-5)],
            fluids=[gas(k=k)],
            conditions={"tank.p": p2},
        )
    )


def blowdown(time: float, isothermal: bool, of: str = "TR-A3") -> Solution:
    """The vessel of TR-A3, adiabatic, or held at its first temperature."""
    g = given(of)
    warm = heat("warmth", None, "tank", law=True, UA=ISOTHERMAL, source_temperature=g["T0"])
    return solve(
        case(
            [vessel("tank", volume=g["V"], initial__p=g["p0"], initial__T=g["T0"])],
            [stream("vent", "tank")],
            [warm] if isothermal else [],
            [orifice("hole", "vent", area=g["A"], downstream_pressure=1e5)],
            [gas(g["R"], g["k"])],
            time,
        )
    )


def adiabatic_choked() -> dict[str, float]:
    found = {}
    for t in (10, 30, 60):
        solution = blowdown(float(t), False)
        found[f"p({t}s)"], found[f"T({t}s)"] = end(solution, "tank", "p"), end(solution, "tank", "T")
    k, p0 = 1.4, given("TR-A3")["p0"]
    # p/p0 = [1 + (k-1)/2 t/tau]^(-2k/(k-1)), solved for tau
    found["tau"] = 0.5 * (k - 1) * 60.0 / ((found["p(60s)"] / p0) ** (-0.5 * (k - 1) / k) - 1.0)
    return found


def isothermal_choked() -> dict[str, float]:
    solution = blowdown(30.0, True, "TR-A4")
    (line,) = (line for line in account(solution, "tank", "energy").lines if line.term == "heat")
    return {"p(30s)": end(solution, "tank", "p"), "Q(30s)": line.value}


def tyre() -> dict[str, float]:
    """The leak is integrated until it no longer chokes."""
    g = given("TR-11")

    def leak(time: float) -> Solution:
        return solve(
            case(
                [vessel("tyre", volume=g["V"], initial__p=g["p0"], initial__T=g["T"])],
                [stream("leak", "tyre")],
                [heat("warmth", None, "tyre", law=True, UA=ISOTHERMAL, source_temperature=g["T"])],
                [orifice("valve", "leak", area=g["A"], downstream_pressure=g["pb"])],
                [gas(k=g["k"])],
                time,
            )
        )

    whole = leak(60.0).transient
    assert whole is not None
    (time,) = (t for t, text in whole.events if "choked" in text)
    p = end(leak(time), "tyre", "p")
    return {"t": time, "p_unchoke_gauge": p, "tau": time / math.log(g["p0"] / p)}


def stirred_with_coil() -> dict[str, float]:
    g = given("TR-06")
    found = {}
    for name, hours in (("T(0.25h)", 0.25), ("T(0.5h)", 0.5), ("T(1h)", 1.0), ("T(inf)", 24.0)):
        solution = solve(
            case(
                [vessel("tank", "gas", mass=g["m"], initial__T=g["T0"])],
                [
                    stream("feed", None, "tank", mass_flow=g["mdot"], T=g["T0"]),
                    stream("drain", "tank", mass_flow=g["mdot"]),
                ],
                [heat("coil", "tank", rate=-g["Q"]), heat("paddle", None, "tank", "shaft_work", rate=g["W"])],
                fluids=[Fluid("gas", "constant_liquid", density=1000.0, cp=g["c"])],
                time=3600.0 * hours,
            )
        )
        found[name] = end(solution, "tank", "T")
    return found


def jacketed() -> dict[str, float]:
    g = given("TR-A5")
    C = 273.15
    solution = solve(
        case(
            [vessel("batch", mass=g["m"], initial__T=g["T0"] + C)],
            transfers=[heat("jacket", None, "batch", law=True, UA=g["UA"], source_temperature=g["Tj"] + C)],
            fluids=[Fluid("gas", "constant_liquid", density=1000.0, cp=g["c"])],
            conditions={"batch.T": g["T"] + C},
        )
    )
    assert solution.transient is not None
    return {"t": solution.transient.end_time, "T(t)": end(solution, "batch", "T")}


def constant_inflow() -> dict[str, float]:
    g = given("TR-A7")
    solution = solve(
        case(
            [vessel("tank", volume=g["V"], initial__p=g["p0"], initial__T=g["T0"])],
            [stream("feed", None, "tank", mass_flow=g["mdot"], p=1e6, T=g["Tin"])],
            fluids=[gas(g["R"], g["k"])],
            time=g["t"],
        )
    )
    return {"p": end(solution, "tank", "p"), "T": end(solution, "tank", "T")}


def evacuated() -> dict[str, float]:
    g = given("TR-A1")
    return {"T2": end(filling(0.0, 0.0, 1e6, g["Tin"], g["k"]), "tank", "T")}


def partly_filled() -> dict[str, float]:
    g = given("TR-A2")
    return {"T2": end(filling(g["p1"], g["T1"], g["p2"], g["Tin"], g["k"]), "tank", "T")}


# -- against Cantera ---------------------------------------------------------------------------------------------------


@cache
def cantera_air() -> cantera.Solution:
    """Air by the NASA polynomials, of the fractions of which TR-C1 to C3 were recorded (told by their isentrope)."""
    air = cantera.Solution("air.yaml")
    air.X = "N2:0.7809, O2:0.2095, AR:0.0093"
    return air


class NasaAir:
    """Cantera's air as a property model of ours, so that the two integrations share their properties and no code."""

    name, kind, dof, pressure_optional = "air", "gas_mixture", 2, True
    properties = ("p", "T", "h", "s", "u", "rho", "v")
    limits = Limits(T_min=200.0, T_max=3000.0, p_max=1e9)
    provenance = Provenance("NASA polynomials", "Cantera, air.yaml", "elements at 298.15 K")

    def __init__(self) -> None:
        self.air = cantera_air()
        self.molar_mass = self.air.mean_molecular_weight / 1e3

    def inputs(self, known: Collection[str]) -> tuple[str, ...] | None:
        return next((pair for pair in (("p", "T"), ("rho", "u")) if set(pair) <= set(known)), None)

    def state(self, inputs: tuple[str, ...], values: tuple[float, ...], extras: Sequence[str] = ()) -> State:
        air, given_ = self.air, dict(zip(inputs, values, strict=True))
        if "rho" in given_:
            air.UV = given_["u"], 1.0 / given_["rho"]
        elif "s" in given_:
            air.SP = given_["s"], given_["p"]
        elif "h" in given_:
            air.HP = given_["h"], given_["p"]
        else:
            air.TP = given_["T"], given_["p"]
        found = {"p": air.P, "T": air.T, "h": air.h, "s": air.s, "u": air.u, "rho": air.density, "x": math.nan}
        return State({**found, "v": 1.0 / air.density}, "gas")


def by_us(what: Case) -> Solution:
    """The case with Cantera's properties."""
    air: Any = NasaAir()
    fluids = dict.fromkeys([s.id for s in what.streams] + [c.id for c in what.contents], air)
    return tell(what, fluids, shooting.solve(what, fluids, None))


def cantera_reactor(T: float, p: float, volume: float) -> cantera.IdealGasReactor:
    air = cantera_air()
    air.TP = T, p
    return cantera.IdealGasReactor(air, energy="on", volume=volume, clone=True)


def cantera_reservoir(T: float, p: float) -> cantera.Reservoir:
    air = cantera_air()
    air.TP = T, p
    return cantera.Reservoir(air, clone=True)


def advanced(reactor: cantera.IdealGasReactor, time: float) -> tuple[float, float]:
    """(p, T) of a reactor after a time [s], at tight tolerances."""
    net = cantera.ReactorNet([reactor])
    net.rtol, net.atol = 1e-10, 1e-16
    net.advance(time)
    return reactor.phase.P, reactor.phase.T


def filled() -> tuple[Solution, tuple[float, float]]:
    g = given("TR-C1")
    ours = case(
        [vessel("tank", volume=g["V"], initial__p=g["p0"], initial__T=g["Tin"])],
        [stream("line", None, "tank", p=g["pin"], T=g["Tin"])],
        relations=[orifice("hole", "line", area=1e-4)],
        conditions={"tank.p": g["pin"]},
    )
    reactor, line = cantera_reactor(g["Tin"], g["p0"], g["V"]), cantera_reservoir(g["Tin"], g["pin"])
    valve = cantera.Valve(line, reactor)
    valve.valve_coeff = 1e-6
    return by_us(ours), advanced(reactor, 200.0)


def blown_down() -> tuple[Solution, tuple[float, float]]:
    """The controller of the other program lets through what a nozzle does: G is ours, the rest is not."""
    g = given("TR-C2")
    ours = case(
        [vessel("tank", volume=g["V"], initial__p=g["p0"], initial__T=g["T0"])],
        [stream("vent", "tank")],
        relations=[orifice("hole", "vent", area=g["A"], downstream_pressure=1e5)],
        time=g["t"],
    )
    reactor, outside = cantera_reactor(g["T0"], g["p0"], g["V"]), cantera_reservoir(300.0, 1e5)
    valve = cantera.MassFlowController(reactor, outside)
    fluid: Any = NasaAir()

    def flow(_: float) -> float:
        at = fluid.state(("p", "T"), (reactor.phase.P, reactor.phase.T)).values
        G = mass_flux(fluid, at["p"], at["T"], at["h"], at["s"], at["rho"], 1e5).value
        return float(g["A"] * G)

    valve.mass_flow_rate = flow
    return by_us(ours), advanced(reactor, g["t"])


def warmed() -> tuple[Solution, tuple[float, float]]:
    g = given("TR-C3")
    ours = case(
        [vessel("tank", volume=g["V"], initial__p=g["p0"], initial__T=g["T0"])],
        transfers=[heat("wall", None, "tank", law=True, UA=g["U"] * g["A"], source_temperature=g["T_hot"])],
        time=g["t"],
    )
    reactor, hot = cantera_reactor(g["T0"], g["p0"], g["V"]), cantera_reservoir(g["T_hot"], 1e5)
    cantera.Wall(hot, reactor, A=g["A"], U=g["U"])
    return by_us(ours), advanced(reactor, g["t"])


TWINS = {"TR-C1": filled, "TR-C2": blown_down, "TR-C3": warmed}


@pytest.mark.parametrize("check", TWINS)
def test_an_integration_agrees_with_one_by_cantera(check):
    ours, (p, T) = TWINS[check]()
    assert end(ours, "tank", "T") == pytest.approx(T, rel=1e-6)  # both integrate to about 1e-8
    assert end(ours, "tank", "p") == pytest.approx(p, rel=1e-6)  # the filling ends 1e-7 from level


@pytest.mark.parametrize("check", ["TR-C1", "TR-C3"])
def test_a_recorded_integration_is_met(check):
    ours, _ = TWINS[check]()
    found = {"T": end(ours, "tank", "T"), "T2": end(ours, "tank", "T")}
    misses = [row.miss(found[row.name]) for row in checks.expected(check)]
    assert not any(misses), misses


def test_a_recorded_blowdown_lies_on_the_path_of_ours():
    """TR-C2: its discharge law (a k for the moment) is not ours, so that only the path is compared, not its time."""
    g = given("TR-C2")
    recorded = {row.name: row for row in checks.expected("TR-C2")}
    ours = by_us(
        case(
            [vessel("tank", volume=g["V"], initial__p=g["p0"], initial__T=g["T0"])],
            [stream("vent", "tank")],
            relations=[orifice("hole", "vent", area=g["A"], downstream_pressure=1e5)],
            conditions={"tank.T": recorded["T"].value},
        )
    )
    assert not recorded["p"].miss(end(ours, "tank", "p"))


CLOSED_FORMS: dict[str, Callable[[], dict[str, float]]] = {
    "TR-06": stirred_with_coil,
    "TR-11": tyre,
    "TR-A1": evacuated,
    "TR-A2": partly_filled,
    "TR-A3": adiabatic_choked,
    "TR-A4": isothermal_choked,
    "TR-A5": jacketed,
    "TR-A7": constant_inflow,
}


@pytest.mark.parametrize("check", CLOSED_FORMS)
def test_a_closed_form_is_met_at_its_printed_accuracy(check):
    found = CLOSED_FORMS[check]()
    rows = checks.expected(check)
    assert {row.name for row in rows} == set(found)
    misses = [row.miss(found[row.name]) for row in rows]
    assert not any(misses), misses


def test_an_evacuated_vessel_drawing_in_steam_ends_where_the_first_law_says():
    """TR-01 by integration: u2 = h of the line, whatever the way there."""
    solution = solve(
        case(
            [vessel("tank", "water", volume=1.0, initial__mass=0.0)],
            [stream("line", None, "tank", p=1e6, T=573.15)],
            relations=[orifice("hole", "line", area=1e-4)],
            fluids=[],
            conditions={"tank.p": 1e6},
        )
    )
    found = {"T2": end(solution, "tank", "T"), "u2": end(solution, "tank", "u")}
    misses = [row.miss(found[row.name]) for row in checks.expected("TR-01")]
    assert not any(misses), misses
