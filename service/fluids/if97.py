"""Water and steam by the industrial formulation IAPWS-IF97, quick enough for long columns of readings.

The library's (p, h) and (p, s) use the formulation's backward equations, which miss the forward ones by up to 25 mK
(IAPWS R7-97(2012), section 5.2.1); what is given in T would not come back from h. Here they are only the start of
Newton's steps on the forward equations.
"""

from __future__ import annotations

import math
import threading
from collections.abc import Callable, Collection, Mapping, Sequence

import CoolProp
import CoolProp.CoolProp as CoolPropLibrary

from service.errors import CaseError, NotConverged, StateAmbiguous, StateOutOfRange
from service.fluids.citations import IF97
from service.fluids.columns import by_rows
from service.fluids.handles import Handle
from service.fluids.if97_columns import IN_COLUMNS, point_columns, pressure_enthalpy_columns
from service.fluids.if97_limits import (
    HOT,
    HOT_PRESSURE,
    P_CRITICAL,
    P_MAX,
    P_MIN,
    RHO_CRITICAL,
    SPANS,
    T_CRITICAL,
    T_MAX,
    T_MIN,
)  # fmt: skip
from service.fluids.pairs import phase_of
from service.fluids.protocol import Column, Limits, Provenance, State
from service.fluids.refusals import refusal
from service.fluids.roots import at_pressure
from service.fluids.slopes import Slope, wet_by_differences
from service.fluids.two_phase_fluid import BASIC, TwoPhaseFluid

ON_THE_LINE = 1e-7  # relative distance in T from boiling, within which (p, T) does not fix a state (0.04 mK)
EXTRAS = {"cp": "cpmass", "cv": "cvmass", "speed_of_sound": "speed_sound", "viscosity": "viscosity",
          "conductivity": "conductivity"}  # fmt: skip
Values = dict[str, float]


