"""Regular variants of a symbol's spelling: one finite list per symbol, made when the table is built.

The rules are told in SPELLING_RULES. What follows one solidus is read as standing below it. The other reading of
`kJ/kg K` (kJ times K over kg) is the unit of no kind of quantity here, so that nothing can be mistaken; only
`kJ/kg*K` is left out, because every programming language reads it that way.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from itertools import product

MAX_LENGTH = 32
"""Longest unit text that is looked at at all."""

SPELLING_RULES: tuple[str, ...] = (
    "Powers: `m3/h` is also `m^3/h` and `m³/h`.",
    "Products: `Pa*s` is also `Pa·s`, `Pa.s`, `Pa s` and `Pa-s`.",
    "Several divisors: `kJ/kg/K` is also `kJ/(kg K)`, `kJ/(kg·K)`, `kJ/(kg*K)`, `kJ/kg K`, `kJ/kg·K`, `kJ/kg.K`, "
    "`kJ/kg-K`, `kJ/kgK`, `kJ kg-1 K-1` and `kJ kg⁻¹ K⁻¹`.",
    "Degrees below the line are differences: `W/m2/K` is also `W/m2/degC`, `W/m²/°C` and `W/(m2 C)`; "
    "the same holds for degF, °F, F and degR, °R, R.",
    "Names: `Btu/h/ft2/degF` is also `BTU/hr/ft2/degF`; likewise lbm for lb, lb-mol for lbmol, day for d, l for L.",
)
"""What a client may write instead of a symbol, in words; in each rule the first quoted text is the symbol."""

_ANYWHERE: dict[str, tuple[str, ...]] = {
    "h": ("h", "hr"),
    "d": ("d", "day"),
    "Btu": ("Btu", "BTU"),
    "kBtu": ("kBtu", "kBTU"),
    "MMBtu": ("MMBtu", "MMBTU"),
    "lb": ("lb", "lbm"),
    "klb": ("klb", "klbm"),
    "lbmol": ("lbmol", "lb-mol"),
    "scf": ("scf", "SCF"),
    "L": ("L", "l"),
    "mL": ("mL", "ml"),
    "NL": ("NL", "Nl"),
}
_BELOW: dict[str, tuple[str, ...]] = {
    "K": ("K", "degC", "°C", "C"),
    "degF": ("degF", "°F", "F"),
    "degR": ("degR", "°R", "R"),
}
_SIGNS = ("*", "·", "⋅", ".", " ", "-")
_POWER_STYLES = ("", "^", "super")
_SUPERSCRIPT = str.maketrans("-123", "⁻¹²³")
_POWER = re.compile(r"(.*[A-Za-z])([23])")


def spellings(symbol: str) -> tuple[str, ...]:
    """Every regular spelling of a symbol, the symbol itself first, none longer than MAX_LENGTH."""
    return tuple(dict.fromkeys(text for text in (symbol, *_variants(symbol)) if len(text) <= MAX_LENGTH))


def _variants(symbol: str) -> Iterator[str]:
    numerator, *divisors = symbol.split("/")
    factors = numerator.split("*")
    tops = product(*(_ANYWHERE.get(factor, (factor,)) for factor in factors))
    bottoms = list(product(*(_BELOW.get(name) or _ANYWHERE.get(name, (name,)) for name in divisors)))
    for top, bottom, style in product(tops, bottoms, _POWER_STYLES):
        yield from _joined([_power(name, 1, style) for name in top], bottom, style)


def _joined(top: list[str], bottom: tuple[str, ...], style: str) -> Iterator[str]:
    below = [_power(name, 1, style) for name in bottom]
    for sign in _SIGNS:
        above = sign.join(top)
        yield "/".join((above, *below))
        if len(below) > 1:
            yield f"{above}/({sign.join(below)})"
            if sign != "*":
                yield f"{above}/{sign.join(below)}"
    if len(below) == 2 and any(bottom[1] in names for names in _BELOW.values()):
        yield f"{'·'.join(top)}/{''.join(below)}"
    if below:
        for sign in (" ", "·"):
            yield sign.join((*top, *(_power(name, -1, style) for name in bottom)))


def _power(name: str, sign: int, style: str) -> str:
    """A name with its power (m2, h) in one of the styles: m2 m^2 m² above the line, m-2 m^-2 m⁻² below it."""
    match = _POWER.fullmatch(name)
    base, exponent = (match[1], int(match[2])) if match else (name, 1)
    if sign * exponent == 1:
        return name
    text = str(sign * exponent)
    return base + (text.translate(_SUPERSCRIPT) if style == "super" else style + text)
