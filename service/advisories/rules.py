"""The rules: each looks at a solved case and yields the advisories that apply. `registry.py` names them all."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from service.advisories.context import Context
from service.advisories.hazards import FLAMMABLE, TOXIC, displaces_air
from service.balance.restriction import mass_flux
from service.balance.solution import Advisory, SignalWord
from service.errors import CaseError

BURN_LIMIT = 333.15  # [K] 60 degC
WET_LIMIT = 0.88
WET_BASIS = "common practice: at least 0.88 at a turbine's exhaust"
HOT_AIR = 453.15  # [K] 180 degC
OIL_BASIS = "common practice: 180 degC at the discharge of oil-lubricated machines"
NEAR_LIMIT = 0.02
PERCEPTIBLE = 1e-9
DOUBTFUL = 0.05  # [K] less than any plant thermometer tells
SHEET = "safety data sheet of the substance (common practice)"
RELEASES: tuple[tuple[Callable[[str], bool], str, SignalWord, str], ...] = (
    (TOXIC.__contains__, "toxic-release", "DANGER", "is toxic: evacuate, and approach only with breathing protection"),
    (FLAMMABLE.__contains__, "flammable-release", "DANGER", "is flammable: keep ignition sources away"),
    (displaces_air, "asphyxiant-release", "WARNING", "displaces air: ventilate, and measure oxygen before entering"),
)


def limit_crossed(context: Context) -> Iterator[Advisory]:
    """A limit that the case states is crossed."""
    for limit in context.built.case.limits:
        value = context.value(limit.of)
        if value is None:
            continue
        kind, why = context.kind(limit.of), f" ({limit.why})" if limit.why else ""
        for bound, word, crossed in (
            (limit.maximum, "above", limit.maximum is not None and value > (limit.maximum.value or 0.0)),
            (limit.minimum, "below", limit.minimum is not None and value < (limit.minimum.value or 0.0)),
        ):
            if crossed and bound is not None and bound.value is not None:
                text = f"{limit.of} is {{0}}, {word} its limit of {{1}}{why.replace('{', '(').replace('}', ')')}."
                amounts = ((kind, value), (kind, bound.value))
                yield Advisory("limit-crossed", "WARNING", text, limit.of, "limit stated in the case", amounts)


def second_law_violated(context: Context) -> Iterator[Advisory]:
    """Entropy would be destroyed: the description or the readings cannot be right."""
    for check in context.solution.entropy:
        if check.verdict == "violated" and check.generation is not None:
            text = (
                f"What is described for {check.boundary} is impossible: entropy would be destroyed at "
                f"{{0}}. Do not act on "
                "these numbers; check the readings, the directions and what crosses the boundary."
            )
            kind = "conductance" if context.built.case.system == "steady_flow" else "entropy"
            yield Advisory(
                "second-law-violated", "DANGER", text, check.boundary, "second law of thermodynamics",
                ((kind, -check.generation),),
            )  # fmt: skip


def efficiency_impossible(context: Context) -> Iterator[Advisory]:
    """An efficiency above one or below zero."""
    for relation, start, end in context.machines():
        value = context.value(f"{relation.id}.value")
        if value is not None and not 0.0 <= value <= 1.0 + PERCEPTIBLE:
            text = (
                f"The efficiency {relation.id} comes out as {{0}}: no machine between {start.stream} "
                f"and {end.stream} can "
                "do that. Check the temperature and pressure readings, and whether the fluid is wet."
            )
            yield Advisory(
                "efficiency-impossible", "WARNING", text, f"{relation.id}.value", "second law of thermodynamics",
                (("dimensionless", value),),
            )  # fmt: skip


def wet_expansion(context: Context) -> Iterator[Advisory]:
    """Droplets behind an expansion erode blades."""
    for relation, start, end in context.machines():
        x = end.properties.get("x")
        falls = end.properties["p"] < start.properties["p"]
        if falls and x is not None and 0.0 <= x < WET_LIMIT:
            text = f"The expansion {relation.id} ends wet, with a quality of {{0}} at {end.stream}: blades may erode."
            yield Advisory(
                "wet-expansion", "CAUTION", text, f"{end.stream}.x", "common practice: at least 0.88 "
                "at a turbine's exhaust",
                (("dimensionless", x),),
            )  # fmt: skip


def flashing_liquid(context: Context) -> Iterator[Advisory]:
    """A liquid that enters a boundary leaves it partly as vapour."""
    case = context.built.case
    for stream in case.streams:
        end = context.state(stream.id)
        if end is None or end.phase != "two_phase" or stream.source is None:
            continue
        feeders = [context.state(s.id) for s in case.streams if s.target == stream.source and s.id != stream.id]
        same = [f for f in feeders if f is not None and f.fluid == end.fluid]
        heated = any(stream.source in (t.source, t.target) and t.kind in ("heat", "fuel") for t in case.transfers)
        if same and all(f.phase == "liquid" for f in same) and not heated:
            text = (
                f"The liquid flashes in {stream.source}: {stream.id} leaves with a quality of {{0}}. Unless meant, "
                "as in an expansion valve, expect noise, erosion and cavitation in a pump behind it."
            )
            amounts = (("dimensionless", end.properties["x"]),)
            yield Advisory("flashing-liquid", "CAUTION", text, f"{stream.id}.x", "common practice", amounts)


def below_atmosphere(context: Context) -> Iterator[Advisory]:
    """A vapour side below the pressure of the site draws in air, and its vessel may collapse."""
    atmosphere = context.built.case.site.atmospheric_pressure
    for state, fluid in context.states():
        p = state.properties.get("p")
        if p is None or fluid.kind != "pure" or state.phase not in ("vapour", "two_phase"):
            continue
        if p < 0.98 * atmosphere and fluid.limits.T_critical is not None:
            text = (
                f"{state.stream} is below atmospheric pressure, at {{0}}: air leaks in, and a vessel "
                "that is not built for "
                "vacuum may collapse. Check the vacuum rating and the vacuum breaker."
            )
            yield Advisory(
                "below-atmosphere", "CAUTION", text, f"{state.stream}.p", "common practice", (("pressure", p),)
            )


def temperature_cross(context: Context) -> Iterator[Advisory]:
    """Temperatures of an exchanger that its arrangement makes hard, or that physics forbids."""
    for relation in context.built.case.relations:
        if relation.kind not in ("lmtd_UA", "effectiveness"):
            continue
        T = {role: context.value(f"{stream}.T") for role, stream in relation.streams.items()}
        if any(t is None for t in T.values()):
            continue
        hi, ho, ci, co = (float(T[r] or 0.0) for r in ("hot_in", "hot_out", "cold_in", "cold_out"))
        if co > hi + PERCEPTIBLE * hi or ho < ci - PERCEPTIBLE * ci:
            text = f"In {relation.id} a stream passes the other's inlet temperature, which no exchanger can do."
            yield Advisory("temperature-impossible", "WARNING", text, relation.id, "second law of thermodynamics")
        elif co > ho:
            text = (
                f"In {relation.id} the cold stream leaves hotter ({{0}}) than the hot stream ({{1}}): "
                "only counterflow does "
                "that; with several passes check the correction factor."
            )
            amounts = (("temperature", co), ("temperature", ho))
            yield Advisory("temperature-cross", "NOTICE", text, relation.id, "Bowman, Mueller and Nagle 1940", amounts)


def choked_flow(context: Context) -> Iterator[Advisory]:
    """The flow through a restriction is choked: what lies behind it no longer matters."""
    for relation in context.built.case.relations:
        if relation.kind != "restriction":
            continue
        state = context.state(relation.streams["stream"])
        p2 = context.value(f"{relation.id}.downstream_pressure")
        fluid = context.built.fluids[relation.streams["stream"]]
        if state is None or p2 is None or fluid is None:
            continue
        p, T, h, s, rho = (state.properties[name] for name in ("p", "T", "h", "s", "rho"))
        try:
            flux = mass_flux(fluid, p, T, h, s, rho, p2)
        except CaseError:
            continue
        if flux.choked:
            text = (
                f"The flow through {relation.id} is choked, with {{0}} at the throat: a lower pressure "
                "behind it does not "
                "raise the flow. Expect noise and vibration."
            )
            amounts = (("pressure", flux.throat_pressure),)
            yield Advisory("choked-flow", "NOTICE", text, relation.id, "ISO 9300:2005 (value from memory)", amounts)


def flashing_discharge(context: Context) -> Iterator[Advisory]:
    """A liquid flashes behind its restriction; the flow was taken as that of a liquid, which is on the high side."""
    for relation in context.built.case.relations:
        if relation.kind != "restriction":
            continue
        stream = relation.streams["stream"]
        state, p2 = context.state(stream), context.value(f"{relation.id}.downstream_pressure")
        fluid = context.built.fluids[stream]
        if state is None or fluid is None or p2 is None or state.phase != "liquid":
            continue
        boiling = fluid.saturation(T=state.properties["T"])
        if boiling is not None and p2 < boiling:
            text = (
                f"The liquid boils below {{0}}, and the pressure behind {relation.id} is {{1}}: it flashes there. "
                "The flow was taken as that of a liquid, which overstates it, the more the longer the passage."
            )
            amounts = (("pressure", boiling), ("pressure", p2))
            yield Advisory("flashing-discharge", "NOTICE", text, relation.id, "common practice", amounts)


def hot_surface(context: Context) -> Iterator[Advisory]:
    """A surface that loses heat to the surroundings is hot enough to burn."""
    for transfer in context.built.case.transfers:
        temperature = context.value(f"{transfer.id}.temperature")
        outward = transfer.kind == "heat" and transfer.target is None
        if outward and temperature is not None and temperature > BURN_LIMIT:
            text = f"{transfer.id} leaves at a surface of {{0}}: touching it burns. Insulate or guard it."
            yield Advisory(
                "hot-surface", "WARNING", text, f"{transfer.id}.temperature", "ISO 13732-1:2006 (value from memory)",
                (("temperature", temperature),),
            )  # fmt: skip


def release(context: Context) -> Iterator[Advisory]:
    """Something gets out through an opening: scalding, poisoning, fire or suffocation."""
    for relation, stream, state in context.vents():
        name, T = state.fluid, state.properties.get("T", 0.0)
        flow = context.value(f"{stream.id}.mass_flow")
        amounts = (("mass_flow", flow),) if flow is not None else ()
        amount = "{0} of " if amounts else ""
        where = f"{relation.id} lets out {amount}{name}"
        for applies, code, word, advice in RELEASES:
            if applies(name):
                yield Advisory(code, word, f"{where}, which {advice}.", stream.id, SHEET, amounts)
        if name == "water" and T > BURN_LIMIT:
            text = f"{where} at {{{len(amounts)}}}: it scalds, and steam may be invisible near the leak."
            yield Advisory(
                "scalding-release", "WARNING", text, stream.id, "common practice", (*amounts, ("temperature", T))
            )


def near_model_limit(context: Context) -> Iterator[Advisory]:
    """A state lies close to where its property model ends."""
    for state, fluid in context.states():
        for name, most in (("T", fluid.limits.T_max), ("p", fluid.limits.p_max)):
            value = state.properties.get(name)
            if value is not None and value > (1 - NEAR_LIMIT) * most:
                text = f"{state.stream}.{name} is {{0}}, near the end of the property model at {{1}}."
                kind = "temperature" if name == "T" else "pressure"
                yield Advisory(
                    "near-model-limit", "NOTICE", text, f"{state.stream}.{name}", "limits of the equation of state",
                    ((kind, value), (kind, most)),
                )  # fmt: skip


def reversed_flow(context: Context) -> Iterator[Advisory]:
    """A flow comes out negative: it really runs the other way."""
    for stream in context.built.case.streams:
        for name in ("mass_flow", "dry_air_flow", "mass"):
            flow = context.value(f"{stream.id}.{name}")
            if flow is not None and flow < 0 and not name.startswith("dry"):
                text = (
                    f"{stream.id} runs against its stated direction, with {{0}}. Its state then has "
                    "to be that of the source."
                )
                kind = context.kind(f"{stream.id}.{name}")
                yield Advisory(
                    "reversed-flow", "NOTICE", text, f"{stream.id}.{name}", "sign of the answer", ((kind, flow),)
                )


def uphill_heat(context: Context) -> Iterator[Advisory]:
    """Heat would flow by itself from a colder to a hotter place."""
    for transfer in context.built.case.transfers:
        if not transfer.has_law:
            continue
        rate = context.value(f"{transfer.id}.rate")
        if rate is not None and rate < 0:
            text = (
                f"{transfer.id} runs against its stated direction, with {{0}}: its source is colder than what it faces."
            )
            yield Advisory(
                "reversed-heat", "NOTICE", text, f"{transfer.id}.rate", "sign of the answer", (("power", rate),)
            )


def hot_compressed_air(context: Context) -> Iterator[Advisory]:
    """Air hot from compression can ignite oil."""
    for _, start, end in context.machines():
        T = end.properties.get("T", 0.0)
        if start.fluid in ("air", "oxygen") and end.properties["p"] > start.properties["p"] and T > HOT_AIR:
            text = (
                f"{end.stream} leaves compression at {{0}}: with oil-lubricated machines deposits may "
                "ignite. Check the "
                "limits of the maker and the discharge cooling."
            )
            yield Advisory(
                "hot-compressed-air", "WARNING", text, f"{end.stream}.T", "common practice: 180 degC "
                "at oil-lubricated discharge",
                (("temperature", T),),
            )  # fmt: skip


def doubtful_phase(context: Context) -> Iterator[Advisory]:
    """A state told by p and T lies so close to saturation that its phase hangs on the last digit."""
    for stream in context.built.case.streams:
        p, T = context.value(f"{stream.id}.p"), context.value(f"{stream.id}.T")
        fluid = context.built.fluids[stream.id]
        told = {name for name, quantity in stream.quantities.items() if quantity.value is not None}
        if fluid is None or p is None or T is None or not {"p", "T"} <= told or told & {"x", "h", "s", "u", "rho", "v"}:
            continue
        boiling = fluid.saturation(p=p)
        if boiling is not None and abs(T - boiling) < DOUBTFUL:
            state = context.state(stream.id)
            phase = state.phase if state is not None else "one phase"
            text = (
                f"{stream.id} at {{0}} is within {{1}} of boiling and was taken as {phase}; the other is as likely. "
                "Give x, or saturated, instead of T."
            )
            amounts = (("temperature", T), ("temperature_difference", abs(T - boiling)))
            yield Advisory("doubtful-phase", "CAUTION", text, f"{stream.id}.T", "common practice", amounts)


def freezing(context: Context) -> Iterator[Advisory]:
    """Water close to freezing."""
    for state, _ in context.states():
        T = state.properties.get("T")
        if state.fluid == "water" and state.phase == "liquid" and T is not None and T < 275.15:
            text = f"{state.stream} is at {{0}}: it may freeze and block or burst the line."
            yield Advisory("freezing", "CAUTION", text, f"{state.stream}.T", "common practice", (("temperature", T),))
