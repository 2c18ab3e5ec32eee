"""Which pure fluids a gas mixture can be made of, and what they may be called."""

from __future__ import annotations

import math
from collections.abc import Mapping
from difflib import get_close_matches
from functools import lru_cache

import CoolProp.CoolProp as CoolPropLibrary

from service.errors import UnknownFluid

MOST_COMPONENTS = 20
SUM_TOLERANCE = 1e-6
PSEUDO_PURE = frozenset({"Air", "R404A", "R407C", "R410A", "R507A", "SES36"})
DRY_AIR = "nitrogen 0.7812, oxygen 0.2096, argon 0.0092"
"""Mole fractions of dry air. Source: E. W. Lemmon et al., J. Phys. Chem. Ref. Data 29 (2000) 331, table 3."""


@lru_cache(maxsize=1)
def _spellings() -> Mapping[str, str]:
    """Every accepted spelling (without regard to case, spaces and hyphens) -> the library's name."""
    table: dict[str, str] = {}
    fluids = CoolPropLibrary.get_global_param_string("fluids_list").split(",")
    for fluid in fluids:
        for alias in CoolPropLibrary.get_fluid_param_string(fluid, "aliases").split(","):
            if alias:
                table.setdefault(_key(alias), fluid)
    table.update({_key(fluid): fluid for fluid in fluids})
    return table


def _key(name: str) -> str:
    return name.casefold().replace(" ", "").replace("-", "").replace("_", "")


def component(name: str) -> str:
    """The property library's name for a component. Raises UnknownFluid with near spellings."""
    spellings = _spellings()
    found = spellings.get(_key(name[:60]))
    if found is None:
        near = get_close_matches(_key(name[:40]), list(spellings), n=3, cutoff=0.6)
        shown = sorted({spellings[spelling] for spelling in near})
        raise UnknownFluid(
            f"There is no component named {name[:40]!r} for a gas mixture.",
            hint=f"Did you mean {', '.join(shown)}?" if shown else "GET /v1/fluids lists the names.",
        )
    if found in PSEUDO_PURE:
        hint = f"Write dry air as {DRY_AIR}." if found == "Air" else "List its components one by one."
        raise UnknownFluid(f"{found} is a mixture itself and cannot be a component of one.", hint=hint)
    return found


def composition(mole_fractions: Mapping[str, float]) -> dict[str, float]:
    """Library name -> mole fraction [mol/mol], summing to one exactly; components at zero are left out.

    Raises UnknownFluid for a name that is not known or named twice, a fraction outside 0 to 1, or a sum that is not 1
    within 1e-6.
    """
    if not mole_fractions:
        raise UnknownFluid(
            "A gas mixture has no components.", hint="Give mole_fractions, for example N2 0.79, O2 0.21."
        )
    if len(mole_fractions) > MOST_COMPONENTS:
        raise UnknownFluid(f"A gas mixture has at most {MOST_COMPONENTS} components; here are {len(mole_fractions)}.")
    found: dict[str, float] = {}
    for name, fraction in mole_fractions.items():
        if not (math.isfinite(fraction) and 0.0 <= fraction <= 1.0):
            raise UnknownFluid(f"The mole fraction of {name[:40]} is {fraction:g}; it must lie between 0 and 1.")
        known = component(name)
        if known in found:
            raise UnknownFluid(f"{known} is named twice in a gas mixture.", hint="Add the two fractions up.")
        found[known] = fraction
    total = math.fsum(found.values())
    if abs(total - 1.0) > SUM_TOLERANCE:
        raise UnknownFluid(
            f"The mole fractions of a gas mixture sum to {total:.7g}, not to 1.",
            hint="Correct the fractions, or add the component that is missing.",
        )
    return {name: fraction / total for name, fraction in found.items() if fraction > 0.0}
