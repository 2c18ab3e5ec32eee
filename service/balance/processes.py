"""The processes of a content: what each keeps constant, and its expansion work.

Expansion work is counted into the content, W = −∫ p dV over the process as a reversible one, by a closed form for each
kind. With v the specific volume and m the constant mass:

    constant_volume             v2 = v1                     W = 0
    constant_pressure           p2 = p1                     W = −m p1 (v2 − v1)
    constant_external_pressure  p2 = p_ext                  W = −m p_ext (v2 − v1)
    isothermal                  T2 = T1                     W = m [(u − T s)2 − (u − T s)1]     any fluid, any phase
    adiabatic_reversible        s2 = s1                     W = m (u2 − u1)
    polytropic                  p2 v2^n = p1 v1^n           W = m (p2 v2 − p1 v1)/(n − 1), −m p1 v1 ln(v2/v1) for n = 1
    linear                      p over V a straight line    W = −m (p1 + p2)/2 (v2 − v1)

The isothermal form is the change of the Helmholtz energy: dw = −p dv = du − T ds along a reversible path of constant T
(any text on thermodynamics); it is the integral over the real equation of state without a quadrature.
Where streams change the mass, only constant volume and constant pressures make sense; they are written with V.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import NamedTuple

import numpy as np

from service.balance.builder import Builder
from service.balance.case import Content, Stage
from service.balance.properties import CONTENT, PROCESS
from service.engine.model import Function, OtherForm, Term, Value, Values
from service.errors import SchemaViolation

WITH_MASS_EXCHANGE = ("constant_volume", "constant_pressure", "constant_external_pressure")


class Piece(NamedTuple):
    """One stage between two named ends of a content."""

    stage: Stage
    start: str
    end: str
    label: str


def pieces(content: Content) -> list[Piece]:
    """The stages of a content with the names of their ends: initial, stage-1, ..., final."""
    count = len(content.process)
    ends = ["initial", *(f"stage-{i + 1}" for i in range(count - 1)), "final"]
    labels = ["process"] if count == 1 else [f"stage-{i + 1}" for i in range(count)]
    return [Piece(s, ends[i], ends[i + 1], labels[i]) for i, s in enumerate(content.process)]


def add_process(builder: Builder, content: Content) -> None:
    """Append what each stage keeps constant, its work, and the content's expansion work as their sum."""
    works = []
    for piece in pieces(content):
        for name in piece.stage.quantities:
            place = piece.label if name in PROCESS else piece.end
            builder.content_quantity(content, f"{place}.{name}")
        if builder.exchanges_mass(content):
            works.append(_with_mass_exchange(builder, content, piece))
        else:
            works.append(_KINDS[piece.stage.kind](builder, content, piece))
    done = [w for w in works if w is not None]
    if not done:
        if f"{content.id}.expansion_work" in builder.quantities:
            builder.model.given[builder.content_quantity(content, "expansion_work")] = 0.0
    elif len(content.process) > 1:
        total = builder.content_quantity(content, "expansion_work")
        terms = [Term(1.0, ((total, 1),)), *(Term(-1.0, ((w, 1),)) for w in done)]
        builder.equation(f"expansion work of {content.id}", *terms)


def _work_variable(builder: Builder, content: Content, piece: Piece) -> int:
    """The expansion work of a stage; of a process in one stage it is the content's own."""
    item = content.id if piece.label == "process" else f"{content.id}.{piece.label}"
    return builder.variable(item, "expansion_work", CONTENT["expansion_work"])


def work_terms(builder: Builder, content: Content) -> list[Term]:
    """The content's expansion work as a term of its boundary's energy balance; none where it has no process."""
    number = builder.model.index.get(f"{content.id}.expansion_work")
    if number is None:
        return []
    return [Term(1.0, ((number, 1),), "", "expansion work", content.id)]


class _Ends:
    """Variables of a stage's two ends, by property: first("p"), last("v")."""

    def __init__(self, builder: Builder, content: Content, piece: Piece) -> None:
        self.builder, self.content, self.piece = builder, content, piece
        self.name = f"{content.id}" if piece.label == "process" else f"{content.id}, {piece.label.replace('-', ' ')}"

    def first(self, name: str) -> int:
        return self.builder.content_state(self.content, self.piece.start, name)

    def last(self, name: str) -> int:
        return self.builder.content_state(self.content, self.piece.end, name)

    def keep(self, name: str, words: str) -> None:
        """The property is the same at both ends."""
        terms = (Term(1.0, ((self.last(name), 1),)), Term(-1.0, ((self.first(name), 1),)))
        self.builder.equation(f"{words} of {self.name}", *terms)

    def work(self, *specific: Term) -> int:
        """The work variable, tied to mass · Σ specific terms."""
        number = _work_variable(self.builder, self.content, self.piece)
        mass = self.builder.content_quantity(self.content, "mass")
        terms = [Term(-t.coefficient, ((mass, 1), *t.factors), t.symbol) for t in specific]
        self.builder.equation(f"expansion work of {self.name}", Term(1.0, ((number, 1),)), *terms)
        return number


