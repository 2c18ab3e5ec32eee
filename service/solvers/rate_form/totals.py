"""The ledger of a rate-form transient: initial + in − out + heat + work − final, from separately integrated totals."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

from service.balance.case import STANDARD_GRAVITY
from service.balance.solution import LedgerAccount, LedgerLine
from service.engine.model import TINY, Show
from service.solvers.rate_form.plant import PER_EXCHANGE, PER_FLOW, Moment, Vector
from service.solvers.rate_form.run import Done
from service.solvers.rate_form.vessels import Held, Vessel

WORK = ("shaft_work", "electrical_work")


@dataclass(slots=True)
class Register:
    """Numbers the quantities that formulas speak of: address, kind, value [SI]."""

    names: list[str] = field(default_factory=list)
    kinds: list[str] = field(default_factory=list)
    values: list[float] = field(default_factory=list)

    def number(self, address: str, kind: str, value: float) -> int:
        """The number of an address, which gets the value the first time."""
        if address in self.names:
            return self.names.index(address)
        self.names.append(address)
        self.kinds.append(kind)
        self.values.append(value)
        return len(self.names) - 1


class Totals:
    """Writes the accounts of every boundary of a finished integration."""

    def __init__(self, done: Done, register: Register) -> None:
        self.plant, self.register = done.plant, register
        self.y: Vector = done.course.y * done.plant.scale
        self.start = done.plant.moment(0.0, done.plant.start(), _first_within(done))
        self.final = done.plant.moment(done.course.t, done.course.y, _last_within(done))

    def accounts(self) -> list[LedgerAccount]:
        """Mass and energy of each boundary."""
        out = []
        for n, vessel in enumerate(self.plant.vessels):
            out.append(_account(vessel.boundary, "mass", "mass", self._mass_lines(n, vessel)))
            out.append(_account(vessel.boundary, "energy", "energy", self._energy_lines(n, vessel)))
        return out

    def flow_total(self, i: int, which: int) -> float:
        """Total of a stream: 0 mass [kg], 1 enthalpy [J], 2 kinetic energy [J], 3 entropy [J/K]."""
        return float(self.y[self.plant.flow_at + PER_FLOW * i + which])

    def exchange_total(self, i: int, which: int) -> float:
        """Total of a transfer: 0 energy [J], 1 entropy [J/K]."""
        return float(self.y[self.plant.exchange_at + PER_EXCHANGE * i + which])

    def ambient_total(self, n: int) -> float:
        """Heat from the ambient into a vessel's wall [J]."""
        return float(self.y[self.plant.ambient_at + self.plant.walls.index(n)])

    # -- lines ---------------------------------------------------------------------------------------------------

    def _ends(self, n: int) -> list[tuple[str, float, Held]]:
        begin = Held(self.plant.vessels[n].mass, self.start.held[n].state, self.start.held[n].wall)
        return [("initial", 1.0, begin), ("final", -1.0, self.final.held[n])]

    def _signs(self, n: int, source: int | None, target: int | None) -> float:
        return (target == n) * 1.0 - (source == n) * 1.0

    def _mass_lines(self, n: int, vessel: Vessel) -> list[LedgerLine]:
        first, last = [
            self._line(f"{end} mass", vessel.id, sign, [(f"{vessel.id}.{end}.mass", "mass", held.mass)], "{0}")
            for end, sign, held in self._ends(n)
        ]
        between = []
        for i, flow in enumerate(self.plant.flows):
            if sign := self._signs(n, flow.source, flow.target):
                total = (f"{flow.id}.mass", "mass", self.flow_total(i, 0))
                between.append(self._line("mass", flow.id, sign, [total], "{0}"))
        return [first, *between, last]

    def _energy_lines(self, n: int, vessel: Vessel) -> list[LedgerLine]:
        first: list[LedgerLine] = []
        last: list[LedgerLine] = []
        for end, sign, held in self._ends(n):
            lines = first if end == "initial" else last
            mass = (f"{vessel.id}.{end}.mass", "mass", held.mass)
            u = (f"{vessel.id}.{end}.u", "specific_energy", held.state.values["u"])
            lines.append(self._line(f"{end} internal energy", vessel.id, sign, [mass, u], "{0}·{1}"))
            if vessel.elevation is not None:
                z = (f"{vessel.id}.initial.elevation", "length", vessel.elevation)
                text = f"{STANDARD_GRAVITY} m/s²·{{0}}·{{1}}"
                lines.append(self._line(f"{end} potential energy", vessel.id, sign, [mass, z], text, STANDARD_GRAVITY))
            if vessel.wall is not None:
                parts = [
                    (f"{vessel.id}.wall.mass", "mass", vessel.wall.mass),
                    (f"{vessel.id}.wall.cp", "specific_entropy", vessel.wall.cp),
                    (f"{vessel.id}.{end}.wall.T", "temperature", held.wall),
                ]
                lines.append(self._line(f"{end} energy of the wall", vessel.id, sign, parts, "{0}·{1}·{2}"))
        return [*first, *self._flow_lines(n), *self._exchange_lines(n, vessel), *last]

    def _flow_lines(self, n: int) -> list[LedgerLine]:
        out = []
        for i, flow in enumerate(self.plant.flows):
            sign = self._signs(n, flow.source, flow.target)
            if not sign:
                continue
            h = (f"{flow.id}.enthalpy", "energy", self.flow_total(i, 1))
            out.append(self._line("flow enthalpy", flow.id, sign, [h], f"∫ ṁ h dt ({flow.id}) = {{0}}"))
            if flow.moves:
                k = (f"{flow.id}.kinetic_energy", "energy", self.flow_total(i, 2))
                out.append(self._line("kinetic energy", flow.id, sign, [k], f"∫ ½ ṁ w² dt ({flow.id}) = {{0}}"))
            if flow.elevation is not None:
                parts = [
                    (f"{flow.id}.mass", "mass", self.flow_total(i, 0)),
                    (f"{flow.id}.elevation", "length", flow.elevation),
                ]
                text = f"{STANDARD_GRAVITY} m/s²·{{0}}·{{1}}"
                out.append(self._line("potential energy", flow.id, sign, parts, text, STANDARD_GRAVITY))
        return out

    def _exchange_lines(self, n: int, vessel: Vessel) -> list[LedgerLine]:
        out = []
        for i, exchange in enumerate(self.plant.exchanges):
            if sign := self._signs(n, exchange.source, exchange.target):
                kind = exchange.transfer.kind
                total = (f"{exchange.id}.energy", "energy", self.exchange_total(i, 0))
                text = f"∫ Q̇ dt ({exchange.id}) = {{0}}" if kind == "heat" else f"∫ Ẇ dt ({exchange.id}) = {{0}}"
                out.append(self._line(kind.replace("_", " "), exchange.id, sign, [total], text, is_work=kind in WORK))
        if vessel.wall is not None and vessel.wall.h_outside > 0.0:
            total = (f"{vessel.id}.wall.heat_from_ambient", "energy", self.ambient_total(n))
            text = f"∫ h_outside A (T_ambient − T_wall) dt ({vessel.id}) = {{0}}"
            out.append(self._line("heat", f"{vessel.id}.wall", 1.0, [total], text))
        if vessel.volume is None:
            out.append(self._expansion(n, vessel))
        return out

    def _expansion(self, n: int, vessel: Vessel) -> LedgerLine:
        """Work on the atmosphere at the surface of an open tank."""
        parts = [(f"{vessel.id}.pressure", "pressure", vessel.pressure)]
        volumes = []
        for end, _, held in self._ends(n):
            volume = held.mass / held.state.values["rho"]
            volumes.append(volume)
            parts.append((f"{vessel.id}.{end}.volume", "volume", volume))
        value = -vessel.pressure * (volumes[1] - volumes[0])
        numbers = [self.register.number(*part) for part in parts]
        return LedgerLine("expansion work", vessel.id, _text("−{0}·({2} − {1})", numbers), value, True)

    def _line(
        self,
        term: str,
        of: str,
        sign: float,
        parts: list[tuple[str, str, float]],
        text: str,
        factor: float = 1.0,
        is_work: bool = False,
    ) -> LedgerLine:
        value = sign * factor
        for _, _, part in parts:
            value *= part
        numbers = [self.register.number(*part) for part in parts]
        return LedgerLine(term, of, _text(text if sign > 0 else f"−{text}", numbers), value, is_work)


def _text(template: str, numbers: list[int]) -> Callable[[Show], str]:
    return lambda show: template.format(*(show(n) for n in numbers))


def _account(boundary: str, of: str, kind: str, lines: list[LedgerLine]) -> LedgerAccount:
    total = sum(line.value for line in lines)
    closure = abs(total) / max(max(abs(line.value) for line in lines), TINY)
    assert of in ("mass", "energy")
    return LedgerAccount(boundary, of, "", kind, tuple(lines), total, closure)  # type: ignore[arg-type]


def _first_within(done: Done) -> float:
    pieces = done.course.path.pieces
    return pieces[0].within if pieces else done.plant.within


def _last_within(done: Done) -> float:
    pieces = done.course.path.pieces
    return pieces[-1].within if pieces else done.plant.within


def final_moment(done: Done) -> Moment:
    """Everything at the end."""
    return done.plant.moment(done.course.t, done.course.y, _last_within(done))
