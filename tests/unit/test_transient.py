"""Rate-form transients: balances by hand, properties that any integration has to keep, and what ends one."""

from __future__ import annotations

import time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from service.balance.case import Fluid, Table
from service.errors import NoSolution, OverSpecified, SchemaViolation, TimeBudgetExceeded, UnderSpecified
from service.solvers.pipeline import resolve_fluids
from service.solvers.rate_form.run import integrate
from tests.unit.transient_cases import CATALOGUE, account, case, end, gas, heat, orifice, solve, stream, vessel

LIQUID = Fluid("gas", "constant_liquid", density=1000.0, cp=4180.0)
WALL = {
    "wall__mass": 500.0, "wall__cp": 480.0, "wall__area": 5.0, "wall__h_inside": 50.0, "wall__h_outside": 8.0,
    "wall__ambient_temperature": 300.0,
}  # fmt: skip


def blowdown(fluid="nitrogen", p=20e5, T=300.0, area=1e-4, **more):
    """A vessel of 1 m3 that empties through an orifice."""
    values = {"volume": 1.0, "initial__p": p, "initial__T": T} | more.pop("vessel", {})
    return case(
        [vessel("tank", fluid, **values)],
        [stream("vent", "tank", **more.pop("stream", {}))],
        relations=[orifice("hole", "vent", area=area, downstream_pressure=101325.0)],
        fluids=more.pop("fluids", []),
        **more,
    )


# -- by hand -----------------------------------------------------------------------------------------------------------


def test_two_bottles_of_ideal_gas_level_out_where_mass_and_energy_say():
    solution = solve(
        case(
            [
                vessel("a", volume=1.0, initial__p=10e5, initial__T=300.0),
                vessel("b", volume=2.0, initial__p=1e5, initial__T=350.0),
            ],
            [stream("pipe", "a", "b")],
            relations=[orifice("hole", "pipe", area=1e-4)],
            time=1000.0,
        )
    )
    # Σ p V is the internal energy but for a factor: p = (10·1 + 1·2)/3 bar
    assert end(solution, "a", "p") == pytest.approx(4e5, rel=1e-9)
    assert end(solution, "b", "p") == pytest.approx(4e5, rel=1e-9)
    # what stays in a expands reversibly: T = 300 K (4/10)^(0.4/1.4)
    assert end(solution, "a", "T") == pytest.approx(300.0 * 0.4 ** (0.4 / 1.4), rel=1e-6)
    mass = 10e5 / (287.0 * 300.0) + 2e5 / (287.0 * 350.0)
    assert end(solution, "a", "mass") + end(solution, "b", "mass") == pytest.approx(mass, rel=1e-12)
    assert solution.transient.method["steps"] < 200  # it comes to rest, and does not chatter


def test_a_stream_between_vessels_runs_against_its_direction_where_the_pressures_say_so():
    solution = solve(
        case(
            [
                vessel("a", volume=1.0, initial__p=1e5, initial__T=300.0),
                vessel("b", volume=1.0, initial__p=5e5, initial__T=300.0),
            ],
            [stream("pipe", "a", "b")],
            relations=[orifice("hole", "pipe", area=1e-4)],
            time=500.0,
        )
    )
    assert end(solution, "a", "p") == pytest.approx(3e5, rel=1e-9)
    (line,) = (line for line in account(solution, "b", "mass").lines if line.of == "pipe")
    assert line.value < 0.0


def test_a_vent_to_the_surroundings_stops_at_level_pressures_and_says_so():
    solution = solve(blowdown(time=2000.0))
    assert end(solution, "tank", "p") == pytest.approx(101325.0, rel=1e-6)
    assert any("nothing flows back" in text for _, text in solution.transient.events)
    assert any("Nothing flows back" in text for text in solution.assumptions)


