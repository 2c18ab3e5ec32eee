"""Published examples between two states, written as cases of the language; values, tolerances and sources: checks.json.

Where a source's own simple model is meant (an ideal gas of constant heat capacity), the case declares it.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from typing import Any

import pytest

from service.wire.operations import Operations

from . import checks

Document = dict[str, Any]
R = 8.314462618  # [J/(mol K)] CODATA 2018


@cache
def operations() -> Operations:
    return Operations.build()


def answers(document: Document) -> dict[str, float]:
    solved = operations().solve(document)["answers"]
    return {address: shown["value"] for address, shown in solved.items()}


def holding(content: Document, **more: Any) -> Document:
    return {"system": "closed", "boundaries": [{"id": "b", "contents": [{"id": "c", **content}]}], **more}


def heat(way: str = "to", energy: str = "? kJ") -> Document:
    return {"id": "heat", "kind": "heat", way: "b", "energy": energy}


def ideal_gas(R_specific: float, k: float) -> Document:
    """An ideal gas of constant heat capacity, from its specific gas constant [J/(kg K)] and k."""
    cp = R_specific * k / (k - 1)
    molar_mass = R / R_specific * 1e3
    return {"gas": {"kind": "ideal_gas", "molar_mass": f"{molar_mass!r} kg/kmol", "cp": f"{cp!r} J/kg/K"}}


def polytropic_work() -> dict[str, float]:
    found = {}
    for n, name in ((1.5, "W(n=1.5)"), (1.0, "W(n=1)"), (0.0, "W(n=0)")):
        content = {
            "fluid": "gas", "volume": "0.1 m3", "expansion_work": "? kJ", "initial": {"p": "3 bar", "T": "300 K"},
            "final": {"volume": "0.2 m3"}, "process": {"kind": "polytropic", "n": n},
        }  # fmt: skip
        found[name] = -answers(holding(content, fluids=ideal_gas(287.0, 1.4), transfers=[heat()]))["c.expansion_work"]
    return found


def isothermal_compression() -> dict[str, float]:
    content = {
        "fluid": "gas", "volume": "0.4 m3", "expansion_work": "? kJ", "initial": {"p": "100 kPa", "T": "80 degC"},
        "final": {"volume": "0.1 m3"}, "process": {"kind": "isothermal"},
    }  # fmt: skip
    work = answers(holding(content, fluids=ideal_gas(287.0, 1.4), transfers=[heat("from")]))["c.expansion_work"]
    return {"W": -work}


def spring_loaded_piston() -> dict[str, float]:
    """p2 = p1 + k x/A with x = ΔV/A; the work of the spring is what exceeds that against p1."""
    p2 = 200.0 + 150.0 * 0.05 / 0.25**2
    content = {
        "fluid": "gas", "volume": "0.05 m3", "expansion_work": "? kJ", "initial": {"p": "200 kPa", "T": "300 K"},
        "final": {"p": f"{p2!r} kPa", "volume": "0.1 m3"}, "process": {"kind": "linear"},
    }  # fmt: skip
    work = -answers(holding(content, fluids=ideal_gas(287.0, 1.4), transfers=[heat()]))["c.expansion_work"]
    return {"p2": p2, "W": work, "W_spring": work - 200.0 * 0.05}


def stirred_helium() -> dict[str, float]:
    """cv = 0.753 Btu/(lb R) and R = 0.4961 Btu/(lb R) as the source's table has them."""
    btu_lb_R = 4186.8
    gas = ideal_gas(0.4961 * btu_lb_R, (0.753 + 0.4961) / 0.753)
    content = {
        "fluid": "gas", "mass": "1.5 lb", "initial": {"p": "50 psia", "T": "80 degF"},
        "final": {"p": "? psia", "T": "? degF"}, "process": {"kind": "constant_volume"},
    }  # fmt: skip
    stirrer = {"id": "paddle", "kind": "shaft_work", "to": "b", "energy": f"{0.02 * 0.5 * 2544.5!r} Btu"}
    found = answers(holding(content, fluids=gas, transfers=[stirrer]))
    return {"T2": found["c.final.T"], "p2": found["c.final.p"]}


def heated_nitrogen() -> dict[str, float]:
    content = {
        "fluid": "nitrogen", "volume": "0.5 m3", "initial": {"p": "400 kPa", "T": "27 degC"},
        "final": {"T": "? degC"}, "process": {"kind": "constant_pressure"},
    }  # fmt: skip
    heater = {"id": "heater", "kind": "electrical_work", "to": "b", "energy": "72 kJ"}
    return {"T2": answers(holding(content, transfers=[heater, heat("from", "2800 J")]))["c.final.T"]}


def iron_in_water() -> dict[str, float]:
    document = holding({"fluid": "iron", "mass": "50 kg", "initial": {"T": "80 degC"}, "final": {"T": "? degC"}})
    document["fluids"] = {"iron": {"kind": "solid", "density": "7870 kg/m3", "cp": "0.45 kJ/kg/K"}}
    bath = {
        "id": "w", "fluid": "water", "volume": "0.5 m3", "initial": {"p": "1 atm", "T": "25 degC"}, "final": {},
        "process": {"kind": "constant_pressure"},
    }  # fmt: skip
    document["boundaries"][0]["contents"].append(bath)
    document["relations"] = [{"kind": "equal", "of": ["c.final.T", "w.final.T"]}]
    return {"T2": answers(document)["c.final.T"]}


def steam_at_constant_pressure() -> dict[str, float]:
    content = {
        "fluid": "water", "mass": "10 lb", "expansion_work": "? Btu", "initial": {"p": "60 psia", "T": "320 degF"},
        "final": {"T": "400 degF"}, "process": {"kind": "constant_pressure"},
    }  # fmt: skip
    return {"W": -answers(holding(content, transfers=[heat()]))["c.expansion_work"]}


