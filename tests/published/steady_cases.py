"""The steady-flow and psychrometric entries of checks.json, written as cases of our language.

Each function takes what its entry gives [SI] and returns the case with, for every published number, how to read it off
the answers (all of them SI, since every case asks for SI units).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import Any

Given = Mapping[str, float]
Answers = Mapping[str, float]
Read = Callable[[Answers], float]
Entry = tuple[dict[str, Any], dict[str, Read]]


def q(value: float, unit: str) -> str:
    return f"{value!r} {unit}"


def p(value: float) -> str:
    return q(value, "Pa")


def T(value: float) -> str:
    return q(value, "K")


def at(address: str, factor: float = 1.0) -> Read:
    """Reads one answer."""
    return lambda a: factor * a[address]


def case(streams: list[dict[str, Any]], **members: Any) -> dict[str, Any]:
    """A case over the boundaries that its streams and transfers name, answered in SI units."""
    ends = [item.get(end) for item in (*streams, *members.get("transfers", [])) for end in ("from", "to")]
    boundaries = [{"id": b} for b in dict.fromkeys(e for e in ends if e)]
    fixed = {"title": "published", "system": "steady_flow", "boundaries": boundaries, "streams": streams}
    return {**fixed, "answer": {"units": "SI"}, **members}


def stream(name: str, source: str | None, target: str | None, fluid: str | None, **rest: Any) -> dict[str, Any]:
    """One stream; keywords that belong to the state go there."""
    outside = {"mass_flow", "dry_air_flow", "volume_flow", "velocity", "bore", "elevation", "side"}
    out: dict[str, Any] = {"id": name}
    out |= {"from": source} if source else {}
    out |= {"to": target} if target else {}
    out |= {"fluid": fluid} if fluid else {}
    out |= {key: value for key, value in rest.items() if key in outside}
    state = {key: value for key, value in rest.items() if key not in outside}
    return out | ({"state": state} if state else {})


def work(name: str, source: str | None = None, target: str | None = None, rate: str = "?") -> dict[str, Any]:
    return _transfer("shaft_work", name, source, target, rate)


def heat(name: str, source: str | None = None, target: str | None = None, rate: str = "?") -> dict[str, Any]:
    return _transfer("heat", name, source, target, rate)


def _transfer(kind: str, name: str, source: str | None, target: str | None, rate: str) -> dict[str, Any]:
    out = {"id": name, "kind": kind, "rate": rate}
    return out | ({"from": source} if source else {}) | ({"to": target} if target else {})


def tie(name: str, kind: str, *of: str, value: Any = "?") -> dict[str, Any]:
    return {"id": name, "kind": kind, "of": list(of)} | ({} if kind == "equal" else {"value": value})


def efficiency(name: str, source: str, target: str, value: Any = "?") -> dict[str, Any]:
    return {"id": name, "kind": "isentropic_efficiency", "from": source, "to": target, "value": value}


# --- steam -----------------------------------------------------------------------------------------------------------


def sf_01(g: Given) -> Entry:
    streams = [
        stream("inlet", None, "turbine", "water", p=p(g["p1"]), T=T(g["T1"]), velocity=q(g["V1"], "m/s"),
               elevation=q(g["z1"], "m"), mass_flow="?"),
        stream("exit", "turbine", None, None, p=p(g["p2"]), x=g["x2"], velocity=q(g["V2"], "m/s"),
               elevation=q(g["z2"], "m")),
    ]  # fmt: skip
    rise = tie("rise", "difference", "exit.h", "inlet.h")
    document = case(streams, transfers=[work("shaft", "turbine", rate=q(g["W"], "W"))], relations=[rise])
    return document, {
        "dh": at("rise.value"),
        "dke": lambda a: -(a["ledger turbine kinetic energy"]) / a["inlet.mass_flow"],
        "dpe": lambda a: -(a["ledger turbine potential energy"]) / a["inlet.mass_flow"],
        "w_out": lambda a: g["W"] / a["inlet.mass_flow"],
        "mdot": at("inlet.mass_flow"),
    }


def sf_03(g: Given) -> Entry:
    streams = [
        stream("inlet", None, "nozzle", "water", p=p(g["p1"]), T=T(g["T1"]), velocity=q(g["V1"], "m/s"),
               mass_flow=q(g["m"], "kg/s")),
        stream("jet", "nozzle", None, None, p=p(g["p2"]), velocity=q(g["V2"], "m/s"), h="?", v="?", bore="?"),
    ]  # fmt: skip
    return case(streams), {"h2": at("jet.h"), "v2": at("jet.v"), "A2": lambda a: math.pi / 4 * a["jet.bore"] ** 2}


def sf_05(g: Given) -> Entry:
    """A nozzle's efficiency compares kinetic energies: the real jet against that of a reversible nozzle."""
    inlet = {"p": p(g["p1"]), "T": T(g["T1"]), "velocity": q(g["V1"], "m/s")}
    streams = [
        stream("inlet", None, "nozzle", "water", **inlet),
        stream("jet", "nozzle", None, None, p=p(g["p2"]), T=T(g["T2"]), velocity="?"),
        stream("ideal-inlet", None, "ideal-nozzle", "water", **inlet),
        stream("ideal-jet", "ideal-nozzle", None, None, p=p(g["p2"]), velocity="?"),
    ]
    document = case(streams, relations=[efficiency("ideal", "ideal-inlet", "ideal-jet", 1.0)])
    return document, {"eta": lambda a: (a["jet.velocity"] / a["ideal-jet.velocity"]) ** 2}


