"""POST /v1/states: the full state of a fluid from as many properties as fix it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

from service.balance.case import Fluid as DeclaredFluid
from service.balance.case import Quantity
from service.balance.solution import FluidSource
from service.errors import CaseError, Contradictory, Issue, SchemaViolation, UnderSpecified
from service.fluids.catalogue import FluidCatalogue
from service.fluids.protocol import Fluid, FluidSpec, Limits, State
from service.units import UnitTable
from service.wire.addresses import AddressBook
from service.wire.building import CaseBuilder
from service.wire.findings import Findings
from service.wire.pointers import token
from service.wire.presenting import NO_MEANING, SINGLE_PHASE, Presenter
from service.wire.provenance import provenance
from service.wire.shapes import Shape, pruned, report
from service.wire.suggest import listed
from service.wire.telling import amounts_shown
from service.wire.vocabulary import DERIVED_STATE, SATURATED, STATE

ASKED = ("superheat", "subcooling")
"""State properties that a model works out only when asked."""

LIMIT_KINDS = {
    "T_min": "temperature",
    "T_max": "temperature",
    "p_min": "pressure",
    "p_max": "pressure",
    "T_triple": "temperature",
    "p_triple": "pressure",
    "T_critical": "temperature",
    "p_critical": "pressure",
}


def answer_state(document: Any, shape: Shape, units: UnitTable, catalogue: FluidCatalogue) -> dict[str, Any]:
    """The answer to a states request. Raises CaseError with everything that is wrong with it."""
    findings = Findings()
    body = document
    if not shape.fits(document):
        faults = shape.faults(document)
        report(faults, findings)
        body = pruned(document, faults)
    builder = CaseBuilder(units, findings)
    site, declared, options = builder.site(body), builder.fluids(body), builder.answer(body)
    given = _given(body, builder)
    findings.raise_any()
    fluid = _fluid(body["fluid"], declared, catalogue)
    presenter = Presenter(units, options.units, site.atmospheric_pressure)
    assumptions: list[str] = []
    try:
        if fluid.pressure_optional and "p" not in given:
            given["p"] = Quantity("p", "pressure", site.atmospheric_pressure, pointer="#/state")
            assumptions.append(
                f"No pressure is given: {presenter.text('pressure', site.atmospheric_pressure)}, that of the site, is "
                f"taken; properties of {fluid.name} hardly depend on it."
            )
        state = _state(fluid, given, options.agreement)
    except CaseError as error:
        raise _placed(error, given, presenter) from error
    return {
        "fluid": fluid.name,
        "phase": state.phase,
        "assumptions": assumptions,
        "state": _shown(state, presenter),
        "saturation": _saturation(fluid, state, presenter),
        "limits": limits_of(fluid.limits, presenter),
        "provenance": provenance([source_of(fluid)], document),
    }


def _given(body: Mapping[str, Any], builder: CaseBuilder) -> dict[str, Quantity]:
    stated, given = body.get("state"), {}
    if not isinstance(stated, dict):
        return {}
    for name, raw in stated.items():
        place = f"#/state/{token(name)}"
        if name == "saturated" and raw in SATURATED:
            given["x"] = Quantity("x", "dimensionless", SATURATED[raw], pointer=place)
        elif name in STATE:
            found = builder.reader.given(raw, STATE[name], name, place)
            if found is not None:
                given[name] = found
    if "x" in stated and "saturated" in stated:
        builder.findings.add(
            SchemaViolation,
            "`saturated` and `x` say the same thing twice.",
            pointer="#/state/saturated",
            hint="Keep one of them.",
        )
    return given


def _fluid(name: str, declared: Mapping[str, DeclaredFluid], catalogue: FluidCatalogue) -> Fluid:
    spec = declared.get(name)
    try:
        return catalogue.resolve(name if spec is None else spec_of(spec))
    except CaseError as error:
        place = "#/fluid" if spec is None else f"#/fluids/{token(name)}"
        issues = error.issues or (Issue(error.detail),)
        raise type(error)(error.detail, [Issue(i.detail, i.address, i.hint, place) for i in issues]) from error


def spec_of(declared: DeclaredFluid) -> FluidSpec:
    """What the catalogue needs of a declared fluid."""
    return FluidSpec(
        declared.kind,
        declared.name,
        declared.model,
        declared.mole_fractions,
        declared.mass_fraction,
        declared.molar_mass,
        declared.cp,
        declared.density,
        declared.key,
    )


def _state(fluid: Fluid, given: Mapping[str, Quantity], agreement: float) -> State:
    can_be_given = [name for name in fluid.properties if name in STATE]
    strangers = [name for name in given if name not in can_be_given]
    if strangers:
        raise SchemaViolation(
            f"{strangers[0]} is not a property of {fluid.name}.",
            [
                Issue(
                    f"{name} is not a property of {fluid.name}.",
                    name,
                    f"Its properties are {listed(can_be_given)}.",
                )
                for name in strangers
            ],
        )
    inputs = fluid.inputs(tuple(given))
    if inputs is None:
        number = {2: "two", 3: "three"}.get(fluid.dof, str(fluid.dof))
        raise UnderSpecified(
            f"{', '.join(given) or 'Nothing'} does not fix a state of {fluid.name}.",
            [
                Issue(
                    f"A state of {fluid.name} needs {number} independent properties; {len(given)} given.",
                    next(iter(given), ""),
                    f"Give {number} of {listed(can_be_given)}.",
                )
            ],
        )
    extras = tuple(name for name in fluid.properties if name in DERIVED_STATE or name in ASKED)
    state = fluid.state(inputs, tuple(_value(given[name]) for name in inputs), extras)
    for name, quantity in given.items():
        if name not in inputs:
            _agrees(name, quantity, state, agreement)
    return state


def _value(quantity: Quantity) -> float:
    assert quantity.value is not None  # only given quantities are read
    return quantity.value


def _agrees(name: str, quantity: Quantity, state: State, agreement: float) -> None:
    held, implied = _value(quantity), state.values.get(name, math.nan)
    if not abs(held - implied) <= agreement * max(abs(held), abs(implied), 1e-12):
        detail = f"{name} is given as {{0}}, but the other properties give {{1}}."
        raise Contradictory(
            detail,
            [
                Issue(
                    detail,
                    name,
                    "Drop one of the given properties.",
                    amounts=((quantity.kind, held), (quantity.kind, implied)),
                )
            ],
        )


def _placed(error: CaseError, given: Mapping[str, Quantity], presenter: Presenter) -> CaseError:
    """The error in the reader's units, with pointers into a states request, where addresses are property names."""
    issues = []
    for issue in error.issues or (Issue(error.detail),):
        name = issue.address.rpartition(".")[2]
        place = given[name].pointer if name in given else "#/state"
        detail = issue.told(amounts_shown(AddressBook(None), presenter))
        issues.append(Issue(detail, issue.address, issue.hint, issue.pointer or place))
    return type(error)(issues[0].detail if len(issues) == 1 else error.detail, issues)