@pytest.mark.parametrize(
    ("between", "mass"),
    [
        ("linear", 0.5 * (0.0 + 2.0) * 10.0 + 2.0 * 10.0 + 0.5 * (2.0 + 1.0) * 20.0 + 1.0 * 10.0),
        ("steps", 0.0 * 10.0 + 2.0 * 10.0 + 2.0 * 20.0 + 1.0 * 10.0),
    ],
)
def test_a_table_is_followed_exactly_and_keeps_its_last_value(between, mass):
    table = Table((0.0, 10.0, 20.0, 40.0), (0.0, 2.0, 2.0, 1.0), between)
    solution = solve(
        case(
            [vessel("tank", mass=100.0, initial__T=300.0)],
            [stream("feed", None, "tank", table=table, T=350.0)],
            fluids=[LIQUID],
            time=50.0,
        )
    )
    assert end(solution, "tank", "mass") == pytest.approx(100.0 + mass, rel=1e-12)
    expected = (100.0 * 300.0 + mass * 350.0) / (100.0 + mass)  # mixing at constant cp
    assert end(solution, "tank", "T") == pytest.approx(expected, rel=1e-9)


def test_kinetic_and_potential_energy_of_a_stream_warm_what_it_falls_into():
    solution = solve(
        case(
            [vessel("tank", mass=100.0, initial__T=300.0)],
            [stream("fall", None, "tank", mass_flow=1.0, T=300.0, velocity=20.0, elevation=50.0)],
            fluids=[LIQUID],
            time=100.0,
        )
    )
    rise = 100.0 * (0.5 * 20.0**2 + 9.80665 * 50.0) / (200.0 * 4180.0)
    assert end(solution, "tank", "T") - 300.0 == pytest.approx(rise, rel=1e-7)
    terms = {line.term for line in account(solution, "tank", "energy").lines}
    assert {"kinetic energy", "potential energy", "flow enthalpy"} <= terms


def test_a_wall_without_outside_shares_its_energy_with_the_content():
    wall = {**WALL, "wall__h_outside": 0.0, "wall__temperature": 400.0}
    solution = solve(case([vessel("tank", volume=1.0, initial__p=1e6, initial__T=300.0, **wall)], time=1e5))
    m, cv, C = 1e6 / (287.0 * 300.0), 287.0 / 0.4, 500.0 * 480.0
    T = (m * cv * 300.0 + C * 400.0) / (m * cv + C)
    assert end(solution, "tank", "T") == pytest.approx(T, rel=1e-7)
    assert solution.transient.extremes["tank.wall.T"][0] == pytest.approx(T, rel=1e-7)


def test_heat_joins_two_vessels_by_a_law():
    solution = solve(
        case(
            [vessel("a", mass=100.0, initial__T=360.0), vessel("b", mass=300.0, initial__T=300.0)],
            transfers=[heat("wall", "a", "b", law=True, UA=500.0)],
            fluids=[LIQUID],
            time=600.0,
        )
    )
    # difference of temperatures decays by UA (1/C1 + 1/C2); the mean stays
    decay = np.exp(-500.0 * 600.0 / 4180.0 * (1 / 100.0 + 1 / 300.0))
    assert end(solution, "a", "T") - end(solution, "b", "T") == pytest.approx(60.0 * decay, rel=1e-7)
    assert 0.25 * end(solution, "a", "T") + 0.75 * end(solution, "b", "T") == pytest.approx(315.0, rel=1e-10)


# -- properties --------------------------------------------------------------------------------------------------------


@settings(max_examples=12, deadline=None, derandomize=True)
@given(points=st.integers(2, 300))
def test_the_number_of_points_reported_changes_nothing_else(points):
    few, many = (solve(blowdown(conditions={"tank.p": 5e5}, points=n, vessel=WALL)) for n in (2, points))
    assert few.transient.end_time == many.transient.end_time
    assert few.transient.extremes == many.transient.extremes
    assert few.transient.events == many.transient.events
    assert end(few, "tank", "T") == end(many, "tank", "T")


def test_halving_the_report_interval_repeats_every_other_point():
    coarse, fine = (solve(blowdown(time=60.0, points=n)).transient for n in (11, 21))
    assert np.array_equal(coarse.columns["tank.p"], fine.columns["tank.p"][::2])


