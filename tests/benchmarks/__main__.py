"""Speed, as ratios against a named baseline in the same run: `python -m tests.benchmarks [engine|chain|series ...]`.

Every figure is the median of several alternating rounds; absolute times belong to this machine, ratios travel better.
"""

from __future__ import annotations

import statistics
import sys
import time
from collections.abc import Callable
from typing import Any

import CoolProp
import numpy as np

from service import solvers
from service.wire.operations import Operations
from service.wire.parsing import parse_case
from tests.benchmarks import cases, transients
from tests.benchmarks.http_rates import compare_http


def seconds(work: Callable[[], Any], repeat: int) -> float:
    start = time.perf_counter()
    for _ in range(repeat):
        work()
    return (time.perf_counter() - start) / repeat


def alternate(ours: Callable[[], Any], bare: Callable[[], Any], repeat: int, rounds: int = 7) -> tuple[float, float]:
    """Median seconds of each, measured in turn so that a drift of the machine meets both."""
    ours(), bare()
    pairs = [(seconds(ours, repeat), seconds(bare, repeat)) for _ in range(rounds)]
    return statistics.median(a for a, _ in pairs), statistics.median(b for _, b in pairs)


def engine(operations: Operations) -> None:
    print("Engine: solving a parsed case, against a bare script doing the same flashes (milliseconds)")
    print(f"{'case':18}{'ours':>9}{'bare':>9}{'above':>9}{'ratio':>8}{'whole request':>16}")
    state = CoolProp.AbstractState("HEOS", "Water")
    for name, (document, bare) in cases.SCALAR.items():
        body = document()
        case = parse_case(body, operations.case_shape, operations.unit_table)
        ours, theirs = alternate(lambda c=case: solvers.solve(c, operations.catalogue), lambda b=bare: b(state), 100)  # type: ignore[misc]
        whole = seconds(lambda d=body: operations.solve(d), 100)  # type: ignore[misc]
        above, ratio = ours - theirs, ours / theirs
        print(f"{name:18}{ours * 1e3:9.3f}{theirs * 1e3:9.3f}{above * 1e3:9.3f}{ratio:8.2f}{whole * 1e3:16.3f}")


def chain(operations: Operations) -> None:
    print("\nA chain of boundaries: whole solution without HTTP")
    print(f"{'boundaries':>10}{'seconds':>10}{'ms each':>10}")
    for length in (25, 50, 100, 200):
        document = cases.chain(length)
        spent = statistics.median(seconds(lambda d=document: operations.solve(d), 1) for _ in range(5))  # type: ignore[misc]
        print(f"{length:10}{spent:10.3f}{spent / length * 1e3:10.2f}")


def series(operations: Operations) -> None:
    print("\nColumns of readings on one core: microseconds a row, against the bare low-level loop")
    print(f"{'case':34}{'rows':>8}{'ours':>9}{'bare':>9}{'ratio':>8}")
    rng = np.random.default_rng(7)
    for label, model, backend, rows in (
        ("let-down valve, IF97", "IF97", "IF97", 100_000),
        ("let-down valve, Helmholtz", "helmholtz", "HEOS", 4_000),
    ):
        T = rng.uniform(650.0, 700.0, rows)
        state = CoolProp.AbstractState(backend, "Water")
        case = parse_case(cases.let_down_valve(model), operations.case_shape, operations.unit_table)
        _series_line(
            label, rows,
            lambda c=case, t=T: solvers.series(c, operations.catalogue, {"inlet.T": t}, ["outlet.T"]),  # type: ignore[misc]
            lambda s=state, t=T: _bare_valve_column(s, t),  # type: ignore[misc]
        )  # fmt: skip
    rows = 4_000
    T = rng.uniform(650.0, 700.0, rows)
    state = CoolProp.AbstractState("HEOS", "Water")
    case = parse_case(cases.turbine(), operations.case_shape, operations.unit_table)
    _series_line(
        "turbine efficiency, Helmholtz", rows,
        lambda: solvers.series(case, operations.catalogue, {"inlet.T": T}, ["eff.value", "inlet.mass_flow"]),
        lambda: _bare_turbine_column(state, T),
    )  # fmt: skip


def over_time(operations: Operations) -> None:
    print("\nTransients in rate form: whole answer, against a script by hand with solve_ivp at the same tolerance (ms)")
    print(f"{'case':28}{'ours':>9}{'script':>9}{'ratio':>8}")
    for name in sorted(transients.SCRIPTS):
        document = operations.example(name)
        a, b = alternate(lambda d=document: operations.solve(d), transients.SCRIPTS[name], 1, rounds=5)  # type: ignore[misc]
        print(f"{name:28}{a * 1e3:9.1f}{b * 1e3:9.1f}{a / b:8.2f}")


def _series_line(label: str, rows: int, ours: Callable[[], Any], bare: Callable[[], Any]) -> None:
    a, b = alternate(ours, bare, 1, rounds=5)
    print(f"{label:34}{rows:8}{a / rows * 1e6:9.2f}{b / rows * 1e6:9.2f}{a / b:8.2f}")


def _bare_valve_column(state: Any, T: np.ndarray) -> np.ndarray:
    out = np.empty(len(T))
    update, hmass, temperature, flow = state.update, state.hmass, state.T, 12 / 3.6
    for i, t in enumerate(T.tolist()):
        update(CoolProp.PT_INPUTS, 41e5, t)
        update(CoolProp.HmassP_INPUTS, hmass() - 15e3 / flow, 11e5)
        out[i] = temperature()
    return out


def _bare_turbine_column(state: Any, T: np.ndarray) -> np.ndarray:
    """The outlet and its ideal state differ only in what the row gives, so the constant outlet is flashed once."""
    out = np.empty((len(T), 2))
    update, hmass, smass = state.update, state.hmass, state.smass
    update(CoolProp.PT_INPUTS, 0.5e5, 373.15)
    h2 = hmass()
    for i, t in enumerate(T.tolist()):
        update(CoolProp.PT_INPUTS, 30e5, t)
        h1 = hmass()
        update(CoolProp.PSmass_INPUTS, 0.5e5, smass())
        out[i] = (h1 - h2) / (h1 - hmass()), 2e6 / (h1 - h2)
    return out


def main() -> None:
    wanted = sys.argv[1:] or ["engine", "chain", "series", "transients", "http"]
    operations = Operations.build()
    for name, run in (("engine", engine), ("chain", chain), ("series", series), ("transients", over_time)):
        if name in wanted:
            run(operations)
    if "http" in wanted:
        compare_http()


if __name__ == "__main__":
    main()
