"""Series: columns of readings in, columns of answers out, and a bad cell costs its row only."""

from __future__ import annotations

import csv
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from service.balance.case import Case
from service.balance.solution import SeriesResult
from service.errors import CaseError, SchemaViolation, UnitNotUnderstood, UnitOfWrongKind
from service.wire import series_csv
from service.wire.addresses import AddressBook
from service.wire.findings import Findings
from service.wire.presenting import Presenter
from service.wire.series import ColumnPlan, SeriesRun, column_plan, reported_addresses, with_columns
from service.wire.series_csv import read_headers, run_csv

from .wire_helpers import let_down, parse, table

Columns = Mapping[str, Any]


class TenKelvinColder:
    """Stands for the operations: outlet.T is inlet.T less 10 K; a row above 1000 K has no solution."""

    def __init__(self) -> None:
        self.rows: list[int] = []
        self.cases: list[Case] = []

    def solve(self, case: Case, columns: Columns, report: Sequence[str]) -> SeriesResult:
        T = columns["inlet.T"]
        self.rows.append(len(T))
        self.cases.append(case)
        found = T - 10.0
        hot = np.flatnonzero(T > 1000.0)
        found[hot] = np.nan
        problems = {int(row): "no-solution" for row in hot}
        details = {int(row): "too hot" for row in hot}
        kinds = dict.fromkeys(report, "temperature")
        return SeriesResult(len(T), dict.fromkeys(report, found), kinds, problems, details)

    def series_run(self, document: Any, headers: Mapping[str, str | None]) -> SeriesRun:
        case, book, findings = parse(document), AddressBook(document), Findings()
        plans = [column_plan(a, unit, book, table(), findings, "#") for a, unit in headers.items()]
        reported = reported_addresses(None, case, headers, book, findings)
        findings.raise_any()
        presenter = Presenter(table(), case.answer.units, case.site.atmospheric_pressure)
        return SeriesRun(case, [p for p in plans if p is not None], reported, presenter, self.solve)


def run(columns: dict[str, list[float]], headers: dict[str, str | None]) -> Any:
    prepared = TenKelvinColder().series_run(let_down(), headers)
    return prepared.run({a: np.array(values, dtype=float) for a, values in columns.items()})


def test_a_column_is_read_in_its_unit_and_answered_in_the_unit_asked() -> None:
    answer = run({"inlet.T": [752.0, 932.0]}, {"inlet.T": "degF"})  # 400 and 500 degC
    assert answer.units["outlet.T"].symbol == "degC"  # as in the case's "? degC"
    assert answer.columns["outlet.T"] == pytest.approx([390.0, 490.0], abs=1e-9)
    assert answer.status == ["solved", "solved"]


def test_a_bad_row_costs_only_itself_and_says_why() -> None:
    answer = run({"inlet.T": [400.0, np.nan, -300.0, 2000.0, 500.0]}, {"inlet.T": "degC"})
    assert answer.status == ["solved", "under-specified", "state-out-of-range", "no-solution", "solved"]
    assert np.isnan(answer.columns["outlet.T"]).tolist() == [False, True, True, True, False]
    assert [entry["row"] for entry in answer.unsolved] == [1, 2, 3]
    assert "inlet.T has no reading" in answer.unsolved[0]["detail"]
    assert "cannot exist" in answer.unsolved[1]["detail"]
    assert answer.unsolved[2]["detail"] == "too hot"


def test_only_the_first_bad_rows_are_told_in_words() -> None:
    assert len(run({"inlet.T": [np.nan] * 500}, {"inlet.T": "degC"}).unsolved) == 20


def test_gauge_pressures_of_a_column_count_from_the_site() -> None:
    operations = TenKelvinColder()
    prepared = operations.series_run(let_down(), {"inlet.T": "K", "inlet.p": "barg"})
    prepared.run({"inlet.T": np.array([500.0]), "inlet.p": np.array([40.0])})
    quantity = operations.cases[0].streams[0].quantities["p"]
    assert quantity.value == pytest.approx(40e5 + 100_200.0, rel=1e-14)  # the site's 1.002 bar


def test_a_column_may_bring_a_quantity_that_the_case_does_not_mention() -> None:
    case = parse(let_down())
    full = with_columns(
        case, {"outlet.elevation": ("length", np.array([np.nan, 3.0]))}, [("inlet.h", "specific_energy")]
    )
    assert full.streams[1].quantities["elevation"].value == 3.0
    mentioned = full.streams[0].quantities["h"]
    assert (mentioned.value, mentioned.wanted) == (None, False)
    assert case.streams[1].quantities.keys() == {"p", "T"}  # the case itself is left alone


def test_a_column_overrides_the_question_at_its_address() -> None:
    case = parse(let_down())
    full = with_columns(case, {"outlet.T": ("temperature", np.array([600.0]))}, [])
    assert full.streams[1].quantities["T"].value == 600.0
    assert not full.streams[1].quantities["T"].wanted


@pytest.mark.parametrize(
    ("address", "unit", "error", "says"),
    [
        ("inlet.pp", "bar", SchemaViolation, 'Did you mean "p"'),
        ("inlt.p", "bar", SchemaViolation, 'Did you mean "inlet"'),
        ("inlet", "bar", SchemaViolation, "not an address"),
        ("inlet.p", "bra", UnitNotUnderstood, "Did you mean"),
        ("inlet.p", "kg", UnitOfWrongKind, "pressure"),
        ("inlet.p", None, UnitNotUnderstood, "has no unit"),
    ],
)
def test_a_column_that_cannot_be_read_is_told(
    address: str, unit: str | None, error: type[CaseError], says: str
) -> None:
    findings = Findings()
    assert column_plan(address, unit, AddressBook(let_down()), table(), findings, "#/readings/x") is None
    ((found, issue),) = findings.found
    assert found is error
    assert says in f"{issue.detail} {issue.hint}"