def sf_07(g: Given) -> Entry:
    streams = [
        stream("inlet", None, "valve", "R134a", p=p(g["p1"]), x=g["x1"]),
        stream("outlet", "valve", None, None, p=p(g["p2"]), x="?"),
    ]
    document = case(streams, relations=[tie("drop", "difference", "outlet.T", "inlet.T")])
    return document, {"x2": at("outlet.x"), "dT": at("drop.value")}


def sf_13(g: Given) -> Entry:
    streams = [
        stream("inlet", None, "turbine", "water", p=p(g["p1"]), T=T(g["T1"]), mass_flow="?"),
        stream("exit", "turbine", None, None, p=p(g["p2"]), T=T(g["T2"])),
    ]
    shaft = work("shaft", "turbine", rate=q(g["W"], "W"))
    document = case(streams, transfers=[shaft], relations=[efficiency("eta", "inlet", "exit")])
    return document, {"eta": at("eta.value"), "mdot": at("inlet.mass_flow")}


def sf_14(g: Given) -> Entry:
    streams = [
        stream("hot", None, "shower", "water", p=p(g["p"]), T=T(g["T_hot"])),
        stream("cold", None, "shower", "water", p=p(g["p"]), T=T(g["T_cold"])),
        stream("warm", "shower", None, None, p=p(g["p"]), T=T(g["T_mix"])),
    ]
    ratio = tie("ratio", "ratio", "hot.mass_flow", "cold.mass_flow")
    return case(streams, relations=[ratio]), {"ratio": at("ratio.value")}


def sf_16(g: Given) -> Entry:
    """The source takes the cooling water as saturated liquid, which is incompressible to the digits printed."""
    streams = [
        stream("steam", None, "shell", "water", p=p(g["p"]), x=g["x1"], mass_flow="1 kg/s"),
        stream("condensate", "shell", None, None, p=p(g["p"]), T=T(g["T2"])),
        stream("water-in", None, "tubes", "water", p="1 bar", T=T(g["T3"])),
        stream("water-out", "tubes", None, None, p="1 bar", T=T(g["T4"])),
    ]
    ratio = tie("ratio", "ratio", "water-in.mass_flow", "steam.mass_flow")
    document = case(streams, transfers=[heat("duty", "shell", "tubes")], relations=[ratio])
    return document, {"ratio": at("ratio.value"), "q": at("duty.rate", -1.0)}


