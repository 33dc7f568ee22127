"""The hours of a case: one CSV row an hour, whole years, checked cell by cell.

Rows are counted as a spreadsheet shows them: the header is row 1.
"""

from __future__ import annotations

import csv
import re
from collections import Counter
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from datetime import datetime

import numpy as np
from numpy.typing import NDArray

from appraise.case.kinds import LARGEST, Within
from appraise.case.words import listed, nearest, shown, utf8_text
from appraise.errors import CaseError, Problem

Array = NDArray[np.float64]
Hourly = NDArray[np.datetime64]

RANGES: Mapping[str, Within] = {
    "heat_MW": Within(0),
    "outdoor_C": Within(-60, 60),
    "supply_C": Within(0, 200),
    "return_C": Within(0, 200),
    "power_price": Within(),
}
"""The columns a series may have beside `time`, and what each may hold."""

_SHOWN_FAULTS = 3  # of one kind; the rest is counted, unless it is a single one
FIRST_ROW = 2  # of the numbers
_TIME = re.compile(r"(19|20|21)\d\d-\d\d-\d\d[T ]\d\d:\d\d(:\d\d(\.0+)?)?", re.ASCII)
_WITH_OFFSET = re.compile(r"\d{4}-\d\d-\d\d[T ][\d:.]+ ?(Z|[+-]\d\d(:?\d\d)?)", re.ASCII | re.IGNORECASE)
_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?", re.ASCII)
_TIME_ALLOWED = "the start of an hour in local standard time, such as 2025-01-01T00:00"
_HOUR = np.timedelta64(1, "h")


@dataclass(frozen=True, slots=True, eq=False)
class Hours:
    """The series, one element an hour; None for a column that is absent. Times are local standard time."""

    time: Hourly  # start of the hour, datetime64[h]
    heat_MW: Array | None
    outdoor_C: Array | None
    supply_C: Array | None
    return_C: Array | None
    power_price: Array | None
    number_of_years: float  # a fraction where some hours stand for all of them
    other_prices: Mapping[str, Array] = field(default_factory=dict)

    def price(self, column: str) -> Array | None:
        """The power prices of a column by its name in the file; None if it is absent."""
        return self.power_price if column == "power_price" else self.other_prices.get(column)


@dataclass(frozen=True, slots=True)
class Needed:
    """What a case needs of its series, to be named where it is missing.

    heat, temperatures : whether the series must give them itself; otherwise it must give `outdoor_C`.
    price_columns : columns that scenarios name.
    """

    heat: bool = True
    temperatures: bool = True
    price_columns: tuple[str, ...] = ()


def parsed_hours(content: bytes, name: str, needed: Needed) -> Hours:
    """The hours in the bytes of a CSV file called `name`. Raises CaseError with every fault."""
    rows = _rows(content, name)
    header = [cell.strip() for cell in rows[0]]
    problems = list(_header_problems(header, name, needed))
    if not problems:
        problems = list(_shape_problems(rows, name))
    if problems:
        raise CaseError(problems)
    cells = dict(zip(header, zip(*rows[1:], strict=True), strict=True))
    time, time_problems = _times(cells.pop("time"), name)
    problems += time_problems
    columns: dict[str, Array] = {}
    for column, texts in cells.items():
        columns[column], wrong = _numbers(texts, RANGES.get(column, Within()), f"column {column}", name)
        problems += wrong
    problems += _crossed_temperatures(columns, name)
    if problems:
        raise CaseError(problems)
    known = {column: columns.pop(column, None) for column in RANGES}
    return Hours(time=time, number_of_years=_years(time)[0], other_prices=columns, **known)


def _rows(content: bytes, name: str) -> list[list[str]]:
    """All rows of cells. Raises CaseError for what is no comma-separated UTF-8 text."""
    text = utf8_text(content, name, "row")
    try:
        rows = list(csv.reader(text.splitlines(), strict=True))
    except csv.Error as error:
        raise CaseError([Problem(name, f"{error}; allowed: comma-separated cells")]) from None
    while rows and not any(cell.strip() for cell in rows[-1]):
        rows.pop()
    if not rows:
        raise CaseError([Problem(name, "empty; allowed: a header and one row an hour")])
    for mark, word in ((";", "semicolons"), ("\t", "tabs")):
        if len(rows[0]) == 1 and mark in rows[0][0]:
            message = f"{word} between the columns; allowed: commas between columns, a point in numbers"
            raise CaseError([Problem(f"{name} row 1", message)])
    return rows


