"""What substances do to people when they get out: data for the rules on leaks and vents.

Properties as on the substances' safety data sheets (common practice); names are those of the fluid catalogue.
"""

from __future__ import annotations

TOXIC = frozenset({"ammonia", "carbon monoxide", "hydrogen sulfide", "sulfur dioxide", "carbonyl sulfide"})
FLAMMABLE = frozenset(
    {
        "hydrogen", "methane", "ethane", "propane", "n-butane", "isobutane", "n-pentane", "isopentane", "n-hexane",
        "ethylene", "propylene", "1-butene", "acetone", "ethanol", "methanol", "dimethyl ether", "benzene", "toluene",
        "carbon monoxide", "hydrogen sulfide", "ammonia",
    }
)  # fmt: skip
ASPHYXIANT = frozenset(
    {"nitrogen", "argon", "helium", "neon", "krypton", "xenon", "carbon dioxide", "sulfur hexafluoride"}
)


def displaces_air(name: str) -> bool:
    """Whether a gas in a room displaces oxygen: inert gases, carbon dioxide, and the refrigerants."""
    return name in ASPHYXIANT or (name[:1] in "Rr" and name[1:2].isdigit())
