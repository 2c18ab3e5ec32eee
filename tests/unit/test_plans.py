"""A case solved by a kept plan has the very answer that it has on its own."""

from __future__ import annotations

import copy
import json
from pathlib import Path
from typing import Any

import pytest

from service.solvers import pipeline
from service.solvers.plans import MOST, KeptPlans
from service.wire.json_text import dumps
from service.wire.operations import Operations

EXAMPLES = sorted((Path(__file__).parents[2] / "schemas" / "examples").glob("*.json"))
OPERATIONS = Operations.build()


def with_other_numbers(document: Any) -> Any:
    """The same case with every flow a little larger."""
    other = copy.deepcopy(document)
    for stream in other["streams"]:
        flow = stream.get("mass_flow")
        if isinstance(flow, str) and not flow.startswith("?"):
            number, _, unit = flow.partition(" ")
            stream["mass_flow"] = f"{float(number) * 1.01:.6g} {unit}"
    return other


def steady(path: Path) -> bool:
    return json.loads(path.read_text())["system"] == "steady_flow"


@pytest.mark.parametrize("path", list(filter(steady, EXAMPLES)), ids=lambda p: p.stem)
def test_a_kept_plan_gives_the_bytes_of_a_new_one(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    document = json.loads(path.read_text())
    monkeypatch.setattr(pipeline, "_KEPT", KeptPlans())
    alone = dumps(OPERATIONS.solve(document))
    monkeypatch.setattr(pipeline, "_KEPT", KeptPlans())
    OPERATIONS.solve(with_other_numbers(document))
    assert dumps(OPERATIONS.solve(document)) == alone


def let_down(flow: str) -> dict[str, Any]:
    return {
        "system": "steady_flow",
        "boundaries": [{"id": "valve"}],
        "streams": [
            {"id": "a", "to": "valve", "fluid": "water", "mass_flow": flow, "state": {"p": "40 bar", "T": "400 degC"}},
            {"id": "b", "from": "valve", "state": {"p": "10 bar", "T": "?"}},
        ],
        "transfers": [{"id": "q", "kind": "heat", "from": "valve", "rate": "500 kW"}],
    }


def test_a_plan_is_used_again_for_other_numbers_and_they_count(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(pipeline, "_KEPT", KeptPlans())
    first = OPERATIONS.solve(let_down("2 kg/s"))["answers"]["b.T"]["value"]
    monkeypatch.setattr(pipeline, "_build", None)  # building again would fail now
    assert OPERATIONS.solve(let_down("4 kg/s"))["answers"]["b.T"]["value"] > first + 20


def test_the_store_of_plans_is_bounded(monkeypatch: pytest.MonkeyPatch) -> None:
    kept = KeptPlans()
    monkeypatch.setattr(pipeline, "_KEPT", kept)
    document = let_down("2 kg/s")
    for number in range(MOST + 20):
        document["boundaries"] = [{"id": f"v{number}"}]
        document["streams"][0]["to"] = document["streams"][1]["from"] = document["transfers"][0]["from"] = f"v{number}"
        OPERATIONS.solve(document)
    assert len(kept._kept) == MOST
