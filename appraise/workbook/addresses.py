"""Addresses of cells as formulas write them. Rows and columns count from 1."""

import re
from functools import cache
from typing import Literal

from openpyxl.utils import get_column_letter, range_boundaries

LAST_ROW = 1_048_576
LAST_COLUMN = 16_384

LABEL, UNIT, TOTAL, YEAR_ZERO = 1, 2, 3, 4
"""Columns of every sheet with years: label, unit, total or present value, then t = 0, 1, 2 …"""


@cache
def column(col: int) -> str:
    """Letters of a column: 1 is A."""
    return get_column_letter(col)


def year_column(t: int) -> int:
    """Column of year t (0 is the year of the investment), the same on every sheet."""
    return YEAR_ZERO + t


def ref(row: int, col: int, absolute: bool | Literal["row", "column"] = False) -> str:
    """Address of a cell: "D5"; `absolute` True "$D$5", "row" "D$5", "column" "$D5"."""
    before_col = "$" if absolute is True or absolute == "column" else ""
    before_row = "$" if absolute is True or absolute == "row" else ""
    return f"{before_col}{column(col)}{before_row}{row}"


def area(row: int, col: int, last_row: int, last_col: int, absolute: bool = False) -> str:
    """Address of a rectangle: "D5:H5"."""
    return f"{ref(row, col, absolute)}:{ref(last_row, last_col, absolute)}"


def sheet_prefix(title: str) -> str:
    """A sheet's title as it stands before an address, in quotes where needed: "'Cash flow'!"."""
    plain = re.fullmatch(r"[A-Za-z_]{4,}", title)  # up to three letters could be a column
    return f"{title}!" if plain else "'" + title.replace("'", "''") + "'!"


def ref_to(title: str, row: int, col: int, last_row: int | None = None, last_col: int | None = None) -> str:
    """Absolute address of a cell, or of a rectangle, on another sheet: "'Cash flow'!$D$5"."""
    end = (last_row or row, last_col or col)
    return sheet_prefix(title) + (ref(row, col, True) if end == (row, col) else area(row, col, *end, True))


def corners(address: str) -> tuple[int, int, int, int]:
    """First row, first column, last row, last column of "D5" or "$D$5:$H$5"."""
    first_col, first_row, last_col, last_row = range_boundaries(address)
    if first_col is None or first_row is None or last_col is None or last_row is None:
        raise ValueError(f"{address!r} is no rectangle of cells")
    return first_row, first_col, last_row, last_col


def cells_in(address: str) -> list[tuple[int, int]]:
    """(row, column) of all cells of an area, row by row."""
    row, col, last_row, last_col = corners(address)
    return [(r, c) for r in range(row, last_row + 1) for c in range(col, last_col + 1)]