def sf_17(g: Given) -> Entry:
    """With an open heat loss the energy balance leaves the mass balance alone; the loss is what the note speaks of."""
    streams = [
        stream("inlet-1", None, "heater", "water", p=p(g["p"]), T=T(g["T1"]), mass_flow=q(g["m1"], "kg/s")),
        stream("inlet-2", None, "heater", "water", p=p(g["p"]), T=T(g["T2"]), mass_flow="?", velocity="?",
               bore=q(math.sqrt(4 / math.pi * g["A2"]), "m")),
        stream("exit", "heater", None, "water", p=p(g["p"]), saturated="liquid", mass_flow="?",
               volume_flow=q(g["AV3"], "m3/s")),
    ]  # fmt: skip
    document = case(streams, transfers=[heat("open", "heater")])
    return document, {"m2": at("inlet-2.mass_flow"), "m3": at("exit.mass_flow"), "V2": at("inlet-2.velocity")}


def steam_plant(hot: dict[str, Any], p1: float, p2: float, net: str, cooling: bool, g: Given) -> dict[str, Any]:
    """Boiler, ideal turbine, condenser and ideal pump in a ring."""
    streams = [
        stream("s1", "boiler", "turbine", "water", p=p(p1), **hot, mass_flow="?"),
        stream("s2", "turbine", "condenser", "water", p=p(p2), x="?", h="?"),
        stream("s3", "condenser", "pump", "water", p=p(p2), saturated="liquid"),
        stream("s4", "pump", "boiler", "water", p=p(p1)),
    ]
    transfers = [
        heat("q_in", None, "boiler"), work("turbine-shaft", "turbine"), work("pump-shaft", None, "pump"),
        heat("q_out", "condenser", "cooler" if cooling else None),
    ]  # fmt: skip
    if cooling:
        streams += [
            stream("cold", None, "cooler", "water", p="1 bar", T=T(g["Tcw1"]), mass_flow="?"),
            stream("warm", "cooler", None, None, p="1 bar", T=T(g["Tcw2"])),
        ]
    relations = [
        efficiency("turbine-ideal", "s1", "s2", 1.0), efficiency("pump-ideal", "s3", "s4", 1.0),
        tie("net", "difference", "turbine-shaft.rate", "pump-shaft.rate", value=net),
        tie("efficiency", "ratio", "net.value", "q_in.rate"),
        tie("back-work", "ratio", "pump-shaft.rate", "turbine-shaft.rate"),
    ]  # fmt: skip
    return case(streams, transfers=transfers, relations=relations)


def sf_19(g: Given) -> Entry:
    document = steam_plant({"saturated": "vapour"}, g["p1"], g["p2"], q(g["W"], "W"), True, g)
    return document, {
        "x2": at("s2.x"), "h2": at("s2.h"), "eta": at("efficiency.value"), "bwr": at("back-work.value"),
        "m": at("s1.mass_flow"), "Qin": at("q_in.rate"), "Qout": at("q_out.rate"), "m_cw": at("cold.mass_flow"),
    }  # fmt: skip


def sf_21(g: Given) -> Entry:
    low, middle, high = p(g["p3"]), p(g["p2"]), p(g["p1"])
    streams = [
        stream("live", None, "hp", "water", p=high, T=T(g["T1"]), mass_flow="?"),
        stream("extraction", "hp", "heater", "water", p=middle, h="?"),
        stream("onward", "hp", "lp", "water", p=middle),
        stream("exhaust", "lp", "condenser", "water", p=low),
        stream("condensate", "condenser", "pump-1", "water", p=low, saturated="liquid"),
        stream("to-heater", "pump-1", "heater", "water", p=middle),
        stream("heated", "heater", "pump-2", "water", p=middle, saturated="liquid"),
        stream("feed", "pump-2", None, "water", p=high),
    ]
    transfers = [
        work("hp-shaft", "hp"), work("lp-shaft", "lp"), work("pump-1-shaft", None, "pump-1"),
        work("pump-2-shaft", None, "pump-2"), heat("rejected", "condenser"),
    ]  # fmt: skip
    relations = [
        efficiency("hp-eta", "live", "extraction", g["eta_t"]), efficiency("lp-eta", "onward", "exhaust", g["eta_t"]),
        efficiency("pump-1-ideal", "condensate", "to-heater", 1.0), efficiency("pump-2-ideal", "heated", "feed", 1.0),
        tie("one-state", "equal", "extraction.h", "onward.h"),
        tie("gross", "sum", "hp-shaft.rate", "lp-shaft.rate"),
        tie("own", "sum", "pump-1-shaft.rate", "pump-2-shaft.rate"),
        tie("net", "difference", "gross.value", "own.value", value=q(g["W"], "W")),
        tie("fraction", "ratio", "extraction.mass_flow", "live.mass_flow"),
        tie("rise", "difference", "live.h", "feed.h"),
    ]  # fmt: skip
    return case(streams, transfers=transfers, relations=relations), {
        "h2": at("extraction.h"), "y": at("fraction.value"), "m1": at("live.mass_flow"),
        "eta": lambda a: g["W"] / (a["live.mass_flow"] * a["rise.value"]),
    }  # fmt: skip


