"""The case that a workbook holds: its inputs, as they stand now, and the hours of its year.

Read are the cells that a run wrote: column `PATH` of sheet `Inputs` says where a value belongs in the case. A
row that somebody added is refused, so that nobody believes it had an effect. The scenario chosen on the first
sheet only picks what is shown; the case keeps its reference scenario.
"""

from __future__ import annotations

import hashlib
import json
import re
from collections.abc import Mapping, Sequence
from datetime import date
from pathlib import Path
from typing import Any

from appraise.case import book_layout as layout
from appraise.case.archive import Archive
from appraise.case.book_hours import MOST_COLUMNS, hours_csv, sheet_row
from appraise.case.book_rows import Input, cell, data_of, inputs_of
from appraise.case.kinds import Place, is_number
from appraise.case.sheets import Book, Odd
from appraise.errors import FileProblem, Problem

_SERIES = "year.series"
_NUMBERLIKE = re.compile(r"[+-]?[\d.,' ]*\d[\d.,' ]*%?")


class BookCase:
    """What a workbook says about its case.

    data : mapping of tables as a case file would have them; what stands in a cell and is no value is in it
        as `Odd`, which every kind of value refuses in its own words
    sha256 : of `data` as JSON with sorted keys, so that it stays the same whatever program saved the workbook
    problems : rows that are out of order
    hours_csv : the series as a CSV file has it, numbers to the last bit; None where it must be read from one
    series_sha256 : what that file must have, "" where another series than that of the run is asked for
    Raises FileProblem for what is no workbook of a run.
    """

    def __init__(self, content: bytes, path: Path) -> None:
        archive = Archive(content, path)
        book = Book(archive)
        cells = book.cells(layout.INPUTS, layout.NOTE)
        hours = book.cells(layout.HOURS, MOST_COLUMNS)
        headings = tuple(cells.words(layout.HEADING_ROW, col) for col in range(1, layout.NOTE + 1))
        if headings != layout.HEADINGS:
            row, wanted = layout.HEADING_ROW, ", ".join(layout.HEADINGS)
            raise archive.refusal(f'row {row} of sheet "{layout.INPUTS}" has not the headings {wanted}')
        self._inputs, self.problems = inputs_of(cells)
        if not self._inputs:
            raise archive.refusal(f'sheet "{layout.INPUTS}" has no inputs')
        self.data, wrong = data_of(self._inputs)
        self.problems += wrong
        self._by_fault = {_as_fault(one.place): one for one in self._inputs}
        self.sha256 = _identity(self.data)
        series = next((one for one in self._inputs if one.path == _SERIES), None)
        another = series is not None and series.value != series.as_run
        self.hours_csv = None if another else hours_csv(hours)
        told = hours.words(layout.HOURS_HASH_ROW, 1).removeprefix(layout.HASH_OF_FILE).strip()
        self.series_sha256 = "" if another else told

    def located(self, problems: Sequence[Problem]) -> list[Problem]:
        """All faults: those of the rows, and these, each with its cell."""
        return self.problems + [self._located(problem) for problem in problems]

    def _located(self, problem: Problem) -> Problem:
        of_hours = re.fullmatch(rf"{layout.HOURS}(?: row (\d+))?(?:, column (.+))?", problem.where)
        if of_hours is not None and self.hours_csv is not None:
            return Problem(_hours_place(of_hours[1], of_hours[2]), problem.message)
        message = problem.message
        if self.hours_csv is not None and problem.where == _SERIES:
            message = re.sub(
                r"first row (\d+)", lambda found: f"first row {sheet_row(int(found[1]))}", message
            )
        one = self._by_fault.get(problem.where)
        if one is not None:
            return Problem(one.where, message + _hint(one, message))
        return self._located_within(problem.where, message)

    def _located_within(self, where: str, message: str) -> Problem:
        """A fault of a table or list: at its first row, or at the element that is no value."""
        below = [one for fault, one in self._by_fault.items() if fault.startswith((where + ".", where + "["))]
        for one in below:
            if isinstance(one.value, Odd) and message.startswith("a list given"):
                return Problem(one.where, f"{one.value} given{message.removeprefix('a list given')}")
        place = cell(below[0].row, layout.PATH) if below else layout.INPUTS
        return Problem(f"{place} ({where})", message)

    def series_places(self, name: str, folder: Path) -> list[Path]:
        """Where a series may be that the workbook does not hold: by its path from here, and beside it."""
        return list(dict.fromkeys((folder / name, folder / Path(name).name)))

    def right_series(self, tried: Sequence[Path], contents: Mapping[Path, bytes]) -> tuple[Path, bytes]:
        """The series of the run among the files that were found. Raises FileProblem where none is."""
        if not contents:
            places = " nor ".join(map(str, tried))
            raise FileProblem(f"the workbook does not hold its rows, and there is no {places}")
        hashes = {path: hashlib.sha256(content).hexdigest() for path, content in contents.items()}
        wanted = self.series_sha256 or next(iter(hashes.values()))
        for path, found in hashes.items():
            if found == wanted:
                return path, contents[path]
        told = ", ".join(f"{path} has {found}" for path, found in hashes.items())
        raise FileProblem(f"the workbook belongs to a file with SHA-256 {wanted}; {told}")


def _identity(data: Mapping[str, Any]) -> str:
    text = json.dumps(data, sort_keys=True, ensure_ascii=False, separators=(",", ":"), default=str)
    return hashlib.sha256(text.encode()).hexdigest()


# -- faults and their cells


def _as_fault(place: Place) -> str:
    """The path by which faults name a place: elements of lists are counted from 1."""
    return "".join(f"[{step + 1}]" if isinstance(step, int) else f".{step}" for step in place).lstrip(".")


def _hint(one: Input, message: str) -> str:
    """What a spreadsheet made of what was typed, where that explains the fault."""
    allowed = message.partition("allowed: ")[2]
    if isinstance(one.value, date) and "YYYY" not in allowed:
        return "; the spreadsheet made a date of what was typed, an apostrophe before it keeps it: '07-06"
    if isinstance(one.value, Odd) and "percentage" in one.value.words:
        return "; an apostrophe before what is typed keeps it: '-20%"
    if isinstance(one.value, str) and "number" in allowed and _NUMBERLIKE.fullmatch(one.value.strip()):
        return "; the cell holds a text, type the number again"
    if is_number(one.value) and ("text" in allowed or "letters" in allowed) and "number" not in allowed:
        return f"; an apostrophe before what is typed makes it a text: '{one.value}"
    return ""


def _hours_place(row: str | None, column: str | None) -> str:
    sheet = layout.HOURS if row is None else f"{layout.HOURS} row {sheet_row(int(row))}"
    return sheet if column is None else f"{sheet}, column {column}"
