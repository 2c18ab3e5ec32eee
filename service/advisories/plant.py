"""Rules on vessels, lines and surfaces: heat, cold, vacuum, boiling, moisture and speed."""

from __future__ import annotations

from collections.abc import Iterator

from service.advisories.context import Context, Finding, also, known, told_once

BURN_LIMIT = 333.15  # [K] 60 degC
BRITTLE = 244.15  # [K] -29 degC (-20 degF)
FREEZING = 273.15  # [K]
COLD_WATER = 275.15  # [K] 2 degC
FREEZING_MARGIN = 3.0  # [K]
VACUUM = 0.98
"""Of the site's pressure: what barometers and gauges differ by is no vacuum."""
LITTLE_SUPERHEAT = 5.0  # [K]
SATURATED_AIR = 0.995
FASTEST = {"liquid": 5.0, "two_phase": 25.0}
FASTEST_GAS = 60.0  # [m/s]
SQUEEZED = 2.0
"""Ratio of final to initial pressure from which a vessel full of liquid is told."""


def hot_surface(context: Context) -> Iterator[Finding]:
    """Heat that leaves to the surroundings at a stated temperature above 60 degC."""
    for transfer in context.built.case.transfers:
        T = context.value(f"{transfer.id}.temperature")
        if transfer.kind == "heat" and transfer.target is None and T is not None and T > BURN_LIMIT:
            text = f"{transfer.id} leaves at a surface of {{0}}: touching it burns. Insulate or guard it."
            yield Finding(text, f"{transfer.id}.temperature", (("temperature", T),))


def below_atmosphere(context: Context) -> Iterator[Finding]:
    """Vapour of a fluid that can condense, below the pressure of the site. Each pressure of a fluid is told once."""
    least = VACUUM * context.built.case.site.atmospheric_pressure
    low = [
        state
        for state, fluid in context.states
        if state.phase in ("vapour", "two_phase") and fluid.kind == "pure" and (known(state, "p") or least) < least
    ]
    for state, others in told_once(low, lambda s: (s.fluid, f"{s.properties['p']:.4g}")):
        text = (
            f"{state.stream} is below atmospheric pressure, at {{0}}{also(others)}: air leaks in, and a vessel that "
            "is not built for vacuum may collapse. Check the vacuum rating and the vacuum breaker."
        )
        yield Finding(text, f"{state.stream}.p", (("pressure", state.properties["p"]),))


def flashing_liquid(context: Context) -> Iterator[Finding]:
    """A liquid that enters a boundary and leaves it partly as vapour, although nothing heats it there."""
    for end, feeders in context.fed:
        if end.phase != "two_phase" or not feeders or any(f.phase != "liquid" for f in feeders):
            continue
        boundary = context.streams[end.stream].source
        if boundary is not None and not context.transfers_at(boundary, "heat", "fuel"):
            text = (
                f"The liquid flashes in {boundary}: {end.stream} leaves with a quality of {{0}}. Unless meant, as in "
                "an expansion valve, expect noise, erosion, hammer in the line, and cavitation in a pump behind it."
            )
            yield Finding(text, f"{end.stream}.x", (("dimensionless", end.properties["x"]),))


def cold_embrittlement(context: Context) -> Iterator[Finding]:
    """What comes in above -29 degC and is made colder: a let-down or a vessel that is emptied."""
    made = [(end, feeders) for end, feeders in context.fed if feeders]
    for content in context.built.case.contents:
        ends = [context.state(f"{content.id}.{end}") for end in ("initial", "final")]
        made += [(end, [start]) for start, end in [ends] if start is not None and end is not None]
    for end, feeders in made:
        T = known(end, "T")
        coldest = min((known(f, "T") or 0.0 for f in feeders), default=0.0)
        if T is not None and T < BRITTLE <= coldest:
            text = (
                f"{end.stream} is cooled to {{0}}: common carbon steel may break brittle there. Check the minimum "
                "design temperature of vessel, valve and line, and where the cold goes from there."
            )
            yield Finding(text, f"{end.stream}.T", (("temperature", T),))


