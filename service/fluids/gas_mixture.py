"""Gas mixtures of fixed composition: from a specification to the model of ideal or of real gases."""

from __future__ import annotations

from typing import TYPE_CHECKING

from service.errors import UnknownFluid
from service.fluids.ideal_mixture import IdealGasMixture
from service.fluids.mixture_components import composition
from service.fluids.real_mixture import RealGasMixture

if TYPE_CHECKING:
    from service.fluids.protocol import FluidSpec

__all__ = ["IdealGasMixture", "RealGasMixture", "build"]


def build(spec: FluidSpec) -> IdealGasMixture | RealGasMixture:
    """The mixture of a specification (kind "gas_mixture": mole_fractions, model "ideal_gas" or "real_gas").

    Raises UnknownFluid for a composition or a model that cannot be.
    """
    fractions = composition(spec.mole_fractions or {})
    model = spec.model or "ideal_gas"
    if model == "ideal_gas":
        return IdealGasMixture(fractions)
    if model == "real_gas":
        return RealGasMixture(fractions)
    raise UnknownFluid(f"A gas mixture has no model {model[:40]!r}.", hint="Choose ideal_gas or real_gas.")
