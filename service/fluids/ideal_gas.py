"""Ideal gas of constant heat capacity.

p v = R T    h = cp (T - T0)    u = h - R T    s = cp ln(T/T0) - R ln(p/p0)    R = R_molar / M
"""

from __future__ import annotations

import math
from types import ModuleType

from service.errors import SchemaViolation
from service.fluids.protocol import FluidSpec, Limits, Provenance
from service.fluids.simple_fluid import P_ZERO, T_ZERO, Number, SimpleFluid
from service.fluids.slopes import Slope

GAS_CONSTANT = 8.31446261815324
"""R_molar [J/(mol K)], exact since 2019: BIPM, The International System of Units (9th edition)."""


class IdealGas(SimpleFluid):
    """molar_mass [kg/mol] and cp [J/(kg K)], both constant; cp has to exceed R_molar / M."""

    kind = "ideal_gas"
    phase = "gas"
    basic = ("p", "T", "h", "s", "u", "rho", "v", "x", "cp", "cv", "speed_of_sound")
    properties = ("p", "T", "h", "s", "u", "rho", "v", "cp", "cv", "speed_of_sound")
    pairs = (
        ("p", "h"), ("p", "u"), ("p", "T"), ("p", "s"),
        ("rho", "u"), ("v", "u"), ("rho", "h"), ("v", "h"), ("T", "rho"), ("T", "v"), ("rho", "s"), ("v", "s"),
        ("p", "rho"), ("p", "v"), ("h", "s"), ("s", "u"), ("T", "s"),
    )  # fmt: skip

    def __init__(self, name: str, molar_mass: float, cp: float) -> None:
        self.name, self.molar_mass, self.cp = name, molar_mass, cp
        self.R = GAS_CONSTANT / molar_mass
        self.cv = cp - self.R
        self.limits = Limits(T_min=1.0, T_max=6000.0, p_min=1e-3, p_max=1e9)
        self.provenance = Provenance(
            model="ideal gas of constant cp",
            citation="p v = R T with cp and molar mass as declared",
            reference_state="h = 0 and s = 0 at 0 degC and 101.325 kPa",
        )

    def base(self, m: ModuleType, first: str, second: str, a: Number, b: Number) -> tuple[Number, Number]:
        """(p, T) [Pa, K] from a pair."""
        cp, R = self.cp, self.R
        given = {first: a, second: b}
        if "v" in given:
            given["rho"] = 1.0 / given["v"]
        T = given.get("T")
        if "h" in given:
            T = T_ZERO + given["h"] / cp
        elif "u" in given:
            T = (given["u"] + cp * T_ZERO) / self.cv
        if "p" in given:
            p = given["p"]
            if T is None and "s" in given:
                T = T_ZERO * m.exp((given["s"] + R * m.log(p / P_ZERO)) / cp)
            elif T is None:
                T = p / (R * given["rho"])
            return p, T
        if T is None:  # (rho, s)
            T = m.exp((given["s"] + cp * math.log(T_ZERO) + R * m.log(given["rho"] * R / P_ZERO)) / self.cv)
        if "rho" in given:
            return given["rho"] * R * T, T
        return P_ZERO * m.exp((cp * m.log(T / T_ZERO) - given["s"]) / R), T

    def evaluate(self, m: ModuleType, p: Number, T: Number) -> dict[str, Number]:
        """Every property [SI]."""
        cp, R = self.cp, self.R
        h, v = cp * (T - T_ZERO), R * T / p
        s = cp * m.log(T / T_ZERO) - R * m.log(p / P_ZERO)
        return {
            "p": p, "T": T, "h": h, "s": s, "u": h - R * T, "rho": 1.0 / v, "v": v, "x": math.nan,
            "cp": cp, "cv": self.cv, "speed_of_sound": m.sqrt(cp / self.cv * R * T),
        }  # fmt: skip

    def base_slopes(self, p: float, T: float) -> dict[str, Slope]:
        """d/d(p, T)."""
        cp, R = self.cp, self.R
        rho, v = p / (R * T), R * T / p
        return {
            "p": (1.0, 0.0), "T": (0.0, 1.0), "h": (0.0, cp), "u": (0.0, self.cv), "s": (-R / p, cp / T),
            "rho": (1.0 / (R * T), -rho / T), "v": (-v / p, R / p), "cp": (0.0, 0.0), "cv": (0.0, 0.0),
            "speed_of_sound": (0.0, 0.5 * math.sqrt(cp / self.cv * R / T)),
        }  # fmt: skip


def build(spec: FluidSpec) -> IdealGas:
    """The gas of a specification (kind "ideal_gas": molar_mass, cp). Raises SchemaViolation."""
    name = spec.label or spec.name or "ideal gas"
    M, cp = spec.molar_mass, spec.cp
    if M is None or cp is None:
        raise SchemaViolation(f"The ideal gas {name} needs molar_mass and cp.", hint="Give both in its declaration.")
    if not (math.isfinite(M) and 5e-4 <= M <= 10.0):
        raise SchemaViolation(
            f"{1e3 * M:.6g} g/mol is not the molar mass of a gas ({name}).", hint="Air has 28.96 g/mol."
        )
    if not (math.isfinite(cp) and GAS_CONSTANT / M * (1 + 1e-9) < cp <= 1e6):
        least = GAS_CONSTANT / M / 1e3
        raise SchemaViolation(
            f"cp = {cp / 1e3:.6g} kJ/kg/K of {name} is not above its gas constant, {least:.6g} kJ/kg/K.",
            hint="An ideal gas has cp - cv = R; cp is at least 2.5 R. Check cp and molar_mass, and their units.",
        )
    return IdealGas(name, M, cp)