@settings(max_examples=8, deadline=None, derandomize=True)
@given(p=st.floats(3e5, 100e5), T=st.floats(280.0, 400.0), x=st.sampled_from(["nitrogen", "propane", "carbon dioxide"]))
def test_refining_the_tolerance_changes_less_than_the_accuracy_stated(p, T, x):
    what = blowdown(x, p, T, time=20.0)
    fluids = resolve_fluids(what, CATALOGUE)
    ends = []
    for rtol in (1e-8, 1e-10):
        done = integrate(what, fluids, {}, None, rtol=rtol)
        assert done.course.ended_by == "time"
        moment = done.plant.moment(done.course.t, done.course.y)
        ends.append([moment.held[0].value(name) for name in ("p", "T", "mass")])
    assert ends[0] == pytest.approx(ends[1], rel=1e-6)


@settings(max_examples=10, deadline=None, derandomize=True)
@given(p=st.floats(1e4, 3e5), T=st.floats(250.0, 400.0), T_in=st.floats(250.0, 500.0), flow=st.floats(0.001, 0.2))
def test_a_constant_inlet_ends_where_the_balance_between_two_states_says(p, T, T_in, flow):
    """m2 u2 = m1 u1 + m h for the total that came in, whatever the way."""
    solution = solve(
        case(
            [vessel("tank", "nitrogen", volume=2.0, initial__p=p, initial__T=T)],
            [stream("feed", None, "tank", mass_flow=flow, p=20e5, T=T_in)],
            fluids=[],
            time=60.0,
        )
    )
    fluid = CATALOGUE.resolve("nitrogen")
    first = fluid.state(("p", "T"), (p, T)).values
    h = fluid.state(("p", "T"), (20e5, T_in)).values["h"]
    m1, m = 2.0 * first["rho"], 60.0 * flow
    last = fluid.state(("rho", "u"), ((m1 + m) / 2.0, (m1 * first["u"] + m * h) / (m1 + m))).values
    assert end(solution, "tank", "p") == pytest.approx(last["p"], rel=1e-8)
    assert end(solution, "tank", "T") == pytest.approx(last["T"], rel=1e-8)


CASES = {
    "gas through a wall": blowdown(vessel=WALL, time=100.0),
    "two phases": blowdown("propane", vessel={"initial__p": None, "initial__x": 0.4}, time=100.0),
    "supercritical to wet": blowdown("carbon dioxide", 120e5, 330.0, conditions={"tank.p": 40e5}),
    "open tank": case(
        [vessel("tank", "water", mass=500.0, initial__T=360.0)],
        [stream("out", "tank", mass_flow=0.5), stream("in", None, "tank", mass_flow=0.4, T=290.0, p=101325.0)],
        [heat("loss", "tank", law=True, UA=200.0, source_temperature=293.15)],
        fluids=[],
        time=1000.0,
    ),
}


@pytest.mark.parametrize("name", CASES)
def test_the_ledger_closes_and_no_entropy_is_destroyed(name):
    solution = solve(CASES[name])
    assert all(a.closure < 1e-9 for a in solution.ledger)
    assert {check.verdict for check in solution.entropy} == {"satisfied"}


def test_extremes_between_the_steps_are_found():
    """The gas is coldest on the way, where it cools by expansion as fast as the wall warms it."""
    solution = solve(blowdown(vessel=WALL, time=300.0, points=3001))
    column = solution.transient.columns["tank.T"]
    low, when, *_ = solution.transient.extremes["tank.T"]
    assert 0.0 < when < 300.0
    assert low <= column.min()
    assert low == pytest.approx(column.min(), abs=1e-3)  # 3001 points come that close to a smooth minimum


def test_an_answer_over_time_is_the_same_twice():
    first, again = (solve(CASES["supercritical to wet"]).transient for _ in range(2))
    assert np.array_equal(first.columns["tank.p"], again.columns["tank.p"])


