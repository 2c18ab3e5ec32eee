"""What the tests of the wire share: the unit table, the compiled schemas, and a case to break."""

from __future__ import annotations

import copy
from collections.abc import Mapping
from functools import cache
from typing import Any

import pytest

from service.balance.case import Case
from service.errors import CaseError
from service.units import UnitTable
from service.wire.findings import Findings
from service.wire.library import read_schemas, schema_directory
from service.wire.parsing import parse_case
from service.wire.quantities import QuantityReader
from service.wire.shapes import Shape

LET_DOWN: Mapping[str, Any] = {
    "title": "Let-down station",
    "system": "steady_flow",
    "site": {"atmospheric_pressure": "1.002 bar", "ambient_temperature": "20 degC"},
    "boundaries": [{"id": "valve"}],
    "streams": [
        {"id": "inlet", "to": "valve", "fluid": "water", "mass_flow": "12 t/h",
         "state": {"p": "40 barg", "T": "400 degC"}},
        {"id": "outlet", "from": "valve", "state": {"p": "10 barg", "T": "? degC"}},
    ],
    "transfers": [{"id": "loss", "kind": "heat", "from": "valve", "rate": "15 kW", "temperature": "60 degC"}],
    "relations": [],
    "limits": [{"of": "outlet.T", "max": "380 degC", "why": "downstream pipe class"}],
    "answer": {"units": "metric"},
}  # fmt: skip


@cache
def table() -> UnitTable:
    return UnitTable.build()


@cache
def shape(name: str) -> Shape:
    return Shape(name, read_schemas(schema_directory()))


def let_down() -> dict[str, Any]:
    """A fresh copy, to be changed."""
    return copy.deepcopy(dict(LET_DOWN))


def parse(document: Any) -> Case:
    return parse_case(document, shape("case"), table())


def refusal(document: Any) -> CaseError:
    """The error that a document of a case meets."""
    with pytest.raises(CaseError) as caught:
        parse(document)
    return caught.value


def issues(error: CaseError) -> dict[str, str]:
    """Pointer → details and hints."""
    told: dict[str, str] = {}
    for issue in error.issues:
        told[issue.pointer] = f"{told.get(issue.pointer, '')} {issue.detail} {issue.hint}".strip()
    return told


def reader(pressure: float = 101_325.0) -> QuantityReader:
    return QuantityReader(table(), Findings(), pressure)
