"""The second law over the period, for each group of vessels that streams or heat join.

S_gen = Σ (m s)_final − Σ (m s)_initial + Σ ∫ ṁ s dt (out) − Σ ∫ ṁ s dt (in) − Σ ∫ Q̇/T dt (in) ≥ 0
"""

from __future__ import annotations

import math

from service.balance.network import connected_groups
from service.balance.solution import EntropyCheck
from service.solvers.rate_form.totals import Totals

NOISE = 1e-6
"""Relative to the largest term: what the integration and the look-ups can amount to."""


def entropy_checks(totals: Totals) -> list[EntropyCheck]:
    """Entropy generated over the period [J/K], group by group."""
    plant = totals.plant
    links = [(f.source, f.target) for f in plant.flows if f.source is not None and f.target is not None]
    links += [(e.source, e.target) for e in plant.exchanges if e.source is not None and e.target is not None]
    return [_check(totals, group) for group in sorted(connected_groups(range(len(plant.vessels)), links))]


def _check(totals: Totals, group: list[int]) -> EntropyCheck:
    plant = totals.plant
    name = " + ".join(plant.vessels[n].boundary for n in group)
    terms: list[float] = []
    for n in group:
        vessel = plant.vessels[n]
        if vessel.mass > 0.0:
            terms.append(-vessel.mass * totals.start.held[n].state.values["s"])
        terms.append(totals.final.held[n].mass * totals.final.held[n].state.values["s"])
        if (wall := vessel.wall) is not None:
            terms.append(wall.capacity * math.log(totals.final.held[n].wall / wall.start))
            terms.append(-totals.ambient_total(n) / wall.ambient)
    for i, flow in enumerate(plant.flows):
        if sign := (flow.source in group) * 1.0 - (flow.target in group) * 1.0:
            terms.append(sign * totals.flow_total(i, 3))
    for i, exchange in enumerate(plant.exchanges):
        sign = (exchange.source in group) * 1.0 - (exchange.target in group) * 1.0
        if not sign or exchange.transfer.kind in ("shaft_work", "electrical_work"):
            continue
        if exchange.transfer.kind == "fuel":
            return EntropyCheck(name, None, "not_checked", f"{exchange.id} is a fuel; its combustion is not modelled.")
        if exchange.temperature is None and totals.exchange_total(i, 0) != 0.0:
            why = f"{exchange.id} does not say at which `temperature` its heat crosses."
            return EntropyCheck(name, None, "not_checked", why)
        terms.append(sign * totals.exchange_total(i, 1))
    generation = sum(terms)
    if generation < -NOISE * max(abs(t) for t in terms):
        return EntropyCheck(name, generation, "violated", "Entropy would be destroyed over the period.")
    return EntropyCheck(name, generation, "satisfied", "Entropy generation over the period is not negative.")