def _constant_volume(builder: Builder, content: Content, piece: Piece) -> int | None:
    _Ends(builder, content, piece).keep("v", "constant volume")
    return None


def _constant_pressure(builder: Builder, content: Content, piece: Piece) -> int | None:
    ends = _Ends(builder, content, piece)
    ends.keep("p", "constant pressure")
    p = ends.first("p")
    return ends.work(Term(-1.0, ((p, 1), (ends.last("v"), 1))), Term(1.0, ((p, 1), (ends.first("v"), 1))))


def _external_pressure(builder: Builder, content: Content, piece: Piece) -> int:
    """The variable of the pressure that the content works against: given, or the site's."""
    number = builder.variable(f"{content.id}.{piece.label}", "external_pressure", PROCESS["external_pressure"])
    if "external_pressure" not in piece.stage.quantities:
        builder.model.given[number] = builder.case.site.atmospheric_pressure
        builder.built.assumptions.append(f"{content.id} works against the pressure of the atmosphere: none is given.")
    return number


def _constant_external_pressure(builder: Builder, content: Content, piece: Piece) -> int | None:
    ends = _Ends(builder, content, piece)
    outside = _external_pressure(builder, content, piece)
    builder.equation(
        f"mechanical equilibrium of {ends.name}", Term(1.0, ((ends.last("p"), 1),)), Term(-1.0, ((outside, 1),))
    )
    return ends.work(Term(-1.0, ((outside, 1), (ends.last("v"), 1))), Term(1.0, ((outside, 1), (ends.first("v"), 1))))


def _isothermal(builder: Builder, content: Content, piece: Piece) -> int | None:
    ends = _Ends(builder, content, piece)
    ends.keep("T", "constant temperature")
    T = ends.first("T")
    return ends.work(
        Term(1.0, ((ends.last("u"), 1),)),
        Term(-1.0, ((T, 1), (ends.last("s"), 1))),
        Term(-1.0, ((ends.first("u"), 1),)),
        Term(1.0, ((T, 1), (ends.first("s"), 1))),
    )


def _adiabatic_reversible(builder: Builder, content: Content, piece: Piece) -> int | None:
    ends = _Ends(builder, content, piece)
    ends.keep("s", "constant entropy")
    return ends.work(Term(1.0, ((ends.last("u"), 1),)), Term(-1.0, ((ends.first("u"), 1),)))


def _linear(builder: Builder, content: Content, piece: Piece) -> int | None:
    ends = _Ends(builder, content, piece)
    p1, p2, v1, v2 = ends.first("p"), ends.last("p"), ends.first("v"), ends.last("v")
    return ends.work(
        Term(-0.5, ((p1, 1), (v2, 1)), "½"), Term(-0.5, ((p2, 1), (v2, 1)), "½"),
        Term(0.5, ((p1, 1), (v1, 1)), "½"), Term(0.5, ((p2, 1), (v1, 1)), "½"),
    )  # fmt: skip


