"""The second law as a check on a solved first law: entropy generation of each boundary.

S_gen = Σ ṁ s (out) − Σ ṁ s (in) − Σ Q̇/T (in, at the temperature where the heat crosses) ≥ 0
"""

from __future__ import annotations

import math

from service.balance.builder import BuiltCase
from service.balance.case import Stream, Transfer
from service.balance.solution import EntropyCheck
from service.engine.execute import Run

NOISE = 1e-7
"""Relative to the largest entropy flow: what round-off in property look-ups can amount to."""


class _NotCheckable(Exception):
    """Something that the check needs is not known; the text says what."""


def entropy_checks(built: BuiltCase, done: Run) -> list[EntropyCheck]:
    """Entropy generation [W/K] of every boundary with an energy balance, with its verdict."""
    checks = []
    for energy in built.energy_balances:
        try:
            checks.append(_check(built, done, energy.boundary))
        except _NotCheckable as reason:
            checks.append(EntropyCheck(energy.boundary, None, "not_checked", str(reason)))
    return checks


def _check(built: BuiltCase, done: Run, boundary: str) -> EntropyCheck:
    case = built.case
    streams = [(s, -1.0) for s in case.streams if s.target == boundary]
    streams += [(s, 1.0) for s in case.streams if s.source == boundary]
    terms = [sign * _flow(built, done, s, len(streams)) * _entropy(built, done, s) for s, sign in streams]
    for transfer in case.transfers:
        sign = (transfer.source == boundary) * 1.0 - (transfer.target == boundary) * 1.0
        if sign:
            terms.append(sign * _entropy_of_transfer(built, done, transfer))
    generation = sum(terms)
    largest = max((abs(t) for t in terms), default=0.0)
    if generation < -NOISE * largest:
        return EntropyCheck(boundary, generation, "violated", "Entropy would be destroyed.")
    return EntropyCheck(boundary, generation, "satisfied", "Entropy generation is not negative.")


def _flow(built: BuiltCase, done: Run, stream: Stream, crossing: int) -> float:
    index = built.model.index
    number = index.get(f"{stream.id}.dry_air_flow", index.get(f"{stream.id}.mass_flow"))
    flow = done.values[number] if number is not None else math.nan
    if math.isfinite(flow):
        return float(flow)
    if crossing == 2:
        return 1.0  # one stream passing: per kilogram and second
    raise _NotCheckable(f"The flow of {stream.id} is not known.")


def _entropy(built: BuiltCase, done: Run, stream: Stream) -> float:
    looked_up = done.lookups.get(built.state_nodes.get(stream.id, -1))
    s = looked_up.get("s", math.nan) if looked_up is not None else math.nan
    if not math.isfinite(s):
        raise _NotCheckable(f"The entropy of {stream.id} is not known.")
    return s


def _entropy_of_transfer(built: BuiltCase, done: Run, transfer: Transfer) -> float:
    if transfer.kind == "fuel":
        raise _NotCheckable(f"{transfer.id} is a fuel; the entropy of its combustion is not modelled.")
    if transfer.kind != "heat":
        return 0.0
    rate = done.values[built.model.index[f"{transfer.id}.rate"]]
    if not math.isfinite(rate):
        raise _NotCheckable(f"The rate of {transfer.id} is not known.")
    if rate == 0.0:
        return 0.0
    for name in ("temperature", "source_temperature"):
        number = built.model.index.get(f"{transfer.id}.{name}")
        if number is not None and math.isfinite(done.values[number]):
            return float(rate / done.values[number])
    raise _NotCheckable(f"{transfer.id} does not say at which `temperature` its heat crosses.")
