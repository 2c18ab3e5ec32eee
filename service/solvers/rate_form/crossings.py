"""What crosses the boundaries in the rate form: streams and transfers, and what they carry at a moment."""

from __future__ import annotations

import bisect
import math
from collections.abc import Sequence
from dataclasses import dataclass, field

from service.balance.case import STANDARD_GRAVITY, Stream, Table, Transfer
from service.fluids.protocol import Fluid, State
from service.solvers.rate_form.throat import Throat
from service.solvers.rate_form.vessels import Held

PHASES = {"liquid": 0.0, "vapour": 1.0}


@dataclass(frozen=True, slots=True)
class Course:
    """A quantity over time [s]: constant, or a table whose first and last values hold outside of it."""

    constant: float = math.nan
    table: Table | None = None

    def at(self, t: float, within: float) -> float:
        """The value [SI]. within: a time inside of the interval between jumps that t belongs to."""
        table = self.table
        if table is None:
            return self.constant
        times, values = table.times, table.values
        place = bisect.bisect_right(times, within) - 1
        if place < 0:
            return values[0]
        if place >= len(times) - 1 or table.between == "steps":
            return values[place]
        share = (t - times[place]) / (times[place + 1] - times[place])
        return values[place] + share * (values[place + 1] - values[place])

    @property
    def breaks(self) -> Sequence[float]:
        return self.table.times if self.table is not None else ()


@dataclass(slots=True)
class Carried:
    """A stream at a moment: mass flow [kg/s] in its stated direction, the state it carries, its energies [J/kg].

    Of a restriction: fall is (p1 − p2)/p1, solid tells that its throat would lie below the triple point.
    """

    mass_flow: float
    state: State
    enthalpy: float
    kinetic: float = 0.0
    choked: bool = False
    fall: float = math.inf
    solid: bool = False


@dataclass(slots=True)
class Flow:
    """One stream between two vessels (by number), or between a vessel and the surroundings (None).

    supply: its state where it comes from the surroundings; course: its mass flow unless `throat` has a say; area [m2]
    includes the discharge coefficient; downstream [Pa] is None where it is the target vessel's own pressure.
    """

    stream: Stream
    fluid: Fluid
    source: int | None
    target: int | None
    supply: State | None = None
    course: Course = field(default_factory=Course)
    throat: Throat | None = None
    area: float = 0.0
    downstream: float | None = None
    relation: str = ""
    velocity: float | None = None
    bore: float | None = None
    elevation: float | None = None

    @property
    def id(self) -> str:
        return self.stream.id

    @property
    def moves(self) -> bool:
        """Whether its kinetic energy counts."""
        return self.velocity is not None or self.bore is not None

    @property
    def gz(self) -> float:
        """Potential energy [J/kg]."""
        return STANDARD_GRAVITY * (self.elevation or 0.0)

    def at(self, t: float, within: float, held: Sequence[Held]) -> Carried:
        """What it carries at a time [s]."""
        if self.throat is not None:
            return self._through_restriction(held)
        mass_flow = self.course.at(t, within)
        turned = mass_flow < 0.0
        origin = self.target if turned else self.source
        state = self.supply if origin is None and self.supply is not None else self._drawn(held, origin)
        return self._carried(mass_flow, state)

    def _drawn(self, held: Sequence[Held], origin: int | None) -> State:
        """The state of what is drawn from a vessel: mixed, or the phase that the stream draws where there are two."""
        if origin is None:  # a negative flow out of the surroundings: what the vessel itself holds
            origin = self.source if self.source is not None else self.target
        assert origin is not None
        whole = held[origin].state
        x = whole.values.get("x", math.nan)
        if origin != self.source or self.stream.draws == "mixed" or not 0.0 <= x <= 1.0:
            return whole
        return self.fluid.state(("p", "x"), (whole.values["p"], PHASES[self.stream.draws]))

    def _through_restriction(self, held: Sequence[Held]) -> Carried:
        """From the higher pressure to the lower; between two vessels either way, else only as stated."""
        assert self.throat is not None
        upstream = self.supply if self.source is None else held[self.source].state
        assert upstream is not None
        p1 = upstream.values["p"]
        p2 = self.downstream if self.downstream is not None else held[self.target or 0].state.values["p"]
        if p2 > p1 and self.source is not None and self.target is not None:
            back = held[self.target].state
            flux = self.throat.flux(back, p1)
            return self._carried(-self.area * flux, back, (p1 - p2) / p2)
        drawn = upstream if self.source is None else self._drawn(held, self.source)
        return self._carried(self.area * self.throat.flux(drawn, p2), drawn, (p1 - p2) / p1)

    def _carried(self, mass_flow: float, state: State, fall: float = math.inf) -> Carried:
        velocity = self.velocity or 0.0
        if self.bore is not None:
            velocity = mass_flow / (state.values["rho"] * 0.25 * math.pi * self.bore**2)
        choked = self.throat is not None and self.throat.choked
        solid = self.throat is not None and self.throat.below_triple
        return Carried(mass_flow, state, state.values["h"], 0.5 * velocity * velocity, choked, fall, solid)


@dataclass(slots=True)
class Exchange:
    """One transfer. With a law, rate = UA (T of the source − T of the target); else its course.

    temperature [K]: where the heat crosses, None where it is not known.
    """

    transfer: Transfer
    source: int | None
    target: int | None
    course: Course = field(default_factory=Course)
    UA: float | None = None
    outside: float = math.nan
    temperature: float | None = None

    @property
    def id(self) -> str:
        return self.transfer.id

    def at(self, t: float, within: float, held: Sequence[Held]) -> float:
        """Rate [W] in the stated direction."""
        if self.UA is None:
            return self.course.at(t, within)
        ends = [self.outside if n is None else held[n].state.values["T"] for n in (self.source, self.target)]
        return self.UA * (ends[0] - ends[1])