def _header_problems(header: Sequence[str], name: str, needed: Needed) -> Iterator[Problem]:
    where = f"{name} row 1"
    known = ("time", *RANGES, *needed.price_columns)
    for column, count in Counter(header).items():
        if column not in known:
            yield Problem(where, f"{shown(column)} is no known column; {nearest(column, known, 'column')}")
        elif count > 1:
            yield Problem(where, f"column {column} given {count} times; allowed: once")
    if "time" not in header:
        yield Problem(where, f"column time is missing; required: {_TIME_ALLOWED}")
    if "heat_MW" not in header and needed.heat:
        yield Problem(where, "column heat_MW is missing; required: heat_MW, or year.heat_signature")
    for column in ("supply_C", "return_C"):
        if column not in header and needed.temperatures:
            message = f"column {column} is missing; required: {column}, or network.heating_curve"
            yield Problem(where, message)
    derived = not needed.heat and "heat_MW" not in header
    derived |= not needed.temperatures and not {"supply_C", "return_C"} <= set(header)
    if derived and "outdoor_C" not in header:
        message = "column outdoor_C is missing; required by year.heat_signature and network.heating_curve"
        yield Problem(where, message)
    for column in needed.price_columns:
        if column not in header:
            prices = [c for c in header if c not in ("time", *RANGES) or c == "power_price"]
            yield Problem(
                where, f"column {column} is missing, which a scenario names; price columns: {listed(prices)}"
            )


def _shape_problems(rows: Sequence[Sequence[str]], name: str) -> Iterator[Problem]:
    """Rows that are blank or have more or fewer cells than the header."""
    width = len(rows[0])
    if len(rows) == 1:
        yield Problem(name, "a header and no rows; allowed: one row an hour for whole years")
    wrong = [index for index, row in enumerate(rows) if len(row) != width]

    def message(index: int) -> str:
        cells = len(rows[index])
        if not any(cell.strip() for cell in rows[index]):
            return "blank row; allowed: one row an hour"
        comma = "; numbers need a decimal point, not a comma" if cells > width else ""
        return f"{cells} cells given; allowed: {width}, as in the header{comma}"

    yield from _some(
        wrong, lambda index: Problem(f"{name} row {index + 1}", message(index)), name, "such rows"
    )


def _some(
    wrong: Sequence[int] | NDArray[np.intp], problem: Callable[[int], Problem], where: str, noun: str
) -> Iterator[Problem]:
    """The first few problems of one kind, and how many more there are."""
    told = len(wrong) if len(wrong) <= _SHOWN_FAULTS + 1 else _SHOWN_FAULTS
    for index in wrong[:told]:
        yield problem(int(index))
    if len(wrong) > told:
        yield Problem(where, f"and {len(wrong) - told} more {noun}")


def _numbers(texts: Sequence[str], kind: Within, column: str, name: str) -> tuple[Array, list[Problem]]:
    """One column as numbers, and its faults."""
    try:
        if "_" in "".join(texts):  # Python would read 1_000 as a number
            raise ValueError
        values = np.array(texts).astype(np.float64)
        good = np.isfinite(values)
    except ValueError:
        good = np.array([bool(_NUMBER.fullmatch(text.strip())) for text in texts])
        values = np.array([float(text) if ok else np.nan for text, ok in zip(texts, good, strict=True)])
        good &= np.isfinite(values)
    good &= np.abs(values) <= LARGEST
    if kind.low is not None:
        good &= values >= kind.low
    if kind.high is not None:
        good &= values <= kind.high

    def problem(index: int) -> Problem:
        text = texts[index].strip()
        given = "empty cell" if not text else f"{text if _NUMBER.fullmatch(text) else shown(text)} given"
        size = f", in size at most {LARGEST:g}" if LARGEST < abs(values[index]) < np.inf else ""
        comma = ", with a decimal point" if re.fullmatch(r"[+-]?\d+,\d+", text) else ""
        return Problem(
            f"{name} row {index + FIRST_ROW}, {column}", f"{given}; allowed: {kind.allowed}{comma}{size}"
        )

    return values, list(_some(np.flatnonzero(~good), problem, f"{name}, {column}", "such cells"))


def _crossed_temperatures(columns: Mapping[str, Array], name: str) -> Iterator[Problem]:
    """Hours whose return is not below the supply."""
    supply, back = columns.get("supply_C"), columns.get("return_C")
    if supply is None or back is None:
        return

    def problem(index: int) -> Problem:
        message = f"{back[index]:g} °C given; allowed: below the supply of {supply[index]:g} °C"
        return Problem(f"{name} row {index + FIRST_ROW}, column return_C", message)

    yield from _some(np.flatnonzero(back >= supply), problem, f"{name}, column return_C", "such cells")


