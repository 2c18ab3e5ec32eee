"""Reads checks.json: published values with their sources, tolerances and notes.

`expected(id)` gives the values in SI units with the tolerance that the source's digits allow.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path
from typing import Any

# (factor, offset) to SI of every unit in which the sources print: definitions of the SI and NIST SP 811, appendix B
_TO_SI: dict[str, tuple[float, float]] = {
    "-": (1.0, 0.0),
    "K": (1.0, 0.0),
    "degC": (1.0, 273.15),
    "MPa": (1e6, 0.0),
    "kPa": (1e3, 0.0),
    "bar": (1e5, 0.0),
    "kJ/kg": (1e3, 0.0),
    "kJ/(kg K)": (1e3, 0.0),
    "m3/kg": (1.0, 0.0),
    "kg/m3": (1.0, 0.0),
    "kg/kg": (1.0, 0.0),
    "m/s": (1.0, 0.0),
    "1/K": (1.0, 0.0),
    "1/MPa": (1e-6, 0.0),
    "MPa/K": (1e6, 0.0),
    "g/s": (1e-3, 0.0),
    "kW": (1e3, 0.0),
    "MW": (1e6, 0.0),
    "kJ/min": (1e3 / 60.0, 0.0),
    "Btu/h": (1055.05585262 / 3600.0, 0.0),
    "ton": (3516.853, 0.0),  # of refrigeration
    "kg/s": (1.0, 0.0),
    "kg/min": (1.0 / 60.0, 0.0),
    "kg/h": (1.0 / 3600.0, 0.0),
    "m2": (1.0, 0.0),
    "m3/s": (1.0, 0.0),
    "m3/min": (1.0 / 60.0, 0.0),
    "degF": (5.0 / 9.0, 0.0),  # only a mean temperature difference is printed so
    "kJ": (1e3, 0.0),
    "kg": (1.0, 0.0),
    "s": (1.0, 0.0),
    "psig": (6894.757293168, 14.7 * 6894.757293168),  # above 14.7 psia, the atmosphere of the source that prints it
}


@dataclass(frozen=True, slots=True)
class Expected:
    """One published number: value [SI] and the absolute tolerance [SI] that its source allows."""

    name: str
    value: float
    tolerance: float
    printed: str

    def miss(self, found: float) -> str:
        """Empty where the number found [SI] agrees; else what is wrong, for the test's message."""
        if abs(found - self.value) <= self.tolerance:
            return ""
        off = found - self.value
        return f"{self.name}: published {self.printed}, found {found!r}, off by {off:.3g}, allowed {self.tolerance:.3g}"


@lru_cache(maxsize=1)
def _all() -> dict[str, dict[str, Any]]:
    text = Path(__file__).with_name("checks.json").read_text(encoding="utf-8")
    return {entry["id"]: entry for entry in json.loads(text)["checks"]}


def ids(topic: str = "", beginning: str = "") -> list[str]:
    """The ids of a topic (its beginning), or those that begin so, in the order of the file."""
    return [key for key, entry in _all().items() if entry["topic"].startswith(topic) and key.startswith(beginning)]


def given(check: str) -> dict[str, float]:
    """What an entry gives [SI]."""
    return dict(_all()[check]["given"]["si"])


def entry(check: str) -> dict[str, Any]:
    """A whole entry: topic, given, source, note, origin, expected."""
    return _all()[check]


def expected(check: str) -> list[Expected]:
    """The published values of an entry [SI]."""
    return [_expected(row) for row in _all()[check]["expected"]]


def _expected(row: dict[str, Any]) -> Expected:
    factor, offset = _TO_SI[row["unit"]]
    value = row["value"] * factor + offset
    tolerance = row["tol"]["value"]
    # a relative tolerance is one of the number as printed, so that degC is no excuse
    absolute = tolerance * factor * (abs(row["value"]) if row["tol"]["kind"] == "rel" else 1.0)
    return Expected(row["name"], value, absolute, f"{row['printed']} {row['unit']}")


def arguments(name: str) -> tuple[float | str, ...]:
    """The arguments inside a name such as `f(3,500)` or `Ws(20)`."""
    inside = name[name.index("(") + 1 : name.rindex(")")]
    return tuple(float(part) if part[-1].isdigit() else part for part in inside.split(","))
