"""Pressure symbols, as data: unmarked (absolute), marked absolute, gauge, and differences.

Rows are those of symbols.py: (symbol, built from in pint's language, aliases). Columns of mercury and water are the
conventional ones (13 595.1 and 1000 kg/m3 under standard gravity).
"""

from __future__ import annotations

from .rows import Row

PLAIN_PRESSURES: tuple[Row, ...] = (
    ("bar", "bar", ("BAR",)),
    ("mbar", "millibar", ()),
    ("Pa", "pascal", ()),
    ("hPa", "hectopascal", ()),
    ("kPa", "kilopascal", ()),
    ("MPa", "megapascal", ()),
    ("psi", "psi", ("PSI", "lbf/in2")),
    ("atm", "atmosphere", ()),
    ("at", "technical_atmosphere", ("kgf/cm2", "kg/cm2", "kp/cm2")),
    ("torr", "torr", ("Torr",)),
    ("mmHg", "millimeter_Hg", ("mm Hg",)),
    ("inHg", "inch_Hg", ("in Hg",)),
    ("mmH2O", "millimeter_H2O", ("mmH₂O", "mm H2O")),
    ("cmH2O", "centimeter_H2O", ("cmH₂O",)),
    ("mH2O", "meter_H2O", ("mH₂O",)),
    ("inH2O", "inch_H2O", ("inH₂O", "in H2O")),
    ("ftH2O", "foot_H2O", ("ftH₂O", "ft H2O")),
    ("N/m2", "newton/meter**2", ()),
    ("kN/m2", "kilonewton/meter**2", ()),
    ("N/mm2", "newton/millimeter**2", ()),
    ("lbf/ft2", "pound_force/foot**2", ("psf",)),
)

# Marked absolute: the same as the plain symbol, said aloud.
ABSOLUTE_PRESSURES: tuple[Row, ...] = (
    ("bara", "bar", ("bar(a)", "bar a", "bar abs", "BARA")),
    ("mbara", "millibar", ("mbar(a)", "mbar a")),
    ("kPaa", "kilopascal", ("kPa(a)", "kPa a", "kPa abs")),
    ("MPaa", "megapascal", ("MPa(a)", "MPa a")),
    ("psia", "psi", ("psi(a)", "psi a", "PSIA")),
    ("ata", "technical_atmosphere", ("kgf/cm2a", "kgf/cm2(a)", "kg/cm2a", "kg/cm2(a)")),
    ("mmHga", "millimeter_Hg", ("mmHg(a)", "mmHg abs")),
    ("inHga", "inch_Hg", ("inHg(a)", "inHg abs", "inHgA")),
    ("mmH2Oa", "millimeter_H2O", ("mmH2O(a)",)),
    ("inH2Oa", "inch_H2O", ("inH2O(a)",)),
)

# Above the site's atmosphere.
GAUGE_PRESSURES: tuple[Row, ...] = (
    ("barg", "bar", ("bar(g)", "bar g", "bar gauge", "BARG")),
    ("mbarg", "millibar", ("mbar(g)", "mbar g")),
    ("Pag", "pascal", ("Pa(g)",)),
    ("kPag", "kilopascal", ("kPa(g)", "kPa g", "kPa gauge")),
    ("MPag", "megapascal", ("MPa(g)", "MPa g")),
    ("psig", "psi", ("psi(g)", "psi g", "PSIG")),
    ("atg", "technical_atmosphere", ("kgf/cm2g", "kgf/cm2(g)", "kg/cm2g", "kg/cm2(g)")),
    ("mmHgg", "millimeter_Hg", ("mmHg(g)",)),
    ("inHgg", "inch_Hg", ("inHg(g)",)),
    ("mmH2Og", "millimeter_H2O", ("mmH2O(g)", "mmWG", "mmwg")),
    ("inH2Og", "inch_H2O", ("inH2O(g)", "inWG", "inwg")),
)

# A difference is neither gauge nor absolute; "water column" and "water gauge" say nothing else than mm of water.
PRESSURE_DIFFERENCES: tuple[Row, ...] = (
    *PLAIN_PRESSURES,
    ("mmWC", "millimeter_H2O", ("mmWG", "mmwg")),
    ("inWC", "inch_H2O", ("inWG", "inwg")),
)
