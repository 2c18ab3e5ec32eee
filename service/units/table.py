"""The unit table: built once from pint's definitions, then looked up and multiplied, and never parsed again.

UnitTable.build()      the only place that imports pint; what it returns holds plain numbers and texts
table.unit(text, kind) one dictionary look-up, exact and case-sensitive
table.to_si(...)       value * factor + offset, plus the site's atmosphere for a gauge pressure
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from fractions import Fraction
from types import MappingProxyType
from typing import TYPE_CHECKING, Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from service.errors import StateOutOfRange, UnitNotUnderstood, UnitOfWrongKind

from . import gases, pressures, symbols
from .hints import PAIRS, TRAPS
from .kinds import KIND_ROWS, SYSTEMS, KindRow, System
from .rows import Row
from .spelling import MAX_LENGTH, spellings
from .suggest import nearby, shown

if TYPE_CHECKING:
    from pint import UnitRegistry

Value = TypeVar("Value", float, NDArray[np.float64])

_GAS_TABLES = {
    "normal_volume_flow": (gases.NORMAL_VOLUME_FLOWS, 1),
    "normal_volume": (gases.NORMAL_VOLUMES, 1),
    "volumetric_heating_value": (gases.VOLUMETRIC_HEATING_VALUES, -1),
}


@dataclass(frozen=True, slots=True)
class Unit:
    """A unit of a kind: SI value = value * factor + offset, plus the atmospheric pressure if it is a gauge pressure."""

    symbol: str
    kind: str
    factor: float
    offset: float = 0.0
    gauge: bool = False


@dataclass(frozen=True, slots=True)
class Kind:
    """A kind of quantity with the units it accepts.

    symbols: one per unit, usual ones first; aliases: symbol -> other names (regular spelling variants left out);
    units: all of these in one tuple; bare_number_allowed: the unit may be left out; positive: only values above zero
    exist (an absolute pressure, a temperature); note: what a user should know.
    """

    name: str
    title: str
    si_unit: str
    bare_number_allowed: bool
    positive: bool
    note: str
    symbols: tuple[str, ...]
    aliases: Mapping[str, tuple[str, ...]]

    @property
    def units(self) -> tuple[str, ...]:
        return tuple(name for symbol in self.symbols for name in (symbol, *self.aliases[symbol]))


class UnitTable:
    """The closed table. Immutable once built, so that threads may share it."""

    __slots__ = ("_coherent", "_display", "_folded", "_kinds_of", "_rows", "_units", "kinds")

    kinds: Mapping[str, Kind]

    def __init__(self, entries: Mapping[str, list[tuple[Unit, tuple[str, ...]]]]) -> None:
        self._rows: dict[str, KindRow] = {row.name: row for row in KIND_ROWS}
        self._units: dict[str, dict[str, Unit]] = {name: _by_spelling(entries[name]) for name in self._rows}
        self._kinds_of: dict[str, list[str]] = {}
        self._folded: dict[str, list[str]] = {}
        for name, units in self._units.items():
            for text in units:
                self._kinds_of.setdefault(text, []).append(name)
        for text in self._kinds_of:
            self._folded.setdefault(text.casefold(), []).append(text)
        for name, row in self._rows.items():
            if row.bare_number:
                self._units[name][""] = self._units[name][row.si]
        self.kinds = MappingProxyType({name: _kind(row, entries[name]) for name, row in self._rows.items()})
        self._display = self._preferred("display")
        self._coherent = self._preferred("coherent")

    @classmethod
    def build(cls) -> UnitTable:
        """Evaluate every row with pint, exactly (in fractions), and let go of pint. Takes some tenths of a second."""
        import pint

        # Fractions make the factors the correctly rounded ones; no cache folder: nothing is written to disk.
        registry: UnitRegistry[Any] = pint.UnitRegistry(non_int_type=Fraction, cache_folder=None)
        return cls({row.name: list(_entries(row, registry)) for row in KIND_ROWS})

    def unit(self, text: str, kind: str, address: str = "") -> Unit:
        """The unit that a text names for a quantity of this kind.

        Raises UnitNotUnderstood (with spellings nearby) or UnitOfWrongKind (with the kind meant, the kind given and
        units that would do), both with `address`; KeyError for a kind that does not exist.
        """
        units = self._units[kind]
        if isinstance(text, str) and len(text) <= MAX_LENGTH:
            unit = units.get(text)
            if unit is not None:
                return unit
        raise self._refusal(text, self._rows[kind], address)

    @staticmethod
    def to_si(value: Value, unit: Unit, atmospheric_pressure: float) -> Value:
        """value [unit] in SI; atmospheric_pressure [Pa] is added to a gauge pressure. Floats and arrays."""
        if unit.gauge:
            return value * unit.factor + atmospheric_pressure
        return value * unit.factor + unit.offset

    @staticmethod
    def from_si(value: Value, unit: Unit, atmospheric_pressure: float) -> Value:
        """value [SI] in the unit; atmospheric_pressure [Pa] is taken off for a gauge pressure. Floats and arrays."""
        if unit.gauge:
            return (value - atmospheric_pressure) / unit.factor
        return (value - unit.offset) / unit.factor

    @staticmethod
    def difference_factor(unit: Unit) -> float:
        """SI units per unit for a difference or an uncertainty: the scale without any zero."""
        return unit.factor

    def require_possible(self, value: float, kind: str, address: str = "") -> None:
        """Refuse a value [SI] that cannot exist: at or below absolute zero or vacuum, no positive density ...

        Raises StateOutOfRange, also for a value that is not finite.
        """
        row = self._rows[kind]
        if not -np.inf < value < np.inf:
            raise StateOutOfRange(f"The {row.title} is not a finite number.", address=address)
        if row.positive and value <= 0.0:
            raise StateOutOfRange(
                f"{row.article.capitalize()} {row.title} of {value:.6g} {row.si} cannot exist: it must be above zero.",
                address=address,
                hint=row.note,
            )

    def display(self, kind: str, system: System) -> Unit:
        """The unit in which answers of a kind are shown: system is "metric", "SI" or "US"."""
        return self._display[kind, system]

    def coherent(self, kind: str, system: System) -> Unit:
        """The unit for formulas with numbers in them, chosen so that products of them come out in each other."""
        return self._coherent[kind, system]

    def _preferred(self, use: str) -> dict[tuple[str, str], Unit]:
        return {
            (name, system): self._units[name][symbol]
            for name, row in self._rows.items()
            for system, symbol in zip(SYSTEMS, getattr(row, use), strict=True)
        }

    def _refusal(self, text: object, row: KindRow, address: str) -> UnitNotUnderstood | UnitOfWrongKind:
        would_do = f"Units that would do: {', '.join(row.usual or self.kinds[row.name].symbols[:6])}."
        if not isinstance(text, str) or len(text) > MAX_LENGTH:
            detail = f"A unit is a text of at most {MAX_LENGTH} characters."
            return UnitNotUnderstood(detail, address=address, hint=would_do)
        if not text.strip():
            detail = f"{row.article.capitalize()} {row.title} needs a unit."
            return UnitNotUnderstood(detail, address=address, hint=would_do)
        given = self._kinds_of.get(text)
        if given:
            meant = " or ".join(self._rows[name].title for name in given[:3])
            detail = f"{shown(text)} is a unit of {meant}; {row.article} {row.title} is expected here."
            advice = [PAIRS.get((row.name, given[0]), ""), would_do]
            return UnitOfWrongKind(detail, address=address, hint=" ".join(filter(None, advice)))
        detail = f"{shown(text)} is not a unit that is known here; {row.article} {row.title} is expected."
        trap = next((advice for texts, kinds, advice in TRAPS if text in texts and row.name in kinds), "")
        near = nearby(text, self.kinds[row.name].symbols, self._folded.get(text.casefold(), ()), self._units[row.name])
        advice = [trap, f"Did you mean {' or '.join(near)}?" if near else would_do]
        return UnitNotUnderstood(detail, address=address, hint=" ".join(filter(None, advice)))


def _kind(row: KindRow, entries: list[tuple[Unit, tuple[str, ...]]]) -> Kind:
    return Kind(
        name=row.name,
        title=row.title,
        si_unit=row.si,
        bare_number_allowed=row.bare_number,
        positive=row.positive,
        note=row.note,
        symbols=tuple(unit.symbol for unit, _ in entries),
        aliases=MappingProxyType({unit.symbol: aliases for unit, aliases in entries}),
    )


def _by_spelling(entries: list[tuple[Unit, tuple[str, ...]]]) -> dict[str, Unit]:
    """Every spelling of a kind; one that would stand for two units is a mistake in the tables and stops the start."""
    found: dict[str, Unit] = {}
    for unit, aliases in entries:
        for text in dict.fromkeys(text for name in (unit.symbol, *aliases) for text in spellings(name)):
            if text in found:
                raise ValueError(f"{text!r} stands for both {found[text].symbol} and {unit.symbol} in {unit.kind}")
            found[text] = unit
    return found


def _entries(row: KindRow, registry: UnitRegistry[Any]) -> Iterator[tuple[Unit, tuple[str, ...]]]:
    """The units of a kind, as plain numbers."""
    if row.name == "temperature":
        for symbol, built_from, aliases in symbols.TEMPERATURES:
            zero, one = (registry.Quantity(Fraction(n), built_from).to(row.si_built_from).magnitude for n in (0, 1))
            yield Unit(symbol, row.name, float(one - zero), float(zero)), aliases
        return
    if row.name in _GAS_TABLES:
        yield from _gas_entries(row, registry)
        return
    yield from _factors(row, symbols.PLAIN[row.name], registry)
    if row.name == "pressure":
        yield from _factors(row, pressures.GAUGE_PRESSURES, registry, gauge=True)


def _factors(
    row: KindRow,
    rows: tuple[Row, ...],
    registry: UnitRegistry[Any],
    *,
    gauge: bool = False,
    scale: Fraction = Fraction(1),
) -> Iterator[tuple[Unit, tuple[str, ...]]]:
    for symbol, built_from, aliases in rows:
        factor = scale * _evaluate(built_from, row.si_built_from, registry)
        yield Unit(symbol, row.name, float(factor), gauge=gauge), aliases


def _gas_entries(row: KindRow, registry: UnitRegistry[Any]) -> Iterator[tuple[Unit, tuple[str, ...]]]:
    """Amounts of gas: a volume at (T, p) holds the amount of p/T over p/T of the normal state."""
    table, power = _GAS_TABLES[row.name]
    normal = _amount_per_volume("normal", registry)
    for reference, rows in table.items():
        scale = (_amount_per_volume(reference, registry) / normal) ** power
        yield from _factors(row, rows, registry, scale=scale)


def _amount_per_volume(reference: str, registry: UnitRegistry[Any]) -> Fraction:
    temperature, pressure = gases.GAS_REFERENCES[reference]
    return _evaluate(pressure, "pascal", registry) / _evaluate(temperature, "kelvin", registry)


def _evaluate(built_from: str, si: str, registry: UnitRegistry[Any]) -> Fraction:
    quantity = registry.Quantity(Fraction(1), "dimensionless") * registry.parse_expression(built_from)
    return Fraction(quantity.to(si).magnitude)
