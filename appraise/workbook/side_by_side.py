"""Tables of a run's values with the options side by side, for sheets that are not live.

A value that does not exist is shown as a dash, never as 0.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import ceil

from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page

LINE_POINTS = 13.5
MISSING = "–"


@dataclass(frozen=True, slots=True)
class Line:
    """One row of a table: a value for each column. `kind` is a kind of number of `looks`.

    A line without values is a heading over the lines below it.
    """

    label: str
    unit: str
    kind: str
    values: Sequence[float | int | str | None]


def put_section(page: Page, row: int, text: str, last_col: int) -> None:
    """Title of a section, ruled over the whole width."""
    page.put(row, LABEL, text, "section")
    for col in range(LABEL + 1, last_col + 1):
        page.put(row, col, None, "section")


def residual(value: float) -> float:
    """A rounding residual, to the two digits that anyone would read."""
    return float(f"{value:.1e}")


def line_of(
    objects: Sequence[object], label: str, unit: str, kind: str, name: str, scale: float = 1.0
) -> Line:
    """One attribute of every object, `scale` times what it is."""
    found = [getattr(one, name) for one in objects]
    scaled = found if scale == 1.0 else [None if value is None else value * scale for value in found]
    return Line(label, unit, kind, scaled)


def group(label: str) -> Line:
    """A heading over the lines below it."""
    return Line(label, "", "text", ())


def put_value(page: Page, row: int, col: int, value: float | int | str | None, kind: str) -> None:
    """One value of the run; a dash where there is none, text as it is."""
    if value is None or isinstance(value, str):
        page.put(row, col, MISSING if value is None else value, "text_right as run")
    else:
        page.put(row, col, value, f"{kind} as run")


def put_line(page: Page, row: int, line: Line, first: int = TOTAL, label_style: str = "label") -> None:
    """Label, unit and the values from column `first` on."""
    page.put(row, LABEL, line.label, label_style if line.values else "text bold")
    page.put(row, UNIT, line.unit, "unit")
    for offset, value in enumerate(line.values):
        put_value(page, row, first + offset, value, line.kind)


def put_headings(
    page: Page, row: int, label: str, titles: Sequence[str], width: float, unit: str = ""
) -> None:
    """Heads of a table, tall enough for the longest title in columns of `width` characters."""
    page.put(row, LABEL, label, "heading_left")
    page.put(row, UNIT, unit, "heading_left")
    page.headings(row, titles, first=TOTAL)
    page.height(row, heading_height((*titles,), width))


def heading_height(titles: Sequence[str], width: float) -> float:
    """Height in points of a head whose titles wrap at words in columns of `width` characters."""
    return max(_wrapped_lines(title, width) for title in titles) * LINE_POINTS + 4.0


def _wrapped_lines(text: str, width: float) -> int:
    """Lines that bold text takes, broken at words; a word too long for the column is broken inside."""
    room = max(1.0, width * 1.1)
    lines, used = 1, 0.0
    for word in text.split():
        length = float(len(word))
        if used and used + 1 + length > room:
            lines, used = lines + 1, 0.0
        if length > room:
            lines += ceil(length / room) - 1
        used += length + (1 if used else 0)
    return lines


def put_table(
    page: Page, row: int, label: str, titles: Sequence[str], lines: Sequence[Line], width: float, most: int
) -> int:
    """A table, folded into bands of at most `most` columns; returns the first free row below it."""
    label_style = "label" if all(line.values for line in lines) else "label_indent"
    for start in range(0, len(titles), most):
        chosen = slice(start, start + most)
        put_headings(page, row, label, titles[chosen], width)
        for offset, line in enumerate(lines, 1):
            part = replace(line, values=line.values[chosen])
            put_line(page, row + offset, part, label_style=label_style)
        row += len(lines) + 2
    return row
