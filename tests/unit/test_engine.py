"""The engine on small systems of plain algebra: it has to work for anything that has names, incidence and residuals."""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping

import numpy as np
import pytest

from service.engine.columns import agreement_columns, run_columns
from service.engine.execute import run, surplus_residuals
from service.engine.model import Column, Function, Model, Polynomial, Show, Term
from service.engine.plan import Iterated, Lookup, Rearranged
from service.engine.sensitivity import sensitivities
from service.engine.structure import compile_plan
from service.errors import CaseError, NoSolution, StateOutOfRange, TimeBudgetExceeded, UnderSpecified


class Disc:
    """A node for tests: x, y, r and a (angle) of a point of the plane; any two that suffice fix the others."""

    name = "point"
    dof = 2

    def __init__(self, members: Mapping[str, int]) -> None:
        self.members = members

    def choose(self, known: Collection[str]) -> tuple[str, ...] | None:
        for pair in (("x", "y"), ("r", "a")):
            if set(pair) <= set(known):
                return pair
        return None

    def is_steep(self, inputs: tuple[str, ...]) -> bool:
        return False

    def is_blind(self, inputs: tuple[str, ...]) -> bool:
        return False

    def evaluate(self, inputs: tuple[str, ...], values: tuple[float, ...]) -> Mapping[str, float]:
        one, other = values
        if inputs == ("r", "a"):
            if one < 0:
                raise StateOutOfRange("r must not be negative", address="point.r")
            return {"x": one * math.cos(other), "y": one * math.sin(other), "r": one, "a": other}
        return {"x": one, "y": other, "r": math.hypot(one, other), "a": math.atan2(other, one)}

    def evaluate_columns(
        self, inputs: tuple[str, ...], values: tuple[Column, ...], wanted: tuple[str, ...]
    ) -> tuple[Mapping[str, Column], Mapping[int, CaseError]]:
        out = {name: np.full(len(values[0]), math.nan) for name in wanted}
        bad: dict[int, CaseError] = {}
        for row, pair in enumerate(zip(*values, strict=True)):
            try:
                found = self.evaluate(inputs, tuple(map(float, pair)))
            except CaseError as error:
                bad[row] = error
                continue
            for name in wanted:
                out[name][row] = found[name]
        return out, bad

    def partials(
        self, inputs: tuple[str, ...], values: tuple[float, ...], of: tuple[str, ...]
    ) -> Mapping[str, tuple[float, ...]]:
        slopes: dict[str, tuple[float, ...]] = {}
        for name in of:
            row = []
            for i in range(2):
                above, below = list(values), list(values)
                above[i] += 1e-6
                below[i] -= 1e-6
                difference = self.evaluate(inputs, tuple(above))[name] - self.evaluate(inputs, tuple(below))[name]
                row.append(difference / 2e-6)
            slopes[name] = tuple(row)
        return slopes

    def text(self, member: str, inputs: tuple[str, ...], show: Show) -> str:
        return f"{member}({', '.join(inputs)})"


def linear(model: Model, name: str, **coefficients: float) -> None:
    """Append Σ coefficient · variable = 0."""
    terms = [Term(c, ((model.variable(v.replace("_", ".")), 1),)) for v, c in coefficients.items()]
    model.equations.append(Polynomial.of(name, terms))


def given(model: Model, **values: float) -> None:
    for name, value in values.items():
        model.given[model.variable(name.replace("_", "."))] = value


def want(model: Model, *names: str) -> None:
    model.wanted |= {model.variable(name) for name in names}


def value(model: Model, done: object, name: str) -> float:
    return float(done.values[model.index[name]])  # type: ignore[attr-defined]


def test_one_unknown_at_a_time_is_rearranged_in_order() -> None:
    model = Model()
    linear(model, "second", b=1, c=1, d=-1)
    linear(model, "first", a=2, b=-1)
    given(model, a=3, c=1)
    want(model, "d")
    plan = compile_plan(model)
    assert [type(s) for s in plan.steps] == [Rearranged, Rearranged]
    assert value(model, run(plan), "d") == 7.0


def test_a_node_is_looked_up_as_soon_as_two_members_are_known() -> None:
    model = Model()
    model.nodes.append(Disc({n: model.variable(n) for n in "xyra"}))
    given(model, x=3.0, y=4.0)
    want(model, "r")
    plan = compile_plan(model)
    assert isinstance(plan.steps[0], Lookup)
    assert value(model, run(plan), "r") == 5.0


