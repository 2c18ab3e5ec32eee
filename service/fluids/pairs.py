"""Which two known properties to start a state from, and phases in our own words."""

from __future__ import annotations

from collections.abc import Collection, Iterable

Pair = tuple[str, str]

PREFERENCE: tuple[Pair, ...] = (
    ("p", "x"), ("T", "x"),
    ("p", "h"), ("p", "s"), ("p", "u"),
    ("p", "superheat"), ("p", "subcooling"), ("T", "superheat"), ("T", "subcooling"),
    ("p", "T"),
    ("rho", "u"), ("v", "u"), ("rho", "h"), ("v", "h"), ("rho", "s"), ("v", "s"),
    ("T", "rho"), ("T", "v"), ("p", "rho"), ("p", "v"),
    ("T", "s"), ("T", "u"), ("T", "h"),
    ("h", "s"), ("s", "u"), ("h", "u"),
    ("x", "rho"), ("x", "v"), ("x", "s"), ("x", "h"), ("x", "u"),
)  # fmt: skip
"""Pairs that fix a state of a fluid that evaporates, the best conditioned and quickest first.

(p, h) goes before (p, T), which says nothing in the wet region.
"""


def choose(known: Collection[str], pairs: Iterable[Pair]) -> Pair | None:
    """The first pair that is known, None where there is none."""
    have = known if isinstance(known, (set, frozenset)) else set(known)
    return next((pair for pair in pairs if pair[0] in have and pair[1] in have), None)


def phase_of(
    p: float, T: float, rho: float, x: float, p_critical: float, T_critical: float, rho_critical: float
) -> str:
    """The phase by our own words; x [-] is NaN in a single phase.

    liquid (also saturated, and compressed above the critical pressure), two_phase, vapour (also saturated), gas (above
    the critical temperature), supercritical (above both).
    """
    if x == x:
        return "two_phase" if 0.0 < x < 1.0 else ("liquid" if x == 0.0 else "vapour")
    if T_critical <= T:
        return "supercritical" if p >= p_critical else "gas"
    return "liquid" if p >= p_critical or rho > rho_critical else "vapour"
