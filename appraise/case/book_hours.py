"""The series of a year as a workbook holds it, put back into the text of a CSV file."""

from __future__ import annotations

import csv
import io
from datetime import date, datetime

from appraise.case.book_layout import HOURS_FIRST_ROW, HOURS_HEADER_ROW
from appraise.case.kinds import is_number
from appraise.case.sheets import Cells, CellValue, as_date

MOST_COLUMNS = 20


def hours_csv(cells: Cells) -> bytes | None:
    """The rows of the sheet as a CSV file has them, numbers to the last bit; None where it has none."""
    if cells.last_row < HOURS_FIRST_ROW:
        return None
    width = 0
    while width < MOST_COLUMNS and cells.at(HOURS_HEADER_ROW, width + 1) is not None:
        width += 1
    columns = range(1, width + 1)
    last = max((row for row, col in cells.values if col <= width), default=0)
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow([_written(cells.at(HOURS_HEADER_ROW, col)) for col in columns])
    for row in range(HOURS_FIRST_ROW, last + 1):
        numbers = (_written(cells.at(row, col)) for col in columns[1:])
        writer.writerow([_moment(cells.at(row, 1), cells.epoch), *numbers])
    return text.getvalue().encode()


def sheet_row(row: int) -> int:
    """Row of the sheet for a row of the series as a CSV file."""
    return HOURS_HEADER_ROW if row == 1 else row - 2 + HOURS_FIRST_ROW


def _written(value: CellValue) -> str:
    if value is None:
        return ""
    return repr(value) if is_number(value) else " ".join(str(value).split())


def _moment(value: CellValue, epoch: datetime) -> str:
    """A time as the series writes it; what is none stays as it is."""
    at = as_date(value, epoch) if isinstance(value, int | float) and not isinstance(value, bool) else value
    if isinstance(at, datetime):
        return at.isoformat(timespec="seconds" if at.second else "minutes")
    return f"{at.isoformat()}T00:00" if isinstance(at, date) else _written(value)
