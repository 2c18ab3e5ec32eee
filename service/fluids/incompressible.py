"""Heat-transfer liquids and brines: density and heat capacity depend on temperature, hardly anything on pressure.

h(p, T): dh = cp dT + (v - T dv/dT) dp        s(p, T): ds = cp/T dT - dv/dT dp        rho = rho(T)
"""

from __future__ import annotations

import math
import threading
from collections.abc import Collection, Sequence
from difflib import get_close_matches
from typing import TYPE_CHECKING, Any

import CoolProp
import CoolProp.CoolProp as CoolPropLibrary

from service.errors import StateAmbiguous, StateOutOfRange, UnknownFluid
from service.fluids import incompressible_names
from service.fluids.base_point import BasePointFluid, Point
from service.fluids.bracketed_root import newton_in_bracket, root_in_bracket
from service.fluids.protocol import Limits, Provenance
from service.fluids.refusals import literal, refusal

if TYPE_CHECKING:
    from service.fluids.protocol import FluidSpec

HIGHEST_PRESSURE = 1e8  # [Pa] the model has no limit of its own; above, no liquid is incompressible
LOWEST_PRESSURE = 1e2  # [Pa] where no vapour pressure is given
CITATION = (
    "I. H. Bell, J. Wronski, S. Quoilin, V. Lemort: Pure and pseudo-pure fluid thermophysical property evaluation and "
    "the open-source thermophysical property library CoolProp. Ind. Eng. Chem. Res. 53 (2014) 2498-2508"
)


