"""The second law as a check on a solved first law: entropy generation of each boundary.

S_gen = Σ ṁ s (out) − Σ ṁ s (in) − Σ Q̇/T (in, at the temperature where the heat crosses) ≥ 0
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping

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
    """Entropy generation [W/K, or J/K over a period] of every boundary with an energy balance, with its verdict.

    Boundaries that exchange heat at an unknown temperature (the two sides of an exchanger) are checked together.
    """
    plant = _Plant(built, done)
    checks = []
    for group in _groups(built, done):
        name = " + ".join(group)
        try:
            checks.append(_check(name, _Group(plant, group)))
        except _NotCheckable as reason:
            checks.append(EntropyCheck(name, None, "not_checked", str(reason)))
    return checks


class _Plant:
    """A solved case with what crosses and fills each boundary."""

    def __init__(self, built: BuiltCase, done: Run) -> None:
        self.built, self.done = built, done
        self.streams: dict[str | None, list[Stream]] = {}
        self.transfers: dict[str | None, list[Transfer]] = {}
        self.contents: dict[str, list[Content]] = {}
        for stream in built.case.streams:
            for end in {stream.source, stream.target}:
                self.streams.setdefault(end, []).append(stream)
        for transfer in built.case.transfers:
            for end in {transfer.source, transfer.target}:
                self.transfers.setdefault(end, []).append(transfer)
        for content in built.case.contents:
            self.contents.setdefault(content.boundary, []).append(content)
        self.states: dict[str, list[Mapping[str, float]]] = {}
        for key, node in built.state_nodes.items():
            if (found := done.lookups.get(node)) is not None:
                self.states.setdefault(key.partition(".")[0], []).append(found)

    def value(self, *addresses: str) -> float:
        """The value [SI] of the first of the addresses that the model knows; NaN where it knows none."""
        number = next((n for a in addresses if (n := self.built.model.index.get(a)) is not None), None)
        return float(self.done.values[number]) if number is not None else math.nan


class _Group:
    """Boundaries that are checked together. out: +1 where something leaves them, -1 where it enters, else 0."""

    def __init__(self, plant: _Plant, boundaries: list[str]) -> None:
        self.plant, self.boundaries = plant, set(boundaries)
        self.streams = {s.id: s for b in boundaries for s in plant.streams.get(b, ())}.values()
        self.transfers = {t.id: t for b in boundaries for t in plant.transfers.get(b, ())}.values()
        self.contents = [c for b in boundaries for c in plant.contents.get(b, ())]

    def out(self, item: Stream | Transfer) -> float:
        return (item.source in self.boundaries) * 1.0 - (item.target in self.boundaries) * 1.0


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


def _check(name: str, group: _Group) -> EntropyCheck:
    crossing = [s for s in group.streams if group.out(s)]
    flows = [_flow(group, s) for s in crossing]
    terms = [group.out(s) * m * _entropy(group.plant, s) for m, s in zip(flows, crossing, strict=True)]
    for content in group.contents:
        for sign, mass, s in _stored(group.plant, content):
            flows.append(mass)
            terms.append(sign * mass * s)
    heat = _heat_out(group)
    terms += [rate / T for rate, T in heat.values() if T is not None]
    doubtful = {name: rate for name, (rate, T) in heat.items() if T is None}
    noise = NOISE * max([*(abs(t) for t in terms), *(LEAST_CAPACITY * abs(m) for m in flows)], default=0.0)
    if doubtful:
        return _without_temperatures(name, group, sum(terms), doubtful, noise)
    generation = sum(terms)
    if generation < -noise:
        return EntropyCheck(name, generation, "violated", "Entropy would be destroyed.")
    return EntropyCheck(name, generation, "satisfied", "Entropy generation is not negative.")


def _without_temperatures(
    name: str, group: _Group, known: float, doubtful: Mapping[str, float], noise: float
) -> EntropyCheck:
    """The verdict where heat crosses at temperatures that are not given; known [W/K]: all other terms.

    Entropy that is destroyed even where heat leaves at the lowest and enters at the highest temperature inside is
    destroyed. Otherwise heat from or to the surroundings is counted at the ambient temperature, where that is given:
    it can confirm but, since a heating or cooling agent may not be drawn, not condemn.
    """
    names, inside = ", ".join(doubtful), _range(group)
    if inside is not None:
        best = known + sum(rate / (inside[0] if rate > 0 else inside[1]) for rate in doubtful.values())
        if best < -noise:
            why = f"Entropy would be destroyed, at whatever temperature inside the heat crosses: {names}."
            return EntropyCheck(name, best, "violated", why)
    ambient = group.plant.built.case.site.ambient_temperature
    outside = {t.id for t in group.transfers if None in (t.source, t.target)}
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


def _range(group: _Group) -> tuple[float, float] | None:
    """The lowest and the highest temperature [K] inside; None where nothing is known to be inside.

    That of what crosses or is held, but a working fluid that does not show may be as cold as the surroundings and,
    where work crosses, as hot as any fire.
    """
    items = [*(s.id for s in group.streams), *(c.id for c in group.contents)]
    T = [state["T"] for item in items for state in group.plant.states.get(item, ()) if "T" in state]
    if not T:
        return None
    works = any(t.kind not in ("heat", "fuel") for t in group.transfers)
    surroundings = group.plant.built.case.site.ambient_temperature or COLD_SURROUNDINGS
    return min(*T, surroundings), math.inf if works else max(T)


def _stored(plant: _Plant, content: Content) -> Iterator[tuple[float, float, float]]:
    """(sign, mass [kg], s [J/(kg K)]) of the initial and the final state of a content."""
    for end, sign in (("initial", -1.0), ("final", 1.0)):
        mass = plant.value(f"{content.id}.{end}.mass", f"{content.id}.mass")
        if mass == 0.0:
            continue
        looked_up = plant.done.lookups.get(plant.built.state_nodes.get(f"{content.id}.{end}", -1))
        if looked_up is None or not math.isfinite(mass) or not math.isfinite(looked_up.get("s", math.nan)):
            raise _NotCheckable(f"The {end} state or mass of {content.id} is not known.")
        yield sign, mass, looked_up["s"]


def _flow(group: _Group, stream: Stream) -> float:
    """Flow [kg/s] or mass [kg] of a stream; 1 where it is not known and does not matter."""
    plant = group.plant
    amount = "mass_flow" if plant.built.case.system == "steady_flow" else "mass"
    flow = plant.value(f"{stream.id}.dry_air_flow", f"{stream.id}.{amount}")
    if math.isfinite(flow):
        return flow
    if _passes(group):
        return 1.0
    raise _NotCheckable(f"The flow of {stream.id} is not known.")


def _passes(group: _Group) -> bool:
    """Whether one stream enters, one leaves, and no heat crosses: the verdict is then the same for any flow."""
    ends = sorted(out for s in group.streams if (out := group.out(s)))
    heated = any(t.kind == "heat" and group.out(t) for t in group.transfers)
    return group.plant.built.case.system == "steady_flow" and ends == [-1.0, 1.0] and not heated


def _entropy(plant: _Plant, stream: Stream) -> float:
    looked_up = plant.done.lookups.get(plant.built.state_nodes.get(stream.id, -1))
    s = looked_up.get("s", math.nan) if looked_up is not None else math.nan
    if not math.isfinite(s):
        raise _NotCheckable(f"The entropy of {stream.id} is not known.")
    return s


def _heat_out(group: _Group) -> dict[str, tuple[float, float | None]]:
    """Heat that leaves a group of boundaries [W, J], and the temperature [K] at which it does, None where not known."""
    plant = group.plant
    out: dict[str, tuple[float, float | None]] = {}
    rate_name = "rate" if plant.built.case.system == "steady_flow" else "energy"
    for transfer in group.transfers:
        sign = group.out(transfer)
        if sign and transfer.kind == "fuel":
            raise _NotCheckable(f"{transfer.id} is a fuel; the entropy of its combustion is not modelled.")
        if sign and transfer.kind == "heat":
            rate = plant.value(f"{transfer.id}.{rate_name}")
            if not math.isfinite(rate):
                raise _NotCheckable(f"The rate of {transfer.id} is not known.")
            if rate != 0.0:
                out[transfer.id] = (sign * rate, _crossing_temperature(plant.built, plant.done, transfer))
    return out


def _crossing_temperature(built: BuiltCase, done: Run, transfer: Transfer) -> float | None:
    for name in ("temperature", "source_temperature"):
        number = built.model.index.get(f"{transfer.id}.{name}")
        if number is not None and math.isfinite(done.values[number]):
            return float(done.values[number])
    return None
