"""The sheet of inputs: every value of the case once, what it was in the run, and whether it was changed.

The value cells carry the names by which all other sheets use them (`naming.input_name`), and a list carries a
name for the whole of it ("in_capex_spend"). Column A holds the dotted path that leads back into the case.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby
from math import ceil, inf
from typing import TYPE_CHECKING

from appraise.case.book_layout import (
    ACTS,
    AS_RUN,
    CHANGED,
    HEADING_ROW,
    HEADINGS,
    NOTE,
    PATH,
    UNIT,
    VALUE,
    WORDS,
)
from appraise.case.book_layout import INPUTS as TITLE
from appraise.case.kinds import CalendarDay, Kind, OneOf, TrueOrFalse, Whole, Within
from appraise.case.load import Case
from appraise.workbook.cells import Page, Sheet, area, quoted, ref
from appraise.workbook.input_rows import InputRow, input_rows
from appraise.workbook.input_sections import SECTIONS
from appraise.workbook.input_units import InputValue
from appraise.workbook.naming import input_name

if TYPE_CHECKING:
    from appraise.study import Study

WIDTHS = (40.0, 38.0, 25.0, 21.0, 9.0, 9.5, 10.0, 44.0)
CHARACTERS, NOTE_CHARACTERS = 1.2, 1.3  # of a text, per character of the width

LARGEST = 1e15  # numbers without a limit of their own, as far as a cell keeps all digits
LEAST_ABOVE = 1e-9  # stands in a rule for numbers that must lie above 0, where the rule knows only "at least"
LINE_POINTS, LEAST_POINTS = 12.5, 12.75
HEADING_POINTS, GAP_POINTS = 17.0, 8.0  # of a group's heading, and of the row before it
IN_STEP = "Heat balances, hours and sizes belong to these inputs."
OUTDATED = "Heat balances, hours and sizes are still those of the run: run this workbook again."
PAGE_POINTS = 670.0  # height of what surely fits on a printed page, at the scale that its width asks for
LEAST_ROWS = 5  # of a group that begins at the foot of a page, its heading included
SAME = "1E-12"  # numbers that differ by less, relative to the larger, are the same


def inputs_sheet(study: Study) -> Sheet:
    """Every input of the case, with defaults."""
    case = study.case
    page = Page(TITLE, "input")
    page.width(WIDTHS)
    page.head("Inputs", "Change values here and nowhere else; each stands once.")
    page.headings(HEADING_ROW, HEADINGS, "heading_left")
    page.freeze(HEADING_ROW + 1, VALUE)
    rows = input_rows(case)
    first = _guide(page, case, HEADING_ROW + 1)
    tops, last = _all_rows(page, case, rows, first)
    _summary(page, first, last)
    _marks(page, first, last)
    page.printed(repeat_rows=(HEADING_ROW, HEADING_ROW), breaks_after=_breaks(page, tops, last))
    return page.finish()


# -- what was changed, and how to read the sheet


def _guide(page: Page, case: Case, row: int) -> int:
    """Legend and scenario names; rows 6 to 8 are kept for the summary. Returns the first free row."""
    _heading(page, row, "How to use this sheet")
    page.legend(row + 1, UNIT)
    for offset, (word, meaning) in enumerate(
        (
            ("live", "the sheets of money follow at once"),
            ("run again", "heat balances, hours and sizes follow only after a new run of this workbook"),
            ("text", "no figure depends on it"),
        )
    ):
        page.put(row + 4 + offset, PATH, f"{word}: {meaning}", "note")
    return _scenario_list(page, case, row + 8)


def _scenario_list(page: Page, case: Case, row: int) -> int:
    """Names and titles of the scenarios, once for the whole book."""
    _heading(page, row, "Scenarios: names and titles")
    first = row + 1
    for at, (name, scenario) in enumerate(case.scenarios.items(), first):
        page.put(at, WORDS, f"scenario {at - row}: name, title", "label")
        page.put(at, VALUE, name, "text")
        cell = input_name(f"scenarios.{name}.title")
        title = scenario.title or name
        page.formula(at, AS_RUN, f'=IF({cell}="",{ref(at, VALUE)},{cell})', title, _text_style(title))
        _fit(page, at, ((title, AS_RUN),))
    last = row + len(case.scenarios)
    page.name("scenario_names", first, VALUE, last, VALUE)
    page.name("scenario_titles", first, AS_RUN, last, AS_RUN)
    return last + 2


def _summary(page: Page, first: int, last: int) -> None:
    """How many inputs differ from the run, by how they act."""
    acts, changed = (area(first, col, last, col, True) for col in (ACTS, CHANGED))
    for row, name, word, meaning in (
        (HEADING_ROW + 2, "changed_live", "live", "changed inputs that the live sheets follow"),
        (HEADING_ROW + 3, "changed_technical", "run again", "changed inputs that need a new run"),
    ):
        page.put(row, WORDS, meaning, "label")
        counted = f'=COUNTIFS({acts},"{word}",{changed},"changed")'
        page.formula(row, VALUE, counted, 0, "integer bold", name=name)
    verdict = f"=IF(changed_technical>0,{quoted(OUTDATED)},{quoted(IN_STEP)})"
    page.formula(HEADING_ROW + 2, PATH, verdict, IN_STEP, "text_wrap bold")
    page.merge(HEADING_ROW + 2, PATH, HEADING_ROW + 3, PATH)
    for row in (HEADING_ROW + 2, HEADING_ROW + 3):  # three lines in both
        page.height(row, 1.5 * LINE_POINTS + 2)
    page.highlight(ref(HEADING_ROW + 2, PATH), "=changed_technical>0", "caution")
    page.highlight(ref(HEADING_ROW + 3, VALUE), "=changed_technical>0", "caution")


def _marks(page: Page, first: int, last: int) -> None:
    """Changed rows stand out, those that need a new run more than the others."""
    marked = area(first, CHANGED, last, CHANGED)
    changed, acts = (ref(first, col, "column") for col in (CHANGED, ACTS))
    page.highlight(marked, f'=AND({changed}="changed",{acts}="run again")', "caution")
    page.highlight(marked, f'={changed}="changed"', "chosen")


# -- the rows


def _heading(page: Page, row: int, text: str) -> None:
    page.height(row, HEADING_POINTS)
    page.put(row, PATH, text, "section")
    for col in range(WORDS, NOTE + 1):
        page.put(row, col, None, "section")


def _all_rows(page: Page, case: Case, rows: Sequence[InputRow], row: int) -> tuple[list[int], int]:
    """All inputs by group; returns the rows of the groups' headings, and the last row used."""
    tops: list[int] = []
    for section, members in groupby(rows, key=lambda item: item.section):
        tops.append(row)
        _heading(page, row, _title_of(case, section))
        row += 1
        inputs = list(members)
        for index, item in enumerate(inputs):
            _one_row(page, case, item, row)
            if item.list_path and item.list_path not in {one.list_path for one in inputs[index + 1 :]}:
                row = _end_of_list(page, inputs[: index + 1], row)
            row += 1
        page.height(row, GAP_POINTS)
        row += 1
    return tops, row - 2


