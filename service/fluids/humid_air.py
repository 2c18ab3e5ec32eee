"""Humid air: three degrees of freedom, p and two others; h, s, u per kg of dry air, rho and v of the moist air.

Whatever two are given beside p, the state is found as (p, T, humidity_ratio); the relations are in
humid_air_relations.py. Air is never fog here: more water than saturated air can hold is refused.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Collection, Mapping, Sequence
from typing import TYPE_CHECKING

from service.errors import CaseError, StateOutOfRange
from service.fluids import humid_air_refusals as refuse
from service.fluids import humid_air_relations as air
from service.fluids.base_point import BasePointFluid, Point
from service.fluids.bracketed_root import newton_in_bracket, root_in_bracket
from service.fluids.protocol import Limits, Provenance

if TYPE_CHECKING:
    from service.fluids.protocol import FluidSpec

T_MIN, T_MAX = 173.15, 623.15  # [K]; the model itself reaches down to 130 K
P_MIN, P_MAX = 1e3, 1e7  # [Pa]

ROUNDING = 1e-9  # saturated air may exceed Ws by this part, which is rounding and no fog

W, R, B, D = "humidity_ratio", "relative_humidity", "wet_bulb", "dew_point"
_SECOND_AND_THIRD = (
    ("T", W), ("T", R), ("T", D), ("T", B), (W, "h"), (D, "h"), ("T", "h"), (R, "h"), (W, "s"), (D, "s"), (W, R),
    (W, B), (R, D), (R, B), (D, B), (B, "h"), ("T", "s"), (W, "rho"), (W, "v"), (W, "u"), ("T", "rho"), ("T", "v"),
)  # fmt: skip


class HumidAir(BasePointFluid):
    """Moist air after ASHRAE RP-1485; see the module's text."""

    name = "humid_air"
    kind = "humid_air"
    molar_mass = None
    dof = 3
    pressure_optional = False
    base = ("p", "T", W)
    basic = ("p", "T", "h", "s", "u", "rho", "v", W, R, B, D)
    extras = ("cp", "viscosity", "conductivity", "molar_mass", "mole_fraction_water")
    properties = (*basic, *extras)
    pairs = tuple(("p", *two) for two in _SECOND_AND_THIRD)
    phase = "humid_air"

    def __init__(self) -> None:
        self.limits = Limits(T_min=T_MIN, T_max=T_MAX, p_max=P_MAX, p_min=P_MIN)
        self.provenance = Provenance(
            model="real-gas mixture of dry air and water",
            citation="S. Herrmann, H.-J. Kretzschmar, D. P. Gatley: Thermodynamic properties of real moist air, "
            "dry air, steam, water, and ice (RP-1485). HVAC&R Research 15 (2009) 961-986, as in CoolProp 8",
            reference_state="per kg of dry air; dry air h = s = 0 at 0 degC and 101.325 kPa, water u = s = 0 as liquid "
            "at its triple point, the zero of water on its own",
            notes=(
                "the enthalpy of the water is shifted by -30.8 J/kg against the library, to the zero of IAPWS-95",
                "entropy is computed from h and v, as the library's own is not consistent with them",
            ),
        )

    def saturation(self, *, p: float | None = None, T: float | None = None) -> float | None:
        """None: the saturation of humid air is its dew point, which is a property of the state."""
        return None

    def bounds(self, name: str) -> tuple[float, float]:
        """Search bounds [SI] for one property."""
        fixed = {
            "p": (P_MIN, P_MAX), "T": (T_MIN, T_MAX), B: (T_MIN, T_MAX), D: (T_MIN, T_MAX), W: (0.0, air.HIGHEST_W),
            R: (0.0, 1.0),
        }  # fmt: skip
        if name in fixed:
            return fixed[name]
        corners = [(p, T, w) for p in (P_MIN, P_MAX) for T, w in ((T_MIN, 0.0), (T_MAX, 0.0), (T_MAX, 0.9))]
        corners.append((P_MIN, T_MAX, air.HIGHEST_W))
        found = [self.evaluate(corner, (name,))[name] for corner in corners]
        return min(found), max(found)

    # --- finding (p, T, W) ---------------------------------------------------------------------------------------

    def point(self, inputs: Sequence[str], values: Sequence[float]) -> Point:
        """(p, T, W) [Pa, K, kg/kg] of a state; see the base class."""
        self.require_finite(inputs, values)
        given = dict(zip(inputs, values, strict=True))
        if "p" not in given or len(given) != 3:
            raise self.unsupported(inputs)
        p = given.pop("p")
        if not P_MIN <= p <= P_MAX:
            raise self.outside("p", p, P_MIN, P_MAX)
        self._check_given(given)
        T, w = self._find(p, given, inputs)
        self._check(p, T, w)
        ice_bulb = dict(zip(inputs, values, strict=True)).get(B, math.inf)
        if ice_bulb < min(T, air.T_TRIPLE) and not abs(air.wet_bulb(p, T, w) - ice_bulb) < 1e-6 * ice_bulb:
            # the wet bulb jumps where ice gives way to water: no air has one in between
            raise refuse.not_covered(p, ice_bulb, B)
        return p, T, w

    def _check_given(self, given: Mapping[str, float]) -> None:
        for name in ("T", B, D):
            if name in given and not T_MIN <= given[name] <= T_MAX:
                raise self.outside(name, given[name], T_MIN, T_MAX)
        if R in given and not 0.0 <= given[R] <= 1.0:
            raise self.outside(R, given[R], 0.0, 1.0, hint="60 % is 0.6, or write the unit %.")
        if W in given and not 0.0 <= given[W] <= air.HIGHEST_W:
            raise self.outside(W, given[W], 0.0, air.HIGHEST_W)
        for name in (B, D):
            if name in given and "T" in given and given[name] > given["T"]:
                raise refuse.out_of_order(name, given[name], "temperature", given["T"])
        if B in given and D in given and given[D] > given[B]:
            raise refuse.out_of_order(D, given[D], B, given[B])

    def _check(self, p: float, T: float, w: float) -> None:
        if not T_MIN <= T <= T_MAX:
            raise self.outside("T", T, T_MIN, T_MAX)
        if not 0.0 <= w <= air.HIGHEST_W:
            raise self.outside(W, w, 0.0, air.HIGHEST_W)
        highest = air.saturated(p, T)
        if w > highest * (1.0 + ROUNDING):
            raise refuse.fog(p, T, w, highest)

    def _find(self, p: float, given: dict[str, float], inputs: Sequence[str]) -> tuple[float, float]:
        if D in given:
            w = self._of_dew_point(p, given.pop(D))
            if W in given:
                raise self.unsupported(inputs)
            given[W] = w
        if "v" in given:
            given["rho"] = 1.0 / given.pop("v")
        if "T" in given:
            T = given.pop("T")
            return T, self._humidity(p, T, *next(iter(given.items())), inputs)
        if W in given:
            w = given.pop(W)
            return self._temperature(p, w, *next(iter(given.items())), inputs), w
        if given.keys() == {R, "h"}:
            return self._from_relative_humidity(
                p, given[R], lambda T, w: air.enthalpy(p, T, w) - given["h"], "h", T_MIN
            )
        if given.keys() == {R, B}:
            b = given[B]
            return self._from_relative_humidity(p, given[R], lambda T, w: self._wet_bulb_excess(p, T, w, b), B, b)
        if given.keys() == {B, "h"}:
            return self._of_wet_bulb_and_enthalpy(p, given[B], given["h"])
        raise self.unsupported(inputs)

    def _of_dew_point(self, p: float, dew_point: float) -> float:
        w = air.saturated(p, dew_point)
        if w == math.inf:
            raise refuse.more_water_than_air(p, D, dew_point, dew_point)
        return w

    def _humidity(self, p: float, T: float, name: str, value: float, inputs: Sequence[str]) -> float:
        """W [kg/kg] at p, T where one more property has its value."""
        if name == W:
            return value
        if name == R:
            w = air.at_relative_humidity(p, T, value)
            if w == math.inf:
                raise refuse.more_water_than_air(p, R, value, T)
            return w
        if name == B:
            w = air.humidity_of_wet_bulb(p, T, value)
            if w < 0.0:
                raise refuse.too_dry(p, T, value)
            return w
        highest = min(air.saturated(p, T), air.HIGHEST_W)
        if name in ("h", "s", "rho"):
            found = self._humidity_where(p, T, name, value, highest)
            if found is None:
                ends = sorted(self._one(name, p, T, w) for w in (0.0, highest))
                raise refuse.between_dry_and_saturated(p, T, name, value, ends)
            return found
        raise self.unsupported(inputs)

    def _humidity_where(self, p: float, T: float, name: str, value: float, highest: float) -> float | None:
        if name != "h":
            return root_in_bracket(lambda w: self._one(name, p, T, w) - value, 0.0, highest)
        slope = 2.5e6 + 1860.0 * (T - 273.15)  # [J/kg] of water vapour: h is all but linear in W

        def residual(w: float) -> tuple[float, float]:
            return air.enthalpy(p, T, w) - value, slope

        at_dry, at_highest = residual(0.0)[0], residual(highest)[0]
        if at_dry > 0.0 or at_highest < 0.0:
            return None
        return newton_in_bracket(residual, 0.0, highest, -at_dry / slope, scale=at_highest - at_dry, exact=False)

    @staticmethod
    def _one(name: str, p: float, T: float, w: float) -> float:
        if name == "h":
            return air.enthalpy(p, T, w)
        if name == "s":
            return air.entropy(p, T, w)
        if name == "u":
            return air.enthalpy(p, T, w) - p * air.volume(p, T, w)
        return (1.0 + w) / air.volume(p, T, w)

    def _temperature(self, p: float, w: float, name: str, value: float, inputs: Sequence[str]) -> float:
        """T [K] at p, W where one more property has its value."""
        lowest = air.dew_point(p, w, T_MIN)
        lowest = T_MIN if math.isnan(lowest) else lowest
        if name in ("h", "s", "u"):
            return self._caloric_temperature(p, w, name, value, lowest)
        if name == R:
            if value == 0.0 or w == 0.0:
                raise self.unsupported(inputs)
            high = air.hottest_at(p, value, T_MAX)
            found = root_in_bracket(lambda T: air.at_relative_humidity(p, T, value) - w, lowest, high)
        elif name == B:
            found = root_in_bracket(lambda T: self._wet_bulb_excess(p, T, w, value), max(value, lowest), T_MAX)
        elif name == "rho":
            found = root_in_bracket(lambda T: self._one("rho", p, T, w) - value, lowest, T_MAX)
        else:
            raise self.unsupported(inputs)
        if found is None:
            raise refuse.nowhere(p, (W, w), name, lowest, T_MAX)
        return found

    def _caloric_temperature(self, p: float, w: float, name: str, value: float, lowest: float) -> float:
        def residual(T: float) -> tuple[float, float]:
            cp = 1006.0 + 1860.0 * w  # [J/(kg K)] good to a few per cent, which makes the steps shrink fast
            slope = cp / T if name == "s" else cp - (287.0 + 461.5 * w if name == "u" else 0.0)
            return self._one(name, p, T, w) - value, slope

        # the very edge of saturation belongs to the state: rounding must not push it out
        low, high = max(lowest * (1.0 - 1e-9), T_MIN), T_MAX
        at_low, at_high = residual(low)[0], residual(high)[0]
        if at_low > 0.0 or at_high < 0.0:
            raise refuse.beyond(p, w, name, (value, value + at_low, value + at_high), (lowest, T_MAX))
        start = low - at_low / residual(low)[1]
        return newton_in_bracket(residual, low, high, start, scale=at_high - at_low, exact=False)

    @staticmethod
    def _wet_bulb_excess(p: float, T: float, w: float, b: float) -> float:
        """Rises with T and is zero where the wet bulb is b; the cheaper of two ways, over water and over ice."""
        return w - air.humidity_of_wet_bulb(p, T, b) if b >= air.T_TRIPLE else air.wet_bulb(p, T, w) - b

    def _from_relative_humidity(
        self, p: float, r: float, excess: Callable[[float, float], float], name: str, low: float
    ) -> tuple[float, float]:
        high = air.hottest_at(p, r, T_MAX)
        if name == B and low < air.T_TRIPLE:
            high = min(high, 340.0)  # no air of an ice bulb is hotter

        def function(T: float) -> float:
            return excess(T, air.at_relative_humidity(p, T, r))

        T = root_in_bracket(function, low, high) if low < high else None
        if T is None:
            raise refuse.nowhere(p, (R, r), name, low, high)
        return T, air.at_relative_humidity(p, T, r)

    def _of_wet_bulb_and_enthalpy(self, p: float, b: float, h: float) -> tuple[float, float]:
        """Nearly parallel lines: adiabatic saturation gives W in closed form, as badly conditioned as the data are."""
        if b < air.T_TRIPLE:
            raise StateOutOfRange(
                "Humid air: wet bulb with h is not solved over ice.", hint="Give T or relative_humidity."
            )
        highest = air.saturated(p, b)
        if highest == math.inf:
            raise refuse.not_covered(p, b, B)
        h_water = air.liquid_water(p, b)
        w = highest + (h - air.enthalpy(p, b, highest)) / h_water if h_water > 1.0 else -1.0
        if not 0.0 <= w <= highest * (1.0 + ROUNDING):
            raise refuse.wet_bulb_with_enthalpy(h, b)
        return self._temperature(p, w, "h", h, (B, "h")), w

    # --- evaluating ----------------------------------------------------------------------------------------------

    def evaluate(self, point: Point, wanted: Collection[str]) -> dict[str, float]:
        """The wanted properties [SI] at (p, T, W); NaN for the dew point of dry air and a wet bulb beyond the model."""
        p, T, w = point
        found = {"p": p, "T": T, W: w}
        volume = air.volume(p, T, w)
        if "h" in wanted or "u" in wanted:
            found["h"] = air.enthalpy(p, T, w)
            found["u"] = found["h"] - p * volume
        if "s" in wanted:
            found["s"] = air.entropy(p, T, w)
        found["rho"] = (1.0 + w) / volume
        found["v"] = volume / (1.0 + w)
        for name in wanted:
            if name not in found:
                found[name] = self._derived(name, p, T, w)
        return found

    def _derived(self, name: str, p: float, T: float, w: float) -> float:
        if name == R:
            highest = air.saturated(p, T)
            return 1.0 if w >= highest * (1.0 - 1e-12) else air.library("R", T, p, "W", w)
        if name == B:
            return air.wet_bulb(p, T, w)
        if name == D:
            return T if w >= air.saturated(p, T) * (1.0 - 1e-12) else air.dew_point(p, w, T_MIN)
        if name == "molar_mass":
            return air.amounts(w)[2]
        if name == "mole_fraction_water":
            return air.amounts(w)[0]
        outputs = {"cp": "cp", "viscosity": "mu", "conductivity": "k"}
        if name not in outputs:
            raise self.unsupported((name,))
        return air.library(outputs[name], T, p, "W", w)

    def _inside(self, point: Point, names: Sequence[str]) -> dict[str, float] | None:
        """Slopes of smooth properties are taken across the saturation line, where the model goes on smoothly."""
        if set(names) <= {"h", "s", "u", "rho", "v"} and point[2] >= 0.0 and T_MIN <= point[1] <= T_MAX:
            try:
                return self.evaluate(point, names)
            except CaseError:
                return None
        return super()._inside(point, names)


def build(spec: FluidSpec) -> HumidAir:
    """Humid air; a specification of kind "humid_air" says nothing more."""
    return HumidAir()
