"""A series from a CSV file into a CSV file, chunk by chunk, so that a million rows need no more memory than a chunk.

A header is an address with the unit of its column, `inlet.p [barg]`; a column whose header is no address (a time stamp,
a tag) is copied. Numbers are written with a decimal point. A cell that is no number costs its row, nothing else.
"""

from __future__ import annotations

import csv
import itertools
import math
import re
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TextIO

import numpy as np

from service.errors import SchemaViolation
from service.wire.findings import Findings
from service.wire.operations import Operations
from service.wire.pointers import pointer
from service.wire.presenting import DIGITS
from service.wire.series import SOLVED, Column, SeriesRun
from service.wire.suggest import quoted

CHUNK = 50_000
"""Rows solved at a time."""

LONGEST_CELL = 40
MOST_COLUMNS = 500

_HEADER = re.compile(r"\s*([^\[\]]+?)\s*(?:\[\s*([^\[\]]*?)\s*\])?\s*")
_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_PLAIN = str.maketrans("", "", "0123456789.+-eE")


@dataclass(frozen=True, slots=True)
class Headers:
    """readings: address → (position, unit or None); labels: position → header of a column that is copied."""

    readings: Mapping[str, tuple[int, str | None]]
    labels: Mapping[int, str]


def run_csv(operations: Operations, case_document: Any, csv_path: Path | str, out_path: Path | str) -> dict[str, Any]:
    """Solve the case for every row of the file; returns {"rows", "solved", "unsolved": {problem type: rows}}.

    Raises CaseError where the case or the headers are wrong, OSError where a file cannot be read or written.
    """
    with Path(csv_path).open(encoding="utf-8-sig", newline="") as source:
        rows = csv.reader(source)
        headers = read_headers(next(rows, []))
        units = {address: unit for address, (_, unit) in headers.readings.items()}
        run = operations.series_run(case_document, units)
        with Path(out_path).open("w", encoding="utf-8", newline="") as target:
            count = _write(run, headers, rows, target)
    solved = count.pop(SOLVED, 0)
    return {"rows": solved + sum(count.values()), "solved": solved, "unsolved": dict(sorted(count.items()))}


def read_headers(cells: Sequence[str]) -> Headers:
    """What each column is. Raises SchemaViolation for a file without readings, or with one twice."""
    findings = Findings()
    readings: dict[str, tuple[int, str | None]] = {}
    labels: dict[int, str] = {}
    if len(cells) == 1 and (";" in cells[0] or "\t" in cells[0]):
        raise SchemaViolation(
            "The columns are not separated by commas.",
            hint="Write a comma between columns and a point as the decimal mark.",
        )
    if len(cells) > MOST_COLUMNS:
        raise SchemaViolation(f"The file has more than {MOST_COLUMNS} columns.", hint="Leave out what is not needed.")
    for position, cell in enumerate(cells):
        match = _HEADER.fullmatch(cell)
        if match is None or (match[2] is None and "." not in match[1]):
            labels[position] = cell
            continue
        address = match[1]
        if address in readings:
            findings.add(
                SchemaViolation,
                f"The file has two columns {quoted(address)}.",
                pointer=pointer(("readings", address)),
                address=address,
                hint="Keep one of them.",
            )
        readings[address] = (position, match[2] or None)
    findings.raise_any()
    if not readings:
        raise SchemaViolation(
            "The first line names no readings.",
            hint="Begin the file with headers such as inlet.p [barg],inlet.T [degC].",
        )
    return Headers(readings, labels)


def _write(run: SeriesRun, headers: Headers, rows: Iterator[list[str]], target: TextIO) -> Counter[str]:
    writer = csv.writer(target, lineterminator="\n")
    units = {a: u.symbol for a, u in run.units.items()}
    names = [a if units[a] == "-" else f"{a} [{units[a]}]" for a in units]
    writer.writerow([*headers.labels.values(), *names, "status"])
    count: Counter[str] = Counter()
    filled = (row for row in rows if row)
    while chunk := list(itertools.islice(filled, CHUNK)):
        values, bad = _columns(headers, chunk)
        answer = run.run(values)
        status = [SchemaViolation.problem_type if r in bad else s for r, s in enumerate(answer.status)]
        labels = [[row[p] if p < len(row) else "" for row in chunk] for p in headers.labels]
        texts = [_texts(answer.columns[a], bad) for a in units]
        writer.writerows(zip(*labels, *texts, status, strict=True))
        count.update(status)
    return count


def _columns(headers: Headers, chunk: Sequence[Sequence[str]]) -> tuple[dict[str, Column], set[int]]:
    """(the readings as columns, the rows with a cell that is no number); NaN in bad and in empty cells."""
    width = max(position for position, _ in headers.readings.values())
    expected = len(headers.readings) + len(headers.labels)
    bad = {r for r, row in enumerate(chunk) if len(row) <= width or len(row) > expected}
    values = {}
    for address, (position, _) in headers.readings.items():
        cells = (
            [row[position] if r not in bad else "" for r, row in enumerate(chunk)]
            if bad
            else [row[position] for row in chunk]
        )
        values[address] = _numbers(cells, bad)
    return values, bad


def _numbers(cells: list[str], bad: set[int]) -> Column:
    if not "".join(cells).translate(_PLAIN):  # nothing but digits, points, signs and exponents: convert at once
        try:
            column = np.array([float(cell) if cell else math.nan for cell in cells])
        except ValueError:
            pass
        else:
            if not np.isinf(column).any():
                return column
    column = np.empty(len(cells))
    for row, cell in enumerate(cells):
        stripped = cell.strip()
        column[row] = math.nan
        if not stripped:
            continue
        if len(stripped) <= LONGEST_CELL and _NUMBER.fullmatch(stripped):
            column[row] = float(stripped)
        if not math.isfinite(column[row]):
            column[row] = math.nan
            bad.add(row)
    return column


def _texts(column: Column, bad: set[int]) -> list[str]:
    texts = [f"{v:.{DIGITS}g}" if v == v else "" for v in column.tolist()]
    for row in bad:
        texts[row] = ""
    return texts