# -- what ends it ------------------------------------------------------------------------------------------------------


def stopped(what) -> str:
    solution = solve(what)
    assert solution.transient.stopped
    assert solution.transient.end_time < 1e6
    return solution.transient.stopped


def test_a_tank_that_is_drawn_empty_stops_when_it_is():
    what = case(
        [vessel("tank", mass=200.0, initial__T=300.0)],
        [stream("out", "tank", mass_flow=2.0)],
        fluids=[LIQUID],
        time=1e4,
    )
    assert "tank is empty" in stopped(what)
    assert solve(what).transient.end_time == pytest.approx(100.0, rel=2e-6)  # 200 kg at 2 kg/s, less a millionth


def test_liquid_drawn_until_none_is_left_stops_there():
    what = blowdown("propane", vessel={"initial__p": None, "initial__x": 0.05}, stream={"draws": "liquid"}, time=1e5)
    assert "holds no liquid any more" in stopped(what)


def test_a_carbon_dioxide_vessel_stops_at_its_triple_point():
    text = stopped(blowdown("carbon dioxide", 60e5, 300.0, conditions={"tank.p": 2e5}))
    assert "triple point" in text
    events = [t for _, t in solve(blowdown("carbon dioxide", 60e5, 300.0, conditions={"tank.p": 2e5})).transient.events]
    assert any("solid may form" in t for t in events)


def test_an_open_tank_that_boils_stops_there():
    what = case(
        [vessel("tank", "water", mass=200.0, initial__T=363.15)],
        transfers=[heat("fire", None, "tank", rate=1e4)],
        fluids=[],
        time=1e5,
    )
    assert "boils" in stopped(what)


def test_a_vessel_heated_out_of_its_property_model_stops_there():
    what = case(
        [vessel("tank", "nitrogen", volume=1.0, initial__p=1e5, initial__T=300.0)],
        transfers=[heat("fire", None, "tank", rate=1e4)],
        fluids=[],
        time=1e5,
    )
    assert "property model" in stopped(what)


def test_a_condition_that_is_never_reached_is_told():
    what = case(
        [vessel("tank", mass=200.0, initial__T=300.0)],
        transfers=[heat("jacket", None, "tank", law=True, UA=100.0, source_temperature=350.0)],
        fluids=[LIQUID],
        conditions={"tank.T": 360.0},
    )
    assert "none of the conditions" in solve(what).transient.stopped


def test_a_vessel_passes_the_critical_point():
    """Carbon dioxide at its critical density, 467.6 kg/m3 (Span and Wagner 1996), heated from the wet region."""
    solution = solve(
        case(
            [vessel("tank", "carbon dioxide", volume=1.0, initial__T=300.0, initial__rho=467.6)],
            transfers=[heat("fire", None, "tank", rate=1e5, temperature=500.0)],
            fluids=[],
            conditions={"tank.T": 320.0},
        )
    )
    assert solution.transient.end_reason.startswith("condition")
    phases = [text for _, text in solution.transient.events if " → " in text]
    assert "two phase →" in phases[0]  # a hair of the liquid may lie between: the model's critical density is 467.6
    assert "→ supercritical" in phases[-1]
    assert all(a.closure < 1e-9 for a in solution.ledger)


def test_the_first_of_time_and_conditions_ends_it():
    early = solve(blowdown(time=1.0, conditions={"tank.p": 5e5})).transient
    late = solve(blowdown(time=1e4, conditions={"tank.p": 5e5, "tank.mass": 20.0})).transient
    assert (early.end_reason, early.end_time) == ("time", 1.0)
    assert late.end_reason.startswith("condition tank.mass")


def test_a_case_made_to_run_forever_stops_within_its_budget_and_says_how_far_it_came():
    jigsaw = Table(tuple(float(i) for i in range(20_000)), tuple(1e4 * (-1.0) ** i for i in range(20_000)), "steps")
    what = case(
        [vessel("tank", mass=1000.0, initial__T=300.0)],
        transfers=[heat("jigsaw", None, "tank", table=jigsaw)],
        fluids=[LIQUID],
        time=1e12,
        conditions={"tank.T": 400.0},
    )
    with pytest.raises(TimeBudgetExceeded, match="had reached t = "):
        solve(what, time.monotonic() + 0.2)


