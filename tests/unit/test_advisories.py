"""Each advisory is raised by a case that deserves it, and not by a near neighbour that does not."""

from __future__ import annotations

import copy
from collections.abc import Callable
from typing import Any

import pytest

from service.advisories import DEFERENCE, SEVERITY
from service.advisories.catalogue import catalogue
from service.advisories.registry import RULES
from service.wire.operations import Operations

Document = dict[str, Any]
OPERATIONS = Operations.build()


def valve(fluid: str = "water", flow: str = "2 kg/s", **ends: dict[str, str]) -> Document:
    """A let-down valve: one stream in, one out, nothing else."""
    return {
        "system": "steady_flow",
        "boundaries": [{"id": "valve"}],
        "streams": [
            {"id": "inlet", "to": "valve", "fluid": fluid, "mass_flow": flow, "state": ends["inlet"]},
            {"id": "outlet", "from": "valve", "state": ends["outlet"]},
        ],
    }


def machine(fluid: str, inlet: dict[str, str], outlet: dict[str, str], **more: Any) -> Document:
    """A compressor or turbine with its shaft and its efficiency."""
    document = valve(fluid, inlet=inlet, outlet=outlet)
    document["transfers"] = [{"id": "shaft", "kind": "shaft_work", "from": "valve", "rate": "? kW"}]
    eff = {
        "id": "eff",
        "kind": "isentropic_efficiency",
        "from": "inlet",
        "to": "outlet",
        "value": more.get("eff", "? %"),
    }
    document["relations"] = [eff]
    return document


def exchanger(cold_out: str, arrangement: str = "counterflow") -> Document:
    streams = []
    for side, flow, warm, leaving in (
        ("hot", "2 kg/s", "80 degC", "? degC"),
        ("cold", "1.5 kg/s", "20 degC", cold_out),
    ):
        streams += [
            {"id": f"{side}_in", "to": side, "fluid": "water", "mass_flow": flow, "state": {"p": "3 bar", "T": warm}},
            {"id": f"{side}_out", "from": side, "state": {"p": "3 bar", "T": leaving}},
        ]
    roles = ("hot_in", "hot_out", "cold_in", "cold_out")
    relation = {
        "id": "eps",
        "kind": "effectiveness",
        **{r: r for r in roles},
        "arrangement": arrangement,
        "value": "?",
    }
    return {
        "system": "steady_flow",
        "boundaries": [{"id": "hot"}, {"id": "cold"}],
        "streams": streams,
        "transfers": [{"id": "duty", "kind": "heat", "from": "hot", "to": "cold", "rate": "? kW"}],
        "relations": [relation],
    }


def leak(fluid: str, state: dict[str, str], behind: str = "1.013 bar") -> Document:
    """A header with a small hole."""
    return {
        "system": "steady_flow",
        "boundaries": [{"id": "header"}],
        "streams": [
            {"id": "supply", "to": "header", "fluid": fluid, "mass_flow": "? kg/s", "state": state},
            {"id": "use", "from": "header", "mass_flow": "1 kg/s", "state": state},
            {"id": "leak", "from": "header", "mass_flow": "? kg/h", "state": state},
        ],
        "relations": [
            {"id": "hole", "kind": "restriction", "stream": "leak", "bore": "3 mm", "discharge_coefficient": 0.65,
             "downstream_pressure": behind}
        ],
    }  # fmt: skip


def limited(maximum: str) -> Document:
    document = valve(inlet={"p": "41 bar", "T": "400 degC"}, outlet={"p": "11 bar", "T": "?"})
    document["limits"] = [{"of": "outlet.T", "max": maximum, "why": "pipe class"}]
    return document


def surface(temperature: str) -> Document:
    document = valve(inlet={"p": "11 bar", "T": "200 degC"}, outlet={"p": "11 bar", "T": "?"})
    document["transfers"] = [
        {"id": "loss", "kind": "heat", "from": "valve", "rate": "2 kW", "temperature": temperature}
    ]
    return document


def jacket(source: str) -> Document:
    document = valve(inlet={"p": "3 bar", "T": "50 degC"}, outlet={"p": "3 bar", "T": "?"})
    law = {"UA": "2 kW/K", "source_temperature": source}
    document["transfers"] = [{"id": "jacket", "kind": "heat", "to": "valve", "rate": "?", "law": law}]
    return document


def tee(branch: str) -> Document:
    at = {"p": "3 bar", "T": "50 degC"}
    return {
        "system": "steady_flow",
        "boundaries": [{"id": "tee"}],
        "streams": [
            {"id": "a", "to": "tee", "fluid": "water", "mass_flow": "2 kg/s", "state": at},
            {"id": "b", "to": "tee", "fluid": "water", "mass_flow": "?", "state": at},
            {"id": "c", "from": "tee", "fluid": "water", "mass_flow": branch, "state": at},
        ],
        "answer": {"agreement": 1e-3},
    }


