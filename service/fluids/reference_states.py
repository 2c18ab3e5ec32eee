"""Where the property library puts h and s to zero, found out from its own numbers and told as a sentence.

The library chooses a zero for each fluid and says so nowhere. The usual conventions are tried in turn; where none
holds, the sentence gives h and s at one state, which says the same.
"""

from __future__ import annotations

from typing import Any

import CoolProp

KELVIN = 273.15
ATMOSPHERE = 101325.0
NEAR_H, NEAR_S = 100.0, 1.0  # [J/kg], [J/(kg K)] how near a convention has to be met to be named

_TRIPLE = "h = 0 and s = 0 in the saturated liquid at the triple point ({T:g} K)"
_IIR = "h = 200 kJ/kg and s = 1 kJ/(kg K) in the saturated liquid at 0 degC (IIR)"
_ASHRAE = "h = 0 and s = 0 in the saturated liquid at -40 degC (ASHRAE)"
_NBP = "h = 0 and s = 0 in the saturated liquid at 101.325 kPa (normal boiling point, {T:.2f} K)"
_STATED = "h = {h:.2f} kJ/kg and s = {s:.4f} kJ/(kg K) at {T:g} K and {p:g} kPa (the library's own zero)"


def reference_state(backend: Any) -> str:
    """The sentence for one fluid; backend: a state object of the property library that may be moved about."""
    lowest, critical = backend.Ttriple(), backend.T_critical()
    if _is(backend, CoolProp.QT_INPUTS, 0.0, lowest, 0.0, 0.0):
        return _TRIPLE.format(T=lowest)
    if lowest < KELVIN < critical and _is(backend, CoolProp.QT_INPUTS, 0.0, KELVIN, 2e5, 1e3):
        return _IIR
    if lowest < KELVIN - 40.0 < critical and _is(backend, CoolProp.QT_INPUTS, 0.0, KELVIN - 40.0, 0.0, 0.0):
        return _ASHRAE
    if _is(backend, CoolProp.PQ_INPUTS, ATMOSPHERE, 0.0, 0.0, 0.0):
        return _NBP.format(T=backend.T())
    return _stated(backend)


def _is(backend: Any, pair: Any, first: float, second: float, h: float, s: float) -> bool:
    try:
        backend.update(pair, first, second)
        return bool(abs(backend.hmass() - h) < NEAR_H and abs(backend.smass() - s) < NEAR_S)
    except ValueError:
        return False


def _stated(backend: Any) -> str:
    T, p = 298.15, 1e5
    try:
        backend.update(CoolProp.PT_INPUTS, p, T)
        return _STATED.format(h=backend.hmass() / 1e3, s=backend.smass() / 1e3, T=T, p=p / 1e3)
    except ValueError:
        return "the library's own zero"
