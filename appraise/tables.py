"""Tables of text with aligned columns, units in the head, never wider than a page."""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from textwrap import wrap
from typing import TypeVar

WIDTH = 100
GAP = "  "

Cell = str | float | None


@dataclass(frozen=True, slots=True)
class Column:
    """One column. Without `decimals` it holds text and is aligned left; with them numbers, aligned right."""

    title: str
    unit: str = ""
    decimals: int | None = None

    def shown(self, cell: Cell) -> str:
        """The cell as text: "-" for a value that does not exist; text stays as it is."""
        if cell is None:
            return "-"
        return cell if isinstance(cell, str) else f"{cell:,.{self.decimals or 0}f}"

    def aligned(self, text: str, width: int) -> str:
        """Text padded to the width of the column."""
        return text.ljust(width) if self.decimals is None else text.rjust(width)


def table(columns: Sequence[Column], rows: Sequence[Sequence[Cell]], width: int = WIDTH) -> str:
    """A table as text: titles (a line break in a title makes a second line), units, a rule, the rows.

    The first column gives way, with "…", where the table would be wider than `width` characters.
    """
    body = [[column.shown(cell) for column, cell in zip(columns, row, strict=True)] for row in rows]
    head = _head(columns)
    widths = [max(len(line[index]) for line in head + body) for index in range(len(columns))]
    excess = sum(widths) + len(GAP) * (len(widths) - 1) - width
    widths[0] = max(1, widths[0] - max(0, excess))
    lines = [_line(columns, line, widths) for line in [*head, ["-" * w for w in widths], *body]]
    return "\n".join(lines)


Record = TypeVar("Record")


def table_of(columns: Sequence[tuple[Column, Callable[[Record], Cell]]], records: Iterable[Record]) -> str:
    """A table with a row for each record; every column brings how its cell is read off one."""
    rows = [[cell(record) for _, cell in columns] for record in records]
    return table([column for column, _ in columns], rows)


def heading(text: str) -> str:
    """A title underlined, folded to the width of a page."""
    lines = wrap(text, WIDTH) or [""]
    return "\n".join([*lines, "=" * max(map(len, lines))])


def _head(columns: Sequence[Column]) -> list[list[str]]:
    """Title lines, set against the bottom, and a line of units if any column has one."""
    titles = [column.title.split("\n") for column in columns]
    depth = max(map(len, titles))
    padded = [[""] * (depth - len(lines)) + lines for lines in titles]
    units = [[column.unit for column in columns]] if any(column.unit for column in columns) else []
    return [list(line) for line in zip(*padded, strict=True)] + units


def _line(columns: Sequence[Column], cells: Sequence[str], widths: Sequence[int]) -> str:
    fitted = [cell if len(cell) <= w else cell[: w - 1] + "…" for cell, w in zip(cells, widths, strict=True)]
    return GAP.join(map(Column.aligned, columns, fitted, widths)).rstrip()
