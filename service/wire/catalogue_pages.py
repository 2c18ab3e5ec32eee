"""What can be named: fluids and units, as documents."""

from __future__ import annotations

from typing import Any

from service.errors import NotFound, UnknownFluid
from service.fluids.catalogue import FluidCatalogue
from service.units import UnitTable
from service.wire.presenting import Presenter
from service.wire.stating import limits_of
from service.wire.vocabulary import FLUID


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
    """Every fluid that can be named, and the kinds that a case can declare."""
    return {"fluids": list(catalogue.names()), "declared_kinds": list(FLUID)}


def describe_one_fluid(name: str, catalogue: FluidCatalogue, presenter: Presenter) -> dict[str, Any]:
    """Aliases, models, limits, properties and source of one fluid. Raises NotFound."""
    try:
        found = catalogue.describe(name)
    except UnknownFluid as error:
        hint = error.issues[0].hint if error.issues else "GET /v1/fluids lists what can be named."
        raise NotFound(error.detail, hint=hint) from error
    source = found["provenance"]
    out = {
        "name": found["name"],
        "kind": found["kind"],
        "aliases": found["aliases"],
        "models": found["models"],
        "properties": found["properties"],
        "limits": limits_of(found["limits"], presenter),
        "model": source.model,
        "citation": source.citation,
        "reference_state": source.reference_state,
        "notes": list(source.notes),
    }
    if found["molar_mass"] is not None:
        out["molar_mass"] = presenter.quantity(found["molar_mass"], "molar_mass")
    return out