class IncompressibleLiquid(BasePointFluid):
    """A liquid of the INCOMP library: one code, and for a solution one mass fraction."""

    kind = "brine"
    dof = 2
    pressure_optional = True
    base = ("p", "T")
    basic = ("p", "T", "h", "s", "u", "rho", "v", "x", "cp")
    extras = ("viscosity", "conductivity")
    properties = (*basic, *extras)
    pairs = (("p", "T"), ("p", "h"), ("p", "s"), ("p", "u"), ("p", "rho"), ("p", "v"))
    phase = "liquid"
    molar_mass = None

    def __init__(self, code: str, mass_fraction: float | None) -> None:
        self._code = code
        self._mass_fraction = mass_fraction
        self._threads = threading.local()
        self.name = code if mass_fraction is None else f"{code} {100.0 * mass_fraction:g} %"
        handle = self._handle()
        T_min, T_max = handle.Tmin(), handle.Tmax()
        if mass_fraction is not None:
            handle.update(CoolProp.PT_INPUTS, HIGHEST_PRESSURE, T_max)
            freezing = handle.keyed_output(CoolPropLibrary.iT_freeze)
            if math.isfinite(freezing) and freezing > 100.0:  # some fits leave it out and return rubbish near zero
                T_min = max(T_min, freezing)
        if T_min >= T_max:
            raise StateOutOfRange(
                f"{self.name} is solid in the whole range that its model covers.", hint="Take a smaller mass fraction."
            )
        self.limits = Limits(T_min=T_min, T_max=T_max, p_min=LOWEST_PRESSURE, p_max=HIGHEST_PRESSURE)
        self.provenance = Provenance(
            model="incompressible liquid, fitted rho(T) and cp(T)",
            citation=CITATION,
            reference_state="h = 0 and s = 0 at 20 degC and 101.325 kPa, at each composition",
        )
        self._boils = self._vapour_pressure(T_max) is not None
        self._transport = (
            handle.keyed_output(CoolPropLibrary.iconductivity) > 0.0 if mass_fraction is not None else True
        )

    def _handle(self) -> Any:
        """This thread's own state of the library: shared between threads it returns wrong numbers."""
        handle = getattr(self._threads, "handle", None)
        if handle is None:
            handle = CoolPropLibrary.AbstractState("INCOMP", self._code)
            if self._mass_fraction is not None:
                handle.set_mass_fractions([self._mass_fraction])
            self._threads.handle = handle
        return handle

    def saturation(self, *, p: float | None = None, T: float | None = None) -> float | None:
        """Boiling pressure [Pa] at T [K], or boiling temperature [K] at p [Pa]; None where the fit has none."""
        if T is not None:
            return self._vapour_pressure(T)
        if p is None:
            return None
        low, high = self._boiling_range()
        if low is None or high is None:
            return None
        return root_in_bracket(lambda t: math.log((self._vapour_pressure(t) or math.nan) / p), low, high)

    def _vapour_pressure(self, T: float) -> float | None:
        handle = self._handle()
        try:
            handle.update(CoolProp.QT_INPUTS, 0.0, T)
            pressure = float(handle.p())
        except ValueError:
            return None
        return pressure if math.isfinite(pressure) and pressure > 0.0 else None

    def _boiling_range(self) -> tuple[float | None, float | None]:
        low, high = self.limits.T_min, self.limits.T_max
        if not self._boils:
            return None, None
        for part in range(20):  # the fit of the vapour pressure starts somewhere above T_min
            T = low + (high - low) * part / 20.0
            if self._vapour_pressure(T) is not None:
                return T, high
        return None, None

    def bounds(self, name: str) -> tuple[float, float]:
        """Search bounds [SI] for one property, from the limits of the model."""
        limits = self.limits
        if name == "T":
            return limits.T_min, limits.T_max
        if name == "p":
            return LOWEST_PRESSURE, HIGHEST_PRESSURE
        ends = [
            self.evaluate((HIGHEST_PRESSURE if p else self._above_boiling(T), T), (name,))[name]
            for T in (limits.T_min, limits.T_max)
            for p in (0, 1)
        ]
        return min(ends), max(ends)

    def _above_boiling(self, T: float) -> float:
        return 1.001 * max(self._vapour_pressure(T) or 0.0, LOWEST_PRESSURE)

    def point(self, inputs: Sequence[str], values: Sequence[float]) -> Point:
        """(p, T) [Pa, K] of a state; see the base class."""
        self.require_finite(inputs, values)
        given = dict(zip(inputs, values, strict=True))
        if "p" not in given or len(given) != 2:
            raise self.unsupported(inputs)
        p = given.pop("p")
        self._check_pressure(p)
        ((name, value),) = given.items()
        if name == "T":
            T = value
        elif name in ("h", "s", "u"):
            T = self._temperature_of(p, name, value)
        elif name in ("rho", "v"):
            T = self._temperature_of_density(p, value if name == "rho" else 1.0 / value)
        else:
            raise self.unsupported(inputs)
        self._check_temperature(p, T)
        return p, T

    def _check_pressure(self, p: float) -> None:
        if not LOWEST_PRESSURE <= p <= HIGHEST_PRESSURE:
            raise self.outside("p", p, LOWEST_PRESSURE, HIGHEST_PRESSURE)

    def _check_temperature(self, p: float, T: float) -> None:
        limits = self.limits
        if not limits.T_min <= T <= limits.T_max:
            hint = (
                "The lower end is the freezing point, where that is known." if self._mass_fraction is not None else ""
            )
            raise self.outside("T", T, limits.T_min, limits.T_max, hint)
        boiling = self._vapour_pressure(T) if self._boils else None
        if boiling is not None and p < boiling:
            raise refusal(
                StateOutOfRange,
                f"{literal(self.name)} would boil: at {{0}} its vapour pressure is {{1}}, above the pressure of {{2}}.",
                ("T", T),
                ("p", boiling),
                ("p", p),
                hint="The model covers the liquid only: raise the pressure or lower the temperature.",
                of="p",
            )

    def _temperature_of(self, p: float, name: str, value: float) -> float:
        low, high = self.limits.T_min, self.limits.T_max
        handle = self._handle()
        top = HIGHEST_PRESSURE  # the library refuses to evaluate below the vapour pressure; h, s, u are linear in p

        def residual(T: float) -> tuple[float, float]:
            found = self._at(handle, p, T, top)
            slope = found["cp"] / T if name == "s" else found["cp"]
            return found[name] - value, slope

        at_low, at_high = residual(low)[0], residual(high)[0]
        if at_low > 0.0 or at_high < 0.0:
            hint = "Enthalpy and entropy are counted from 20 degC." if name != "u" else ""
            raise self.outside(name, value, value + at_low, value + at_high, hint)
        guess = low + (high - low) * (-at_low) / (at_high - at_low)
        return newton_in_bracket(residual, low, high, guess, scale=max(abs(value), at_high - at_low))

    def _temperature_of_density(self, p: float, rho: float) -> float:
        low, high = self.limits.T_min, self.limits.T_max
        handle = self._handle()
        top = HIGHEST_PRESSURE
        T = root_in_bracket(lambda t: self._at(handle, p, t, top)["rho"] - rho, low, high)
        if T is None:
            ends = [self._at(handle, p, t, top)["rho"] for t in (low, high)]
            hint = "The density of a liquid says little of its temperature: give T instead."
            raise self.outside("rho", rho, min(ends), max(ends), hint)
        return T

    def _at(self, handle: Any, p: float, T: float, at: float) -> dict[str, float]:
        """h, s, u, rho, cp [SI] at (p, T), evaluated at the pressure `at` and carried to p: exact, as v = v(T)."""
        handle.update(CoolProp.PT_INPUTS, at, T)
        rho, cp, h, s = handle.rhomass(), handle.cpmass(), handle.hmass(), handle.smass()
        if p != at:
            handle.update(CoolProp.PT_INPUTS, 2.0 * at, T)
            h += (handle.hmass() - h) / at * (p - at)
            s += (handle.smass() - s) / at * (p - at)
        return {"h": h, "s": s, "u": h - p / rho, "rho": rho, "cp": cp}

    def evaluate(self, point: Point, wanted: Collection[str]) -> dict[str, float]:
        """Properties [SI] at (p, T); viscosity [Pa s], conductivity [W/(m K)] where the fit has them."""
        p, T = point
        handle = self._handle()
        try:
            handle.update(CoolProp.PT_INPUTS, p, T)
        except ValueError as exc:
            raise self._no_state(p, T) from exc
        rho, h = handle.rhomass(), handle.hmass()
        found = {"p": p, "T": T, "h": h, "s": handle.smass(), "u": h - p / rho, "rho": rho, "v": 1.0 / rho}
        found["cp"] = handle.cpmass()
        if not all(map(math.isfinite, found.values())):
            raise self._no_state(p, T)
        found["x"] = math.nan
        for name in wanted:
            if name not in found:
                found[name] = self._extra(handle, name)
        return found

    def _no_state(self, p: float, T: float) -> StateOutOfRange:
        return refusal(StateOutOfRange, f"{literal(self.name)} has no state at {{0}} and {{1}}.", ("p", p), ("T", T))

    def _extra(self, handle: Any, name: str) -> float:
        if name not in self.extras or not self._transport:
            raise StateAmbiguous(f"{self.name} has no property {name}.")
        return float(handle.viscosity() if name == "viscosity" else handle.conductivity())


