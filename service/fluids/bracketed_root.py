"""Roots of smooth functions of one variable inside a bracket, with few calls.

Newton's steps where they stay inside the bracket, bisection where they do not: W. H. Press et al., Numerical Recipes,
3rd edition, section 9.4 (the idea; value from memory).
"""

from __future__ import annotations

import math
from collections.abc import Callable

from scipy.optimize import toms748

from service.errors import NotConverged

RELATIVE = 1e-13


def newton_in_bracket(
    step: Callable[[float], tuple[float, float]],
    low: float,
    high: float,
    start: float,
    scale: float,
    exact: bool = True,
) -> float:
    """x in [low, high] where a rising residual is zero.

    step(x) returns (residual, its slope); scale is the size of the residual below which it counts as zero relative to
    RELATIVE. exact: the slope is the derivative; where it is only about right (False), it serves for the first step and
    secants follow. Raises NotConverged after 60 calls.
    """
    x = min(max(start, low), high)
    settled = 1e-9 if exact else 1e-12  # Newton's next error is the square of the step, a secant's nearly so
    before: tuple[float, float] | None = None
    for _ in range(60):
        residual, slope = step(x)
        if residual > 0.0:
            high = x
        else:
            low = x
        if not exact and before is not None and before[0] != x:
            secant = (residual - before[1]) / (x - before[0])
            slope = secant if secant > 0.0 else slope
        before = x, residual
        move = -residual / slope if slope > 0.0 else math.nan
        new = x + move
        if not low <= new <= high:
            new = 0.5 * (low + high)
        if abs(residual) <= RELATIVE * scale or abs(new - x) <= 4e-16 * abs(x):
            return new if low <= new <= high else x
        if abs(move) < settled * abs(x):
            return new
        x = new
    raise NotConverged("A property of state did not converge.")


def root_in_bracket(function: Callable[[float], float], low: float, high: float) -> float | None:
    """x in [low, high] where the function changes sign, None where it has the same sign at both ends [x in SI].

    Algorithm 748 of G. Alefeld, F. Potra and Y. Shi (1995), as scipy has it.
    """
    at_low, at_high = function(low), function(high)
    if at_low == 0.0:
        return low
    if at_high == 0.0:
        return high
    if not (math.isfinite(at_low) and math.isfinite(at_high)) or (at_low > 0.0) == (at_high > 0.0):
        return None
    return float(toms748(function, low, high, xtol=1e-300, rtol=1e-14, maxiter=100))
