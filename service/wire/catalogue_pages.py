"""What can be named: fluids and units, as documents."""

from __future__ import annotations

from typing import Any

from service.fluids.catalogue import FluidCatalogue
from service.units import UnitTable
from service.wire.presenting import Presenter
from service.wire.stating import limits_of, source_of


def describe_units(units: UnitTable) -> dict[str, Any]:
    """Every kind of quantity, the units it accepts with their aliases, and those that answers use."""
    kinds = []
    for name, kind in units.kinds.items():
        kinds.append(
            {
                "name": name,
                "title": kind.title,
                "si_unit": kind.si_unit,
                "bare_number_allowed": kind.bare_number_allowed,
                "note": kind.note,
                "units": [{"symbol": s, "aliases": list(kind.aliases[s])} for s in kind.symbols],
                "shown_in": {
                    "metric": units.display(name, "metric").symbol,
                    "SI": units.display(name, "SI").symbol,
                    "US": units.display(name, "US").symbol,
                },
            }
        )
    return {"kinds": kinds}


def describe_fluids(catalogue: FluidCatalogue) -> dict[str, Any]:
    """The names of every fluid."""
    return {"fluids": list(catalogue.names())}


def describe_one_fluid(name: str, catalogue: FluidCatalogue, presenter: Presenter) -> dict[str, Any]:
    """Limits, properties and source of one fluid. Raises UnknownFluid."""
    fluid = catalogue.resolve(name)
    source = source_of(fluid)
    out: dict[str, Any] = {"name": fluid.name, "kind": fluid.kind, "properties": list(fluid.properties)}
    if fluid.molar_mass is not None:
        out["molar_mass"] = presenter.quantity(fluid.molar_mass, "molar_mass")
    out["limits"] = limits_of(fluid.limits, presenter)
    out["model"] = source.model
    out["citation"] = source.citation
    out["reference_state"] = source.reference_state
    return out
