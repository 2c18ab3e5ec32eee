"""A request document into a Case: shape, references and quantities, with everything that is wrong told at once."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from service.balance.case import Case
from service.units import UnitTable
from service.wire.addresses import AddressBook, items
from service.wire.building import CaseBuilder
from service.wire.findings import Findings
from service.wire.references import check_references
from service.wire.shapes import Fault, Shape, pruned, report


def parse_case(document: Any, shape: Shape, units: UnitTable) -> Case:
    """The case that a document of POST /v1/balances says. Raises CaseError with every issue found."""
    findings = Findings()
    if not shape.fits(document):
        faults = shape.faults(document)
        report(faults, findings)
        _read_the_rest(document, faults, units, findings)
        findings.raise_any()
    book = AddressBook(document)
    check_references(document, book, findings)
    case = CaseBuilder(units, findings).case(document, book)
    findings.raise_any()
    return case


def _read_the_rest(document: Any, faults: list[Fault], units: UnitTable, findings: Findings) -> None:
    """What else is wrong in a document of the wrong shape: quantities, and references where all ids can be read."""
    if not isinstance(document, dict) or len(faults) >= 20:
        return
    rest = pruned(document, faults)
    book = AddressBook(rest)
    if _ids_are_whole(document):
        check_references(rest, book, findings)
    CaseBuilder(units, findings).case(rest, book)


def _ids_are_whole(document: Mapping[str, Any]) -> bool:
    """Whether nothing is missing from the names that references could lead to."""
    lists = [document.get(name, []) for name in ("boundaries", "streams", "transfers", "relations")]
    if not all(isinstance(found, list) and all(isinstance(item, dict) for item in found) for found in lists):
        return False
    named = ("boundaries", "streams", "transfers")
    return all(isinstance(item.get("id"), str) for name in named for _, item in items(document, name))
