"""How a property model says no: one sentence with the amounts, a hint, and the property at fault.

Amounts are kept beside the sentence (see `Issue.amounts`), so that the reader sees them in the units of the case; the
plain text of the error has them in bar, degC and kJ/kg.
"""

from __future__ import annotations

import math
from typing import TypeVar

from service.errors import CaseError, Issue

E = TypeVar("E", bound=CaseError)

KINDS = {
    "p": "pressure",
    "T": "temperature",
    "h": "specific_energy",
    "u": "specific_energy",
    "s": "specific_entropy",
    "rho": "density",
    "v": "specific_volume",
    "x": "dimensionless",
    "superheat": "temperature_difference",
    "subcooling": "temperature_difference",
}
"""Property → kind of quantity."""

_PLAIN = {
    "pressure": (1e-5, 0.0, "bar"),
    "temperature": (1.0, -273.15, "degC"),
    "specific_energy": (1e-3, 0.0, "kJ/kg"),
    "specific_entropy": (1e-3, 0.0, "kJ/kg/K"),
    "density": (1.0, 0.0, "kg/m3"),
    "specific_volume": (1.0, 0.0, "m3/kg"),
    "temperature_difference": (1.0, 0.0, "K"),
}


def plain(kind: str, value: float) -> str:
    """An amount [SI] as text in the units that plants use."""
    factor, offset, unit = _PLAIN.get(kind, (1.0, 0.0, ""))
    return f"{value * factor + offset:.6g} {unit}".rstrip()


def literal(text: str) -> str:
    """A name as part of a template."""
    return text.replace("{", "{{").replace("}", "}}")


def refusal(error: type[E], template: str, *amounts: tuple[str, float], hint: str = "", of: str = "") -> E:
    """An error of the given class. template: {0}, {1} ... stand for amounts (property or kind, value [SI])."""
    told = tuple((KINDS.get(name, name), value) for name, value in amounts)
    detail = template.format(*(plain(kind, value) for kind, value in told))
    showable = all(math.isfinite(value) for _, value in told)
    if showable and told:
        return error(detail, [Issue(template, of, hint, amounts=told)])
    return error(detail, [Issue(detail, of, hint)])
