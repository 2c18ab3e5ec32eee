"""The second law as a check on a solved first law: entropy generation of each boundary.

S_gen = Σ ṁ s (out) − Σ ṁ s (in) − Σ Q̇/T (in, at the temperature where the heat crosses) ≥ 0
"""

from __future__ import annotations

import math

from service.balance.builder import BuiltCase
from service.balance.case import Content, Stream, Transfer
from service.balance.network import connected_groups
from service.balance.solution import EntropyCheck
from service.engine.execute import Run

NOISE = 1e-7
"""Relative to the largest entropy flow: what round-off in property look-ups can amount to."""


class _NotCheckable(Exception):
    """Something that the check needs is not known; the text says what."""


def entropy_checks(built: BuiltCase, done: Run) -> list[EntropyCheck]:
    """Entropy generation [W/K] of every boundary with an energy balance, with its verdict.

    Boundaries that exchange heat at an unknown temperature (the two sides of an exchanger) are checked together.
    """
    checks = []
    for group in _groups(built, done):
        name = " + ".join(group)
        try:
            checks.append(_check(built, done, name, set(group)))
        except _NotCheckable as reason:
            checks.append(EntropyCheck(name, None, "not_checked", str(reason)))
    return checks


def _groups(built: BuiltCase, done: Run) -> list[list[str]]:
    names = [e.boundary for e in built.energy_balances]
    place = {name: i for i, name in enumerate(names)}
    links = [
        (place[t.source], place[t.target])
        for t in built.case.transfers
        if t.kind == "heat"
        and t.source in place
        and t.target in place
        and _crossing_temperature(built, done, t) is None
    ]
    groups = sorted(connected_groups(range(len(names)), links))
    return [[names[i] for i in group] for group in groups]


def _check(built: BuiltCase, done: Run, name: str, group: set[str]) -> EntropyCheck:
    case = built.case
    streams = [(s, (s.source in group) * 1.0 - (s.target in group) * 1.0) for s in case.streams]
    crossing = [(s, sign) for s, sign in streams if sign]
    terms = [sign * _flow(built, done, s, len(crossing)) * _entropy(built, done, s) for s, sign in crossing]
    for content in case.contents:
        if content.boundary in group:
            terms += _stored(built, done, content)
    at_ambient = []
    for transfer in case.transfers:
        sign = (transfer.source in group) * 1.0 - (transfer.target in group) * 1.0
        if sign:
            term, ambient = _entropy_of_transfer(built, done, transfer)
            terms.append(sign * term)
            at_ambient += [transfer.id] if ambient else []
    generation = sum(terms)
    largest = max((abs(t) for t in terms), default=0.0)
    note = f" Counted at the site's ambient temperature: {', '.join(at_ambient)}." if at_ambient else ""
    if generation < -NOISE * largest:
        return EntropyCheck(name, generation, "violated", f"Entropy would be destroyed.{note}")
    return EntropyCheck(name, generation, "satisfied", f"Entropy generation is not negative.{note}")


def _stored(built: BuiltCase, done: Run, content: Content) -> list[float]:
    """Final and minus initial entropy of a content [J/K]."""
    terms = []
    for end, sign in (("initial", -1.0), ("final", 1.0)):
        index = built.model.index
        mass = done.values[index.get(f"{content.id}.{end}.mass", index.get(f"{content.id}.mass", 0))]
        if mass == 0.0:
            continue
        looked_up = done.lookups.get(built.state_nodes.get(f"{content.id}.{end}", -1))
        if looked_up is None or not math.isfinite(mass) or not math.isfinite(looked_up.get("s", math.nan)):
            raise _NotCheckable(f"The {end} state or mass of {content.id} is not known.")
        terms.append(sign * mass * looked_up["s"])
    return terms


def _flow(built: BuiltCase, done: Run, stream: Stream, crossing: int) -> float:
    index, amount = built.model.index, "mass_flow" if built.case.system == "steady_flow" else "mass"
    number = index.get(f"{stream.id}.dry_air_flow", index.get(f"{stream.id}.{amount}"))
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


def _entropy_of_transfer(built: BuiltCase, done: Run, transfer: Transfer) -> tuple[float, bool]:
    """Entropy that goes with a transfer [W/K], in its stated direction; whether ambient temperature had to serve."""
    if transfer.kind == "fuel":
        raise _NotCheckable(f"{transfer.id} is a fuel; the entropy of its combustion is not modelled.")
    if transfer.kind != "heat":
        return 0.0, False
    rate_name = "rate" if built.case.system == "steady_flow" else "energy"
    rate = done.values[built.model.index[f"{transfer.id}.{rate_name}"]]
    if not math.isfinite(rate):
        raise _NotCheckable(f"The rate of {transfer.id} is not known.")
    if rate == 0.0:
        return 0.0, False
    temperature = _crossing_temperature(built, done, transfer)
    if temperature is not None:
        return float(rate / temperature), False
    ambient = built.case.site.ambient_temperature
    if ambient is not None and None in (transfer.source, transfer.target):
        return float(rate / ambient), True
    raise _NotCheckable(f"{transfer.id} does not say at which `temperature` its heat crosses.")


def _crossing_temperature(built: BuiltCase, done: Run, transfer: Transfer) -> float | None:
    for name in ("temperature", "source_temperature"):
        number = built.model.index.get(f"{transfer.id}.{name}")
        if number is not None and math.isfinite(done.values[number]):
            return float(done.values[number])
    return None