# -- targets -----------------------------------------------------------------------------------------------------------


def test_the_bore_that_empties_a_vessel_in_time_is_found():
    what = case(
        [vessel("tank", volume=1.0, initial__p=10e5, initial__T=300.0)],
        [stream("vent", "tank")],
        relations=[orifice("hole", "vent", bore="?", downstream_pressure=1e5)],
        time=60.0,
        targets=[("tank.p", 2.2046749099835754e5, None)],  # TR-A3 the other way round: area 1e-4 m2
    )
    bore = solve(what).answers["hole.bore"].value
    assert bore == pytest.approx((4e-4 / np.pi) ** 0.5, rel=1e-7)


@pytest.mark.parametrize("at", [None, 3600.0])
def test_a_heat_rate_is_found_for_a_target_at_the_end_or_at_a_time(at):
    what = case(
        [vessel("tank", mass=1000.0, initial__T=300.0)],
        transfers=[heat("heater", None, "tank", rate="?")],
        fluids=[LIQUID],
        time=3600.0 if at is None else 7200.0,
        targets=[("tank.T", 350.0, at)],
    )
    assert solve(what).answers["heater.rate"].value == pytest.approx(1000.0 * 4180.0 * 50.0 / 3600.0, rel=1e-8)


def test_the_time_itself_can_be_what_meets_a_target():
    what = case(
        [vessel("tank", mass=1000.0, initial__T=300.0)],
        transfers=[heat("heater", None, "tank", rate=1e5)],
        fluids=[LIQUID],
        time="?",
        targets=[("tank.T", 350.0, None)],
    )
    assert solve(what).answers["until.time"].value == pytest.approx(1000.0 * 4180.0 * 50.0 / 1e5, rel=1e-9)


def test_a_target_out_of_reach_is_refused_with_what_was_reached():
    what = case(
        [vessel("tank", mass=1000.0, initial__T=300.0)],
        transfers=[heat("jacket", None, "tank", law=True, UA=(1.0, 1e6), source_temperature=340.0)],
        fluids=[LIQUID],
        time=3600.0,
        targets=[("tank.T", 350.0, None)],
    )
    with pytest.raises(NoSolution, match="meets the target"):
        solve(what)


def test_an_unknown_without_a_target_and_a_target_without_an_unknown_are_refused():
    tank = [vessel("tank", mass=1000.0, initial__T=300.0)]
    with pytest.raises(UnderSpecified, match=r"heater\.rate"):
        solve(case(tank, transfers=[heat("heater", None, "tank", rate="?")], fluids=[LIQUID], time=10.0))
    with pytest.raises(OverSpecified):
        solve(case(tank, fluids=[LIQUID], time=10.0, targets=[("tank.T", 350.0, None)]))


def test_a_case_that_nothing_ends_is_refused():
    with pytest.raises(UnderSpecified, match="Nothing says when"):
        solve(blowdown())


def test_an_address_that_does_not_exist_is_refused():
    with pytest.raises(SchemaViolation, match=r"tank\.wall\.T"):
        solve(blowdown(time=1.0, columns=("tank.wall.T",)))


def test_a_stream_of_another_fluid_than_its_vessel_is_refused():
    what = case(
        [vessel("tank", volume=1.0, initial__p=1e5, initial__T=300.0)],
        [stream("feed", None, "tank", mass_flow=1.0, p=1e5, T=300.0)],
        fluids=[gas()],
        time=1.0,
    )
    other = what.streams[0].__class__("feed", None, "tank-room", "water", what.streams[0].quantities)
    with pytest.raises(SchemaViolation, match="another fluid"):
        solve(type(what)(**{**{f: getattr(what, f) for f in what.__slots__}, "streams": (other,)}))
