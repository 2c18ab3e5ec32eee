"""Moist air as functions of (p, T, W): the property library's humid-air model, put right where it needs to be.

Model: real-gas mixture of dry air and water with virial coefficients, S. Herrmann, H.-J. Kretzschmar, D. P. Gatley,
HVAC&R Research 15 (2009) 961-986 (ASHRAE RP-1485). W is kg of water per kg of dry air; h, s, u are per kg of dry air.

Two things were measured in the library and are corrected here (the tests hold both):

1. *The zero of water.* Its enthalpy of water in air lies 30.8 J/kg above that of water on its own (IAPWS-95), because
   two values of the gas constant meet in it. A constant is taken off, so that condensate and make-up water close.
2. *The entropy.* Its entropy of moist air does not obey dh = T ds + v dp (0.06 % of ds/dT at W = 0.05 and 1 bar, more
   at higher pressure). Entropy is therefore taken from h and v, which do agree with each other:

       s = (h - g)/T,   g = sum x_i (g_i0 + R T ln x_i) + R T (2 B rho + 3/2 C rho^2 - ln Z),   Z = 1 + B rho + C rho^2

   with B and C read from Z at two pressures, and g_i0 the ideal-gas parts of dry air and of IAPWS-95 water. Dry air has
   h = s = 0 at 0 degC and 101.325 kPa; water has the zero of liquid water at its triple point.
"""

from __future__ import annotations

import math
import threading
from functools import lru_cache
from typing import Any

import CoolProp
import CoolProp.CoolProp as CoolPropLibrary

from service.errors import StateOutOfRange
from service.fluids.bracketed_root import newton_in_bracket, root_in_bracket
from service.fluids.humid_air_refusals import not_covered
from service.fluids.ideal_part import ideal_part

GAS_CONSTANT = 8.314472  # [J/(mol K)] that of the humid-air model
MOLAR_MASS_WATER = 0.018015268  # [kg/mol] same
MOLAR_MASS_AIR = 0.028966  # [kg/mol] same
RATIO = 0.621945  # [-] ratio of the two, as the model rounds it
HIGHEST_W = 10.0  # [kg/kg] range of the model
T_TRIPLE = 273.16  # [K] water
T_ZERO, P_ZERO = 273.15, 101_325.0  # [K, Pa] zero of dry air

_threads = threading.local()


def library(output: str, T: float, p: float, name: str, value: float) -> float:
    """One call of the library's humid air, checked: `output` at T [K], p [Pa] and a third property [SI].

    Raises StateOutOfRange for a state that the model does not cover.
    """
    try:
        found = float(CoolPropLibrary.HAPropsSI(output, "T", T, "P", p, name, value))
    except ValueError as exc:
        raise not_covered(p, T) from exc
    if not math.isfinite(found):
        raise not_covered(p, T)
    return found


def _water() -> Any:
    """This thread's own state of liquid water."""
    handle = getattr(_threads, "water", None)
    if handle is None:
        handle = CoolPropLibrary.AbstractState("HEOS", "Water")
        handle.specify_phase(CoolProp.iphase_liquid)
        _threads.water = handle
    return handle


def liquid_water(p: float, T: float) -> float:
    """Enthalpy of liquid water [J/kg] at p [Pa], T [K]: IAPWS-95."""
    handle = _water()
    handle.update(CoolProp.PT_INPUTS, p, T)
    return float(handle.hmass())


@lru_cache(maxsize=512)
def boiling_temperature(p: float) -> float:
    """T [K] at which pure water boils at p [Pa]; the triple point's below its pressure, the critical one's above."""
    handle = CoolPropLibrary.AbstractState("HEOS", "Water")
    if p <= handle.trivial_keyed_output(CoolPropLibrary.iP_triple):
        return T_TRIPLE
    if p >= handle.p_critical():
        return float(handle.T_critical())
    handle.update(CoolProp.PQ_INPUTS, p, 0.0)
    return float(handle.T())