def _shown(state: State, presenter: Presenter) -> dict[str, Any]:
    out = {}
    for name, value in state.values.items():
        kind = STATE.get(name) or DERIVED_STATE.get(name)
        if kind is not None and (math.isfinite(value) or name in STATE):
            out[name] = presenter.quantity(value, kind, None, SINGLE_PHASE if name == "x" else NO_MEANING)
    return out


def _saturation(fluid: Fluid, state: State, presenter: Presenter) -> dict[str, Any]:
    out: dict[str, Any] = {}
    p, T = state.values.get("p", math.nan), state.values.get("T", math.nan)
    at_p = fluid.saturation(p=p) if math.isfinite(p) else None
    at_T = fluid.saturation(T=T) if math.isfinite(T) else None
    if at_p is not None and math.isfinite(at_p):
        out["T_at_p"] = presenter.quantity(at_p, "temperature")
    if at_T is not None and math.isfinite(at_T):
        out["p_at_T"] = presenter.quantity(at_T, "pressure")
    return out


def limits_of(limits: Limits, presenter: Presenter) -> dict[str, Any]:
    """The range of validity, with triple and critical point where they exist."""
    return {
        name: presenter.quantity(value, kind)
        for name, kind in LIMIT_KINDS.items()
        if (value := getattr(limits, name)) is not None and math.isfinite(value)
    }


def source_of(fluid: Fluid) -> FluidSource:
    p = fluid.provenance
    return FluidSource(fluid.name, p.model, p.citation, p.reference_state)
