"""Working out a formula with numbers as a person would, with pint's units instead of our own."""

from __future__ import annotations

import math
import re
from functools import cache
from typing import Any

import pint
import pytest

PINT_NAMES = {
    "gpm": "gallon/minute",
    "/degF": "/delta_degF",
    "MMBtu": "megaBtu_it",
    "scfh": "scf/hour",
    "scfm": "scf/minute",
    "m3": "m**3",
    "m2": "m**2",
    "ft3": "ft**3",
    "ft2": "ft**2",
    "m/s²": "m/s**2",
    "kg/m³ (normal)": "kg/Nm3",
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

_QUANTITY = re.compile(r"\((-?[0-9.]+(?:e[+-]?[0-9]+)?) ([^()−+·][^()]*)\)")
_CONSTANT = re.compile(r"(?<![\w.])([0-9][0-9.]*(?:e[+-]?[0-9]+)?) (m/s²|kg/m³ \(normal\)|kg/mol)")


@cache
def registry() -> pint.UnitRegistry[Any]:
    """pint, taught that a normal volume is an amount of gas; scf: 60 degF (519.67 degR), 14.696 psi."""
    ureg: pint.UnitRegistry[Any] = pint.UnitRegistry(cache_folder=None)
    ureg.define("Nm3 = [normal_volume]")
    cubic_foot, psi = 0.3048**3, 6894.757293168  # [m3], [Pa] NIST SP 811, appendix B.8
    ureg.define(f"scf = {cubic_foot * (14.696 * psi / (519.67 / 1.8)) / (101_325 / 273.15)} * Nm3")
    return ureg


def quantity(number: str, unit: str) -> Any:
    """A number with one of our unit symbols, as pint's quantity; a level of temperature is in K or degR."""
    for symbol, name in PINT_NAMES.items():
        end = "" if symbol.endswith(")") else "(?![A-Za-z0-9_*])"
        unit = re.sub(rf"(?<![A-Za-z0-9_]){re.escape(symbol)}{end}", name, unit)
    return float(number) * registry().parse_units("" if unit == "-" else unit)


def recomputed(formula: str) -> Any:
    """What a formula with numbers comes to, worked out by pint."""
    text = _CONSTANT.sub(lambda m: f"({m[1]} {m[2].replace('kg/m³ (normal)', 'kg/Nm3')})", formula)
    text = _QUANTITY.sub(r"(quantity('\1', '\2'))", text)
    for sign, python in (
        ("·", "*"),
        ("−", "-"),
        ("²", "**2"),
        ("³", "**3"),
        ("½", "0.5"),
        ("π", "pi"),
        ("√", "sqrt"),
        ("^", "**"),
    ):
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


def recompute_steps(answer: dict[str, Any]) -> int:
    """Check every rearranged step against pint; returns how many there were."""
    count = 0
    for step in answer["steps"]:
        if step["method"] != "rearranged" or NOT_ARITHMETIC.search(step["numbers"]):
            continue
        formula, _ = step["numbers"].rsplit(" = ", 1)
        ((address, found),) = step["values"].items()
        if found["unit"] in ("degC", "degF", "barg", "kPag", "psig"):
            continue  # a level that does not count from zero is no product of units
        value = in_unit(recomputed(formula), found["unit"])
        slack = printed_slack(formula, found["unit"])
        assert value == pytest.approx(found["value"], rel=1e-9, abs=2 * slack), (address, step["numbers"])
        assert slack < 1e-3 * abs(found["value"]) + 1e-9, (address, step["numbers"])
        count += 1
    return count
