"""Partial derivatives of one property by another from slopes at a common base point.

d(of)/d(inputs) = J(of) J(inputs)^-1,  J(y) = dy/d(base), two base coordinates
"""

from __future__ import annotations

import math
from collections.abc import Callable, Collection, Mapping, Sequence

from service.errors import StateAmbiguous

Slope = tuple[float, float]


def combine(
    slopes: Mapping[str, Slope], inputs: Sequence[str], of: Sequence[str], name: str
) -> dict[str, tuple[float, ...]]:
    """d(of)/d(inputs) of each property. Raises StateAmbiguous where the inputs are not independent."""
    (a1, a2), (b1, b2) = slopes[inputs[0]], slopes[inputs[1]]
    determinant = a1 * b2 - a2 * b1
    size = math.hypot(a1 * b2, a2 * b1)
    if not abs(determinant) > 1e-13 * size:
        raise StateAmbiguous(
            f"{inputs[0]} and {inputs[1]} of {name} do not vary independently here.",
            hint="Fix the state by another pair of properties.",
        )
    out: dict[str, tuple[float, ...]] = {}
    for wanted in of:
        y1, y2 = slopes[wanted]
        out[wanted] = ((y1 * b2 - y2 * b1) / determinant, (y2 * a1 - y1 * a2) / determinant)
    return out


def wet_by_differences(
    values: Callable[[float, float], Mapping[str, float]], p: float, x: float, names: Collection[str]
) -> dict[str, Slope]:
    """d(name)/d(p, x) of a wet state at p [Pa], x [-] by central differences, one-sided at x = 0 and x = 1."""
    step = 1e-5 * p
    low, high = max(x - 1e-3, 0.0), min(x + 1e-3, 1.0)
    below, above, dry, moist = values(p - step, x), values(p + step, x), values(p, high), values(p, low)
    out = {
        name: ((above[name] - below[name]) / (2.0 * step), (dry[name] - moist[name]) / (high - low)) for name in names
    }
    return out | {"p": (1.0, 0.0), "x": (0.0, 1.0)}
