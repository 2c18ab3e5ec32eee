"""The range of a Helmholtz equation of state, measured once on the property library itself."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import CoolProp

from service.fluids.melting import MeltingLine, melting_temperature
from service.fluids.protocol import Limits

Range = tuple[float, float]

LOWEST_PRESSURE = 1e-6  # [Pa] any gas is ideal far above it
SPARE = 0.02  # how much wider than what was measured the spans are, relative


@dataclass(frozen=True, slots=True)
class Measured:
    """limits; spans: property → range [SI] of all states; line: T and p of the saturation line."""

    limits: Limits
    spans: Mapping[str, Range]
    line: Mapping[str, Range]
    melting: MeltingLine
    p_critical: float
    T_critical: float
    rho_critical: float
    extras: tuple[str, ...]


def measure(backend: Any) -> Measured:
    """Limits and spans of the fluid of a state object, which is moved about."""
    T_min, T_max, p_max = float(backend.Tmin()), float(backend.Tmax()), float(backend.pmax())
    T_critical, p_critical = float(backend.T_critical()), float(backend.p_critical())
    T_triple = float(backend.Ttriple())
    low = max(T_triple, T_min)
    p_triple, p_top = _ends_of_line(backend, low, T_critical, p_critical)
    melting = MeltingLine(backend, T_min, p_triple, p_max)
    limits = Limits(
        T_min=T_min, T_max=T_max, p_max=p_max, p_min=0.0,
        T_triple=T_triple, p_triple=p_triple, T_critical=T_critical, p_critical=p_critical,
    )  # fmt: skip
    spans = _spans(backend, limits, melting.known)
    spans["T"] = (melting.lowest, T_max * (1 + 1e-12))
    spans["p"] = (min(LOWEST_PRESSURE, 0.5 * p_triple), p_max * (1 + 1e-12))
    return Measured(
        limits=limits, spans=spans, line={"p": (p_triple, p_top), "T": (low, T_critical)},
        melting=melting,
        p_critical=p_critical, T_critical=T_critical, rho_critical=float(backend.rhomass_critical()),
        extras=("cp", "cv", "speed_of_sound", *_transport(backend, T_critical)),
    )  # fmt: skip


def _ends_of_line(backend: Any, low: float, T_critical: float, p_critical: float) -> Range:
    lowest = []
    for x in (0.0, 1.0):  # they differ for a blend
        backend.update(CoolProp.QT_INPUTS, x, low)
        lowest.append(float(backend.p()))
    try:
        backend.update(CoolProp.QT_INPUTS, 0.0, T_critical)
        top = min(float(backend.p()), p_critical)
    except ValueError:
        top = p_critical
    for part in (1.0, 1 - 1e-9, 1 - 1e-6, 0.999, 0.99, 0.97, 0.95, 0.9):  # some blends end before their critical point
        if _boils(backend, part * top):
            return max(lowest), part * top
    return max(lowest), 0.85 * top


def _boils(backend: Any, p: float) -> bool:
    try:
        for x in (0.0, 1.0):
            backend.update(CoolProp.PQ_INPUTS, p, x)
            if not math.isfinite(backend.T() + backend.hmass() + backend.rhomass()):
                return False
    except ValueError:
        return False
    return True


def _corners(backend: Any, limits: Limits) -> Iterator[None]:
    """Moves the state object to the outermost states, one after another."""
    low = max(limits.T_min, limits.T_triple or 0.0)
    coldest = 1.0001 * max(limits.T_min, melting_temperature(backend, limits.p_max) or 0.0)
    places = [
        (CoolProp.QT_INPUTS, 0.0, low),
        (CoolProp.QT_INPUTS, 1.0, low),
        *((CoolProp.PT_INPUTS, p, T) for p in (LOWEST_PRESSURE, 1e5, limits.p_max) for T in (coldest, limits.T_max)),
        (CoolProp.PT_INPUTS, LOWEST_PRESSURE, 1.0001 * low),
    ]
    for pair, first, second in places:
        try:
            backend.update(pair, first, second)
        except ValueError:
            continue
        yield


def _spans(backend: Any, limits: Limits, melting: bool) -> dict[str, Range]:
    seen: dict[str, list[float]] = {"h": [], "s": [], "u": [], "rho": []}
    for _ in _corners(backend, limits):
        for name, value in (
            ("h", backend.hmass()), ("s", backend.smass()), ("u", backend.umass()), ("rho", backend.rhomass()),
        ):  # fmt: skip
            if math.isfinite(value):
                seen[name].append(value)
    spans = {}
    for name, values in seen.items():
        low, high = min(values), max(values)
        spare = SPARE * (high - low)
        spans[name] = (low - spare, high + spare)
    densest = spans["rho"][1] * (1.5 if melting else 2.0)
    spans["rho"] = (1e-15, densest)
    spans["v"] = (1.0 / densest, 1e15)
    return spans


def _transport(backend: Any, T_critical: float) -> Iterator[str]:
    for name in ("viscosity", "conductivity"):
        for x in (0.0, 1.0):
            try:
                backend.update(CoolProp.QT_INPUTS, x, 0.8 * T_critical)
                value = getattr(backend, name)()
            except ValueError:
                continue
            if math.isfinite(value) and value > 0.0:
                yield name
                break