@lru_cache(maxsize=1)
def _zeros() -> tuple[float, float, float]:
    """What the library's h of water in air has too much [J/kg]; h [J/kg] and s [J/(kg K)] to add to ideal dry air."""

    def ideal_limit(T: float, W: float) -> float:
        # h is linear in p at such pressures: carried on from 20 and 10 Pa to zero pressure
        return 2.0 * library("Hda", T, 10.0, "W", W) - library("Hda", T, 20.0, "W", W)

    W = 0.1
    water = (ideal_limit(T_TRIPLE, W) - ideal_limit(T_TRIPLE, 0.0)) / W - _ideal("Water", T_TRIPLE)[0]
    h_air, s_air = _ideal("Air", T_ZERO)
    to_add = ideal_limit(T_ZERO, 0.0) - h_air
    s_air -= GAS_CONSTANT / MOLAR_MASS_AIR * math.log(P_ZERO)
    # dry air has h = s = 0, so g = 0, at its zero
    g = h_air + to_add - T_ZERO * s_air + _residual_gibbs(P_ZERO, T_ZERO, 0.0)
    return water, to_add, g / T_ZERO


@lru_cache(maxsize=4096)
def _ideal(fluid: str, T: float) -> tuple[float, float]:
    """h [J/kg] and s + R ln(p/Pa) [J/(kg K)] of the ideal gas at T [K], with the model's gas constant."""
    part = ideal_part(fluid)
    molar_mass = MOLAR_MASS_WATER if fluid == "Water" else MOLAR_MASS_AIR
    h, s, _ = part.dimensionless(T)
    R = GAS_CONSTANT / molar_mass
    # the equation of state's own gas constant keeps its zero of h; the model's goes with ln p
    own = part.gas_constant / molar_mass
    return own * T * h, own * s + R * math.log(part.gas_constant * part.rho_reducing * T)


def enthalpy(p: float, T: float, W: float) -> float:
    """h [J per kg of dry air] at p [Pa], T [K], W [kg/kg]."""
    return library("Hda", T, p, "W", W) - W * _zeros()[0]


def volume(p: float, T: float, W: float) -> float:
    """Volume [m3 of moist air per kg of dry air]."""
    return library("Vda", T, p, "W", W)


def amounts(W: float) -> tuple[float, float, float]:
    """Mole fraction of water [-], amount of moist air [mol per kg dry air], its molar mass [kg/mol]."""
    y = W / (RATIO + W)
    molar_mass = y * MOLAR_MASS_WATER + (1.0 - y) * MOLAR_MASS_AIR
    return y, (1.0 + W) / molar_mass, molar_mass


def _residual_gibbs(p: float, T: float, W: float) -> float:
    """Gibbs energy [J per kg dry air] over that of the ideal gas at the same p, T, W."""
    n = amounts(W)[1]
    RT = GAS_CONSTANT * T
    rho, rho_half = n / volume(p, T, W), n / volume(0.5 * p, T, W)
    z, z_half = p / (rho * RT) - 1.0, 0.5 * p / (rho_half * RT) - 1.0
    C = (z / rho - z_half / rho_half) / (rho - rho_half)
    B = z / rho - C * rho
    return n * RT * (2.0 * B * rho + 1.5 * C * rho * rho - math.log1p(z))


def entropy(p: float, T: float, W: float) -> float:
    """s [J/K per kg of dry air] at p [Pa], T [K], W [kg/kg]; see the module's text for why not the library's."""
    y, n, _ = amounts(W)
    _, h_to_add, s_to_add = _zeros()
    h_air, s_air = _ideal("Air", T)
    h_water, s_water = _ideal("Water", T)
    log_p = math.log(p)
    R_air, R_water = GAS_CONSTANT / MOLAR_MASS_AIR, GAS_CONSTANT / MOLAR_MASS_WATER
    g = h_air + h_to_add - T * (s_air - R_air * log_p + s_to_add)
    g += W * (h_water - T * (s_water - R_water * log_p))
    if y > 0.0:
        g += n * GAS_CONSTANT * T * (y * math.log(y) + (1.0 - y) * math.log1p(-y))
    g += _residual_gibbs(p, T, W)
    return (enthalpy(p, T, W) - g) / T


def saturated(p: float, T: float) -> float:
    """W of saturated air [kg/kg] at p [Pa], T [K], over ice below 0.01 degC; inf where air can hold more than 10."""
    return at_relative_humidity(p, T, 1.0)


