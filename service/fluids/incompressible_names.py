"""The heat-transfer liquids and brines that can be named, by the codes of the property library: data, not code.

Descriptions say what a liquid is made of; commercial liquids appear under the library's short codes only.
Left out of the library's list: its examples, foodstuffs, ice slurries, gases, liquids that are defined by a volume
fraction (the case language has mass fractions), and water, which has models of its own.
"""

from __future__ import annotations

from collections.abc import Mapping

SOLUTIONS: Mapping[str, str] = {
    "FRE": "potassium formate, inhibited, in water",
    "LiBr": "lithium bromide in water",
    "MAM": "ammonia in water",
    "MAM2": "ammonia in water (second data set)",
    "MCA": "calcium chloride in water",
    "MCA2": "calcium chloride in water (second data set)",
    "MEA": "ethyl alcohol in water",
    "MEA2": "ethyl alcohol in water (second data set)",
    "MEG": "ethylene glycol in water",
    "MEG2": "ethylene glycol in water (second data set)",
    "MGL": "glycerol in water",
    "MGL2": "glycerol in water (second data set)",
    "MITSW": "seawater",
    "MKA": "potassium acetate in water",
    "MKA2": "potassium acetate in water (second data set)",
    "MKC": "potassium carbonate in water",
    "MKC2": "potassium carbonate in water (second data set)",
    "MKF": "potassium formate in water",
    "MLI": "lithium chloride in water",
    "MMA": "methyl alcohol in water",
    "MMA2": "methyl alcohol in water (second data set)",
    "MMG": "magnesium chloride in water",
    "MMG2": "magnesium chloride in water (second data set)",
    "MNA": "sodium chloride in water",
    "MNA2": "sodium chloride in water (second data set)",
    "MPG": "propylene glycol in water",
    "MPG2": "propylene glycol in water (second data set)",
    "VCA": "calcium chloride in water (third data set)",
    "VKC": "potassium carbonate in water (third data set)",
    "VMA": "methyl alcohol in water (third data set)",
    "VMG": "magnesium chloride in water (third data set)",
    "VNA": "sodium chloride in water (third data set)",
}
"""Solutions by mass fraction of what is dissolved."""

_PURE_GROUPS: Mapping[str, str] = {
    "salt-based coolant": "AS10 AS20 AS30 AS40 AS55 HC10 HC20 HC30 HC40 HC50 HY20 HY30 HY40 HY45 HY50 "
    "TY10 TY15 TY20 TY24 ZS10 ZS25 ZS40 ZS45 ZS55",
    "heat-transfer oil": "DEB DSF DowJ DowJ2 DowQ DowQ2 HCB HCM NBS PBB PCL PCR PGLT PHE PHR PLR PMR PNF PNF2 SAB "
    "T66 T72 TCO TD12 TVP1 TVP1869 TX22",
    "silicone liquid": "PMS1 PMS2 S800 XLT XLT2",
    "hydrofluoroether": "HFE HFE2",
    "liquid metal": "NaK",
    "organic liquid": "Acetone Ethanol Hexane",
}

PURE: Mapping[str, str] = {code: group for group, codes in _PURE_GROUPS.items() for code in codes.split()}
"""Liquids of one composition."""

ALIASES: Mapping[str, str] = {
    "calcium chloride": "MCA",
    "CaCl2": "MCA",
    "ethylene glycol": "MEG",
    "glycerol": "MGL",
    "lithium bromide": "LiBr",
    "magnesium chloride": "MMG",
    "MgCl2": "MMG",
    "NaCl": "MNA",
    "potassium formate": "MKF",
    "propylene glycol": "MPG",
    "seawater": "MITSW",
    "sea water": "MITSW",
    "sodium chloride": "MNA",
}
"""What people call some of them."""


def _key(name: str) -> str:
    return name.casefold().replace("_", " ").replace("-", " ").strip()


def code_of(name: str) -> str | None:
    """The library's code for a liquid named by code or alias (case does not matter), None where there is none."""
    wanted = _key(name)
    for table in (SOLUTIONS, PURE):
        for code in table:
            if _key(code) == wanted:
                return code
    return next((code for alias, code in ALIASES.items() if _key(alias) == wanted), None)


def names() -> tuple[str, ...]:
    """Every code that can be named, solutions first."""
    return (*SOLUTIONS, *PURE)
