"""Property models with another zero of enthalpy, to show that no balance depends on it."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from typing import Any

import numpy as np

from service.fluids.catalogue import FluidCatalogue
from service.fluids.protocol import Fluid, FluidSpec, State

MOVED = ("h", "u")


class ShiftedFluid:
    """A fluid whose h and u are larger than those of the model inside by a constant [J/kg]."""

    def __init__(self, inner: Fluid, shift: float) -> None:
        self.inner = inner
        self.shift = shift

    def __getattr__(self, name: str) -> Any:
        return getattr(self.inner, name)

    def _back(self, inputs: Sequence[str], values: Sequence[Any]) -> tuple[Any, ...]:
        return tuple(v - self.shift if n in MOVED else v for n, v in zip(inputs, values, strict=True))

    def state(self, inputs: tuple[str, ...], values: tuple[float, ...], extras: Sequence[str] = ()) -> State:
        found = self.inner.state(inputs, self._back(inputs, values), extras)
        return State({n: v + self.shift if n in MOVED else v for n, v in found.values.items()}, found.phase)

    def columns(self, inputs: tuple[str, ...], values: tuple[Any, ...], wanted: tuple[str, ...]) -> Any:
        found, bad = self.inner.columns(inputs, self._back(inputs, values), wanted)
        return {n: np.asarray(v) + self.shift if n in MOVED else v for n, v in found.items()}, bad

    def partials(self, state: State, inputs: tuple[str, ...], of: tuple[str, ...]) -> Mapping[str, tuple[float, ...]]:
        plain = State({n: v - self.shift if n in MOVED else v for n, v in state.values.items()}, state.phase)
        return self.inner.partials(plain, inputs, of)

    def bounds(self, name: str) -> tuple[float, float]:
        low, high = self.inner.bounds(name)
        return (low + self.shift, high + self.shift) if name in MOVED else (low, high)


class ShiftedCatalogue(FluidCatalogue):
    """Every fluid shifted by an amount of its own; humid air and its water cannot be moved apart and stay."""

    def __init__(self, keep: Collection[str] = ("humid_air",)) -> None:
        super().__init__()
        self._keep = keep
        self._shifted: dict[tuple[str, str], ShiftedFluid] = {}

    def resolve(self, spec: FluidSpec | str) -> Any:
        inner = super().resolve(spec)
        if inner.kind in self._keep:
            return inner
        # one shift a substance: two streams of one fluid have one zero
        shift = 1e5 * (3 + sum(map(ord, inner.name)) % 7)
        return self._shifted.setdefault((inner.name, inner.provenance.model), ShiftedFluid(inner, shift))