def at_relative_humidity(p: float, T: float, relative_humidity: float) -> float:
    """W [kg/kg] at a relative humidity [-]; inf beyond the model's range (W > 10)."""
    try:
        W = float(CoolPropLibrary.HAPropsSI("W", "T", T, "P", p, "R", relative_humidity))
    except ValueError:
        return math.inf
    return W if 0.0 <= W <= HIGHEST_W else math.inf


def hottest_at(p: float, relative_humidity: float, T_max: float) -> float:
    """The highest T [K] at which air of this relative humidity stays within the model (W about 8), at most T_max."""
    limit = 0.93 * p / max(relative_humidity, 1e-12)
    T = min(boiling_temperature(limit), T_max)
    while at_relative_humidity(p, T, relative_humidity) == math.inf and T > T_TRIPLE:
        T -= 0.5
    return T


def dew_point(p: float, W: float, T_min: float) -> float:
    """T [K] at which air of W [kg/kg] is saturated at p [Pa]; NaN for dry air and below T_min."""
    high = hottest_at(p, 1.0, 623.0)
    if saturated(p, T_min) >= W or saturated(p, high) < W:
        return math.nan
    log_W = math.log(W)
    saturated_part = max(W / (RATIO + W), 1e-12) * p
    start = 1.0 / (1.0 / 373.12 - math.log(max(saturated_part, 1e-3) / 101_325.0) / 5_200.0)

    def residual(T: float) -> tuple[float, float]:
        Ws = saturated(p, T)
        # Clausius-Clapeyron, with the mole fraction's share of ln W
        return math.log(Ws) - log_W, (1.0 + Ws / RATIO) * (6_150.0 if T < T_TRIPLE else 5_300.0) / (T * T)

    return newton_in_bracket(residual, T_min, high, start, scale=1.0, exact=False)


def wet_bulb(p: float, T: float, W: float) -> float:
    """Thermodynamic wet-bulb temperature [K]: adiabatic saturation with water, or with ice below 0.01 degC.

        h(p, T, W) + (Ws(B) - W) h_water(p, B) = h(p, B, Ws(B))

    NaN where there is none within the model.
    """
    Ws = saturated(p, T)
    if Ws * (1.0 - 1e-12) <= W:
        return T
    h = enthalpy(p, T, W)
    high = T if Ws < math.inf else min(T, hottest_at(p, 1.0, 623.0))

    def residual(B: float) -> tuple[float, float]:
        Ws = saturated(p, B)
        excess = enthalpy(p, B, Ws) - (Ws - W) * liquid_water(p, B) - h
        slope = 1006.0 + 1860.0 * Ws + Ws * (1.0 + Ws / RATIO) * 5_300.0 / (B * B) * 2.45e6
        return excess, slope

    if high > T_TRIPLE and residual(T_TRIPLE)[0] <= 0.0:
        if residual(high)[0] < 0.0:
            return math.nan
        start = high - min(0.5 * (high - T_TRIPLE), 20.0)
        return newton_in_bracket(residual, T_TRIPLE, high, start, scale=1e5, exact=False)
    try:
        ice_bulb = library("B", T, p, "W", W)
    except StateOutOfRange:
        return math.nan
    return min(ice_bulb, T_TRIPLE, T)


def humidity_of_wet_bulb(p: float, T: float, B: float) -> float:
    """W [kg/kg] of air of T [K] and wet bulb B [K]; negative where even dry air has a higher wet bulb."""
    Ws = saturated(p, B)
    if Ws == math.inf:
        raise not_covered(p, B, "wet_bulb")
    if B >= T:
        return Ws
    if B < T_TRIPLE:
        found = root_in_bracket(lambda W: wet_bulb(p, T, W) - B, 0.0, Ws)  # at Ws the wet bulb is above B, as T is
        return -1.0 if found is None else found
    h_water, h_saturated = liquid_water(p, B), enthalpy(p, B, Ws)
    slope = enthalpy(p, T, 1e-3) * 1e3 - enthalpy(p, T, 0.0) * 1e3 - h_water

    def residual(W: float) -> tuple[float, float]:
        return enthalpy(p, T, W) + (Ws - W) * h_water - h_saturated, slope

    if residual(0.0)[0] > 0.0:
        return -1.0
    return newton_in_bracket(residual, 0.0, Ws, 0.5 * Ws, scale=abs(h_saturated) + 1e4, exact=False)