def test_simultaneous_linear_equations_are_solved_as_one_block() -> None:
    model = Model()
    linear(model, "sum", a=1, b=1, s=-1)
    linear(model, "difference", a=1, b=-1, d=-1)
    given(model, s=10, d=4)
    want(model, "a", "b")
    plan = compile_plan(model)
    done = run(plan)
    assert isinstance(plan.steps[0], Iterated)
    assert value(model, done, "a") == pytest.approx(7, rel=1e-12)
    assert value(model, done, "b") == pytest.approx(3, rel=1e-12)


def test_three_coupled_unknowns_need_two_assumptions_at_most() -> None:
    model = Model()
    linear(model, "one", a=4, b=1, c=1, k=-1)
    linear(model, "two", a=1, b=5, c=-2, k=-1)
    linear(model, "three", a=-1, b=2, c=7, k=-1)
    given(model, k=12)
    want(model, "a", "b", "c")
    plan = compile_plan(model)
    (block,) = plan.steps
    assert isinstance(block, Iterated)
    assert len(block.assumed) <= 2
    done = run(plan)
    expected = np.linalg.solve(np.array([[4, 1, 1], [1, 5, -2], [-1, 2, 7]]), np.full(3, 12.0))
    assert [value(model, done, n) for n in "abc"] == pytest.approx(expected, rel=1e-9)


def test_a_node_inside_a_loop_is_torn_not_guessed_as_a_whole() -> None:
    model = Model()
    model.nodes.append(Disc({n: model.variable(n) for n in "xyra"}))
    linear(model, "tie", x=1, y=-2)
    given(model, r=5.0)
    want(model, "x")
    a = model.variables[model.variable("a")]
    a.lower, a.upper = 0.0, math.pi / 2
    plan = compile_plan(model)
    assert value(model, run(plan), "x") == pytest.approx(2 * math.sqrt(5), rel=1e-12)


def test_the_nearer_of_two_roots_is_taken_when_near_says_so() -> None:
    for near, expected in ((0.1, 1.0), (9.0, 5.0)):
        model = Model()
        x = model.variable("x", lower=0.0, upper=10.0, scale=1.0)
        function = Function("parabola", (x,), lambda v: (v[0] - 1) * (v[0] - 5), lambda v: 25.0, "({0}−1)({0}−5)=0")
        model.equations.append(function)
        model.variables[x].near = near
        want(model, "x")
        assert value(model, run(compile_plan(model)), "x") == pytest.approx(expected, rel=1e-12)


def test_a_jump_is_not_taken_for_a_root() -> None:
    model = Model()
    x = model.variable("x", lower=-3.0, upper=4.0, scale=1.0)
    model.equations.append(Function("pole", (x,), lambda v: 1 / (v[0] - 0.123), lambda v: 1.0, "1/({0}−0.123) = 0"))
    want(model, "x")
    with pytest.raises(NoSolution, match="pole"):
        run(compile_plan(model))


def test_what_is_missing_is_named_with_the_equations_that_lack_it() -> None:
    model = Model()
    linear(model, "mass balance of drum", feed=1, steam=-1, blowdown=-1)
    given(model, feed=5)
    want(model, "steam")
    with pytest.raises(UnderSpecified) as error:
        compile_plan(model)
    (issue,) = error.value.issues
    assert issue.address == "steam"
    assert "mass balance of drum" in issue.detail
    assert "blowdown" in issue.hint


def test_a_quantity_that_nothing_touches_is_told_apart() -> None:
    model = Model()
    want(model, "lonely")
    with pytest.raises(UnderSpecified, match="nothing in the case ties it"):
        compile_plan(model)


def test_what_is_not_asked_may_stay_open() -> None:
    model = Model()
    linear(model, "known", a=1, b=-1)
    linear(model, "open", c=1, d=1, a=-1)
    given(model, a=2)
    want(model, "b")
    plan = compile_plan(model)
    assert {model.variables[v].name for v in plan.undetermined} == {"c", "d"}


def test_a_surplus_value_is_compared_and_not_refused() -> None:
    model = Model()
    linear(model, "tie", a=1, b=-1)
    given(model, a=100, b=101)
    plan = compile_plan(model)
    ((_, off),) = surplus_residuals(plan, run(plan))
    assert off == pytest.approx(1 / 101, rel=1e-12)


def test_a_surplus_member_of_a_node_is_compared_too() -> None:
    model = Model()
    model.nodes.append(Disc({n: model.variable(n) for n in "xyra"}))
    given(model, x=3.0, y=4.0, r=5.5)
    plan = compile_plan(model)
    ((_, off),) = surplus_residuals(plan, run(plan))
    assert off == pytest.approx(0.5 / 5.5, rel=1e-12)


