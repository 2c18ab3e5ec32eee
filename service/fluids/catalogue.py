"""The fluids that a case can name or declare, each built once."""

from __future__ import annotations

import threading
from collections import OrderedDict
from collections.abc import Callable
from typing import Any

from service.errors import UnknownFluid
from service.fluids import fluid_names, names
from service.fluids.protocol import Fluid, FluidSpec

KEPT = 256
"""How many declared fluids (brines, mixtures, constant-property fluids) are kept ready; named ones all are."""

HUMID_AIR = "humid_air"


class FluidCatalogue:
    """Property models by name or specification. Threads may share it."""

    def __init__(self) -> None:
        self._named: dict[str, Fluid] = {}
        self._declared: OrderedDict[object, Fluid] = OrderedDict()
        self._lock = threading.RLock()

    def resolve(self, spec: FluidSpec | str) -> Fluid:
        """The property model of a fluid. Raises UnknownFluid with near spellings."""
        if isinstance(spec, str):
            return self._by_name(spec)
        if spec.kind in ("pure", HUMID_AIR):
            return self._pure(spec)
        key = _key(spec)
        with self._lock:
            found = self._declared.get(key)
            if found is None:
                found = self._declared[key] = _build(spec)
                if len(self._declared) > KEPT:
                    self._declared.popitem(last=False)
            else:
                self._declared.move_to_end(key)
            return found

    def names(self) -> tuple[str, ...]:
        """Every name that `resolve` takes as it stands: pure fluids, humid air, heat-transfer liquids."""
        from service.fluids import incompressible_names

        liquids = (code for code in incompressible_names.PURE if names.library_name(code) is None)
        return (*names.own_names(), HUMID_AIR, *liquids)

    def describe(self, name: str) -> dict[str, Any]:
        """Aliases, models, limits [SI] and citation of a named fluid. Raises UnknownFluid."""
        fluid = self._by_name(name)
        library_name = names.library_name(name)
        return {
            "name": fluid.name,
            "kind": fluid.kind,
            "aliases": list(names.aliases(library_name)) if library_name else [],
            "models": ["helmholtz", "IF97"] if library_name == "Water" else ["helmholtz"] if library_name else [],
            "molar_mass": fluid.molar_mass,
            "properties": list(fluid.properties),
            "limits": fluid.limits,
            "provenance": fluid.provenance,
        }

    def _by_name(self, name: str) -> Fluid:
        found = self._named.get(name)
        if found is not None:
            return found
        library_name = names.library_name(name)
        if library_name is not None:
            return self._kept(names.own_name(library_name), lambda: _helmholtz(library_name))
        if len(name) <= names.LONGEST:
            wanted = names.key(name)
            if wanted in {names.key(own) for own in fluid_names.HUMID_AIR}:
                return self._kept(HUMID_AIR, _humid_air)
            from service.fluids import incompressible_names

            code = incompressible_names.code_of(name)
            if code is not None and code in incompressible_names.PURE:
                return self._kept(code, lambda: _brine(FluidSpec("brine", code)))
            if code is not None:
                raise UnknownFluid(
                    f"{code} ({incompressible_names.SOLUTIONS[code]}) needs a mass fraction.",
                    hint=f'Declare it under `fluids`: {{"kind": "brine", "name": "{code}", "mass_fraction": 0.3}}.',
                )
        raise names.unknown(name, self.names())

    def _pure(self, spec: FluidSpec) -> Fluid:
        name = spec.name or (HUMID_AIR if spec.kind == HUMID_AIR else "")
        fluid = self._by_name(name) if name else None
        if fluid is None or fluid.kind != spec.kind:
            raise names.unknown(name, self.names())
        model = (spec.model or "helmholtz").casefold()
        if spec.kind == HUMID_AIR or model == "helmholtz":
            return fluid
        if model != "if97":
            raise UnknownFluid(f"A pure fluid has no model {spec.model!r:.42}.", hint="Choose helmholtz or IF97.")
        if fluid.name != "water":
            raise UnknownFluid(f"IF97 is a model of water, not of {fluid.name}.", hint="Choose helmholtz.")
        return self._kept("water (IF97)", _if97)

    def _kept(self, name: str, build: Callable[[], Fluid]) -> Fluid:
        found = self._named.get(name)
        if found is None:
            with self._lock:
                found = self._named.get(name)
                if found is None:
                    found = self._named[name] = build()
        return found


def _key(spec: FluidSpec) -> object:
    fractions = tuple(sorted((spec.mole_fractions or {}).items()))
    return (spec.kind, spec.name, spec.model, fractions, spec.mass_fraction, spec.molar_mass, spec.cp, spec.density,
            spec.label)  # fmt: skip


def _build(spec: FluidSpec) -> Fluid:
    builders: dict[str, Callable[[FluidSpec], Fluid]] = {
        "brine": _brine, "gas_mixture": _gas_mixture, "ideal_gas": _ideal_gas, "constant_liquid": _constant,
        "solid": _constant,
    }  # fmt: skip
    builder = builders.get(spec.kind)
    if builder is None:
        raise UnknownFluid(
            f"There is no kind of fluid {spec.kind[:40]!r}.",
            hint=f"The kinds are pure, humid_air, {', '.join(builders)}.",
        )
    return builder(spec)


# modules are imported where they are first needed: each brings its own part of the property library along


def _helmholtz(library_name: str) -> Fluid:
    from service.fluids.helmholtz import HelmholtzFluid

    return HelmholtzFluid(library_name)


def _if97() -> Fluid:
    from service.fluids.if97 import IF97Water

    return IF97Water()


def _humid_air() -> Fluid:
    from service.fluids import humid_air

    return humid_air.build(FluidSpec(HUMID_AIR))


def _brine(spec: FluidSpec) -> Fluid:
    from service.fluids import incompressible

    return incompressible.build(spec)


def _gas_mixture(spec: FluidSpec) -> Fluid:
    from service.fluids import gas_mixture

    return gas_mixture.build(spec)


def _ideal_gas(spec: FluidSpec) -> Fluid:
    from service.fluids.ideal_gas import build

    return build(spec)


def _constant(spec: FluidSpec) -> Fluid:
    from service.fluids.constant_properties import build

    return build(spec)
