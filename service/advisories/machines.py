"""Rules on what wears or breaks machines: droplets, bubbles and hot oil."""

from __future__ import annotations

from collections.abc import Iterator

from service.advisories.context import Context, Finding, known
from service.balance.case import STANDARD_GRAVITY

WET_LIMIT, DAMP_LIMIT = 0.88, 0.90
DRY_ENOUGH = 0.99
"""Quality above which a wet suction may be round-off or a rounded reading."""
LITTLE_HEAD = 3.0
"""[m] Many process pumps ask for 2 to 5 m of net positive suction head (common practice)."""
ROUND_OFF = 1e-3
"""[m] Less is what saturated liquid comes to."""
HOT_AIR = 453.15  # [K] 180 degC

VAPOURS = ("vapour", "supercritical", "gas")


def wet_expansion(context: Context) -> Iterator[Finding]:
    """A vapour that leaves an expansion wetter than blades stand: below 0.88, or below 0.90 and close to it."""
    for machine in context.machines:
        start, end, x = machine.start, machine.end, known(machine.end, "x")
        x_start = known(start, "x")
        was_vapour = start.phase in VAPOURS or (x_start is not None and x_start > DAMP_LIMIT)
        if machine.compresses or x is None or not was_vapour or not 0.0 <= x < DAMP_LIMIT:
            continue
        verdict = "blades erode" if x < WET_LIMIT else "blades may erode, and the usual limit of 0.88 is near"
        text = (
            f"The expansion in {machine.name} ends wet, with a quality of {{0}} at {end.stream}: {verdict}. Check the "
            "maker's limit; more superheat, reheat or drains help."
        )
        yield Finding(text, f"{end.stream}.x", (("dimensionless", x),))


def wet_suction(context: Context) -> Iterator[Finding]:
    """A compressor that draws liquid with its vapour."""
    for machine in context.machines:
        start, x = machine.start, known(machine.start, "x")
        if machine.compresses and start.phase == "two_phase" and x is not None and 0.5 < x < DRY_ENOUGH:
            text = (
                f"{start.stream} brings liquid into the compressor {machine.name}, with a quality of {{0}}: slugs "
                "break valves and blades. Check the superheat and the separator before it."
            )
            yield Finding(text, f"{start.stream}.x", (("dimensionless", x),))


def cavitation_margin(context: Context) -> Iterator[Finding]:
    """A pump whose suction lies close to boiling, or already has bubbles in it."""
    for machine in context.machines:
        start, fluid = machine.start, context.fluid(machine.start.stream)
        if not machine.compresses or fluid is None or fluid.kind not in ("pure", "brine"):
            continue
        p, T, rho, x = (known(start, name) for name in ("p", "T", "rho", "x"))
        if start.phase == "two_phase" and x is not None and x <= 0.5 and T is not None and p is not None:
            head = 0.0
        elif start.phase == "liquid" and p is not None and T is not None and rho is not None:
            critical = fluid.limits.T_critical
            boiling = fluid.saturation(T=T) if critical is None or critical > T else None
            if boiling is None:
                continue
            head = (p - boiling) / (rho * STANDARD_GRAVITY)
            head = head if head > ROUND_OFF else 0.0
        else:
            continue
        if head < LITTLE_HEAD:
            text = (
                f"At {start.stream} the pressure lies only {{0}} of liquid column above boiling: {machine.name} "
                "cavitates if it needs more net positive suction head than that. Compare with the pump's curve, and "
                "add the height of the level above the pump where the case leaves it out."
            )
            yield Finding(text, f"{start.stream}.p", (("length", head),))


def hot_compressed_air(context: Context) -> Iterator[Finding]:
    """Air or oxygen that compression makes hot enough to light oil deposits."""
    for machine in context.machines:
        T = known(machine.end, "T")
        name = machine.start.fluid
        hot = T is not None and T > HOT_AIR and machine.compresses
        if T is not None and hot and (name in ("air", "oxygen") or machine.start.phase == "humid_air"):
            text = (
                f"{machine.end.stream} leaves compression at {{0}}: with oil-lubricated machines deposits may ignite. "
                "Check the maker's limit, the cooling, and the cleanliness of valves and piping."
            )
            if name == "oxygen":
                text += " Oxygen must never meet oil."
            yield Finding(text, f"{machine.end.stream}.T", (("temperature", T),))
