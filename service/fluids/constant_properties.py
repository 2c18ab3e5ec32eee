"""Liquids and solids of constant density and heat capacity.

h = cp (T - T0) + (p - p0) / rho    u = h - p / rho    s = cp ln(T/T0)
"""

from __future__ import annotations

import math
from types import ModuleType

from service.errors import SchemaViolation
from service.fluids.protocol import FluidSpec, Limits, Provenance
from service.fluids.simple_fluid import P_ZERO, T_ZERO, Number, SimpleFluid
from service.fluids.slopes import Slope


class ConstantProperties(SimpleFluid):
    """density [kg/m3] and cp [J/(kg K)], both constant."""

    basic = ("p", "T", "h", "s", "u", "rho", "v", "x", "cp", "cv")
    properties = ("p", "T", "h", "s", "u", "rho", "v", "cp", "cv")
    pairs = (
        ("p", "h"), ("p", "u"), ("p", "T"), ("p", "s"),
        ("h", "s"), ("h", "u"), ("T", "h"),
    )  # fmt: skip
    molar_mass = None

    def __init__(self, name: str, density: float, cp: float) -> None:
        self.name, self.density, self.cp = name, density, cp
        self.limits = Limits(T_min=1.0, T_max=6000.0, p_min=1e-3, p_max=1e9)
        self.provenance = Provenance(
            model=f"{self.kind.replace('_', ' ')} of constant density and cp",
            citation="h = cp (T - T0) + (p - p0) / rho with density and cp as declared",
            reference_state="h = 0 and s = 0 at 0 degC and 101.325 kPa",
        )

    def base(self, m: ModuleType, first: str, second: str, a: Number, b: Number) -> tuple[Number, Number]:
        """(p, T) [Pa, K] from a pair."""
        cp, rho = self.cp, self.density
        given = {first: a, second: b}
        T = given.get("T")
        if "s" in given:
            T = T_ZERO * m.exp(given["s"] / cp)
        elif "u" in given:
            T = T_ZERO + (given["u"] + P_ZERO / rho) / cp
        if "p" in given:
            p = given["p"]
            return p, T_ZERO + (given["h"] - (p - P_ZERO) / rho) / cp if T is None else T
        return P_ZERO + rho * (given["h"] - cp * (T - T_ZERO)), T  # type: ignore[operator]

    def evaluate(self, m: ModuleType, p: Number, T: Number) -> dict[str, Number]:
        """Every property [SI]."""
        cp, rho = self.cp, self.density
        warm = cp * (T - T_ZERO)
        return {
            "p": p, "T": T, "h": warm + (p - P_ZERO) / rho, "s": cp * m.log(T / T_ZERO), "u": warm - P_ZERO / rho,
            "rho": rho, "v": 1.0 / rho, "x": math.nan, "cp": cp, "cv": cp,
        }  # fmt: skip

    def base_slopes(self, p: float, T: float) -> dict[str, Slope]:
        """d/d(p, T)."""
        cp = self.cp
        flat = (0.0, 0.0)
        return {
            "p": (1.0, 0.0), "T": (0.0, 1.0), "h": (1.0 / self.density, cp), "u": (0.0, cp), "s": (0.0, cp / T),
            "rho": flat, "v": flat, "cp": flat, "cv": flat,
        }  # fmt: skip


class ConstantLiquid(ConstantProperties):
    """A liquid."""

    kind = "constant_liquid"
    phase = "liquid"


class Solid(ConstantProperties):
    """A solid, for instance the metal of a wall."""

    kind = "solid"
    phase = "solid"


def build(spec: FluidSpec) -> ConstantProperties:
    """The liquid or solid of a specification (density, cp). Raises SchemaViolation."""
    what = "solid" if spec.kind == "solid" else "liquid"
    name = spec.label or spec.name or what
    density, cp = spec.density, spec.cp
    if density is None or cp is None:
        raise SchemaViolation(f"The {what} {name} needs density and cp.", hint="Give both in its declaration.")
    for value, quantity, unit, most in ((density, "density", "kg/m3", 1e5), (cp, "cp", "J/kg/K", 1e6)):
        if not (math.isfinite(value) and 0.0 < value <= most):
            raise SchemaViolation(f"{value:.6g} {unit} is not a possible {quantity} of {name}.", hint="Check its unit.")
    return Solid(name, density, cp) if spec.kind == "solid" else ConstantLiquid(name, density, cp)