def _times(texts: Sequence[str], name: str) -> tuple[Hourly, list[Problem]]:
    """The column of times, and its faults: form first, then order, then whole years."""
    column = f"{name}, column time"
    stamps = [text.strip() for text in texts]
    parsed = np.full(len(stamps), np.datetime64("NaT", "s"), dtype="datetime64[s]")
    try:
        if all(map(_TIME.fullmatch, stamps)):
            parsed = np.array(stamps, dtype="datetime64[s]")
    except ValueError:
        pass
    if np.isnat(parsed).any():
        parsed = np.array([_stamp(stamp) for stamp in stamps], dtype="datetime64[s]")
    time = parsed.astype("datetime64[h]")
    wrong = np.flatnonzero(np.isnat(parsed) | (parsed != time))

    def malformed(index: int) -> Problem:
        stamp = stamps[index]
        if _WITH_OFFSET.fullmatch(stamp):
            message = f"{shown(stamp)} given; allowed: {_TIME_ALLOWED}, without an offset from UTC"
        else:
            message = f"{shown(stamp) + ' given' if stamp else 'empty cell'}; allowed: {_TIME_ALLOWED}"
        return Problem(f"{name} row {index + FIRST_ROW}, column time", message)

    problems = list(_some(wrong, malformed, column, "such cells"))
    if not problems:
        problems = list(_order_problems(time, name))
    if not problems:
        problems = list(_length_problems(time, name))
    return time, problems


def _stamp(text: str) -> np.datetime64:
    """One time, or not-a-time where the text has another form or names no day of the calendar."""
    try:
        return np.datetime64(text, "s") if _TIME.fullmatch(text) else np.datetime64("NaT", "s")
    except ValueError:
        return np.datetime64("NaT", "s")


def _order_problems(time: Hourly, name: str) -> Iterator[Problem]:
    """Gaps, repeats and steps back between one row and the next."""
    step = np.diff(time).astype(int)

    def problem(index: int) -> Problem:
        before, after = time[index], time[index + 1]
        message = f"{_said(after)} given after {_said(before)}; allowed: {_said(before + _HOUR)}"
        if step[index] in (0, 2) and _may_change(after):
            message += f"; {_CHANGE_OF_CLOCK.format('to' if step[index] else 'from')}"
        elif step[index] > 1:
            message += f" ({step[index] - 1} missing)"
        elif step[index] == 0:
            message += " (a repeat)"
        return Problem(f"{name} row {index + 1 + FIRST_ROW}, column time", message)

    yield from _some(np.flatnonzero(step != 1), problem, f"{name}, column time", "such rows")


_CHANGE_OF_CLOCK = (
    "this looks like the change {} summer time, but the series must be in local standard time all year"
)


def _may_change(time: np.datetime64) -> bool:
    """Whether clocks may be changed about this hour: at night in spring or autumn, in either hemisphere."""
    at = _calendar(time)
    return at.month in (2, 3, 4, 9, 10, 11) and at.hour <= 4


def _calendar(time: np.datetime64) -> datetime:
    """An hour as a date with parts."""
    return datetime.fromisoformat(str(time.astype("datetime64[m]")))


def _years(time: Hourly) -> tuple[int, np.datetime64]:
    """How many whole years the series comes nearest to, at least one, and the hour after their end."""
    years = max(1, round(len(time) / 8766.0))
    start = _calendar(time[0])
    month, day, end = start.month, start.day, start.year + years
    if (month, day) == (2, 29) and not _is_leap(end):
        month, day = 3, 1
    return years, np.datetime64(f"{end:04d}-{month:02d}-{day:02d}T{start.hour:02d}", "h")


def _is_leap(year: int) -> bool:
    return year % 4 == 0 and (year % 100 != 0 or year % 400 == 0)


def _length_problems(time: Hourly, name: str) -> Iterator[Problem]:
    """A series without gaps that is not whole years from midnight."""
    hour = _calendar(time[0]).hour
    if hour != 0:
        message = f"{_said(time[0])} given as the first hour; allowed: 00:00 of any day"
        if hour == 1:
            message += "; each time must be the start of its hour, not the end"
        yield Problem(f"{name} row {FIRST_ROW}, column time", message)
        return
    years, end = _years(time)
    expected = int((end - time[0]).astype(int))
    if len(time) != expected:
        what = "a whole year" if years == 1 else f"{years} whole years"
        yield Problem(
            name,
            f"{len(time)} rows given, to {_said(time[-1])}; allowed: whole years, "
            f"{what} from {_said(time[0])} having {expected} rows to {_said(end - _HOUR)}",
        )


def _said(time: np.datetime64) -> str:
    """An hour as the file writes it."""
    return str(time.astype("datetime64[m]"))