def water_heater(gas_in: str, gas_out: str) -> Document:
    """Hot gas raises steam of 250 degC at 10 bar from water of 60 degC, in counterflow."""
    streams = []
    for side, fluid, flow, p, warm, leaving in (
        ("hot", "nitrogen", "? kg/s", "1.1 bar", gas_in, gas_out),
        ("cold", "water", "1 kg/s", "10 bar", "60 degC", "250 degC"),
    ):
        streams += [
            {"id": f"{side}_in", "to": side, "fluid": fluid, "mass_flow": flow, "state": {"p": p, "T": warm}},
            {"id": f"{side}_out", "from": side, "state": {"p": p, "T": leaving}},
        ]
    return {**exchanger("30 degC"), "streams": streams}


def cold_line(surface_temperature: str) -> Document:
    """Water of 30 degC loses heat at a stated temperature."""
    document = surface(surface_temperature)
    for stream in document["streams"]:
        stream["state"] = {"p": "11 bar", "T": "30 degC" if stream["id"] == "inlet" else "?"}
    return document


def pipe(bore: str) -> Document:
    """2 kg/s of saturated steam of 11 bar in a straight pipe."""
    document = valve(inlet={"p": "11 bar", "saturated": "vapour"}, outlet={"p": "10.9 bar", "T": "?"})
    for stream in document["streams"]:
        stream["bore"] = bore
    return document


def coil(air_in: dict[str, str], air_out: dict[str, str], coldest: str, condensate: str = "") -> Document:
    """Humid air gives heat to a surface of a stated temperature."""
    streams = [
        {
            "id": "air-in",
            "to": "coil",
            "fluid": "humid_air",
            "dry_air_flow": "2 kg/s",
            "state": {"p": "1 bar", **air_in},
        },
        {"id": "air-out", "from": "coil", "fluid": "humid_air", "state": {"p": "1 bar", **air_out}},
    ]
    if condensate:
        state = {"p": "1 bar", "T": condensate}
        streams.append({"id": "drain", "from": "coil", "fluid": "water", "mass_flow": "? kg/h", "state": state})
    heat = {"id": "duty", "kind": "heat", "from": "coil", "rate": "? kW", "temperature": coldest}
    return {"system": "steady_flow", "boundaries": [{"id": "coil"}], "streams": streams, "transfers": [heat]}


def flue(outlet: str) -> Document:
    gas = {"kind": "gas_mixture", "model": "ideal_gas",
           "mole_fractions": {"nitrogen": 0.75, "carbon dioxide": 0.1, "water": 0.15}}  # fmt: skip
    document = valve("flue", inlet={"p": "1.013 bar", "T": "150 degC"}, outlet={"p": "1.013 bar", "T": outlet})
    document["transfers"] = [{"id": "duty", "kind": "heat", "from": "valve", "rate": "? kW"}]
    return {**document, "fluids": {"flue": gas}}


def spray(outlet: str) -> Document:
    """A desuperheater for steam of 11 bar, which boils at 184 degC."""
    document = valve(inlet={"p": "11 bar", "T": "250 degC"}, outlet={"p": "11 bar", "T": outlet})
    water = {"p": "15 bar", "T": "105 degC"}
    document["streams"].append({"id": "spray", "to": "valve", "fluid": "water", "mass_flow": "?", "state": water})
    return document


def shop_gas(p: str) -> Document:
    gas = {"kind": "ideal_gas", "molar_mass": "29 g/mol", "cp": "1.01 kJ/kg/K"}
    return {
        **valve("shop-gas", inlet={"p": p, "T": "20 degC"}, outlet={"p": "2 bar", "T": "?"}),
        "fluids": {"shop-gas": gas},
    }


def split(limited_stream: str) -> Document:
    """A branch whose inlet is told, and of whose outlets only the flows are."""
    flows = {"b": "2 kg/s", "c": "1 kg/s"}
    streams: list[Document] = [
        {"id": "a", "to": "tee", "fluid": "water", "mass_flow": "?", "state": {"p": "3 bar", "T": "20 degC"}}
    ]
    streams += [{"id": name, "from": "tee", "mass_flow": flow, "state": {"p": "2 bar"}} for name, flow in flows.items()]
    limit = {"of": f"{limited_stream}.T", "max": "30 degC"}
    return {"system": "steady_flow", "boundaries": [{"id": "tee"}], "streams": streams, "limits": [limit]}


