"""Sheet of the hours: the series as it was read, for whoever asks what the year was made of.

One year stands here row by row; a longer series is named, with the hash of its file, and not repeated.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator

import numpy as np

from appraise.case.book_layout import HASH_OF_FILE, HASH_OF_ROWS, HOURS_HASH_ROW
from appraise.case.book_layout import HOURS as TITLE
from appraise.case.book_layout import HOURS_FIRST_ROW as FIRST_ROW
from appraise.case.book_layout import HOURS_HEADER_ROW as HEADER_ROW
from appraise.case.hours import Hours
from appraise.numerics import Array
from appraise.study import Study
from appraise.workbook.cells import Page, Sheet, area, column

STATISTICS_ROW = 6  # mean, least, greatest
LAST_COLUMN = 8  # of what is printed
PRINTED_HOURS = 24
PRINTED = " Printed is the first day, as a sample; the sheet has them all."

_COLUMNS = ("heat_MW", "outdoor_C", "supply_C", "return_C", "power_price")
_Statistic = Callable[[Array], float]
_STATISTICS: tuple[tuple[str, str, _Statistic], ...] = (
    ("mean", "AVERAGE", lambda values: float(values.mean())),
    ("least", "MIN", lambda values: float(values.min())),
    ("greatest", "MAX", lambda values: float(values.max())),
)


def hours_sheet(study: Study) -> Sheet:
    """The hours as read; printed is what they are, and their first day as a sample."""
    page = Page(TITLE, "as run")
    columns = list(columns_of(study.hours))
    last_column = max(LAST_COLUMN, 1 + len(columns))
    page.width([17.0] + [13.0] * (last_column - 1))
    money = study.case.study.currency
    page.head(
        "Hours of the year",
        f"Time is the start of the hour, local standard time; prices are in {money}/MWh.",
    )
    hours, loaded = study.hours, study.loaded
    one_year = hours.number_of_years == 1
    years = "one year" if one_year else f"{hours.number_of_years} years; the rows stay in the file"
    page.put(
        3,
        1,
        f"{loaded.hours_path.name}: {hours.time.size:,} hours, {years}, from {_shown(hours.time[0])} to "
        f"{_shown(hours.time[-1])}.{PRINTED if one_year else ''}",
        "note",
    )
    hashed = HASH_OF_ROWS if loaded.hours_path == loaded.path else HASH_OF_FILE
    page.put(HOURS_HASH_ROW, 1, hashed + loaded.hours_sha256, "note")
    page.headings(HEADER_ROW, ["time", *(name for name, _ in columns)])
    for offset, (label, function, statistic) in enumerate(_STATISTICS):
        row = STATISTICS_ROW + offset
        page.put(row, 1, label, "label")
        for col, (_, values) in enumerate(columns, 2):
            value = statistic(values)
            if one_year:
                cells = area(FIRST_ROW, col, FIRST_ROW + values.size - 1, col)
                page.formula(row, col, f"={function}({cells})", expect=value, style="number2")
            else:
                page.put(row, col, value, "number2 as run")
    if one_year:
        _rows(page, hours, columns)
    last_row = FIRST_ROW - 1 + (PRINTED_HOURS if one_year else 0)
    page.printed(area=f"A1:{column(last_column)}{last_row}")
    return page.finish()


def columns_of(hours: Hours) -> Iterator[tuple[str, Array]]:
    """The columns present, by their names in the file."""
    for name in _COLUMNS:
        values = getattr(hours, name)
        if values is not None:
            yield name, values
    yield from hours.other_prices.items()


def _rows(page: Page, hours: Hours, columns: list[tuple[str, Array]]) -> None:
    for row, time in enumerate(hours.time, FIRST_ROW):
        page.put(row, 1, time, "hour as run")
    for col, (_, values) in enumerate(columns, 2):
        for row, value in enumerate(values.tolist(), FIRST_ROW):
            page.put(row, col, value, "number2 as run")
    page.freeze(FIRST_ROW, 2)


def _shown(time: np.datetime64) -> str:
    return str(time).replace("T", " ") + ":00"