def _breaks(page: Page, tops: Sequence[int], last: int) -> list[int]:
    """Rows after which a page ends: as few pages as go, and no nearly empty one at the end."""
    found = _breaks_at(page, tops, last, PAGE_POINTS)
    for points in range(int(PAGE_POINTS), int(PAGE_POINTS / 2), -10):
        evener = _breaks_at(page, tops, last, points)
        if len(evener) > len(found):
            break
        found = evener
    return found


def _breaks_at(page: Page, tops: Sequence[int], last: int, points: float) -> list[int]:
    """The same for pages of so many points; no heading stands at a foot with hardly a row below it."""
    breaks, used = [], 0.0
    for row in range(1, last + 1):
        used += page.points(row)
        if used > points:
            head = next((top for top in tops if row - LEAST_ROWS < top <= row), row)
            breaks.append(head - 1)
            used = sum(page.points(r) for r in (HEADING_ROW, *range(head, row + 1)))
    return breaks


def _title_of(case: Case, section: str) -> str:
    if section in SECTIONS:
        return SECTIONS[section]
    table, _, key = section.rpartition(".")
    if table == "options":
        return f"Option: {next(one.name for one in case.options if one.key == key)}"
    if table == "scenarios":
        return f"Scenario: {case.scenarios[key].title or key}"
    return f"Capital item: {next(one.name for one in case.capex.items if one.key == key)}"


def _one_row(page: Page, case: Case, item: InputRow, row: int) -> None:
    """One input, in a row as tall as its texts need."""
    style = value_style(item)
    page.put(row, PATH, item.path, "note")
    page.put(row, WORDS, item.words, "label" if _lines(item.words, WORDS) == 1 else "label_wrap")
    page.put(row, VALUE, item.value, f"{style} input", name=input_name(item.path), note=_typing_hint(item))
    page.put(row, AS_RUN, item.value, f"{style} as run")
    page.formula(row, CHANGED, _changed(row), "", "text_centre")
    page.put(row, UNIT, item.unit, "unit")
    page.put(row, ACTS, item.acts, "unit")
    page.put(row, NOTE, item.note or None, "note" if _lines(item.note, NOTE) == 1 else "note_wrap")
    shown = item.value if isinstance(item.value, str) else ""
    _limit(page, case, item, row)
    _fit(page, row, ((item.words, WORDS), (shown, VALUE), (shown, AS_RUN), (item.note, NOTE)))


