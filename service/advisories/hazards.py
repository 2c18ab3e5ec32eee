"""What substances do to people when they get out: data for the rules on leaks and vents, from memory.

Hazard classes as in the Globally Harmonized System (GHS) and on safety data sheets; refrigerants by the safety
groups of ANSI/ASHRAE Standard 34 (A2L, A2 and A3 burn; B is toxic). Names are those of the fluid catalogue. A name that
is missing here is not thereby harmless.
"""

from __future__ import annotations

from collections.abc import Mapping

TOXIC = frozenset(
    {
        "ammonia", "carbon monoxide", "carbonyl sulfide", "chlorine", "fluorine", "hydrogen chloride",
        "hydrogen sulfide", "sulfur dioxide", "ethylene oxide", "vinyl chloride", "1,2-dichloroethane", "benzene",
        "methanol", "R21", "R40", "R123",
    }
)  # fmt: skip
FLAMMABLE = frozenset(
    {
        "hydrogen", "parahydrogen", "orthohydrogen", "deuterium", "paradeuterium", "orthodeuterium", "methane",
        "ethane", "propane", "n-butane", "isobutane", "n-pentane", "isopentane", "neopentane", "cyclopentane",
        "n-hexane", "isohexane", "cyclohexane", "cyclopropane", "n-heptane", "n-octane", "n-nonane", "n-decane",
        "ethylene", "propylene", "propyne", "1-butene", "isobutene", "cis-2-butene", "trans-2-butene", "benzene",
        "toluene", "ethylbenzene", "m-xylene", "o-xylene", "p-xylene", "acetone", "ethanol", "methanol",
        "dimethyl ether", "diethyl ether", "dimethyl carbonate", "tetrahydrofuran", "ethylene oxide", "vinyl chloride",
        "1,2-dichloroethane", "ammonia", "carbon monoxide", "carbonyl sulfide", "hydrogen sulfide", "R32", "R40", "R41",
        "R142b", "R143a", "R152a", "R161", "R365mfc", "R1123", "R1130(E)", "R1132(E)", "R1234yf", "R1234ze(E)",
        "R1243zf", "HFE-143m",
    }
)  # fmt: skip
OXIDISING = frozenset({"oxygen", "nitrous oxide", "fluorine", "chlorine"})
INERT = frozenset({"nitrogen", "argon", "helium", "neon", "krypton", "xenon", "carbon dioxide", "sulfur hexafluoride"})

OXYGEN_POOR, OXYGEN_RICH = 0.195, 0.235
"""[mol/mol] 29 CFR 1910.146(b): hazardous atmosphere, oxygen below 19.5 % or above 23.5 %."""
FLAMMABLE_SHARE = 0.01
"""[mol/mol] of flammable components: a quarter of hydrogen's lower limit of 4 %, the lowest of the common gases."""
TOXIC_SHARE = 1e-4
"""[mol/mol] of toxic components: 100 ppm, at which hydrogen sulfide is immediately dangerous (NIOSH, from memory)."""


def _is_refrigerant(name: str) -> bool:
    return name[:1] == "R" and name[1:2].isdigit()


def hazards(composition: Mapping[str, float]) -> frozenset[str]:
    """What a gas of this composition (name → mole fraction) does where it gets out.

    Of `toxic`, `flammable`, `oxidising` and `asphyxiant`; the last only where nothing worse is said. Empty for water,
    air, and for what is not known.
    """
    found = set()
    for word, names, least in (("toxic", TOXIC, TOXIC_SHARE), ("flammable", FLAMMABLE, FLAMMABLE_SHARE)):
        if sum(x for name, x in composition.items() if name in names) >= least:
            found.add(word)
    if sum(x for name, x in composition.items() if name in OXIDISING) > OXYGEN_RICH and "flammable" not in found:
        found.add("oxidising")
    displacing = sum(x for name, x in composition.items() if name in INERT or _is_refrigerant(name))
    if not found and displacing > 0.0 and composition.get("oxygen", 0.0) < OXYGEN_POOR:
        found.add("asphyxiant")
    return frozenset(found)
