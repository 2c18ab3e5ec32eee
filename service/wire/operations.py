"""What the service does, from document to document. Every operation parses, solves and dumps; none knows of HTTP."""

from __future__ import annotations

import time
from collections.abc import Callable, Mapping, Sequence
from typing import Any, TypeVar

import numpy as np

from service import solvers
from service.advisories import DEFERENCE
from service.balance.case import Case
from service.balance.solution import SeriesResult, Solution
from service.errors import CaseError, Issue, NotFound, SchemaViolation
from service.fluids.catalogue import FluidCatalogue
from service.units import UnitTable
from service.wire import series as columns
from service.wire.addresses import AddressBook, in_rate_form
from service.wire.answering import Answer
from service.wire.catalogue_pages import describe_fluids, describe_one_fluid, describe_units
from service.wire.findings import Findings
from service.wire.library import read_examples, read_schemas, schema_directory
from service.wire.parsing import parse_case
from service.wire.pointers import pointer
from service.wire.presenting import Presenter
from service.wire.provenance import provenance
from service.wire.shapes import Shape, report
from service.wire.stating import answer_state
from service.wire.suggest import did_you_mean, listed, quoted
from service.wire.telling import told

Document = dict[str, Any]
Result = TypeVar("Result")


class Operations:
    """Built once by the composition root; every method may be called from several threads."""

    def __init__(
        self,
        units: UnitTable,
        catalogue: FluidCatalogue,
        schemas: Mapping[str, Document],
        examples: Mapping[str, Document],
        time_budget: float | None = None,
    ) -> None:
        self.unit_table = units
        self.catalogue = catalogue
        self._schemas = schemas
        self._examples = examples
        self._time_budget = time_budget
        self.case_shape = Shape("case", schemas)
        self._series_shape = Shape("series-request", schemas)
        self._states_shape = Shape("states-request", schemas)

    @classmethod
    def build(cls, settings: object = None) -> Operations:
        """Read the files, build the tables and compile the schemas. `settings.time_budget` [s] bounds each solve."""
        directory = schema_directory()
        return cls(
            UnitTable.build(),
            FluidCatalogue(),
            read_schemas(directory),
            read_examples(directory),
            getattr(settings, "time_budget", None),
        )

    # -- balances ----------------------------------------------------------------------------------------------

    def solve(self, document: Any) -> Document:
        """The answer to a case. Raises CaseError."""
        case, presenter = self._parse(document)
        solution: Solution = self._tell(
            document, presenter, lambda: solvers.solve(case, self.catalogue, self._deadline())
        )
        return Answer(solution, presenter).document(document)

    def check(self, document: Any) -> Document:
        """The structural count of a case, without solving it. Raises CaseError."""
        case, presenter = self._parse(document)
        if in_rate_form(document):
            raise _not_over_time("There is no structural count of a transient in its rate form: it is integrated.")
        found = self._tell(document, presenter, lambda: solvers.check(case, self.catalogue))
        return {
            "status": "solvable",
            "equations": found.equations,
            "unknowns": list(found.unknowns),
            "undetermined": list(found.undetermined),
            "surplus": list(found.surplus),
            "assumptions": list(found.assumptions),
            "provenance": provenance((), document),
        }

    def _parse(self, document: Any) -> tuple[Case, Presenter]:
        case = parse_case(document, self.case_shape, self.unit_table)
        return case, Presenter(self.unit_table, case.answer.units, case.site.atmospheric_pressure)

    def _deadline(self) -> float | None:
        return None if self._time_budget is None else time.monotonic() + self._time_budget

    @staticmethod
    def _tell(document: Any, presenter: Presenter, work: Callable[[], Result]) -> Result:
        """Do the work; an error is told in the units and the places of the request."""
        try:
            return work()
        except CaseError as error:
            raise told(error, AddressBook(document), presenter) from error

    # -- series ------------------------------------------------------------------------------------------------

    def series(self, document: Any) -> Document:
        """The case over JSON columns. Raises CaseError where the request as a whole cannot be served."""
        self._check_series(document)
        readings, findings = document["readings"], Findings()
        headers = {address: stated.get("unit") for address, stated in readings.items()}
        run = self.series_run(document["case"], headers, document.get("report"), self._deadline())
        values = {
            address: _numbers(stated["values"], f"{pointer(('readings', address))}/values", findings)
            for address, stated in readings.items()
        }
        findings.raise_any()
        answer = run.run(values)
        return {
            "rows": answer.rows,
            "columns": {
                name: {"unit": answer.units[name].symbol, "values": columns.numbers(column)}
                for name, column in answer.columns.items()
            },
            "status": list(answer.status),
            "unsolved": list(answer.unsolved),
            "deference": DEFERENCE,
            "provenance": provenance((), document),
        }

    def series_run(
        self,
        case_document: Any,
        headers: Mapping[str, str | None],
        asked: Sequence[str] | None = None,
        deadline: float | None = None,
    ) -> columns.SeriesRun:
        """A case made ready for columns. headers: address → unit of its column; asked: addresses to report.

        Raises CaseError, with pointers into a series request.
        """
        try:
            case, presenter = self._parse(case_document)
        except CaseError as error:
            raise _inside_case(error) from error
        if in_rate_form(case_document):
            raise _inside_case(_not_over_time("A series cannot be had of a transient in its rate form."))
        book, findings = AddressBook(case_document), Findings()
        plans = []
        for address, symbol in headers.items():
            place = pointer(("readings", address))
            plan = columns.column_plan(address, symbol, book, self.unit_table, findings, place)
            if plan is not None:
                plans.append(plan)
        reported = columns.reported_addresses(asked, case, headers, book, findings)
        findings.raise_any()

        def solve(full: Case, si: Mapping[str, columns.Column], names: Sequence[str]) -> SeriesResult:
            try:
                return solvers.series(full, self.catalogue, si, names, deadline)
            except CaseError as error:
                raise _inside_case(told(error, book, presenter)) from error

        return columns.SeriesRun(case, plans, reported, presenter, solve)

    def _check_series(self, document: Any) -> None:
        findings = Findings()
        report(self._series_shape.faults(document), findings)
        findings.raise_any()
        lengths = {len(stated["values"]) for stated in document["readings"].values()}
        if len(lengths) > 1:
            findings.add(
                SchemaViolation,
                f"The columns have different lengths: {listed([str(n) for n in sorted(lengths)], most=5)}.",
                pointer="#/readings",
                hint="Give every column a value or null in each row.",
            )
        findings.raise_any()

    # -- states, fluids, units ---------------------------------------------------------------------------------

    def states(self, document: Any) -> Document:
        """The full state of a fluid. Raises CaseError."""
        return answer_state(document, self._states_shape, self.unit_table, self.catalogue)

    def fluids(self) -> Document:
        """Every fluid that can be named."""
        return describe_fluids(self.catalogue)

    def fluid(self, name: str) -> Document:
        """Limits of validity and source of one fluid. Raises NotFound."""
        return describe_one_fluid(name, self.catalogue, Presenter(self.unit_table))

    def units(self) -> Document:
        """Kinds of quantity and their units."""
        return describe_units(self.unit_table)

    # -- files -------------------------------------------------------------------------------------------------

    def schemas(self) -> Document:
        """Names and titles of the JSON Schemas."""
        return {"schemas": [{"name": name, "title": str(s.get("title", name))} for name, s in self._schemas.items()]}

    def schema(self, name: str) -> Document:
        """One JSON Schema. Raises NotFound."""
        return _named("schema", name, self._schemas)

    def examples(self) -> Document:
        """Names and titles of the ready cases."""
        return {"examples": [{"name": name, "title": str(e.get("title", name))} for name, e in self._examples.items()]}

    def example(self, name: str) -> Document:
        """One ready case. Raises NotFound."""
        return _named("example", name, self._examples)


def _not_over_time(detail: str) -> CaseError:
    hint = 'Choose "form": "integrated", or post it to /v1/balances as one case.'
    return SchemaViolation(detail, [Issue(detail, "", hint, "#/system")])


def _named(what: str, name: str, found: Mapping[str, Document]) -> Document:
    if name not in found:
        raise NotFound(f"There is no {what} {quoted(name)}.", hint=did_you_mean(name, found))
    return found[name]


def _numbers(values: list[float | None], place: str, findings: Findings) -> columns.Column:
    try:
        return np.array(values, dtype=np.float64)
    except (OverflowError, ValueError):
        findings.add(
            SchemaViolation, "A value in this column is too large a number.", pointer=place, hint="Check the column."
        )
        return np.zeros(0)


def _inside_case(error: CaseError) -> CaseError:
    """The error of a case with its pointers moved into a series request."""
    issues = [
        Issue(i.detail, i.address, i.hint, "#/case" + i.pointer.removeprefix("#"), i.amounts) for i in error.issues
    ]
    return type(error)(error.detail, issues)
