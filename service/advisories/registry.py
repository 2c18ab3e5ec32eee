"""Every rule: one table for the service, its documentation and its tests. Data, not code."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from service.advisories import exchangers, impossible, machines, numbers, plant, releases
from service.advisories.context import Context, Finding
from service.balance.solution import SignalWord

PRACTICE = "common practice"
SECOND_LAW = "second law of thermodynamics"
GHS = "hazard classes of the GHS, as on safety data sheets (value from memory)"
OXYGEN = "29 CFR 1910.146(b): hazardous below 19.5 % or above 23.5 % of oxygen"
RELIEF = "API Standard 520 part I, annexes B and C (value from memory)"


@dataclass(frozen=True, slots=True)
class Rule:
    """code: stable name; words: signal words it may carry, the first by default; when: what raises it and why.

    look yields what it finds; basis: the published source, or "common practice".
    """

    code: str
    words: tuple[SignalWord, ...]
    look: Callable[[Context], Iterator[Finding]]
    basis: str
    when: str


RULES: tuple[Rule, ...] = (
    Rule(
        "second-law-violated", ("WARNING",), impossible.second_law_violated, SECOND_LAW,
        "The entropy balance of a boundary, or of boundaries that exchange heat at an unknown temperature, destroys "
        "entropy. The energy balance closes all the same; readings, directions or the list of crossings are wrong.",
    ),
    Rule(
        "efficiency-impossible", ("WARNING",), impossible.efficiency_impossible, SECOND_LAW,
        "An isentropic or polytropic efficiency comes out above 1 or below 0, or a ratio of heat or work to a fuel "
        "above what its heating value allows (1 on the gross value, 1.11 on the net one).",
    ),
    Rule(
        "temperature-impossible", ("WARNING",), exchangers.temperature_impossible, SECOND_LAW,
        "In a rated exchanger an outlet lies beyond the inlet temperature of the other stream, or in parallel flow the "
        "cold outlet beyond the hot one, or the temperatures cross by more than one shell pass can reach.",
    ),
    Rule(
        "internal-temperature-cross", ("WARNING",), exchangers.internal_cross, SECOND_LAW,
        "In a rated exchanger with boiling or condensation the hot side would be colder than the cold side where the "
        "phase change begins or ends, although the four end temperatures look right. Both sides are followed at their "
        "outlet pressures.",
    ),
    Rule(
        "uphill-heat", ("WARNING",), impossible.uphill_heat, SECOND_LAW,
        "Heat leaves a boundary at a stated temperature above its hottest stream, or enters it below its coldest one, "
        "and neither work nor fuel crosses that could make up for it.",
    ),
    Rule(
        "supersonic-pipe", ("WARNING",), impossible.supersonic_pipe, "gas dynamics: a pipe chokes at its end at most",
        "The velocity that follows from the bore of a stream lies above the speed of sound of its state. The outlets "
        "of relations (nozzles, machines) are left out.",
    ),
    Rule(
        "toxic-release", ("DANGER",),
        releases.release_of(
            "toxic", "is toxic: evacuate, keep upwind, and approach only with breathing protection"
        ),
        f"{GHS}; ANSI/ASHRAE Standard 34 for refrigerants (value from memory)",
        "A restriction blows a substance that is toxic by inhalation, or a mixture with more than 100 ppm of such, "
        "into the surroundings at about atmospheric pressure.",
    ),
    Rule(
        "flammable-release", ("DANGER",),
        releases.release_of("flammable", "is flammable: keep people and ignition sources away, and stop the flow"),
        f"{GHS}; ANSI/ASHRAE Standard 34 for refrigerants (value from memory)",
        "A restriction blows a flammable substance, or a mixture with 1 % or more of such, into the surroundings.",
    ),
    Rule(
        "oxidising-release", ("DANGER",),
        releases.release_of(
            "oxidising", "feeds fire: clothes and oil burn fiercely in it. Ventilate, and keep ignition sources away"
        ),
        OXYGEN,
        "A restriction blows oxygen, a mixture with more than 23.5 % of it, or another oxidiser into the surroundings.",
    ),
    Rule(
        "asphyxiant-release", ("WARNING",),
        releases.release_of("asphyxiant", "displaces air: ventilate, and measure oxygen before entering"), OXYGEN,
        "A restriction blows an inert gas, carbon dioxide or a refrigerant into the surroundings; indoors and in pits "
        "it displaces oxygen without warning. Carbon dioxide harms before that.",
    ),
    Rule(
        "scalding-release", ("WARNING",), releases.scalding_release, f"{PRACTICE}: 60 degC",
        "A restriction blows something hotter than 60 degC into the surroundings.",
    ),
    Rule(
        "cold-release", ("WARNING",), releases.cold_release, f"{PRACTICE}: -40 degC",
        "A restriction blows something into the surroundings that is colder than -40 degC, or a liquid that boils so "
        "cold at the pressure of the site.",
    ),
    Rule(
        "limit-crossed", ("WARNING", "CAUTION"), numbers.limit_crossed, "limit stated in the case",
        "A quantity lies above the max or below the min of a limit of the case. Pressures, temperatures and velocities "
        "raise a WARNING, other quantities a CAUTION: what hangs on the limit is the user's to know.",
    ),
    Rule(
        "hot-surface", ("WARNING",), plant.hot_surface,
        "60 degC: ASTM C1055 for 5 s of contact in industry (value from memory); ISO 13732-1:2006 has thresholds by "
        "material and time of contact",
        "A heat loss to the surroundings states the temperature at which it leaves, and it is above 60 degC.",
    ),
    Rule(
        "cold-embrittlement", ("WARNING",), plant.cold_embrittlement,
        "ASME B31.3-2016, figure 323.2.2A: -29 degC for common carbon steel",
        "A stream, or a content at its end, comes out below -29 degC where all that it is made from was warmer.",
    ),
    Rule(
        "liquid-full", ("WARNING",), plant.liquid_full, "API Standard 521, closed-in liquids (value from memory)",
        "A content of fixed volume ends as liquid at more than twice its first pressure.",
    ),
    Rule(
        "wall-too-cold", ("WARNING",), plant.wall_too_cold, "minimum design temperature stated in the case",
        "In a calculation over time a wall falls below the minimum design temperature that the case states for it.",
    ),
    Rule(
        "hot-compressed-air", ("WARNING",), machines.hot_compressed_air,
        f"{PRACTICE}: 180 degC at oil-lubricated discharge",
        "Air or oxygen leaves compression hotter than 180 degC.",
    ),
    Rule(
        "wet-suction", ("CAUTION",), machines.wet_suction, PRACTICE,
        "A compressor draws a two-phase mixture with a quality between 0.5 and 0.99.",
    ),
    Rule(
        "below-atmosphere", ("CAUTION",), plant.below_atmosphere, PRACTICE,
        "Vapour of a pure fluid, or vapour with its liquid, lies below 98 % of the site's atmospheric pressure.",
    ),
    Rule(
        "flashing-liquid", ("CAUTION",), plant.flashing_liquid, PRACTICE,
        "Only liquid of a fluid enters a boundary, nothing heats it there, and it leaves as a two-phase mixture.",
    ),
    Rule(
        "freezing", ("CAUTION",), plant.freezing, f"{PRACTICE}: 2 degC for water, 3 K above where a brine freezes",
        "Liquid water below 2 degC, or a brine within 3 K of its freezing point or of the end of its data.",
    ),
    Rule(
        "doubtful-phase", ("CAUTION",), numbers.doubtful_phase, f"{PRACTICE}: no plant thermometer tells 0.05 K",
        "A stream is told by p and T within 0.05 K of saturation: its phase, and with it most of its enthalpy, hangs "
        "on the last digit.",
    ),
    Rule(
        "wet-expansion", ("NOTICE",), machines.wet_expansion, f"{PRACTICE}: a quality of 0.88 to 0.90 at the least",
        "A vapour leaves a turbine or another expansion with a quality below 0.90; below 0.88 erosion is certain.",
    ),
    Rule(
        "cavitation-margin", ("NOTICE",), machines.cavitation_margin,
        f"{PRACTICE}: 3 m; margins over the pump's need in ANSI/HI 9.6.1 (value from memory)",
        "The suction of a pump lies less than 3 m of liquid column above its boiling pressure, or is two-phase.",
    ),
    Rule(
        "choked-flow", ("NOTICE",), releases.choked_flow, "ISO 9300:2005 (value from memory)",
        "The isentropic mass flux of a restriction has its maximum above the pressure behind it.",
    ),
    Rule(
        "flashing-discharge", ("NOTICE",), releases.flashing_discharge, RELIEF,
        "A liquid enters a restriction, and the pressure behind it lies below its boiling pressure: the flow, taken as "
        "that of a liquid, is on the high side.",
    ),
    Rule(
        "two-phase-discharge", ("NOTICE",), releases.two_phase_discharge, RELIEF,
        "Liquid and vapour enter a restriction together: the flow, taken as homogeneous and in equilibrium, is on "
        "the low side for a short passage.",
    ),
    Rule(
        "temperature-cross", ("NOTICE",), exchangers.temperature_cross, "Bowman, Mueller and Nagle 1940",
        "In a rated exchanger the cold stream leaves hotter than the hot stream.",
    ),
    Rule(
        "low-correction-factor", ("NOTICE",), exchangers.low_correction_factor,
        f"{PRACTICE}: F of 0.8 at the least; F after Bowman, Mueller and Nagle 1940",
        "The correction factor of a rated shell-and-tube exchanger lies below 0.8.",
    ),
    Rule(
        "frosting", ("NOTICE",), plant.frosting, PRACTICE,
        "Humid air is cooled below 0 degC, or by a surface stated below 0 degC, and below the dew point of what "
        "comes in.",
    ),
    Rule(
        "condensation", ("NOTICE",), plant.condensation, PRACTICE,
        "Humid air meets a surface stated below its dew point, or leaves saturated from a boundary that no water "
        "enters, and no stream takes the condensate.",
    ),
    Rule(
        "gas-below-dew-point", ("NOTICE",), numbers.gas_below_dew_point, "Raoult's law, saturation of IAPWS-95",
        "A mixture of ideal gases lies below the dew point of its water, which the model keeps as a gas.",
    ),
    Rule(
        "wet-after-spray", ("NOTICE",), plant.wet_after_spray, f"{PRACTICE}: 5 K of superheat at the least",
        "Liquid is sprayed into superheated vapour of the same fluid, which leaves with less than 5 K of superheat.",
    ),
    Rule(
        "high-velocity", ("NOTICE",), plant.high_velocity,
        f"{PRACTICE}: 5 m/s for liquids, 25 m/s for wet steam, 60 m/s for gases and steam",
        "The velocity in a stream with a bore lies above what lines are built for. Outlets of relations are left out.",
    ),
    Rule(
        "limit-not-checked", ("NOTICE",), numbers.limit_not_checked, "limit stated in the case",
        "A limit is on a quantity that neither the case nor its equations determine.",
    ),
    Rule(
        "stopped-early", ("NOTICE",), numbers.stopped_early, "course of the calculation",
        "A calculation over time had to stop before the time or the condition that was asked for.",
    ),
    Rule(
        "near-model-limit", ("NOTICE",), numbers.near_model_limit, "limits of the equation of state",
        "A temperature or pressure lies within 2 % of the highest that its property model covers.",
    ),
    Rule(
        "dense-ideal-gas", ("NOTICE",), numbers.dense_ideal_gas, f"{PRACTICE}: 10 bar",
        "A gas is taken as ideal above 10 bar, where density and throttling of common gases are off by percents.",
    ),
    Rule(
        "reversed-flow", ("NOTICE",), impossible.reversed_flow, "sign of the answer",
        "A stream's flow comes out negative: it really runs the other way, with another state.",
    ),
    Rule(
        "reversed-transfer", ("NOTICE",), impossible.reversed_transfer, "sign of the answer",
        "Heat, work or fuel comes out negative, and the case did not give it so: it really runs the other way.",
    ),
)  # fmt: skip