def stirred_vapour() -> dict[str, float]:
    content = {
        "fluid": "water", "volume": "0.25 m3", "initial": {"T": "100 degC", "saturated": "vapour"},
        "final": {"p": "1.5 bar", "T": "? degC"}, "process": {"kind": "constant_volume"},
    }  # fmt: skip
    stirrer = {"id": "stirrer", "kind": "shaft_work", "to": "b", "energy": "? kJ"}
    found = answers(holding(content, transfers=[stirrer]))
    return {"T2": found["c.final.T"], "W": -found["stirrer.energy"]}


def wet_container() -> dict[str, float]:
    content = {
        "fluid": "water", "volume": "1 m3", "mass": "2 kg", "initial": {"T": "20 degC", "x": "? %"},
        "final": {"T": "95 degC", "x": "? %"}, "process": {"kind": "constant_volume"},
    }  # fmt: skip
    found = answers(holding(content, transfers=[heat()]))
    return {"x1": found["c.initial.x"], "x2": found["c.final.x"], "Q": found["heat.energy"]}


def blocked_in_water() -> dict[str, float]:
    content = {
        "fluid": "water", "mass": "1 kg", "initial": {"p": "1 bar", "T": "20 degC"},
        "final": {"T": "30 degC", "p": "? MPa"}, "process": {"kind": "constant_volume"},
    }  # fmt: skip
    found = answers(holding(content, transfers=[heat()]))
    return {"p2": found["c.final.p"], "q": found["heat.energy"]}


def filled(fluid: str, line: Document, T: str = "? degC", initial: Document | None = None, **more: Any) -> Document:
    """An insulated rigid vessel filled from a line, to the pressure of the line; empty at first, if nothing is said."""
    content = {
        "fluid": fluid, "volume": "1 m3", "initial": initial or {"mass": "0 kg"},
        "final": {"p": line["p"], "T": T, "u": "? kJ/kg"}, "process": {"kind": "constant_volume"},
    }  # fmt: skip
    stream = {"id": "line", "to": "b", "fluid": fluid, "mass": "? kg", "state": line}
    return {**holding(content, streams=[stream], **more), "system": "transient", "form": "integrated"}


def filled_with_steam(p: str) -> dict[str, float]:
    found = answers(filled("water", {"p": p, "T": "300 degC"}))
    return {"T2": found["c.final.T"], "u2": found["c.final.u"]}


def filled_with_ideal_gas(initial: Document | None) -> dict[str, float]:
    document = filled("gas", {"p": "10 bar", "T": "300 K"}, "? K", initial, fluids=ideal_gas(287.0, 1.4))
    return {"T2": answers(document)["c.final.T"]}


def vapour_drawn_off() -> dict[str, float]:
    content = {
        "fluid": "water", "volume": "0.85 m3", "initial": {"T": "260 degC", "x": 0.7, "mass": "? kg"},
        "final": {"T": "260 degC", "saturated": "vapour", "mass": "? kg"}, "process": {"kind": "constant_volume"},
    }  # fmt: skip
    vapour = {"id": "vapour", "from": "b", "mass": "? kg", "state": {"T": "260 degC", "saturated": "vapour"}}
    document = {**holding(content, streams=[vapour], transfers=[heat()]), "system": "transient", "form": "integrated"}
    found = answers(document)
    return {"Q": found["heat.energy"], "m1": found["c.initial.mass"], "m2": found["c.final.mass"]}


def discharged_air() -> dict[str, float]:
    """What remains in the tank expands without friction or heat, to fill it at the end."""
    content = {
        "fluid": "gas", "mass": "? kg", "initial": {"p": "10 MPa", "T": "298 K"},
        "final": {"p": "200 kPa", "T": "? K", "volume": "20 m3"}, "process": {"kind": "adiabatic_reversible"},
    }  # fmt: skip
    found = answers(holding(content, fluids=ideal_gas(287.0, 1.4)))
    return {"m_f": found["c.mass"], "T_f": found["c.final.T"]}


SOLVED: dict[str, Callable[[], dict[str, float]]] = {
    "CS-01": polytropic_work,
    "CS-03": isothermal_compression,
    "CS-04": spring_loaded_piston,
    "CS-07": stirred_helium,
    "CS-08": heated_nitrogen,
    "CS-10": iron_in_water,
    "CS-11": steam_at_constant_pressure,
    "CS-12": stirred_vapour,
    "CS-14": wet_container,
    "CS-19": blocked_in_water,
    "TR-01": lambda: filled_with_steam("1 MPa"),
    "TR-02": vapour_drawn_off,
    "TR-05": discharged_air,
    "TR-08": lambda: filled_with_steam("1.4 MPa"),
    "TR-A1": lambda: filled_with_ideal_gas(None),
    "TR-A2": lambda: filled_with_ideal_gas({"p": "1 bar", "T": "300 K"}),
}


@pytest.mark.parametrize("check", SOLVED)
def test_a_published_example_between_two_states_is_met(check: str) -> None:
    found = SOLVED[check]()
    for row in checks.entry(check)["expected"]:
        allowed = row["tol"]["value"] * (abs(row["value"]) if row["tol"]["kind"] == "rel" else 1.0)
        assert abs(found[row["name"]] - row["value"]) <= allowed, (row["name"], found[row["name"]], row["printed"])


def test_every_closed_entry_is_solved_here_or_in_the_properties() -> None:
    assert set(checks.ids("closed/")) <= set(SOLVED) | {"CS-15", "IF97-R1-deriv"}