STEAM, COOL = {"p": "30 bar", "T": "400 degC"}, {"p": "3 bar", "T": "20 degC"}
PAIRS: dict[str, tuple[Callable[[], Document], Callable[[], Document]]] = {
    "limit-crossed": (lambda: limited("370 degC"), lambda: limited("380 degC")),
    "limit-not-checked": (lambda: split("c"), lambda: split("a")),
    "second-law-violated": (
        lambda: machine("water", STEAM, {"p": "0.5 bar", "x": "0.7"}),
        lambda: machine("water", STEAM, {"p": "0.5 bar", "x": "0.95"}),
    ),
    "efficiency-impossible": (
        lambda: machine("water", STEAM, {"p": "0.5 bar", "x": "0.7"}),
        lambda: machine("water", STEAM, {"p": "0.5 bar", "x": "0.95"}),
    ),
    "wet-expansion": (
        lambda: machine("water", {"p": "30 bar", "T": "300 degC"}, {"p": "0.05 bar"}, eff="85 %"),
        lambda: machine("water", {"p": "30 bar", "T": "300 degC"}, {"p": "3 bar"}, eff="75 %"),
    ),
    "flashing-liquid": (
        lambda: valve(inlet={"p": "6 bar", "T": "150 degC"}, outlet={"p": "2 bar", "x": "?"}),
        lambda: valve(inlet={"p": "6 bar", "T": "110 degC"}, outlet={"p": "2 bar", "T": "?"}),
    ),
    "below-atmosphere": (
        lambda: valve(inlet={"p": "2 bar", "T": "150 degC"}, outlet={"p": "0.6 bar", "T": "?"}),
        lambda: valve(inlet={"p": "2 bar", "T": "150 degC"}, outlet={"p": "1.2 bar", "T": "?"}),
    ),
    "temperature-cross": (lambda: exchanger("62 degC"), lambda: exchanger("40 degC")),
    "temperature-impossible": (lambda: exchanger("85 degC"), lambda: exchanger("62 degC")),
    "choked-flow": (
        lambda: leak("water", {"p": "11 bar", "saturated": "vapour"}),
        lambda: leak("water", {"p": "11 bar", "saturated": "vapour"}, behind="9 bar"),
    ),
    "flashing-discharge": (
        lambda: leak("water", {"p": "11 bar", "T": "150 degC"}),
        lambda: leak("water", {"p": "11 bar", "T": "60 degC"}),
    ),
    "hot-surface": (lambda: surface("75 degC"), lambda: surface("45 degC")),
    "scalding-release": (
        lambda: leak("water", {"p": "11 bar", "saturated": "vapour"}),
        lambda: leak("water", COOL),
    ),
    "toxic-release": (lambda: leak("ammonia", COOL), lambda: leak("nitrogen", COOL)),
    "flammable-release": (lambda: leak("propane", COOL), lambda: leak("nitrogen", COOL)),
    "asphyxiant-release": (lambda: leak("carbon dioxide", COOL), lambda: leak("air", COOL)),
    "near-model-limit": (
        lambda: valve(inlet={"p": "41 bar", "T": "1700 degC"}, outlet={"p": "11 bar", "T": "?"}),
        lambda: valve(inlet={"p": "41 bar", "T": "1500 degC"}, outlet={"p": "11 bar", "T": "?"}),
    ),
    "reversed-flow": (lambda: tee("1 kg/s"), lambda: tee("3 kg/s")),
    "reversed-transfer": (lambda: jacket("30 degC"), lambda: jacket("90 degC")),
    "internal-temperature-cross": (
        lambda: water_heater("260 degC", "130 degC"),
        lambda: water_heater("400 degC", "250 degC"),
    ),
    "uphill-heat": (lambda: cold_line("40 degC"), lambda: cold_line("25 degC")),
    "supersonic-pipe": (lambda: pipe("25 mm"), lambda: pipe("50 mm")),  # 730 and 180 m/s; sound about 500 m/s
    "high-velocity": (lambda: pipe("50 mm"), lambda: pipe("150 mm")),  # 180 and 20 m/s
    "oxidising-release": (lambda: leak("oxygen", COOL), lambda: leak("air", COOL)),
    "cold-release": (lambda: leak("nitrogen", {"p": "3 bar", "T": "85 K"}), lambda: leak("nitrogen", COOL)),
    "cold-embrittlement": (  # CO2 boils at -46 degC at 8 bar, at -20 degC at 20 bar
        lambda: valve("carbon dioxide", inlet={"p": "70 bar", "T": "20 degC"}, outlet={"p": "8 bar"}),
        lambda: valve("carbon dioxide", inlet={"p": "70 bar", "T": "20 degC"}, outlet={"p": "20 bar"}),
    ),
    "wet-suction": (
        lambda: machine("R134a", {"p": "2 bar", "x": "0.9"}, {"p": "8 bar"}, eff="70 %"),
        lambda: machine("R134a", {"p": "2 bar", "superheat": "5 K"}, {"p": "8 bar"}, eff="70 %"),
    ),
    "cavitation-margin": (
        lambda: machine("water", {"p": "1.2 bar", "T": "104 degC"}, {"p": "50 bar"}, eff="70 %"),
        lambda: machine("water", {"p": "1.2 bar", "T": "70 degC"}, {"p": "50 bar"}, eff="70 %"),
    ),
    "two-phase-discharge": (
        lambda: leak("water", {"p": "11 bar", "x": "0.3"}),
        lambda: leak("water", {"p": "11 bar", "T": "60 degC"}),
    ),
    "low-correction-factor": (
        lambda: exchanger("56 degC", "shell_and_tube"),
        lambda: exchanger("40 degC", "shell_and_tube"),
    ),
    "frosting": (
        lambda: coil(
            {"T": "10 degC", "relative_humidity": "80 %"},
            {"T": "3 degC", "relative_humidity": "95 %"},
            "-5 degC",
            "3 degC",
        ),
        lambda: coil(
            {"T": "10 degC", "relative_humidity": "80 %"},
            {"T": "3 degC", "relative_humidity": "95 %"},
            "1 degC",
            "3 degC",
        ),
    ),
    "condensation": (  # the dew point of the air is 16.7 degC
        lambda: coil({"T": "25 degC", "relative_humidity": "60 %"}, {"T": "20 degC"}, "10 degC"),
        lambda: coil({"T": "25 degC", "relative_humidity": "60 %"}, {"T": "20 degC"}, "18 degC"),
    ),
    "gas-below-dew-point": (lambda: flue("40 degC"), lambda: flue("70 degC")),  # 15 % of water: 54 degC
    "wet-after-spray": (lambda: spray("187 degC"), lambda: spray("210 degC")),
    "dense-ideal-gas": (lambda: shop_gas("40 bar"), lambda: shop_gas("8 bar")),
    "hot-compressed-air": (
        lambda: machine("air", {"p": "1 bar", "T": "20 degC"}, {"p": "8 bar"}, eff="75 %"),
        lambda: machine("air", {"p": "1 bar", "T": "20 degC"}, {"p": "3 bar"}, eff="75 %"),
    ),
    "doubtful-phase": (
        lambda: valve(inlet={"p": "10 bar", "T": "179.88 degC"}, outlet={"p": "2 bar", "T": "?"}),
        lambda: valve(inlet={"p": "10 bar", "saturated": "vapour"}, outlet={"p": "2 bar", "T": "?"}),
    ),
    "freezing": (
        lambda: valve(inlet={"p": "3 bar", "T": "1 degC"}, outlet={"p": "2 bar", "T": "?"}),
        lambda: valve(inlet={"p": "3 bar", "T": "9 degC"}, outlet={"p": "2 bar", "T": "?"}),
    ),
}


