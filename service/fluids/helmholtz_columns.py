"""The tight loop of a Helmholtz fluid over columns: one state object, only the outputs that are asked for."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from service.fluids.protocol import Column

if TYPE_CHECKING:
    from service.fluids.helmholtz import Route

Flags = npt.NDArray[np.bool_]
Doubt = Callable[["Route", Column, Column, Column, Column, Sequence[Column]], Flags]

OUTPUTS = {
    "p": "p", "T": "T", "h": "hmass", "s": "smass", "u": "umass", "rho": "rhomass", "x": "Q",
    "cp": "cpmass", "cv": "cvmass", "speed_of_sound": "speed_sound",
}  # fmt: skip


def run(
    backend: Any, route: Route, first: Column, second: Column, wanted: Sequence[str], doubt: Doubt
) -> tuple[dict[str, Column], list[int]]:
    """(columns of the wanted properties, rows that failed or may not be right and have to be looked at singly)."""
    with np.errstate(invalid="ignore"):
        inside = (first >= route.low_1) & (first <= route.high_1)
        inside &= (second >= route.low_2) & (second <= route.high_2)
    needed = dict.fromkeys(["T", "p", route.first, route.second])
    needed.update(dict.fromkeys("rho" if name == "v" else name for name in wanted))
    if not {"cp", "cv", "speed_of_sound"}.isdisjoint(wanted):
        needed["x"] = None
    got = _loop(backend, route, first, second, inside, tuple(needed))
    flags = doubt(route, first, second, got["T"], got["p"], (got[route.first], got[route.second])) | ~inside
    got[route.first], got[route.second] = first, second
    out = {name: _finished(name, got) for name in wanted}
    for name, column in out.items():
        if name in ("p", "T", "h", "s", "u", "rho", "v"):
            flags |= ~np.isfinite(column)
    return out, np.flatnonzero(flags).tolist()


def _loop(
    backend: Any, route: Route, first: Column, second: Column, inside: Flags, needed: tuple[str, ...]
) -> dict[str, Column]:
    size = len(first)
    got = {name: np.full(size, math.nan) for name in needed}
    sinks = [[math.nan] * size for _ in needed]
    reads = [getattr(backend, OUTPUTS[name]) for name in needed]
    work = list(zip(sinks, reads, strict=True))
    update, pair = backend.update, route.pair
    a, b = (second, first) if route.swapped else (first, second)
    for row, one, other in zip(range(size), a.tolist(), b.tolist(), strict=True):
        if not inside[row]:
            continue
        try:
            update(pair, one, other)
            for sink, read in work:
                sink[row] = read()
        except (ValueError, IndexError):  # looked at singly afterwards
            sinks[0][row] = math.nan
    for name, sink in zip(needed, sinks, strict=True):
        got[name][:] = sink
    return got


def _finished(name: str, got: dict[str, Column]) -> Column:
    if name == "v":
        return 1.0 / got["rho"]
    column = got[name]
    if name == "x":
        return np.where((column >= 0.0) & (column <= 1.0), column, math.nan)
    if name in ("cp", "cv", "speed_of_sound"):  # numbers without meaning in the wet region
        return np.where((got["x"] > 0.0) & (got["x"] < 1.0), math.nan, column)
    return column.copy() if column.base is not None or not column.flags.writeable else column
