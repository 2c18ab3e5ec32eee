"""Analytic slopes of properties: of single phases over (T, rho), of wet states over (p, x).

Source: I. H. Bell et al., Ind. Eng. Chem. Res. 53 (2014) 2498 for what the library differentiates; wet states here are
mixtures of the saturated ones, y = (1 - x) y' + x y'', which is differentiated along the saturation line.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping
from typing import Any

import CoolProp
import CoolProp.CoolProp as CoolPropLibrary

from service.fluids.slopes import Slope, wet_by_differences

KEYS = {
    "p": CoolPropLibrary.iP, "T": CoolPropLibrary.iT, "h": CoolPropLibrary.iHmass, "s": CoolPropLibrary.iSmass,
    "u": CoolPropLibrary.iUmass, "rho": CoolPropLibrary.iDmass,
}  # fmt: skip


def single_phase_slopes(backend: Any, T: float, rho: float, names: Collection[str]) -> dict[str, Slope]:
    """d(name)/d(T, rho) of the single-phase state at T [K], rho [kg/m3]."""
    backend.update(CoolProp.DmassT_INPUTS, rho, T)
    derivative = backend.first_partial_deriv
    iT, iD = CoolPropLibrary.iT, CoolPropLibrary.iDmass
    out: dict[str, Slope] = {}
    for name in names:
        if name == "T":
            out[name] = (1.0, 0.0)
        elif name == "rho":
            out[name] = (0.0, 1.0)
        elif name == "v":
            out[name] = (0.0, -1.0 / rho**2)
        else:
            key = KEYS[name]
            out[name] = (derivative(key, iT, iD), derivative(key, iD, iT))
    return out


def boiling_slope(backend: Any, p: float, x: float, blend: bool) -> float:
    """dT/dp [K/Pa] along the saturation line at p [Pa]; by differences for a blend, which glides."""
    if blend:
        step = 1e-5 * p
        return (_values(backend, p + step, x)["T"] - _values(backend, p - step, x)["T"]) / (2.0 * step)
    backend.update(CoolProp.PQ_INPUTS, p, x)
    return float(backend.first_saturation_deriv(CoolPropLibrary.iT, CoolPropLibrary.iP))


def two_phase_slopes(backend: Any, p: float, x: float, names: Collection[str], blend: bool) -> dict[str, Slope]:
    """d(name)/d(p, x) of the wet state at p [Pa], x [-]. A blend, whose temperature glides, by differences over p."""
    if blend:
        return wet_by_differences(lambda at_p, at_x: _values(backend, at_p, at_x), p, x, names)
    liquid, vapour = _saturated(backend, p, 0.0), _saturated(backend, p, 1.0)
    out: dict[str, Slope] = {"p": (1.0, 0.0), "x": (0.0, 1.0)}
    for name in ("T", "h", "s", "u", "v"):
        (y0, d0), (y1, d1) = liquid[name], vapour[name]
        out[name] = ((1.0 - x) * d0 + x * d1, y1 - y0)
    v = (1.0 - x) * liquid["v"][0] + x * vapour["v"][0]
    out["T"] = (out["T"][0], 0.0)
    out["rho"] = (-out["v"][0] / v**2, -out["v"][1] / v**2)
    return out


def _saturated(backend: Any, p: float, x: float) -> Mapping[str, tuple[float, float]]:
    """Property → (value, slope over p along the line) of the saturated liquid or vapour."""
    backend.update(CoolProp.PQ_INPUTS, p, x)
    along: Callable[[Any, Any], float] = backend.first_saturation_deriv
    iP = CoolPropLibrary.iP
    h, s, T, rho = backend.hmass(), backend.smass(), backend.T(), backend.rhomass()
    slope_h, v = along(CoolPropLibrary.iHmass, iP), 1.0 / rho
    slope_v = -along(CoolPropLibrary.iDmass, iP) / rho**2
    return {
        "h": (h, slope_h),
        "s": (s, along(CoolPropLibrary.iSmass, iP)),
        "T": (T, along(CoolPropLibrary.iT, iP)),
        "v": (v, slope_v),
        "u": (h - p * v, slope_h - v - p * slope_v),
    }


def _values(backend: Any, p: float, x: float) -> dict[str, float]:
    backend.update(CoolProp.PQ_INPUTS, p, x)
    rho = backend.rhomass()
    return {
        "p": p, "x": x, "T": backend.T(), "h": backend.hmass(), "s": backend.smass(), "u": backend.umass(),
        "rho": rho, "v": 1.0 / rho,
    }  # fmt: skip