def items(document: Document) -> list[dict[str, str]]:
    return list(OPERATIONS.solve(copy.deepcopy(document))["advisories"]["items"])


@pytest.mark.parametrize("code", PAIRS)
def test_an_advisory_is_raised_where_it_applies_and_not_next_to_it(code: str) -> None:
    deserving, innocent = PAIRS[code]
    assert code in {item["code"] for item in items(deserving())}
    assert code not in {item["code"] for item in items(innocent())}


OWN_TESTS = {"liquid-full", "wall-too-cold", "stopped-early"}
"""Codes that only balances over a period raise: test_advisories_rules.py."""


def test_every_code_of_the_registry_has_its_pair() -> None:
    codes = [rule.code for rule in RULES]
    assert len(codes) == len(set(codes))
    assert set(codes) == set(PAIRS) | OWN_TESTS


def test_the_catalogue_tells_when_an_advisory_is_raised_and_on_what_it_rests() -> None:
    assert [entry.code for entry in catalogue()] == [rule.code for rule in RULES]
    for entry in catalogue():
        assert entry.signal_words
        assert set(entry.signal_words) <= set(SEVERITY)
        assert entry.when.endswith(".")
        assert len(entry.when) > 40
        assert entry.basis


def test_the_gravest_advisory_comes_first_and_each_names_its_basis() -> None:
    found = items(machine("water", STEAM, {"p": "0.5 bar", "x": "0.7"}))
    assert len({i["signal_word"] for i in found}) > 1
    assert [i["signal_word"] for i in found] == sorted((i["signal_word"] for i in found), key=SEVERITY.index)
    assert all(i["basis"] and i["of"] for i in found)


def test_a_message_speaks_in_the_units_of_the_case() -> None:
    document = limited("680 degF")
    document["answer"] = {"units": "US"}
    (item,) = items(document)
    assert "above its limit of 680 degF (pipe class)" in item["message"]


def test_every_answer_carries_the_deference() -> None:
    assert OPERATIONS.solve(limited("380 degC"))["advisories"]["deference"] == DEFERENCE
    assert "licensed professional" in DEFERENCE