def _changed(row: int) -> str:
    """Compare value and as run: numbers by relative difference, all else exactly, an error as a change."""
    value, run = ref(row, VALUE), ref(row, AS_RUN)
    numbers = f"ABS({value}-{run})<={SAME}*MAX(ABS({value}),ABS({run}))"
    others = f"AND(EXACT({value},{run}),ISNUMBER({value})=ISNUMBER({run}))"
    same = f"IF(AND(ISNUMBER({value}),ISNUMBER({run})),{numbers},{others})"
    return f'=IFERROR(IF({same},"","changed"),"changed")'


def _end_of_list(page: Page, rows: Sequence[InputRow], row: int) -> int:
    """Name the list whose last element stands in `row`; below it the sum where that must be 1."""
    path = rows[-1].list_path
    first = row - sum(item.list_path == path for item in rows) + 1
    page.name(input_name(path), first, VALUE, row, VALUE)
    if not (path == "capex.spend" or (path.startswith("options.") and path.endswith(".shares"))):
        return row
    row += 1
    page.height(row, LEAST_POINTS)
    total = f"SUM({input_name(path)})"
    page.put(row, WORDS, "sum, must be 100 %", "label")
    page.formula(row, VALUE, f"={total}", sum(_number(r) for r in rows if r.list_path == path), "percent2")
    page.formula(row, CHANGED, f'=IF(ABS({total}-1)<1E-9,"","not 1")', "", "text_centre")
    page.highlight(ref(row, CHANGED), f'={ref(row, CHANGED)}="not 1"', "fail")
    return row


def _number(item: InputRow) -> float:
    return float(item.value) if isinstance(item.value, int | float) else 0.0


def _fit(page: Page, row: int, texts: Sequence[tuple[str, int]]) -> None:
    """Make a row as tall as the longest of its texts needs, each with its column."""
    lines = max(_lines(text, col) for text, col in texts)
    page.height(row, LEAST_POINTS if lines == 1 else lines * LINE_POINTS + 2)


def _lines(text: str, col: int) -> int:
    """Lines that a text takes in its column; widths count characters of 11 points, notes are smaller."""
    per_line = WIDTHS[col - 1] * (NOTE_CHARACTERS if col == NOTE else CHARACTERS)
    return max(1, ceil(len(text) / per_line))


def _text_style(text: str) -> str:
    return "text" if _lines(text, AS_RUN) == 1 else "text_wrap"


def value_style(item: InputRow) -> str:
    """Kind of look of a value: long texts wrap, fractions are percentages, money and years whole."""
    value: InputValue = item.value
    if isinstance(value, bool):
        return "general"  # typed into a cell of text, TRUE would be a text
    if isinstance(value, str):
        return _text_style(value)
    if isinstance(item.kind, CalendarDay):
        return "text"  # so that what is typed into it stays as typed
    if item.unit == "year":
        return "year"
    if item.unit.startswith("%"):
        return "percent2"
    if value is not None and abs(value) >= 10_000:
        return "integer" if float(value).is_integer() else "number2"
    return "general"


def _typing_hint(item: InputRow) -> str:
    """A comment on texts that a spreadsheet would turn into a date or a number when they are typed again."""
    if isinstance(item.kind, CalendarDay):
        return "A day as year-month-day: 2026-12-01. Empty, it is the day of the run."
    if item.key in ("from", "to"):
        return "A day as text, month-day. Type an apostrophe first: '07-06"
    if item.path.startswith("drivers[") and item.key in ("low", "high"):
        return (
            "A number replaces the value. A text such as -20% multiplies it; type an apostrophe first: '-20%"
        )
    return ""


# -- what may be typed


def _limit(page: Page, case: Case, item: InputRow, row: int) -> None:
    """The rule of a value cell, as the case reader has it."""
    kind = item.kind
    if item.path in ("study.reference_scenario", "draws.scenario"):
        page.validate_list(row, VALUE, "=scenario_names")
    elif item.path == "study.years":
        years = case.study.years
        message = f"A whole number from 1 to {years}, the years of this run; more need a new run."
        page.validate_number(row, VALUE, 1, years, whole=True, message=message)
    elif isinstance(kind, OneOf):
        page.validate_list(row, VALUE, kind.words)
    elif isinstance(kind, TrueOrFalse):
        page.validate_list(row, VALUE, ("TRUE", "FALSE"))
    elif isinstance(kind, Within | Whole):
        low, high = limits(kind)
        message = f"Allowed: {kind.allowed}."
        page.validate_number(row, VALUE, low, high, whole=isinstance(kind, Whole), message=message)


def limits(kind: Kind) -> tuple[float, float]:
    """Least and greatest number that a rule lets through."""
    if isinstance(kind, Whole):
        return kind.low, LARGEST if kind.high is None else kind.high
    assert isinstance(kind, Within)
    low = -inf if kind.low is None else kind.low + (LEAST_ABOVE if kind.above else 0.0)
    high = inf if kind.high is None else kind.high - (LEAST_ABOVE if kind.below else 0.0)
    return max(low, -LARGEST), min(high, LARGEST)