def build(spec: FluidSpec) -> IncompressibleLiquid:
    """The liquid that a specification names (kind "brine": name, and mass_fraction [kg/kg] for a solution).

    Raises UnknownFluid for a name that is not on the list, a mass fraction that is missing, too much or out of range.
    """
    name = spec.name or ""
    code = incompressible_names.code_of(name)
    if code is None:
        near = get_close_matches(name[:40], incompressible_names.names(), n=3, cutoff=0.4)
        raise UnknownFluid(
            f"There is no brine or heat-transfer liquid named {name[:40]!r}.",
            hint=f"Did you mean {', '.join(near)}?" if near else "GET /v1/fluids lists the names.",
        )
    if code in incompressible_names.PURE:
        if spec.mass_fraction is not None:
            raise UnknownFluid(f"{code} has one composition only.", hint="Leave mass_fraction out.")
        return IncompressibleLiquid(code, None)
    what = incompressible_names.SOLUTIONS[code]
    low, high = mass_fraction_range(code)
    if spec.mass_fraction is None or not low <= spec.mass_fraction <= high:
        given = "is missing" if spec.mass_fraction is None else f"= {spec.mass_fraction:g} is out of range"
        raise UnknownFluid(
            f"{code} ({what}): its mass_fraction {given}.", hint=f"Give a mass_fraction between {low:g} and {high:g}."
        )
    return IncompressibleLiquid(code, spec.mass_fraction)


def mass_fraction_range(code: str) -> tuple[float, float]:
    """Smallest and largest mass fraction [kg/kg] that the fit of a solution covers."""
    handle = CoolPropLibrary.AbstractState("INCOMP", code)
    low = handle.keyed_output(CoolPropLibrary.ifraction_min)
    high = handle.keyed_output(CoolPropLibrary.ifraction_max)
    return float(low), float(high)