class IF97Water(TwoPhaseFluid):
    """Water: 0 to 800 degC up to 1000 bar, to 2000 degC up to 500 bar."""

    name = "water"
    properties = (*BASIC, "superheat", "subcooling", *EXTRAS)
    limits = Limits(
        T_min=T_MIN, T_max=T_MAX, p_max=P_MAX, p_min=P_MIN, T_triple=273.16, p_triple=611.657,
        T_critical=T_CRITICAL, p_critical=P_CRITICAL,
    )  # fmt: skip
    spans = SPANS
    provenance = Provenance(
        model="IAPWS-IF97 industrial formulation",
        citation=IF97,
        reference_state="u = 0 and s = 0 in the saturated liquid at the triple point (273.16 K); h = 0.611 J/kg there",
    )

    def __init__(self) -> None:
        self._threads = threading.local()
        self.molar_mass = float(self._handle().backend.molar_mass())
        self._routes: dict[tuple[str, ...], Callable[[float, float], Values]] = {
            ("p", "T"): self._p_T, ("T", "p"): lambda T, p: self._p_T(p, T),
            ("p", "h"): self._p_h, ("h", "p"): lambda h, p: self._p_h(p, h),
            ("p", "s"): self._p_s, ("s", "p"): lambda s, p: self._p_s(p, s),
            ("p", "x"): self._p_x, ("x", "p"): lambda x, p: self._p_x(p, x),
            ("T", "x"): self._T_x, ("x", "T"): lambda x, T: self._T_x(T, x),
        }  # fmt: skip

    def _handle(self) -> Handle:
        try:
            return self._threads.handle  # type: ignore[no-any-return]
        except AttributeError:
            handle = Handle(CoolPropLibrary.AbstractState("IF97", "Water"))
            self._threads.handle = handle
            return handle

    # -- states ------------------------------------------------------------------------------------------------------

    def state(self, inputs: Sequence[str], values: Sequence[float], extras: Sequence[str] = ()) -> State:
        """The whole state [SI] from two properties. Raises StateOutOfRange, StateAmbiguous."""
        inputs = inputs if type(inputs) is tuple else tuple(inputs)
        route = self._routes.get(inputs)
        if route is None:
            return self.indirect_state(inputs, values, extras)
        a, b = values
        try:
            found = route(a, b)
        except (ValueError, IndexError) as exc:
            raise self._not_found(dict(zip(inputs, values, strict=True))) from exc
        # what was given is what the state says, to the last bit
        found[inputs[0]], found[inputs[1]] = a, b
        if extras:
            self._add(found, extras)
        p, T, rho, x = found["p"], found["T"], found["rho"], found["x"]
        return State(found, phase_of(p, T, rho, x, P_CRITICAL, T_CRITICAL, RHO_CRITICAL))

    def _p_T(self, p: float, T: float) -> Values:
        if not (P_MIN <= p <= P_MAX and T_MIN <= T <= T_MAX):
            raise self._outside({"p": p, "T": T})
        if T > HOT and p > HOT_PRESSURE:
            raise self._too_hot(p, T)
        handle = self._handle()
        if p < P_CRITICAL:
            handle.update(CoolProp.PQ_INPUTS, p, 0.0)
            if abs(handle.T() - T) <= ON_THE_LINE * T:
                raise refusal(
                    StateAmbiguous, "water at {0} and {1} is on the saturation line: p and T do not fix its state.",
                    ("p", p), ("T", T), hint="Give x (the vapour fraction) or h in place of one of them.", of="T",
                )  # fmt: skip
        return self._single(handle, p, T)

    def _single(self, handle: Handle, p: float, T: float) -> Values:
        handle.update(CoolProp.PT_INPUTS, p, T)
        h, s, rho = handle.h(), handle.s(), handle.rho()
        v = 1.0 / rho
        if not math.isfinite(h + s + rho):
            raise ValueError("not finite")
        return {"p": p, "T": T, "h": h, "s": s, "u": h - p * v, "rho": rho, "v": v, "x": math.nan}

    def _p_x(self, p: float, x: float) -> Values:
        if not (P_MIN <= p <= P_CRITICAL and 0.0 <= x <= 1.0):
            raise self._outside({"p": p, "x": x})
        handle = self._handle()
        handle.update(CoolProp.PQ_INPUTS, p, x)
        h, s, rho = handle.h(), handle.s(), handle.rho()
        v = 1.0 / rho
        return {"p": p, "T": handle.T(), "h": h, "s": s, "u": h - p * v, "rho": rho, "v": v, "x": x}

    def _T_x(self, T: float, x: float) -> Values:
        if not (T_MIN <= T <= T_CRITICAL and 0.0 <= x <= 1.0):
            raise self._outside({"T": T, "x": x})
        handle = self._handle()
        handle.update(CoolProp.QT_INPUTS, 0.0, T)
        return self._p_x(max(handle.p(), P_MIN), x)

    def _p_h(self, p: float, h: float) -> Values:
        return self._from_p(p, "h", h)

    def _p_s(self, p: float, s: float) -> Values:
        return self._from_p(p, "s", s)

    def _from_p(self, p: float, name: str, y: float) -> Values:
        """From p and h or s: wet states straight, others by Newton's steps over T on the forward equations."""
        low, high = SPANS[name]
        if not (P_MIN <= p <= P_MAX and low <= y <= high):
            raise self._outside({"p": p, name: y})
        handle = self._handle()
        read = handle.h if name == "h" else handle.s
        update = handle.update
        coldest, hottest = T_MIN, self.hottest(p)
        boiling = None
        if p < P_CRITICAL:
            update(CoolProp.PQ_INPUTS, p, 0.0)
            liquid, boiling = read(), handle.T()
            update(CoolProp.PQ_INPUTS, p, 1.0)
            vapour = read()
            if liquid <= y <= vapour:
                return self._p_x(p, (y - liquid) / (vapour - liquid))
            coldest, hottest = (coldest, boiling) if y < liquid else (boiling, hottest)
        T = self._start(handle, p, name, y, coldest, hottest)
        slope = handle.backend.cpmass
        for _ in range(12):
            if boiling is not None and abs(T - boiling) <= ON_THE_LINE * T:
                return self._next_to_boiling(p, name, y, liquid, vapour)
            update(CoolProp.PT_INPUTS, p, T)
            rate = slope() if name == "h" else slope() / T
            step = (y - read()) / rate
            new = min(max(T + step, coldest), hottest)
            moved, T = abs(new - T), new
            if moved <= 2e-8 * T:  # the next error is its square
                break
        else:
            return self._by_bracket(p, name, y)
        if abs(step) > 1e-6 * T:  # held at an end of the range
            return self._by_bracket(p, name, y)
        return self._single(handle, p, T)

    def _start(self, handle: Handle, p: float, name: str, y: float, coldest: float, hottest: float) -> float:
        """A temperature near to the answer, by the backward equations where they reach."""
        try:
            if name == "h":
                handle.update(CoolProp.HmassP_INPUTS, y, p)
            else:
                handle.update(CoolProp.PSmass_INPUTS, p, y)
            T = float(handle.T())
        except (ValueError, IndexError):  # region 5 has none
            T = 1500.0
        inset = 1e-6 * (hottest - coldest)
        return min(max(T, coldest + inset), hottest - inset)

    def _next_to_boiling(self, p: float, name: str, y: float, liquid: float, vapour: float) -> Values:
        """A state too near to the line for a flash on (p, T): that on the line, where it is near enough."""
        low, high = SPANS[name]
        edge, x = (liquid, 0.0) if y < liquid else (vapour, 1.0)
        if abs(y - edge) > 1e-6 * (high - low):
            return self._by_bracket(p, name, y)
        found = self._p_x(p, x)
        found["x"] = math.nan
        return found

    def _by_bracket(self, p: float, name: str, y: float) -> Values:
        try:
            inputs, (a, b) = at_pressure(self, name, p, y)
        except NotConverged as exc:
            raise self._not_found({"p": p, name: y}) from exc
        return self._routes[inputs](a, b)

    def _add(self, found: Values, extras: Sequence[str]) -> None:
        p, T, x = found["p"], found["T"], found["x"]
        for name in extras:
            if name in found:
                continue
            if name in ("superheat", "subcooling"):
                found[name] = self.distance_from_boiling(name, p, T)
            elif name in EXTRAS and not 0.0 < x < 1.0:
                found[name] = self._extra(name, p, T, x)
            else:  # the library's numbers for wet steam mean nothing
                found[name] = math.nan

    def _extra(self, name: str, p: float, T: float, x: float) -> float:
        handle = self._handle()
        try:
            if x == x:
                # a hair into the single phase, where the library differentiates
                T = T * (1 - 2 * ON_THE_LINE) if x == 0.0 else T * (1 + 2 * ON_THE_LINE)
            handle.update(CoolProp.PT_INPUTS, p, T)
            value = float(getattr(handle.backend, EXTRAS[name])())
        except (ValueError, IndexError):
            return math.nan
        return value if math.isfinite(value) else math.nan

    # -- when there is no state --------------------------------------------------------------------------------------

    def _outside(self, given: Mapping[str, float]) -> CaseError:
        try:
            for name, value in given.items():
                self._require(name, value)
        except CaseError as error:
            return error
        name = "p" if "p" in given else "T"
        return self.no_saturation(name, given[name], "x")

    def _too_hot(self, p: float, T: float) -> StateOutOfRange:
        return refusal(
            StateOutOfRange, "{0} and {1} lie outside of IF97, which above {2} goes up to {3} only.",
            ("p", p), ("T", T), ("T", HOT), ("p", HOT_PRESSURE),
            hint="Choose the helmholtz model of water for hotter steam at higher pressures.", of="T",
        )  # fmt: skip

    def _not_found(self, given: Mapping[str, float]) -> StateOutOfRange:
        (first, a), (second, b) = given.items()
        return refusal(
            StateOutOfRange, f"No state of water was found with {first} = {{0}} and {second} = {{1}}.",
            (first, a), (second, b), hint="Check both values, or give another pair of properties.", of=first,
        )  # fmt: skip

    # -- limits ------------------------------------------------------------------------------------------------------

    def hottest(self, p: float) -> float:
        """Highest temperature [K] of the formulation at p [Pa]."""
        return T_MAX if p <= HOT_PRESSURE else HOT

    def highest_pressure(self, T: float) -> float:
        """Highest pressure [Pa] of the formulation at T [K]."""
        return P_MAX if T <= HOT else HOT_PRESSURE

    def saturation(self, *, p: float | None = None, T: float | None = None) -> float | None:
        """Saturation temperature [K] at p [Pa], or pressure at T; None where not defined."""
        if p is not None:
            return self.boiling(p, 1.0)
        return None if T is None else self.boiling_pressure(T, 1.0)

    def boiling(self, p: float, x: float) -> float | None:
        """Saturation temperature [K] at p [Pa]; None outside of the saturation line."""
        if not P_MIN <= p <= P_CRITICAL:
            return None
        handle = self._handle()
        handle.update(CoolProp.PQ_INPUTS, p, x)
        return float(handle.T())

    def boiling_pressure(self, T: float, x: float) -> float | None:
        """Saturation pressure [Pa] at T [K]; None outside of the saturation line."""
        if not T_MIN <= T <= T_CRITICAL:
            return None
        handle = self._handle()
        handle.update(CoolProp.QT_INPUTS, x, T)
        return max(float(handle.p()), P_MIN)

    # -- slopes ------------------------------------------------------------------------------------------------------

    def base_slopes(self, state: State, names: Collection[str]) -> Mapping[str, Slope]:
        """Slopes over (p, T) of a single phase from cp, cv and speed of sound, over (p, x) of wet steam."""
        at = state.values
        p, T = at["p"], at["T"]
        if at["x"] == at["x"]:
            slopes: dict[str, Slope] = wet_by_differences(self._p_x, p, at["x"], BASIC)
        else:
            slopes = self._single_phase_slopes(p, T, at["rho"])
        for name in names:
            if name in ("superheat", "subcooling"):
                slopes[name] = self._slope_of_degrees(name, p, slopes)
            elif name not in slopes:
                slopes[name] = (math.nan, math.nan) if at["x"] == at["x"] else self._slope_by_differences(name, p, T)
        return slopes

    def _single_phase_slopes(self, p: float, T: float, rho: float) -> dict[str, Slope]:
        """From cp, cv and w: kappa = cp / (cv rho w^2), alpha^2 = (cp - cv) kappa rho / T (exact identities)."""
        handle = self._handle()
        handle.update(CoolProp.PT_INPUTS, p, T)
        backend, v = handle.backend, 1.0 / rho
        cp, cv, w = backend.cpmass(), backend.cvmass(), backend.speed_sound()
        kappa = cp / (cv * rho * w * w)
        if T < 290.0:  # alpha passes through zero near 4 degC
            low, high = max(T - 0.01, T_MIN), T + 0.01
            alpha = (self._single(handle, p, low)["rho"] / self._single(handle, p, high)["rho"] - 1.0) / (high - low)
        else:
            alpha = math.sqrt(max(cp - cv, 0.0) * kappa * rho / T)
        return {
            "p": (1.0, 0.0), "T": (0.0, 1.0), "x": (math.nan, math.nan),
            "h": (v * (1.0 - T * alpha), cp), "s": (-v * alpha, cp / T),
            "u": (v * (p * kappa - T * alpha), cp - p * v * alpha),
            "rho": (rho * kappa, -rho * alpha), "v": (-v * kappa, v * alpha),
        }  # fmt: skip

    def _slope_of_degrees(self, name: str, p: float, slopes: Mapping[str, Slope]) -> Slope:
        step = 1e-5 * p
        below, above = self.boiling(p - step, 1.0), self.boiling(p + step, 1.0)
        if below is None or above is None:
            return math.nan, math.nan
        along, sign = (above - below) / (2.0 * step), 1.0 if name == "superheat" else -1.0
        (T1, T2), (p1, p2) = slopes["T"], slopes["p"]
        return sign * (T1 - along * p1), sign * (T2 - along * p2)

    def _slope_by_differences(self, name: str, p: float, T: float) -> Slope:
        step_p, step_T = 1e-4 * p, 1e-4 * T
        at = [self._extra(name, *place, math.nan) for place in
              ((p - step_p, T), (p + step_p, T), (p, T - step_T), (p, T + step_T))]  # fmt: skip
        return (at[1] - at[0]) / (2.0 * step_p), (at[3] - at[2]) / (2.0 * step_T)

    # -- columns -----------------------------------------------------------------------------------------------------

    def columns(
        self, inputs: tuple[str, ...], values: tuple[Column, ...], wanted: tuple[str, ...]
    ) -> tuple[dict[str, Column], dict[int, CaseError]]:
        """The wanted properties as columns [SI]; (p, T) and (p, h) by the library's own column calls."""
        if set(inputs) == {"p", "T"} and IN_COLUMNS.issuperset(wanted):
            return point_columns(self._handle().backend, self.state, inputs, values, wanted)
        if set(inputs) == {"p", "h"} and IN_COLUMNS.issuperset(wanted):
            return pressure_enthalpy_columns(self._handle().backend, self.state, inputs, values, wanted)
        return by_rows(self.state, inputs, values, wanted)
