"""Every rule, with the codes it may raise: one table for the service, its documentation and its tests."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from service.advisories import rules
from service.advisories.context import Context
from service.balance.solution import Advisory


@dataclass(frozen=True, slots=True)
class Rule:
    """codes: the advisories that the rule can raise; look: what finds them."""

    codes: tuple[str, ...]
    look: Callable[[Context], Iterator[Advisory]]

    @property
    def meaning(self) -> str:
        """What the rule watches, in a sentence."""
        return (self.look.__doc__ or "").strip()


RULES: tuple[Rule, ...] = (
    Rule(("second-law-violated",), rules.second_law_violated),
    Rule(("toxic-release", "flammable-release", "asphyxiant-release", "scalding-release"), rules.release),
    Rule(("limit-crossed",), rules.limit_crossed),
    Rule(("efficiency-impossible",), rules.efficiency_impossible),
    Rule(("hot-surface",), rules.hot_surface),
    Rule(("hot-compressed-air",), rules.hot_compressed_air),
    Rule(("temperature-impossible", "temperature-cross"), rules.temperature_cross),
    Rule(("wet-expansion",), rules.wet_expansion),
    Rule(("flashing-liquid",), rules.flashing_liquid),
    Rule(("below-atmosphere",), rules.below_atmosphere),
    Rule(("doubtful-phase",), rules.doubtful_phase),
    Rule(("freezing",), rules.freezing),
    Rule(("choked-flow",), rules.choked_flow),
    Rule(("flashing-discharge",), rules.flashing_discharge),
    Rule(("near-model-limit",), rules.near_model_limit),
    Rule(("reversed-flow",), rules.reversed_flow),
    Rule(("reversed-heat",), rules.uphill_heat),
)
