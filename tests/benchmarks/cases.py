"""The cases that are timed, as documents, and the bare scripts that do the same flashes by hand."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import CoolProp
import numpy as np
from scipy.optimize import brentq

Document = dict[str, Any]


def let_down_valve(model: str = "helmholtz") -> Document:
    return {
        "title": "Let-down valve",
        "system": "steady_flow",
        "fluids": {"steam": {"kind": "pure", "name": "water", "model": model}},
        "boundaries": [{"id": "valve"}],
        "streams": [
            {"id": "inlet", "to": "valve", "fluid": "steam", "mass_flow": "12 t/h",
             "state": {"p": "41 bar", "T": "400 degC"}},
            {"id": "outlet", "from": "valve", "state": {"p": "11 bar", "T": "? degC"}},
        ],
        "transfers": [{"id": "loss", "kind": "heat", "from": "valve", "rate": "15 kW"}],
    }  # fmt: skip


def bare_valve(state: Any) -> float:
    state.update(CoolProp.PT_INPUTS, 41e5, 673.15)
    flow = 12 / 3.6
    state.update(CoolProp.HmassP_INPUTS, state.hmass() - 15e3 / flow, 11e5)
    return float(state.T())


def turbine() -> Document:
    return {
        "title": "Turbine efficiency from readings",
        "system": "steady_flow",
        "boundaries": [{"id": "turbine"}],
        "streams": [
            {"id": "inlet", "to": "turbine", "fluid": "water", "mass_flow": "? t/h",
             "state": {"p": "30 bar", "T": "400 degC"}},
            {"id": "outlet", "from": "turbine", "state": {"p": "0.5 bar", "T": "100 degC"}},
        ],
        "transfers": [{"id": "shaft", "kind": "shaft_work", "from": "turbine", "rate": "2 MW"}],
        "relations": [{"id": "eff", "kind": "isentropic_efficiency", "from": "inlet", "to": "outlet", "value": "? %"}],
    }  # fmt: skip


def bare_turbine(state: Any, p1: float = 30e5, T1: float = 673.15) -> tuple[float, float]:
    state.update(CoolProp.PT_INPUTS, p1, T1)
    h1, s1 = state.hmass(), state.smass()
    state.update(CoolProp.PT_INPUTS, 0.5e5, 373.15)
    h2 = state.hmass()
    state.update(CoolProp.PSmass_INPUTS, 0.5e5, s1)
    return (h1 - h2) / (h1 - state.hmass()), 2e6 / (h1 - h2)


def exchanger() -> Document:
    return {
        "title": "Exchanger rating",
        "system": "steady_flow",
        "boundaries": [{"id": "shell"}, {"id": "tube"}],
        "streams": [
            {"id": "hot_in", "to": "shell", "fluid": "water", "mass_flow": "5 kg/s",
             "state": {"p": "5 bar", "T": "87 degC"}},
            {"id": "hot_out", "from": "shell", "state": {"p": "5 bar", "T": "? degC"}},
            {"id": "cold_in", "to": "tube", "fluid": "water", "mass_flow": "6 kg/s",
             "state": {"p": "4 bar", "T": "20 degC"}},
            {"id": "cold_out", "from": "tube", "state": {"p": "4 bar", "T": "? degC"}},
        ],
        "transfers": [{"id": "duty", "kind": "heat", "from": "shell", "to": "tube", "rate": "? kW"}],
        "relations": [
            {
                "id": "rating", "kind": "lmtd_UA", "hot_in": "hot_in", "hot_out": "hot_out", "cold_in": "cold_in",
                "cold_out": "cold_out", "arrangement": "counterflow", "value": "20 kW/K",
            }
        ],
    }  # fmt: skip


def bare_exchanger(state: Any) -> float:
    def h(p: float, T: float) -> float:
        state.update(CoolProp.PT_INPUTS, p, T)
        return float(state.hmass())

    h_hot, h_cold, T_hot, T_cold = h(5e5, 360.15), h(4e5, 293.15), 360.15, 293.15

    def off(T_out: float) -> float:
        duty = 6 * (h(4e5, T_out) - h_cold)
        state.update(CoolProp.HmassP_INPUTS, h_hot - duty / 5, 5e5)
        one, other = T_hot - T_out, state.T() - T_cold
        return float(20e3 * (one - other) / np.log(one / other) - duty)

    return float(brentq(off, 300.0, 345.0, xtol=1e-11))


def closed_loop() -> Document:
    return {
        "title": "Boiler, turbine, condenser and pump in a ring",
        "system": "steady_flow",
        "boundaries": [{"id": b} for b in ("boiler", "turbine", "condenser", "pump")],
        "streams": [
            {"id": "steam", "from": "boiler", "to": "turbine", "fluid": "water", "mass_flow": "? t/h",
             "state": {"p": "80 bar", "T": "480 degC"}},
            {"id": "exhaust", "from": "turbine", "to": "condenser", "state": {"p": "8 kPa", "x": "?"}},
            {"id": "condensate", "from": "condenser", "to": "pump", "state": {"p": "8 kPa", "saturated": "liquid"}},
            {"id": "feed", "from": "pump", "to": "boiler", "state": {"p": "80 bar"}},
        ],
        "transfers": [
            {"id": "firing", "kind": "heat", "to": "boiler", "rate": "? MW"},
            {"id": "cooling", "kind": "heat", "from": "condenser", "rate": "? MW"},
            {"id": "shaft", "kind": "shaft_work", "from": "turbine", "rate": "100 MW"},
            {"id": "drive", "kind": "shaft_work", "to": "pump", "rate": "? kW"},
        ],
        "relations": [
            {"id": "turbine_eff", "kind": "isentropic_efficiency", "from": "steam", "to": "exhaust", "value": 0.85},
            {"id": "pump_eff", "kind": "isentropic_efficiency", "from": "condensate", "to": "feed", "value": 0.75},
        ],
    }  # fmt: skip


def bare_closed_loop(state: Any) -> tuple[float, ...]:
    state.update(CoolProp.PT_INPUTS, 80e5, 753.15)
    h1, s1 = state.hmass(), state.smass()
    state.update(CoolProp.PSmass_INPUTS, 8e3, s1)
    h2 = h1 - 0.85 * (h1 - state.hmass())
    state.update(CoolProp.HmassP_INPUTS, h2, 8e3)
    x = state.Q()
    state.update(CoolProp.PQ_INPUTS, 8e3, 0.0)
    h3, s3 = state.hmass(), state.smass()
    state.update(CoolProp.PSmass_INPUTS, 80e5, s3)
    h4 = h3 + (state.hmass() - h3) / 0.75
    state.update(CoolProp.HmassP_INPUTS, h4, 80e5)
    flow = 100e6 / (h1 - h2)
    return flow, x, flow * (h1 - h4), flow * (h2 - h3), flow * (h4 - h3), state.T()


def chain(length: int) -> Document:
    """Heaters in a row, each adding 10 kW to 20 kg/s of water: a chain of boundaries."""
    streams: list[Document] = [
        {"id": "s0", "to": "b0", "fluid": "water", "mass_flow": "20 kg/s", "state": {"p": "10 bar", "T": "20 degC"}}
    ]
    for i in range(1, length):
        streams.append({"id": f"s{i}", "from": f"b{i - 1}", "to": f"b{i}", "state": {"p": "10 bar"}})
    streams.append({"id": f"s{length}", "from": f"b{length - 1}", "state": {"p": "10 bar", "T": "? degC"}})
    return {
        "title": f"{length} heaters in a row",
        "system": "steady_flow",
        "boundaries": [{"id": f"b{i}"} for i in range(length)],
        "streams": streams,
        "transfers": [{"id": f"q{i}", "kind": "heat", "to": f"b{i}", "rate": "10 kW"} for i in range(length)],
    }


SCALAR: dict[str, tuple[Callable[[], Document], Callable[[Any], Any]]] = {
    "let-down valve": (let_down_valve, bare_valve),
    "turbine": (turbine, bare_turbine),
    "exchanger": (exchanger, bare_exchanger),
    "closed loop": (closed_loop, bare_closed_loop),
}