def sf_28(g: Given) -> Entry:
    document = steam_plant({"T": T(g["T1"])}, g["p1"], g["p2"], "?", False, g)
    document["streams"][0]["mass_flow"] = "1 kg/s"
    return document, {
        "x4": at("s2.x"), "q_in": at("q_in.rate"), "q_out": at("q_out.rate"), "w_net": at("net.value"),
        "eta": at("efficiency.value"),
    }  # fmt: skip


# --- gases, refrigerants, liquids ------------------------------------------------------------------------------------


def sf_09(g: Given) -> Entry:
    streams = [
        stream("inlet", None, "compressor", "air", p=p(g["p1"]), T=T(g["T1"]), mass_flow=q(g["m"], "kg/s")),
        stream("outlet", "compressor", None, None, p=p(g["p2"]), T=T(g["T2"])),
    ]
    loss = heat("loss", "compressor", rate=q(g["q"] * g["m"], "W"))
    return case(streams, transfers=[loss, work("shaft", None, "compressor")]), {"W_in": at("shaft.rate")}


def sf_11(g: Given) -> Entry:
    streams = [
        stream("inlet", None, "compressor", "air", p=p(g["p1"]), T=T(g["T1"]), mass_flow=q(g["m"], "kg/s")),
        stream("outlet", "compressor", None, None, p=p(g["p2"]), T="?"),
    ]
    relations = [efficiency("eta", "inlet", "outlet", g["eta"])]
    document = case(streams, transfers=[work("shaft", None, "compressor")], relations=relations)
    return document, {"T2a": at("outlet.T"), "W_in": at("shaft.rate")}


def sf_26(g: Given) -> Entry:
    streams = [
        stream("inlet", None, "compressor", "R22", p=p(g["p1"]), T=T(g["T1"]), mass_flow=q(g["m"], "kg/s")),
        stream("outlet", "compressor", None, None, p=p(g["p2"]), T=T(g["T2"])),
    ]
    relations = [efficiency("eta", "inlet", "outlet")]
    document = case(streams, transfers=[work("shaft", None, "compressor")], relations=relations)
    return document, {"W": at("shaft.rate", -1.0), "eta": at("eta.value")}


def sf_29(g: Given) -> Entry:
    four = {"hot_in": "hot-in", "hot_out": "hot-out", "cold_in": "cold-in", "cold_out": "cold-out"}
    streams = [
        stream("hot-in", None, "hot", "caustic", T=T(g["T1"]), mass_flow=q(g["m_h"], "kg/s")),
        stream("hot-out", "hot", None, None, T=T(g["T2"])),
        stream("cold-in", None, "cold", "liquid-water", T=T(g["t1"]), mass_flow=q(g["m_c"], "kg/s")),
        stream("cold-out", "cold", None, None, T=T(g["t2"])),
    ]
    relations = [
        {"id": "rating", "kind": "lmtd_UA", "arrangement": "counterflow", "value": "?", **four},
        tie("hot-range", "difference", "hot-in.T", "hot-out.T"),
        tie("cold-range", "difference", "cold-out.T", "cold-in.T"),
        tie("inlets", "difference", "hot-in.T", "cold-in.T"),
        tie("R", "ratio", "hot-range.value", "cold-range.value"),
        tie("S", "ratio", "cold-range.value", "inlets.value"),
    ]
    fluids = {
        "caustic": {"kind": "constant_liquid", "density": "1200 kg/m3", "cp": q(g["c_h"], "J/kg/K")},
        "liquid-water": {"kind": "constant_liquid", "density": "1000 kg/m3", "cp": q(g["c_c"], "J/kg/K")},
    }
    transfers = [heat("from-hot", "hot"), heat("to-cold", None, "cold")]
    return case(streams, transfers=transfers, relations=relations, fluids=fluids), {
        "Q_hot": at("from-hot.rate"), "Q_cold": at("to-cold.rate"), "R": at("R.value"), "S": at("S.value"),
        "LMTD": lambda a: a["from-hot.rate"] / a["rating.value"],
    }  # fmt: skip


