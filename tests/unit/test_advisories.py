"""Each advisory is raised by a case that deserves it, and not by a near neighbour that does not."""

from __future__ import annotations

import copy
from collections.abc import Callable
from typing import Any

import pytest

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


def exchanger(cold_out: str, hot_out: str = "? degC") -> Document:
    streams = []
    for side, flow, warm, leaving in (("hot", "2 kg/s", "80 degC", hot_out), ("cold", "1.5 kg/s", "20 degC", cold_out)):
        streams += [
            {"id": f"{side}_in", "to": side, "fluid": "water", "mass_flow": flow, "state": {"p": "3 bar", "T": warm}},
            {"id": f"{side}_out", "from": side, "state": {"p": "3 bar", "T": leaving}},
        ]
    roles = ("hot_in", "hot_out", "cold_in", "cold_out")
    relation = {
        "id": "eps",
        "kind": "effectiveness",
        **{r: r for r in roles},
        "arrangement": "counterflow",
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


STEAM, COOL = {"p": "30 bar", "T": "400 degC"}, {"p": "3 bar", "T": "20 degC"}
PAIRS: dict[str, tuple[Callable[[], Document], Callable[[], Document]]] = {
    "limit-crossed": (lambda: limited("370 degC"), lambda: limited("380 degC")),
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
    "reversed-heat": (lambda: jacket("30 degC"), lambda: jacket("90 degC")),
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


def test_every_code_of_the_registry_has_its_pair_and_its_meaning() -> None:
    codes = [code for rule in RULES for code in rule.codes]
    assert len(codes) == len(set(codes))
    assert set(codes) == set(PAIRS)
    assert all(rule.meaning.endswith(".") for rule in RULES)


def test_the_gravest_advisory_comes_first_and_each_names_its_basis() -> None:
    found = items(machine("water", STEAM, {"p": "0.5 bar", "x": "0.7"}))
    order = ["DANGER", "WARNING", "CAUTION", "NOTICE"]
    assert [i["signal_word"] for i in found] == sorted((i["signal_word"] for i in found), key=order.index)
    assert all(i["basis"] and i["of"] for i in found)


def test_a_message_speaks_in_the_units_of_the_case() -> None:
    document = limited("680 degF")
    document["answer"] = {"units": "US"}
    (item,) = items(document)
    assert "above its limit of 680 degF (pipe class)" in item["message"]


def test_every_answer_carries_the_deference() -> None:
    assert "licensed professional" in OPERATIONS.solve(limited("380 degC"))["advisories"]["deference"]
