"""Working out a formula with numbers as a person would, with pint's units instead of our own."""

from __future__ import annotations

import math
import re
from functools import cache
from typing import Any

import pint

PINT_NAMES = {
    "Nm3": "m**3",
    "scf": "ft**3",
    "scfh": "ft**3/hour",
    "m3": "m**3",
    "m2": "m**2",
    "ft3": "ft**3",
    "ft2": "ft**2",
    "m/s²": "m/s**2",
    "kg/m³": "kg/m**3",
    "Btu": "Btu_it",
    "lb": "pound",
    "Pa": "pascal",
    "h": "hour",
    "psia": "psi",
}
"""Our symbols, and constants' units as formulas print them → pint's names."""

HALF_A_DIGIT = 5e-9
"""Relative size of half a unit in the ninth digit, at most."""

NOT_ARITHMETIC = re.compile(r"[;]|\b[FG]\(|[a-zA-Z_]+\([^()]* = ")
"""Property look-ups and functions that stand for more than arithmetic."""

_QUANTITY = re.compile(r"\((-?[0-9.]+(?:e[+-]?[0-9]+)?) ([^()]+)\)")
_CONSTANT = re.compile(r"(?<![(\w.])([0-9][0-9.]*(?:e[+-]?[0-9]+)?) (m/s²|kg/m³ \(normal\)|kg/mol)")


@cache
def registry() -> pint.UnitRegistry[Any]:
    return pint.UnitRegistry(cache_folder=None)


def quantity(number: str, unit: str) -> Any:
    """A number with one of our unit symbols, as pint's quantity; a level of temperature is in K or degR."""
    for symbol, name in PINT_NAMES.items():
        unit = re.sub(rf"(?<![A-Za-z0-9_]){re.escape(symbol)}(?![A-Za-z0-9_*])", name, unit)
    return float(number) * registry().parse_units("" if unit == "-" else unit)


def recomputed(formula: str) -> Any:
    """What a formula with numbers comes to, worked out by pint."""
    text = _CONSTANT.sub(lambda m: f"({m[1]} {m[2].removesuffix(' (normal)')})", formula)
    text = _QUANTITY.sub(r"(quantity('\1', '\2'))", text)
    for sign, python in (("·", "*"), ("−", "-"), ("²", "**2"), ("³", "**3"), ("½", "0.5"), ("π", "pi"), ("√", "sqrt")):
        text = text.replace(sign, python)
    names = {"quantity": quantity, "pi": math.pi, "ln": _ln, "sqrt": lambda v: v**0.5, "min": min}
    return eval(text, names)


def _ln(ratio: Any) -> float:
    return math.log(float(ratio.to("").magnitude) if hasattr(ratio, "to") else ratio)


def in_unit(value: Any, unit: str) -> float:
    """The magnitude of pint's quantity in one of our units."""
    if not hasattr(value, "to"):
        return float(value)
    return float(value.to(quantity("1", unit).units).magnitude)


def printed_slack(formula: str, unit: str) -> float:
    """How far the rounding of the printed numbers can move the result, in the unit: the sum over all of them."""
    centre, slack = in_unit(recomputed(formula), unit), 0.0
    for match in _QUANTITY.finditer(formula):
        moved = f"{float(match[1]) * (1 + HALF_A_DIGIT):.17g}"
        slack += abs(in_unit(recomputed(formula[: match.start(1)] + moved + formula[match.end(1) :]), unit) - centre)
    return slack