def test_a_dimensionless_column_needs_no_unit() -> None:
    plan = column_plan("inlet.x", None, AddressBook(let_down()), table(), Findings(), "#")
    assert plan == ColumnPlan("inlet.x", "dimensionless", None)


def test_a_series_that_asks_for_nothing_is_refused() -> None:
    findings = Findings()
    assert reported_addresses(None, parse(let_down()), ["outlet.T"], AddressBook(let_down()), findings) == []
    assert "Nothing is asked" in findings.found[0][1].detail


# -- CSV -------------------------------------------------------------------------------------------------------


def solve_csv(tmp_path: Path, text: str, operations: Any = None) -> tuple[dict[str, Any], list[list[str]]]:
    source, target = tmp_path / "in.csv", tmp_path / "out.csv"
    source.write_bytes(text.encode())
    summary = run_csv(operations or TenKelvinColder(), let_down(), source, target)
    with target.open(encoding="utf-8", newline="") as file:
        return summary, list(csv.reader(file))


def test_a_file_is_solved_row_by_row_and_its_labels_are_kept(tmp_path: Path) -> None:
    text = "time,inlet.T [degC],tag\n08:00,400,a\n09:00, 5e2 ,b\n"
    summary, rows = solve_csv(tmp_path, text)
    assert rows == [
        ["time", "tag", "outlet.T [degC]", "status"],
        ["08:00", "a", "390", "solved"],
        ["09:00", "b", "490", "solved"],
    ]
    assert summary == {"rows": 2, "solved": 2, "unsolved": {}}


@pytest.mark.parametrize(
    ("cell", "status"),
    [
        ('"400,5"', "schema-violation"),
        ("4_00", "schema-violation"),
        ("nan", "schema-violation"),
        ("inf", "schema-violation"),
        ("1e999", "schema-violation"),
        ("٤٠٠", "schema-violation"),
        ("abc", "schema-violation"),
        ("4-5", "schema-violation"),
        ("9" * 500, "schema-violation"),
        ("400,7", "schema-violation"),  # one cell too many: a decimal comma without quotes
        ("", "under-specified"),
        ("-300", "state-out-of-range"),
        ("4000", "no-solution"),
    ],
)
def test_a_cell_that_is_no_number_costs_its_row_only(tmp_path: Path, cell: str, status: str) -> None:
    summary, rows = solve_csv(tmp_path, f"inlet.T [degC]\n400\n{cell}\n500\n")
    states = [row[-1] for row in rows[1:]]
    if cell == "":  # an empty line is no row of a file with one column
        assert states == ["solved", "solved"]
        return
    assert states == ["solved", status, "solved"]
    assert [row[0] for row in rows[1:]] == ["390", "", "490"]
    assert summary == {"rows": 3, "solved": 2, "unsolved": {status: 1}}


def test_an_empty_cell_is_a_missing_reading(tmp_path: Path) -> None:
    _, rows = solve_csv(tmp_path, "inlet.T [degC],inlet.p [barg]\n400,\n400,40\n,40\n")
    assert [row[-1] for row in rows[1:]] == ["under-specified", "solved", "under-specified"]


def test_a_row_that_is_too_short_costs_itself_only(tmp_path: Path) -> None:
    _, rows = solve_csv(tmp_path, "inlet.T [degC],inlet.p [barg]\n400\n400,40\n")
    assert [row[-1] for row in rows[1:]] == ["schema-violation", "solved"]


def test_a_byte_order_mark_and_windows_line_ends_are_no_trouble(tmp_path: Path) -> None:
    _, rows = solve_csv(tmp_path, "\ufeffinlet.T [degC]\r\n400\r\n")
    assert rows[1] == ["390", "solved"]


@pytest.mark.parametrize(
    ("header", "says"),
    [
        ("inlet.T [degC];inlet.p [barg]", "commas"),
        ("inlet.T [degC]\tinlet.p [barg]", "commas"),
        ("inlet.T [degC],inlet.T [K]", "two columns"),
        ("time,tag", "no readings"),
        ("", "no readings"),
        ("inlet.T", "has no unit"),
        ("inlet.T [kg]", "temperature"),
        ("inlet.temp [K]", 'Did you mean "T"'),
        (",".join(f"x{n}" for n in range(501)), "500"),
    ],
)
def test_a_header_that_cannot_be_meant_is_told_before_any_row(tmp_path: Path, header: str, says: str) -> None:
    with pytest.raises(CaseError) as caught:
        solve_csv(tmp_path, f"{header}\n1,2\n")
    issue = caught.value.issues[0]
    assert says in f"{issue.detail} {issue.hint}"


def test_headers_are_read_with_and_without_blanks() -> None:
    assert read_headers([" inlet.p[barg] ", "eff.value", "note"]).readings == {
        "inlet.p": (0, "barg"),
        "eff.value": (1, None),
    }


def test_a_long_file_is_solved_in_chunks_of_bounded_size(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(series_csv, "CHUNK", 1000)
    operations = TenKelvinColder()
    text = "inlet.T [degC]\n" + "".join(f"{400 + n % 100}\n" for n in range(20_500))
    summary, rows = solve_csv(tmp_path, text, operations)
    assert operations.rows == [1000] * 20 + [500]
    assert summary["solved"] == 20_500
    assert [float(row[0]) for row in rows[1:]] == [390.0 + n % 100 for n in range(20_500)]
