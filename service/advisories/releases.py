"""Rules on openings: what gets out, what it does to people, and what the flow through the opening is like."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from typing import Protocol, runtime_checkable

from service.advisories.context import Amounts, Context, Finding, Opening, known
from service.advisories.hazards import hazards
from service.balance.restriction import mass_flux
from service.errors import CaseError
from service.fluids.names import own_name
from service.fluids.protocol import Fluid

BURN_LIMIT = 333.15  # [K] 60 degC
COLD_BURN = 233.15  # [K] -40 degC
OPEN_AIR = 1.05
"""Pressure behind an opening over that of the site, up to which it is taken to blow into the open."""


@runtime_checkable
class _Mixture(Protocol):
    """A fluid of several components, by the property library's names."""

    @property
    def mole_fractions(self) -> Mapping[str, float]: ...


def composition(fluid: Fluid) -> dict[str, float]:
    """Name → mole fraction; a pure fluid is all of itself."""
    if isinstance(fluid, _Mixture):
        return {own_name(name): x for name, x in fluid.mole_fractions.items()}
    return {fluid.name: 1.0} if fluid.kind == "pure" else {}


def _escaping(context: Context) -> Iterator[tuple[Opening, str, Amounts]]:
    """Openings into the open, with the words for what they let out and its amount."""
    atmosphere = context.built.case.site.atmospheric_pressure
    for opening in context.vents:
        flow = context.value(f"{opening.stream.id}.mass_flow")
        if (opening.p2 is None or opening.p2 <= OPEN_AIR * atmosphere) and (flow is None or flow > 0.0):
            amount = "{0} of " if flow is not None else ""
            amounts = (("mass_flow", flow),) if flow is not None else ()
            yield opening, f"{opening.relation.id} lets out {amount}{opening.state.fluid}", amounts


def release_of(hazard: str, advice: str) -> Callable[[Context], Iterator[Finding]]:
    """The rule on openings that let out what has one of the hazards of `hazards.py`."""

    def look(context: Context) -> Iterator[Finding]:
        for opening, what, amounts in _escaping(context):
            if hazard in hazards(composition(opening.fluid)):
                yield Finding(f"{what}, which {advice}.", opening.stream.id, amounts)

    return look


def scalding_release(context: Context) -> Iterator[Finding]:
    """Anything above the burn limit that blows into the open."""
    for opening, what, amounts in _escaping(context):
        T = known(opening.state, "T")
        if T is not None and T > BURN_LIMIT:
            harm = (
                "it scalds, and steam may be invisible near the leak" if opening.state.fluid == "water" else "it burns"
            )
            text = f"{what} at {{{len(amounts)}}}: {harm}. Keep people out of its way until it is shut off."
            yield Finding(text, opening.stream.id, (*amounts, ("temperature", T)))


def cold_release(context: Context) -> Iterator[Finding]:
    """Anything that blows into the open so cold, or boils so cold there, that it burns the skin."""
    atmosphere = context.built.case.site.atmospheric_pressure
    for opening, what, amounts in _escaping(context):
        T = known(opening.state, "T")
        if opening.state.phase in ("liquid", "two_phase") and opening.fluid.kind == "pure":
            T = opening.fluid.saturation(p=atmosphere) or T
        if T is not None and T < COLD_BURN:
            text = (
                f"{what}, which is at {{{len(amounts)}}} in the open: it freezes skin and makes common steel brittle. "
                "Keep away, and check what it falls on."
            )
            yield Finding(text, opening.stream.id, (*amounts, ("temperature", T)))


def choked_flow(context: Context) -> Iterator[Finding]:
    """The flow through a restriction no longer depends on what lies behind it."""
    for opening in context.openings:
        if opening.p2 is None or opening.state.phase == "liquid":
            continue
        p, T, h, s, rho = (opening.state.properties[name] for name in ("p", "T", "h", "s", "rho"))
        try:
            flux = mass_flux(opening.fluid, p, T, h, s, rho, opening.p2)
        except CaseError:
            continue
        if flux.choked:
            text = (
                f"The flow through {opening.relation.id} is choked, with {{0}} at the throat: a lower pressure "
                "behind it does not raise the flow. Expect noise and vibration."
            )
            yield Finding(text, opening.relation.id, (("pressure", flux.throat_pressure),))


def flashing_discharge(context: Context) -> Iterator[Finding]:
    """A liquid whose boiling pressure lies above the pressure behind its restriction."""
    for opening in context.openings:
        T = known(opening.state, "T")
        if opening.p2 is None or opening.state.phase != "liquid" or T is None:
            continue
        critical = opening.fluid.limits.T_critical
        boiling = opening.fluid.saturation(T=T) if critical is None or critical > T else None
        if boiling is not None and opening.p2 < boiling:
            text = (
                f"The liquid boils below {{0}}, and the pressure behind {opening.relation.id} is {{1}}: it flashes "
                "there. The flow was taken as that of a liquid, which overstates it, the more the longer the "
                "passage: do not size relief by it."
            )
            yield Finding(text, opening.relation.id, (("pressure", boiling), ("pressure", opening.p2)))


def two_phase_discharge(context: Context) -> Iterator[Finding]:
    """A restriction that is fed with liquid and vapour at once."""
    for opening in context.openings:
        x = known(opening.state, "x")
        if opening.state.phase == "two_phase" and x is not None and 0.0 < x < 1.0:
            text = (
                f"Liquid and vapour enter {opening.relation.id} together, with a quality of {{0}}: the flow was "
                "taken as homogeneous and in equilibrium. A short passage lets more through, up to several times at "
                "low quality: do not size relief by it."
            )
            yield Finding(text, opening.relation.id, (("dimensionless", x),))