def _polytropic(builder: Builder, content: Content, piece: Piece) -> int | None:
    ends = _Ends(builder, content, piece)
    n = builder.variable(f"{content.id}.{piece.label}", "n", PROCESS["n"])
    p1, p2, v1, v2 = ends.first("p"), ends.last("p"), ends.first("v"), ends.last("v")
    path = (p1, p2, v1, v2, n)
    forms: dict[int, tuple[Callable[[Values], Value], str]] = {
        p2: (lambda v: v[p1] * (v[v1] / v[v2]) ** v[n], "{0}·({2}/{3})^{4}"),
        p1: (lambda v: v[p2] * (v[v2] / v[v1]) ** v[n], "{1}·({3}/{2})^{4}"),
        n: (lambda v: np.log(v[p2] / v[p1]) / np.log(v[v1] / v[v2]), "ln({1}/{0})/ln({2}/{3})"),
        v2: (lambda v: v[v1] * (v[p1] / v[p2]) ** (1 / v[n]), "{2}·({0}/{1})^(1/{4})"),
        v1: (lambda v: v[v2] * (v[p2] / v[p1]) ** (1 / v[n]), "{3}·({1}/{0})^(1/{4})"),
    }
    builder.model.equations.append(
        Function(
            f"polytropic path of {ends.name}", path, lambda v: np.log(v[p2] / v[p1]) + v[n] * np.log(v[v2] / v[v1]),
            lambda v: 1.0, "{1}·{3}^{4} = {0}·{2}^{4}", forms,
        )
    )  # fmt: skip
    work = _work_variable(builder, content, piece)
    mass = builder.content_quantity(content, "mass")

    def specific(v: Values) -> Value:
        return _polytropic_work(v[p1], v[v1], v[v2], v[n])

    def residual(v: Values) -> Value:
        return v[work] - v[mass] * specific(v)

    def size(v: Values) -> Value:
        return np.maximum(abs(v[work]), abs(v[mass] * v[p1] * v[v1]))

    text, hyperbola = "({2}·{4} − {1}·{3})/({5} − 1)", "{1}·{3}·ln({3}/{4})"
    forms = {
        work: (lambda v: v[mass] * specific(v), f"{{6}}·{text}"),
        mass: (lambda v: v[work] / specific(v), f"{{0}}/({text})"),
    }
    n_is_one = OtherForm(
        lambda v: bool(abs(v[n] - 1.0) < 1e-6),
        f"{{0}} = {{6}}·{hyperbola}",
        {work: f"{{6}}·{hyperbola}", mass: f"{{0}}/({hyperbola})"},
    )
    variables = (work, p1, p2, v1, v2, n, mass)
    builder.model.equations.append(
        Function(f"expansion work of {ends.name}", variables, residual, size, f"{{0}} = {{6}}·{text}", forms, n_is_one)
    )
    return work


def _polytropic_work(p1: Value, v1: Value, v2: Value, n: Value) -> Value:
    """−∫ p dv from v1 to v2 along p v^n = p1 v1^n [J/kg], continued through n = 1."""
    L = np.log(v2 / v1)
    x = (1.0 - n) * L
    small = abs(x) < 1e-5
    safe = np.where(small, 1.0, x)
    return -p1 * v1 * L * np.where(small, 1.0 + x / 2.0 + x * x / 6.0, np.expm1(safe) / safe)


def _with_mass_exchange(builder: Builder, content: Content, piece: Piece) -> int | None:
    """A stage while streams change the mass: constant volume, or constant pressure with work on the total volume."""
    kind = piece.stage.kind
    if kind not in WITH_MASS_EXCHANGE:
        raise SchemaViolation(
            f"{content.id}: {kind} is a process of a constant mass, but streams change the mass here.",
            address=f"{content.id}.mass", hint=f"Use one of {', '.join(WITH_MASS_EXCHANGE)}.",
        )  # fmt: skip
    V1, V2 = (builder.content_quantity(content, f"{end}.volume") for end in (piece.start, piece.end))
    if kind == "constant_volume":
        builder.equation(f"constant volume of {content.id}", Term(1.0, ((V2, 1),)), Term(-1.0, ((V1, 1),)))
        return None
    p2 = builder.content_state(content, piece.end, "p")
    if kind == "constant_pressure":
        pressure = builder.content_state(content, piece.start, "p")
        name = f"constant pressure of {content.id}"
    else:
        pressure = _external_pressure(builder, content, piece)
        name = f"mechanical equilibrium of {content.id}"
    builder.equation(name, Term(1.0, ((p2, 1),)), Term(-1.0, ((pressure, 1),)))
    work = _work_variable(builder, content, piece)
    terms = (Term(1.0, ((work, 1),)), Term(1.0, ((pressure, 1), (V2, 1))), Term(-1.0, ((pressure, 1), (V1, 1))))
    builder.equation(f"expansion work of {content.id}", *terms)
    return work


_KINDS: dict[str, Callable[[Builder, Content, Piece], int | None]] = {
    "constant_volume": _constant_volume,
    "constant_pressure": _constant_pressure,
    "constant_external_pressure": _constant_external_pressure,
    "isothermal": _isothermal,
    "adiabatic_reversible": _adiabatic_reversible,
    "polytropic": _polytropic,
    "linear": _linear,
}
PROCESS_KINDS: Sequence[str] = tuple(_KINDS)
