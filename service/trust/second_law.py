"""The second law as a check on a solved first law: entropy generation of each boundary.

S_gen = Σ ṁ s (out) − Σ ṁ s (in) − Σ Q̇/T (in, at the temperature where the heat crosses) ≥ 0
"""

from __future__ import annotations

import math
from collections.abc import Mapping

from service.balance.builder import BuiltCase
from service.balance.case import Content, Stream, Transfer
from service.balance.network import connected_groups
from service.balance.solution import EntropyCheck
from service.engine.execute import Run

NOISE = 1e-7
"""Relative to the largest entropy flow: what round-off in property look-ups can amount to."""
LEAST_CAPACITY = 100.0
"""[J/(kg K)] Below the heat capacity of every fluid: the scale of s where it happens to lie at its zero."""
COLD_SURROUNDINGS = 273.15
"""[K] What the surroundings are taken for in a bound, where the case does not say."""


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
    signed = [(s, (s.source in group) * 1.0 - (s.target in group) * 1.0) for s in case.streams]
    crossing = [(s, sign) for s, sign in signed if sign]
    flows = [_flow(built, done, s, _passes(built, group)) for s, _ in crossing]
    terms = [sign * m * _entropy(built, done, s) for m, (s, sign) in zip(flows, crossing, strict=True)]
    for content in case.contents:
        if content.boundary in group:
            terms += _stored(built, done, content)
    heat = _heat_out(built, done, group)
    terms += [rate / T for rate, T in heat.values() if T is not None]
    doubtful = {name: rate for name, (rate, T) in heat.items() if T is None}
    noise = NOISE * max([*(abs(t) for t in terms), *(LEAST_CAPACITY * abs(m) for m in flows)], default=0.0)
    if doubtful:
        return _without_temperatures(built, name, sum(terms), doubtful, _range(built, done, group), noise)
    generation = sum(terms)
    if generation < -noise:
        return EntropyCheck(name, generation, "violated", "Entropy would be destroyed.")
    return EntropyCheck(name, generation, "satisfied", "Entropy generation is not negative.")


def _without_temperatures(
    built: BuiltCase,
    name: str,
    known: float,
    doubtful: Mapping[str, float],
    inside: tuple[float, float] | None,
    noise: float,
) -> EntropyCheck:
    """The verdict where heat crosses at temperatures that are not given; known [W/K]: all other terms.

    Entropy that is destroyed even where heat leaves at the lowest and enters at the highest temperature inside is
    destroyed. Otherwise heat from or to the surroundings is counted at the ambient temperature, where that is given:
    it can confirm but, since a heating or cooling agent may not be drawn, not condemn.
    """
    names = ", ".join(doubtful)
    if inside is not None:
        best = known + sum(rate / (inside[0] if rate > 0 else inside[1]) for rate in doubtful.values())
        if best < -noise:
            why = f"Entropy would be destroyed, at whatever temperature inside the heat crosses: {names}."
            return EntropyCheck(name, best, "violated", why)
    ambient = built.case.site.ambient_temperature
    outside = {t.id for t in built.case.transfers if None in (t.source, t.target)}
    if ambient is None or not doubtful.keys() <= outside:
        raise _NotCheckable(f"Not said: the `temperature` at which heat crosses in {names}.")
    generation = known + sum(doubtful.values()) / ambient
    if generation < -noise:
        raise _NotCheckable(
            f"Heat crosses in {names} to or from something that is not at the ambient temperature of the site: say at "
            "which `temperature`."
        )
    why = f"Entropy generation is not negative. Counted at the site's ambient temperature: {names}."
    return EntropyCheck(name, generation, "satisfied", why)


def _range(built: BuiltCase, done: Run, group: set[str]) -> tuple[float, float] | None:
    """The lowest and the highest temperature [K] inside; None where nothing is known to be inside.

    That of what crosses or is held, but a working fluid that does not show may be as cold as the surroundings and,
    where work crosses, as hot as any fire.
    """
    case = built.case
    items = {s.id for s in case.streams if {s.source, s.target} & group}
    held = {c.id for c in case.contents if c.boundary in group}
    nodes = [n for key, n in built.state_nodes.items() if key in items or key.partition(".")[0] in held]
    T = [found["T"] for n in nodes if (found := done.lookups.get(n)) is not None and "T" in found]
    if not T:
        return None
    works = any(t.kind not in ("heat", "fuel") and {t.source, t.target} & group for t in case.transfers)
    surroundings = case.site.ambient_temperature or COLD_SURROUNDINGS
    return min(*T, surroundings), math.inf if works else max(T)


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


def _passes(built: BuiltCase, group: set[str]) -> bool:
    """Whether one stream enters, one leaves, and no heat crosses: the verdict is then the same for any flow."""
    case = built.case
    ends = [(s.source in group, s.target in group) for s in case.streams if (s.source in group) != (s.target in group)]
    heated = any(t.kind == "heat" and (t.source in group) != (t.target in group) for t in case.transfers)
    return case.system == "steady_flow" and sorted(ends) == [(False, True), (True, False)] and not heated


def _flow(built: BuiltCase, done: Run, stream: Stream, passes: bool) -> float:
    """Flow [kg/s] or mass [kg] of a stream; 1 where it is not known and does not matter."""
    index, amount = built.model.index, "mass_flow" if built.case.system == "steady_flow" else "mass"
    number = index.get(f"{stream.id}.dry_air_flow", index.get(f"{stream.id}.{amount}"))
    flow = done.values[number] if number is not None else math.nan
    if math.isfinite(flow):
        return float(flow)
    if passes:
        return 1.0
    raise _NotCheckable(f"The flow of {stream.id} is not known.")


def _entropy(built: BuiltCase, done: Run, stream: Stream) -> float:
    looked_up = done.lookups.get(built.state_nodes.get(stream.id, -1))
    s = looked_up.get("s", math.nan) if looked_up is not None else math.nan
    if not math.isfinite(s):
        raise _NotCheckable(f"The entropy of {stream.id} is not known.")
    return s


def _heat_out(built: BuiltCase, done: Run, group: set[str]) -> dict[str, tuple[float, float | None]]:
    """Heat that leaves a group of boundaries [W, J], and the temperature [K] at which it does, None where not known."""
    out: dict[str, tuple[float, float | None]] = {}
    rate_name = "rate" if built.case.system == "steady_flow" else "energy"
    for transfer in built.case.transfers:
        sign = (transfer.source in group) * 1.0 - (transfer.target in group) * 1.0
        if sign and transfer.kind == "fuel":
            raise _NotCheckable(f"{transfer.id} is a fuel; the entropy of its combustion is not modelled.")
        if sign and transfer.kind == "heat":
            rate = done.values[built.model.index[f"{transfer.id}.{rate_name}"]]
            if not math.isfinite(rate):
                raise _NotCheckable(f"The rate of {transfer.id} is not known.")
            if rate != 0.0:
                out[transfer.id] = (sign * float(rate), _crossing_temperature(built, done, transfer))
    return out


def _crossing_temperature(built: BuiltCase, done: Run, transfer: Transfer) -> float | None:
    for name in ("temperature", "source_temperature"):
        number = built.model.index.get(f"{transfer.id}.{name}")
        if number is not None and math.isfinite(done.values[number]):
            return float(done.values[number])
    return None