def freezing(context: Context) -> Iterator[Finding]:
    """Liquid water below 2 degC, and a brine within 3 K of its freezing point."""
    for state, fluid in context.states:
        T = known(state, "T")
        if T is None or state.phase != "liquid":
            continue
        if fluid.kind == "pure" and fluid.name == "water" and T < COLD_WATER:
            text = f"{state.stream} is at {{0}}: it may freeze and block or burst the line. Check tracing and flow."
            yield Finding(text, f"{state.stream}.T", (("temperature", T),))
        elif fluid.kind == "brine" and fluid.limits.T_min + FREEZING_MARGIN > T:
            text = (
                f"{state.stream} is at {{0}}, and {fluid.name} freezes, or its data end, at {{1}}: walls are colder "
                "than the bulk. Check the strength of the solution."
            )
            yield Finding(text, f"{state.stream}.T", (("temperature", T), ("temperature", fluid.limits.T_min)))


def frosting(context: Context) -> Iterator[Finding]:
    """Humid air that is cooled below 0 degC, or to its dew point by a surface below 0 degC."""
    for end, feeders in context.fed:
        T = known(end, "T")
        if end.phase != "humid_air" or T is None or not feeders:
            continue
        dew = max((known(f, "dew_point") or 0.0 for f in feeders), default=0.0)
        surface = _coldest_surface(context, end.stream)
        cold = min(T, surface) if surface is not None else T
        if cold < FREEZING and dew > cold and all((known(f, "T") or 0.0) > T for f in feeders):
            text = (
                f"{end.stream} is cooled against {{0}}, below freezing and below the dew point of {{1}} of what "
                "comes in: frost closes the coil. Plan for defrosting, or raise the temperature of the surface."
            )
            yield Finding(text, f"{end.stream}.T", (("temperature", cold), ("temperature", dew)))


def _coldest_surface(context: Context, stream: str) -> float | None:
    """The lowest stated temperature [K] at which heat leaves the boundary that a stream comes from."""
    boundary = context.streams[stream].source
    if boundary is None:
        return None
    out = [t for t in context.transfers_at(boundary, "heat") if t.source == boundary]
    found = [T for t in out if (T := context.value(f"{t.id}.temperature")) is not None]
    return min(found, default=None)


def condensation(context: Context) -> Iterator[Finding]:
    """Humid air that meets a surface below its dew point, or leaves saturated, where no water is said to leave."""
    for end, feeders in context.fed:
        boundary = context.streams[end.stream].source
        if end.phase != "humid_air" or boundary is None or not feeders:
            continue
        if any(s.fluid == "water" and s.phase == "liquid" for s in context.outflows[boundary]):
            continue
        dew = max((known(f, "dew_point") or 0.0 for f in feeders), default=0.0)
        surface, humidity = _coldest_surface(context, end.stream), known(end, "relative_humidity")
        if surface is not None and surface < dew:
            text = (
                f"Air enters {boundary} with a dew point of {{0}} and meets a surface at {{1}}: water condenses "
                "there, and the case has no stream for it. Add the condensate."
            )
            yield Finding(text, end.stream, (("temperature", dew), ("temperature", surface)))
        elif humidity is not None and humidity > SATURATED_AIR and not _is_wetted(context, boundary):
            text = (
                f"{end.stream} leaves saturated, with a relative humidity of {{0}}: mist and water on cold walls are "
                "likely, and the case has no stream for it. Check for condensate."
            )
            yield Finding(text, f"{end.stream}.relative_humidity", (("dimensionless", humidity),))


def _is_wetted(context: Context, boundary: str) -> bool:
    """Whether liquid water enters: saturated air is then what is meant (a washer, a tower)."""
    return any(s.fluid == "water" and s.phase == "liquid" for s in context.inflows[boundary])