# --- humid air -------------------------------------------------------------------------------------------------------


def air(name: str, source: str | None, target: str | None, pressure: float, **rest: Any) -> dict[str, Any]:
    return stream(name, source, target, "humid_air", p=p(pressure), **rest)


def coil(g: Given) -> dict[str, Any]:
    """Cooled to saturation, with condensate at the temperature of the air that leaves."""
    streams = [
        air("in", None, "coil", g["p"], T=T(g["T1"]), relative_humidity=g["RH1"], volume_flow=q(g["AV"], "m3/s"),
            dry_air_flow="?", h="?", humidity_ratio="?", rho="?"),
        air("out", "coil", None, g["p"], T=T(g["T2"]), relative_humidity=1.0),
        stream("condensate", "coil", None, "water", p=p(g["p"]), T=T(g["T2"]), mass_flow="?"),
    ]  # fmt: skip
    return case(streams, transfers=[heat("refrigeration", "coil")])


def ps_01(g: Given) -> Entry:
    return coil(g), {
        "m_a": at("in.dry_air_flow"), "mw_ma": lambda a: a["condensate.mass_flow"] / a["in.dry_air_flow"],
        "Q": at("refrigeration.rate", -1.0), "tons": at("refrigeration.rate"),
    }  # fmt: skip


def ps_12(g: Given) -> Entry:
    return coil(g), {
        "h1": at("in.h"), "W1": at("in.humidity_ratio"), "Q": at("refrigeration.rate"),
        "v1": lambda a: (1.0 + a["in.humidity_ratio"]) / a["in.rho"],
    }  # fmt: skip


def ps_03(g: Given) -> Entry:
    streams = [
        air("in", None, "cooler", g["p"], T=T(g["T1"]), relative_humidity=g["RH1"], volume_flow=q(g["AV"], "m3/s")),
        air("out", "cooler", None, g["p"], T=T(g["T2"]), relative_humidity="?"),
        stream("water", None, "cooler", "water", p=p(g["p"]), T=T(g["Tw"]), mass_flow="?"),
    ]
    return case(streams), {"m_w": at("water.mass_flow"), "RH2": at("out.relative_humidity")}


def ps_04(g: Given) -> Entry:
    streams = [
        air("cold", None, "box", g["p"], T=T(g["T1"]), humidity_ratio=g["W1"], volume_flow=q(g["AV1"], "m3/s")),
        air("warm", None, "box", g["p"], T=T(g["T2"]), relative_humidity=g["RH2"], volume_flow=q(g["AV2"], "m3/s")),
        air("mixed", "box", None, g["p"], T="?", humidity_ratio="?"),
    ]
    return case(streams), {"W3": at("mixed.humidity_ratio"), "T3": at("mixed.T")}


def ps_06(g: Given) -> Entry:
    """The source closes the humidifier by its water alone; what its energy balance lacks is left open as heat."""
    streams = [
        air("outdoor", None, "heater", g["p"], T=T(g["T1"]), relative_humidity=g["RH1"],
            volume_flow=q(g["AV"], "m3/s")),
        air("warm", "heater", "humidifier", g["p"], T=T(g["T2"])),
        stream("steam", None, "humidifier", "water", p=p(g["p"]), saturated="vapour", mass_flow="?"),
        air("supply", "humidifier", None, g["p"], T=T(g["T3"]), relative_humidity=g["RH3"]),
    ]  # fmt: skip
    document = case(streams, transfers=[heat("heating", None, "heater"), heat("rest", "humidifier")])
    return document, {"Q": at("heating.rate"), "m_st": at("steam.mass_flow")}