def test_division_by_nothing_is_told_as_no_solution() -> None:
    model = Model()
    a, b, c = (model.variable(n) for n in "abc")
    model.equations.append(Polynomial.of("product", [Term(1.0, ((a, 1), (b, 1))), Term(-1.0, ((c, 1),))]))
    given(model, a=0, c=4)
    want(model, "b")
    with pytest.raises(NoSolution, match="product"):
        run(compile_plan(model))


def coupled_model() -> Model:
    model = Model()
    model.nodes.append(Disc({n: model.variable(n) for n in "xyra"}))
    linear(model, "tie", x=1, y=-2, k=-1)
    given(model, r=5.0, k=0.5)
    want(model, "x", "y")
    a = model.variables[model.variable("a")]
    a.lower, a.upper = 0.0, math.pi / 2
    return model


def test_columns_give_what_the_rows_give_one_by_one() -> None:
    model = coupled_model()
    plan = compile_plan(model)
    r = np.linspace(1.0, 9.0, 23)
    k = np.linspace(-0.4, 0.6, 23)
    done = run_columns(plan, {model.index["r"]: r, model.index["k"]: k}, 23)
    for row in range(23):
        model.given[model.index["r"]], model.given[model.index["k"]] = r[row], k[row]
        single = run(plan)
        for name in "xy":
            assert done.values[model.index[name]][row] == pytest.approx(value(model, single, name), rel=1e-9)


def test_a_bad_row_costs_only_itself() -> None:
    model = coupled_model()
    plan = compile_plan(model)
    r = np.array([2.0, -1.0, 3.0])
    done = run_columns(plan, {model.index["r"]: r}, 3)
    assert set(done.failures) == {1}
    assert np.isfinite(done.values[model.index["x"]]).tolist() == [True, False, True]


def test_surplus_is_compared_row_by_row() -> None:
    model = Model()
    linear(model, "tie", a=1, b=-1)
    given(model, a=100, b=100)
    plan = compile_plan(model)
    columns = {model.index["b"]: np.array([100.0, 125.0])}
    assert agreement_columns(plan, run_columns(plan, columns, 2), 2).tolist() == [0.0, 0.2]


def test_sensitivities_equal_differences_of_whole_solutions() -> None:
    model = coupled_model()
    plan = compile_plan(model)
    inputs = [model.index["r"], model.index["k"]]
    slopes = sensitivities(plan, run(plan), inputs)
    for position, variable in enumerate(inputs):
        centre = model.given[variable]
        ends = []
        for step in (1e-5, -1e-5):
            model.given[variable] = centre + step
            ends.append(run(plan).values)
        model.given[variable] = centre
        for name in "xya":
            number = model.index[name]
            expected = (ends[0][number] - ends[1][number]) / 2e-5
            assert slopes[number][position] == pytest.approx(expected, rel=1e-6, abs=1e-9)


def test_a_passed_deadline_stops_an_iteration() -> None:
    with pytest.raises(TimeBudgetExceeded):
        run(compile_plan(coupled_model()), deadline=0.0)


def test_an_equation_is_written_rearranged_for_what_it_was_solved_for() -> None:
    model = Model()
    m, h1, h2, q = (model.variable(n) for n in ("m", "h1", "h2", "q"))
    terms = [Term(1.0, ((m, 1), (h1, 1))), Term(-1.0, ((m, 1), (h2, 1))), Term(-1.0, ((q, 1),))]
    balance = Polynomial.of("balance", terms)

    def show(v: int) -> str:
        return model.variables[v].name

    assert balance.text(show) == "m·h1 − m·h2 − q = 0"
    assert balance.text(show, q) == "m·h1 − m·h2"
    assert balance.text(show, h2) == "(m·h1 − q)/m"
    assert balance.text(show, m) == "q/(h1 − h2)"


def test_a_long_chain_compiles_step_by_step_without_blocks() -> None:
    model = Model()
    for i in range(300):
        linear(model, f"link {i}", **{f"v{i}": 1.0, f"v{i + 1}": -1.01})
    given(model, v0=1.0)
    want(model, "v300")
    plan = compile_plan(model)
    assert all(isinstance(s, Rearranged) for s in plan.steps)
    assert value(model, run(plan), "v300") == pytest.approx(1.01**-300, rel=1e-12)
