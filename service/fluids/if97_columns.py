"""Columns of water by IF97 through the library's own column calls, which are right for (p, T) and start (p, h)."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from typing import Any

import CoolProp
import CoolProp.CoolProp as CoolPropLibrary
import numpy as np
import numpy.typing as npt

from service.errors import CaseError
from service.fluids.columns import as_columns, first_of_each, spread
from service.fluids.if97_limits import (
    HOT,
    HOT_PRESSURE,
    P_CRITICAL,
    P_MAX,
    P_MIN,
    SPANS,
    T_MAX,
    T_MIN,
    boiling_temperature,
)  # fmt: skip
from service.fluids.protocol import Column, State

Scalar = Callable[[tuple[str, ...], tuple[float, ...], tuple[str, ...]], State]
Results = tuple[dict[str, Column], dict[int, CaseError]]
Flags = npt.NDArray[np.bool_]

KEYS = {
    "h": CoolPropLibrary.iHmass, "s": CoolPropLibrary.iSmass, "u": CoolPropLibrary.iUmass,
    "rho": CoolPropLibrary.iDmass, "cp": CoolPropLibrary.iCpmass, "speed_of_sound": CoolPropLibrary.ispeed_sound,
}  # fmt: skip
IN_COLUMNS = frozenset(("p", "T", "h", "s", "u", "rho", "v", "x"))
ROOMY = 1e-6  # relative distance in T from boiling, within which rows are looked at singly
SETTLED = 1e-7  # relative size of the second Newton step, above which a row is looked at singly


def _call(backend: Any, pair: Any, first: Column, second: Column, keys: Sequence[Any]) -> tuple[Column, Flags]:
    """(outputs by row and key, rows that the library accepted)."""
    out = np.full((len(first), len(keys)), math.nan)
    status = np.zeros(len(first), dtype=np.int32)
    if len(first):
        outputs = np.array([int(key) for key in keys], dtype=np.int32)
        backend.fast_evaluate(pair, first, second, outputs, out, status)
    return out, status == 0


def _point(backend: Any, p: Column, T: Column, wanted: Sequence[str]) -> tuple[dict[str, Column], Flags]:
    """Properties of single-phase rows at p [Pa], T [K], and which rows are good."""
    read = tuple(dict.fromkeys("rho" if name == "v" else name for name in wanted if name not in ("p", "T", "x")))
    found: dict[str, Column] = {"p": p, "T": T, "x": np.full(len(p), math.nan)}
    good = np.ones(len(p), dtype=bool)
    if read:
        out, good = _call(backend, CoolProp.PT_INPUTS, p, T, [KEYS[name] for name in read])
        for place, name in enumerate(read):
            found[name] = out[:, place].copy()
            good = good & np.isfinite(found[name])
    if "v" in wanted:
        found["v"] = 1.0 / found["rho"]
    # what goes out must not be what came in
    return {name: found[name].copy() if name in ("p", "T") else found[name] for name in wanted}, good


def _in_range(p: Column, T: Column) -> Flags:
    inside: Flags = (p >= P_MIN) & (p <= P_MAX) & (T >= T_MIN) & (T <= T_MAX) & ~((T > HOT) & (p > HOT_PRESSURE))
    return inside


def _near_boiling(p: Column, T: Column) -> Flags:
    boiling = boiling_temperature(np.clip(p, P_MIN, P_CRITICAL))
    near: Flags = (p < P_CRITICAL) & (np.abs(T - boiling) <= ROOMY * boiling)
    return near


def point_columns(
    backend: Any, scalar: Scalar, inputs: tuple[str, ...], values: Sequence[Column], wanted: tuple[str, ...]
) -> Results:
    """From (p, T)."""
    given = dict(zip(inputs, as_columns(values), strict=True))
    p, T = given["p"], given["T"]
    with np.errstate(invalid="ignore"):
        doubtful = ~_in_range(p, T) | _near_boiling(p, T)
    clean = ~doubtful
    if clean.all():
        found, good = _point(backend, p, T, wanted)
    else:  # a row outside of the range makes the library dwell on it
        found, good = _point(backend, np.where(clean, p, 1e5), np.where(clean, T, 300.0), wanted)
    return _singly(scalar, inputs, given, found, doubtful | ~good)


def pressure_enthalpy_columns(
    backend: Any, scalar: Scalar, inputs: tuple[str, ...], values: Sequence[Column], wanted: tuple[str, ...]
) -> Results:
    """From (p, h): backward equations, then two of Newton's steps on the forward ones."""
    columns = as_columns(values)
    rows, belongs = first_of_each(columns)
    given = {name: column[rows] for name, column in zip(inputs, columns, strict=True)}
    p, h = given["p"], given["h"]
    low, high = SPANS["h"]
    with np.errstate(invalid="ignore"):
        inside = (p >= P_MIN) & (p <= P_MAX) & (h >= low) & (h <= high)
    start, good = _call(
        backend, CoolProp.HmassP_INPUTS, np.where(inside, h, 1e5), np.where(inside, p, 1e5),
        [CoolPropLibrary.iT, CoolPropLibrary.iQ],
    )  # fmt: skip
    T, x = start[:, 0].copy(), start[:, 1].copy()
    with np.errstate(invalid="ignore"):
        wet = (x >= 0.0) & (x <= 1.0)
        settled = inside & good & ~wet
        moved = np.zeros(len(p))
        for _ in range(2):
            T, moved, stepped = _newton(backend, p, h, T, settled)
            settled &= stepped
        settled &= (np.abs(moved) <= SETTLED * T) & ~_near_boiling(p, T) & _in_range(p, T)
    found, sound = _point(backend, np.where(settled, p, 1e5), np.where(settled, T, 300.0), wanted)
    if "h" in wanted:
        found["h"] = h.copy()
    out, errors = _singly(scalar, inputs, given, found, ~(settled & sound))
    return spread(out, errors, belongs)


def _newton(backend: Any, p: Column, h: Column, T: Column, live: Flags) -> tuple[Column, Column, Flags]:
    """(T after one step, the step, rows that the library accepted)."""
    out, good = _call(
        backend, CoolProp.PT_INPUTS, np.where(live, p, 1e5), np.where(live, T, 300.0),
        [CoolPropLibrary.iHmass, CoolPropLibrary.iCpmass],
    )  # fmt: skip
    moved = (h - out[:, 0]) / out[:, 1]
    return T + moved, moved, good


def _singly(
    scalar: Scalar, inputs: tuple[str, ...], given: dict[str, Column], found: dict[str, Column], doubtful: Flags
) -> Results:
    """The doubtful rows one by one: the scalar way knows what to do, or what to say."""
    errors: dict[int, CaseError] = {}
    wanted = tuple(found)
    out = {name: np.array(column) for name, column in found.items()} if doubtful.any() else found
    for row in np.flatnonzero(doubtful).tolist():
        try:
            values = scalar(inputs, tuple(float(given[name][row]) for name in inputs), wanted).values
        except CaseError as error:
            errors[row] = error
            values = {}
        for name in wanted:
            out[name][row] = values.get(name, math.nan)
    return out, errors
