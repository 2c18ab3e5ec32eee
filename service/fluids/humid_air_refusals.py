"""What humid air says of states that cannot be: each function makes one error, with its amounts and what to do."""

from __future__ import annotations

from service.errors import StateOutOfRange
from service.fluids.base_point import KIND
from service.fluids.refusals import refusal

OVER_CONDENSATE = "Below saturation water condenses: let it leave as a stream of liquid water."


def fog(p: float, T: float, W: float, highest: float) -> StateOutOfRange:
    """More water than saturated air holds."""
    return refusal(
        StateOutOfRange,
        "Humid air at {0} and {1} holds at most {2} of water per kg of dry air; {3} would be fog.",
        ("T", T),
        ("p", p),
        ("humidity_ratio", highest),
        ("humidity_ratio", W),
        hint="Let the rest leave as a stream of liquid water, or raise the temperature.",
        of="humidity_ratio",
    )


def out_of_order(lower: str, value: float, upper: str, limit: float) -> StateOutOfRange:
    """A dew point above the wet bulb, or one of the two above the temperature."""
    return refusal(
        StateOutOfRange,
        f"Humid air: the {lower.replace('_', ' ')} of {{0}} lies above the {upper.replace('_', ' ')} of {{1}}.",
        ("T", value),
        ("T", limit),
        hint="Dew point, wet bulb and temperature rise in this order; in saturated air all three are equal.",
        of=lower,
    )


def more_water_than_air(p: float, name: str, value: float, T: float) -> StateOutOfRange:
    """Beyond the humidity ratio to which the model reaches."""
    return refusal(
        StateOutOfRange,
        f"Humid air: {name} = {{0}} at {{1}} and {{2}} means more than 10 kg of water per kg of dry air.",
        (KIND[name], value),
        ("T", T),
        ("p", p),
        hint="That is steam with a little air: take the fluid water.",
        of=name,
    )


def too_dry(p: float, T: float, wet_bulb: float) -> StateOutOfRange:
    """A wet bulb below that of dry air."""
    return refusal(
        StateOutOfRange,
        "Humid air: at {0} and {1} even dry air has a wet bulb above {2}.",
        ("T", T),
        ("p", p),
        ("T", wet_bulb),
        hint="Raise the wet bulb or lower the temperature.",
        of="wet_bulb",
    )


def between_dry_and_saturated(p: float, T: float, name: str, value: float, ends: list[float]) -> StateOutOfRange:
    """A property that air of this temperature has at no humidity."""
    return refusal(
        StateOutOfRange,
        f"Humid air: at {{0}} and {{1}} {name} lies between {{2}} and {{3}}, dry and saturated, not at {{4}}.",
        ("T", T),
        ("p", p),
        (name, ends[0]),
        (name, ends[1]),
        (name, value),
        hint="h, s and u count per kg of dry air." if name in ("h", "s", "u") else "",
        of=name,
    )


def beyond(
    p: float, W: float, name: str, ends: tuple[float, float, float], reach: tuple[float, float]
) -> StateOutOfRange:
    """A property [SI] that air of this humidity has at no temperature of its reach; ends: value, lowest, highest."""
    value, lowest, highest = ends
    return refusal(
        StateOutOfRange,
        f"Humid air with humidity_ratio = {{0}} at {{1}}: {name} = {{2}} lies outside {{3}} (at {{4}}) to {{5}} "
        "(at {6}).",
        ("humidity_ratio", W),
        ("p", p),
        (KIND[name], value),
        (KIND[name], lowest),
        ("T", reach[0]),
        (KIND[name], highest),
        ("T", reach[1]),
        hint=OVER_CONDENSATE if value < lowest else "h, s and u count per kg of dry air.",
        of=name,
    )


def nowhere(p: float, given: tuple[str, float], name: str, low: float, high: float) -> StateOutOfRange:
    """No temperature in a range has the given property and the other."""
    return refusal(
        StateOutOfRange,
        f"Humid air at {{0}} with {given[0]} = {{1}}: no temperature between {{2}} and {{3}} has this {name}.",
        ("p", p),
        (KIND[given[0]], given[1]),
        ("T", low),
        ("T", high),
        hint="Check both values, or give the temperature.",
        of=name,
    )


def wet_bulb_with_enthalpy(h: float, wet_bulb: float) -> StateOutOfRange:
    """Two properties that say nearly the same, and contradict each other."""
    return refusal(
        StateOutOfRange,
        "Humid air: h = {0} and a wet bulb of {1} do not belong together.",
        ("h", h),
        ("T", wet_bulb),
        hint="Enthalpy and wet bulb say nearly the same: give T or relative_humidity instead of one of them.",
        of="h",
    )


def not_covered(p: float, T: float, what: str = "T") -> StateOutOfRange:
    """A point that the library's model has no answer for."""
    return refusal(
        StateOutOfRange,
        f"The humid-air model does not cover {what.replace('_', ' ')} = {{0}} at {{1}}.",
        ("T", T),
        ("p", p),
        of=what,
    )
