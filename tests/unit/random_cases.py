"""Random solvable cases for the properties of balances, and the same case said in other units.

A quantity is held as (value [SI], kind) until it is written in the units of a system; the factors here are those of
NIST SP 811, appendix B, and no part of the service.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, NamedTuple

from hypothesis import strategies as st

POUND, FOOT, BTU, PSI = 0.45359237, 0.3048, 1055.05585262, 6894.757293168

UNITS: Mapping[str, Mapping[str, tuple[str, float, float]]] = {  # kind → system → (unit, factor, offset)
    "p": {"SI": ("Pa", 1.0, 0.0), "metric": ("bara", 1e5, 0.0), "US": ("psia", PSI, 0.0)},
    "T": {"SI": ("K", 1.0, 0.0), "metric": ("degC", 1.0, 273.15), "US": ("degF", 1 / 1.8, 459.67 / 1.8)},
    "flow": {"SI": ("kg/s", 1.0, 0.0), "metric": ("t/h", 1 / 3.6, 0.0), "US": ("lb/h", POUND / 3600, 0.0)},
    "power": {"SI": ("W", 1.0, 0.0), "metric": ("kW", 1e3, 0.0), "US": ("Btu/h", BTU / 3600, 0.0)},
    "velocity": {"SI": ("m/s", 1.0, 0.0), "metric": ("m/s", 1.0, 0.0), "US": ("ft/s", FOOT, 0.0)},
    "length": {"SI": ("m", 1.0, 0.0), "metric": ("mm", 1e-3, 0.0), "US": ("ft", FOOT, 0.0)},
    "UA": {"SI": ("W/K", 1.0, 0.0), "metric": ("kW/K", 1e3, 0.0), "US": ("Btu/h/degF", BTU / 3600 * 1.8, 0.0)},
    "ratio": {"SI": ("-", 1.0, 0.0), "metric": ("%", 0.01, 0.0), "US": ("-", 1.0, 0.0)},
}
SYSTEMS = ("SI", "metric", "US")


class Q(NamedTuple):
    """A quantity to be written later; value None asks for it."""

    value: float | None
    kind: str


def written(thing: Any, system: str) -> Any:
    """The document with every quantity as text in the units of a system."""
    if isinstance(thing, Q):
        unit, factor, offset = UNITS[thing.kind][system]
        unit = "" if unit == "-" else unit
        number = "?" if thing.value is None else repr((thing.value - offset) / factor)
        return f"{number} {unit}".strip()
    if isinstance(thing, dict):
        return {key: written(value, system) for key, value in thing.items()}
    return [written(value, system) for value in thing] if isinstance(thing, list) else thing


TO_SI = {unit: (factor, offset) for kinds in UNITS.values() for unit, factor, offset in kinds.values()}


def si(answer: Mapping[str, Any]) -> dict[str, float]:
    """The answers in SI units."""
    found = {}
    for address, shown in answer["answers"].items():
        factor, offset = TO_SI[shown["unit"]]
        found[address] = shown["value"] * factor + offset
    return found


FLUIDS: Mapping[str, Any] = {
    "gas": {"kind": "ideal_gas", "molar_mass": "30 g/mol", "cp": "1.05 kJ/kg/K"},
    "oil": {"kind": "constant_liquid", "density": "860 kg/m3", "cp": "2.2 kJ/kg/K"},
    "brine": {"kind": "brine", "name": "MEG", "mass_fraction": 0.4},
    "steam": {"kind": "pure", "name": "water", "model": "IF97"},
}
RANGES = {  # fluid → (p, T, largest heat [J/kg]) in which it neither boils nor leaves its model
    "water": ((5e5, 2e6), (290.0, 340.0), 6e4), "steam": ((2e5, 2e6), (560.0, 750.0), 1e5),
    "nitrogen": ((1e5, 3e6), (270.0, 500.0), 5e4), "gas": ((1e5, 1e6), (280.0, 600.0), 8e4),
    "oil": ((1e5, 1e6), (300.0, 400.0), 8e4), "brine": ((1e5, 5e5), (280.0, 320.0), 4e4),
}  # fmt: skip

fluid_names = st.sampled_from(sorted(RANGES))
flows = st.floats(0.05, 50.0)


def _document(boundaries: list[str], streams: list[Any], **rest: Any) -> dict[str, Any]:
    used = {s.get("fluid") for s in streams}
    fluids = {name: body for name, body in FLUIDS.items() if name in used}
    base = {"title": "random", "system": "steady_flow", "boundaries": [{"id": b} for b in boundaries]}
    return {**base, "fluids": fluids, "streams": streams, **rest}


def _within(ends: tuple[float, float]) -> st.SearchStrategy[float]:
    return st.floats(*ends)


@st.composite
def chains(draw: st.DrawFn) -> dict[str, Any]:
    """Boundaries in a row, each heated, cooled or driven; every temperature behind the first is asked."""
    fluid, count = draw(fluid_names), draw(st.integers(1, 4))
    p, T, most = RANGES[fluid]
    moving = draw(st.booleans())
    names = [f"b{i}" for i in range(count)]
    flow = draw(flows)
    streams, transfers = [], []
    for i in range(count + 1):
        stream: dict[str, Any] = {"id": f"s{i}", "fluid": fluid, "state": {"p": Q(draw(_within(p)), "p")}}
        stream |= ({"from": names[i - 1]} if i else {}) | ({"to": names[i]} if i < count else {})
        stream["state"]["T"] = Q(draw(_within(T)) if i == 0 else None, "T")
        if i == 0:
            stream["mass_flow"] = Q(flow, "flow")
        if moving:
            stream["elevation"] = Q(draw(st.floats(-20.0, 50.0)), "length")
            stream["velocity"] = Q(draw(st.floats(0.5, 40.0)), "velocity")
        streams.append(stream)
    for i, name in enumerate(names):
        kind = draw(st.sampled_from(["heat", "shaft_work", "electrical_work"]))
        end = draw(st.sampled_from(["from", "to"]))
        rate = Q(flow * most / count * draw(st.floats(0.01, 1.0)), "power")
        transfers.append({"id": f"t{i}", "kind": kind, end: name, "rate": rate})
    return _document(names, streams, transfers=transfers)


@st.composite
def mixers(draw: st.DrawFn) -> dict[str, Any]:
    """Several flows into one; the temperature behind is asked."""
    fluid, count = draw(fluid_names), draw(st.integers(2, 4))
    p, T, _ = RANGES[fluid]
    pressure = Q(draw(_within(p)), "p")
    streams = [
        {"id": f"in{i}", "to": "tee", "fluid": fluid, "mass_flow": Q(draw(flows), "flow"),
         "state": {"p": pressure, "T": Q(draw(_within(T)), "T")}}
        for i in range(count)
    ]  # fmt: skip
    streams.append({"id": "out", "from": "tee", "fluid": fluid, "mass_flow": Q(None, "flow"),
                    "state": {"p": pressure, "T": Q(None, "T")}})  # fmt: skip
    return _document(["tee"], streams)


@st.composite
def machines(draw: st.DrawFn) -> dict[str, Any]:
    """A compressor or expander of a gas with an efficiency; power and temperature are asked."""
    fluid = draw(st.sampled_from(["nitrogen", "gas", "steam"]))
    p, T, _ = RANGES[fluid]
    first, ratio = draw(_within(p)), draw(st.one_of(st.floats(0.3, 0.8), st.floats(1.3, 4.0)))
    kind = draw(st.sampled_from(["isentropic_efficiency", "polytropic_efficiency"]))
    streams = [
        {"id": "in", "to": "machine", "fluid": fluid, "mass_flow": Q(draw(flows), "flow"),
         "state": {"p": Q(first, "p"), "T": Q(draw(_within(T)), "T")}},
        {"id": "out", "from": "machine", "fluid": fluid, "state": {"p": Q(first * ratio, "p"), "T": Q(None, "T")}},
    ]  # fmt: skip
    eta = {"id": "eta", "kind": kind, "from": "in", "to": "out", "value": Q(draw(st.floats(0.5, 0.95)), "ratio")}
    shaft = {"id": "shaft", "kind": "shaft_work", "to": "machine", "rate": Q(None, "power")}
    return _document(["machine"], streams, transfers=[shaft], relations=[eta])


@st.composite
def exchangers(draw: st.DrawFn) -> dict[str, Any]:
    """Two fluids in counterflow with a given conductance; both outlet temperatures and the duty are asked."""
    hot, cold = draw(st.sampled_from([("oil", "water"), ("gas", "oil"), ("oil", "brine")]))
    streams = []
    for side, fluid, (low, high) in (("hot", hot, (360.0, 400.0)), ("cold", cold, (285.0, 310.0))):
        p = Q(draw(_within(RANGES[fluid][0])), "p")
        inlet = {"p": p, "T": Q(draw(st.floats(low, high)), "T")}
        streams.append({"id": f"{side}-in", "to": side, "fluid": fluid, "state": inlet,
                        "mass_flow": Q(draw(st.floats(1.0, 5.0)), "flow")})  # fmt: skip
        streams.append({"id": f"{side}-out", "from": side, "fluid": fluid, "state": {"p": p, "T": Q(None, "T")}})
    four = {"hot_in": "hot-in", "hot_out": "hot-out", "cold_in": "cold-in", "cold_out": "cold-out"}
    ua = Q(draw(st.floats(500.0, 5000.0)), "UA")
    rating = {"id": "rating", "kind": "lmtd_UA", "arrangement": "counterflow", "value": ua, **four}
    duty = {"id": "duty", "kind": "heat", "from": "hot", "to": "cold", "rate": Q(None, "power")}
    return _document(["hot", "cold"], streams, transfers=[duty], relations=[rating])


@st.composite
def networks(draw: st.DrawFn) -> dict[str, Any]:
    """Meters only: a header with branches; each branch has one meter missing."""
    branches = draw(st.integers(1, 5))
    streams: list[dict[str, Any]] = [{"id": "supply", "to": "header", "mass_flow": Q(None, "flow")}]
    for i in range(branches):
        first, second = draw(flows), draw(flows)
        streams += [
            {"id": f"to{i}", "from": "header", "to": f"branch{i}", "mass_flow": Q(first + second, "flow")},
            {"id": f"one{i}", "from": f"branch{i}", "mass_flow": Q(first, "flow")},
            {"id": f"other{i}", "from": f"branch{i}", "mass_flow": Q(None, "flow")},
        ]
    return _document(["header", *(f"branch{i}" for i in range(branches))], streams)


cases = st.one_of(chains(), mixers(), machines(), exchangers(), networks())