def high_velocity(context: Context) -> Iterator[Finding]:
    """A velocity in a pipe above what lines are built for; the end of a machine or nozzle is left out."""
    ends = {r.streams["to"] for r in context.built.case.relations if "to" in r.streams}
    for state, _ in context.states:
        velocity = state.flows.get("velocity")
        most = FASTEST.get(state.phase, FASTEST_GAS)
        if velocity is not None and velocity > most and "bore" in state.flows and state.stream not in ends:
            text = (
                f"{state.stream} moves at {{0}} in its pipe; {{1}} is usual at most. Expect noise, vibration, "
                "pressure drop and erosion: check the bore."
            )
            yield Finding(text, f"{state.stream}.velocity", (("velocity", velocity), ("velocity", most)))


def wet_after_spray(context: Context) -> Iterator[Finding]:
    """Vapour that liquid was sprayed into, leaving with little or no superheat."""
    for end, feeders in context.fed:
        fluid, p, T = context.fluid(end.stream), known(end, "p"), known(end, "T")
        phases = {f.phase for f in feeders}
        if fluid is None or p is None or T is None or not ({"vapour", "supercritical"} & phases and "liquid" in phases):
            continue
        boiling = fluid.saturation(p=p) if end.phase in ("vapour", "two_phase") else None
        superheated = any((known(f, "T") or 0.0) > T + LITTLE_SUPERHEAT for f in feeders if f.phase != "liquid")
        boundary = context.streams[end.stream].source
        leaves_liquid = boundary is not None and any(s.phase == "liquid" for s in context.outflows[boundary])
        if boiling is not None and superheated and not leaves_liquid and T - boiling < LITTLE_SUPERHEAT:
            text = (
                f"{end.stream} leaves with only {{0}} of superheat after the spray: droplets are carried along, and a "
                "controller cannot tell dry from wet there. Spray less."
            )
            yield Finding(text, f"{end.stream}.T", (("temperature_difference", max(T - boiling, 0.0)),))


def liquid_full(context: Context) -> Iterator[Finding]:
    """A vessel of fixed volume that ends full of liquid at a much higher pressure."""
    for content in context.built.case.contents:
        start, end = (context.state(f"{content.id}.{name}") for name in ("initial", "final"))
        if start is None or end is None or end.phase not in ("liquid", "supercritical"):
            continue
        v1, v2, p1, p2 = (start.flows.get("volume"), end.flows.get("volume"), known(start, "p"), known(end, "p"))
        if v1 is None or v2 is None or p1 is None or p2 is None or start.phase not in ("liquid", "two_phase"):
            continue
        if abs(v2 - v1) < 1e-6 * v1 and p2 > SQUEEZED * p1:
            text = (
                f"{content.id} is shut in full of liquid, and its pressure rises from {{0}} to {{1}}: a real vessel "
                "opens or bursts. It needs a thermal relief valve, or room for the vapour."
            )
            yield Finding(text, f"{content.id}.final.p", (("pressure", p1), ("pressure", p2)))


def wall_too_cold(context: Context) -> Iterator[Finding]:
    """A wall that at some time is colder than its minimum design temperature."""
    transient = context.solution.transient
    for content in context.built.case.contents if transient is not None else ():
        design, reached = content.quantities.get("wall.minimum_temperature"), f"{content.id}.wall.T"
        if transient is None or design is None or design.value is None or reached not in transient.extremes:
            continue
        coldest, when, _, _ = transient.extremes[reached]
        if coldest < design.value:
            text = (
                f"The wall of {content.id} falls to {{0}}, {{1}} after the start, below its minimum design "
                "temperature of {2}: it may break brittle. Let down more slowly, in steps, or do not raise the "
                "pressure again while it is cold."
            )
            yield Finding(text, reached, (("temperature", coldest), ("time", when), ("temperature", design.value)))