def ps_08(g: Given) -> Entry:
    streams = [
        air("cold", None, "box", g["p"], T=T(g["T1"]), relative_humidity=1.0, volume_flow=q(g["AV1"], "m3/s")),
        air("warm", None, "box", g["p"], T=T(g["T2"]), relative_humidity=g["RH2"], volume_flow=q(g["AV2"], "m3/s")),
        air("mixed", "box", None, g["p"], T="?", humidity_ratio="?", relative_humidity="?", h="?", volume_flow="?"),
    ]
    return case(streams), {
        "W3": at("mixed.humidity_ratio"), "h3": at("mixed.h"), "T3": at("mixed.T"),
        "RH3": at("mixed.relative_humidity"), "V3": at("mixed.volume_flow"),
    }  # fmt: skip


def ps_09(g: Given) -> Entry:
    streams = [
        stream("warm", None, "tower", "water", p=p(g["p"]), T=T(g["T3"]), mass_flow=q(g["m_w"], "kg/s")),
        stream("cool", "tower", None, "water", p=p(g["p"]), T=T(g["T4"]), mass_flow=q(g["m_w"], "kg/s")),
        stream("make-up", None, "tower", "water", p=p(g["p"]), T=T(g["T4"]), mass_flow="?"),
        air("in", None, "tower", g["p"], T=T(g["T1"]), relative_humidity=g["RH1"], volume_flow="?"),
        air("out", "tower", None, g["p"], T=T(g["T2"]), relative_humidity=1.0),
    ]
    return case(streams), {"V1": at("in.volume_flow"), "m_makeup": at("make-up.mass_flow")}


def ps_10(g: Given) -> Entry:
    """A state only: a duct that does nothing to the air."""
    asked = {"humidity_ratio": "?", "h": "?", "dew_point": "?", "relative_humidity": "?", "rho": "?"}
    streams = [
        air("in", None, "duct", g["p"], T=T(g["T"]), wet_bulb=T(g["Twb"]), dry_air_flow="1 kg/s", **asked),
        air("out", "duct", None, g["p"]),
    ]
    return case(streams), {
        "W": at("in.humidity_ratio"), "h": at("in.h"), "Tdp": at("in.dew_point"), "RH": at("in.relative_humidity"),
        "v": lambda a: (1.0 + a["in.humidity_ratio"]) / a["in.rho"],
    }  # fmt: skip


def ps_11(g: Given) -> Entry:
    streams = [
        air("in", None, "heater", g["p"], T=T(g["T1"]), relative_humidity=1.0, volume_flow=q(g["AV"], "m3/s")),
        air("out", "heater", None, g["p"], T=T(g["T2"])),
    ]
    return case(streams, transfers=[heat("heating", None, "heater")]), {"Q": at("heating.rate")}


def ps_14(g: Given) -> Entry:
    streams = [
        air("in", None, "duct", g["p"], T=T(g["T1"]), wet_bulb=T(g["Twb1"]), dry_air_flow=q(g["m_a"], "kg/s")),
        stream("steam", None, "duct", "water", T=T(g["Tst"]), saturated="vapour", mass_flow="?", h="?"),
        air("out", "duct", None, g["p"], T="?", dew_point=T(g["Tdp2"])),
    ]
    return case(streams), {"T2": at("out.T"), "m_st": at("steam.mass_flow"), "hg": at("steam.h")}


ENTRIES: dict[str, Callable[[Given], Entry]] = {
    function.__name__.upper().replace("_", "-"): function
    for function in (
        sf_01, sf_03, sf_05, sf_07, sf_09, sf_11, sf_13, sf_14, sf_16, sf_17, sf_19, sf_21, sf_26, sf_28, sf_29,
        ps_01, ps_03, ps_04, ps_06, ps_08, ps_09, ps_10, ps_11, ps_12, ps_14,
    )
}  # fmt: skip
"""Id of an entry of checks.json → its case and how to read the published numbers off its answers."""
