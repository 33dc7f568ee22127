"""The values of a workbook's sheets as they are stored: numbers to the last bit, texts, truth values, dates.

Only what was typed is read, and of a formula the value that was saved with it. Office Open XML,
ECMA-376 Part 1, clauses 18.3 (sheets), 18.4 (shared texts) and 18.8 (number formats).
"""

from __future__ import annotations

import math
import posixpath
import re
from dataclasses import dataclass
from datetime import date, datetime, timedelta

from appraise.case.archive import Archive, Danger, Handler
from appraise.case.sheet_parts import Formats, Link, Links, Outline, Shown, Texts, unescaped
from appraise.case.words import listed, shown

LARGEST_SHEET = 20_000_000  # bytes unpacked
LARGEST_TEXTS = 10_000_000
LARGEST_OTHER = 5_000_000
MOST_CELLS = 200_000  # of one sheet: a year with twenty columns has 176,000

_MAIN = "xl/workbook.xml"
_EPOCH, _EPOCH_1904 = datetime(1899, 12, 30), datetime(1904, 1, 1)
_ADDRESS = re.compile(r"([A-Z]{1,3})([1-9][0-9]{0,6})")
_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?", re.ASCII)


@dataclass(frozen=True, slots=True)
class Odd:
    """What stands in a cell and is no value: an error, a formula that was never computed, nothing."""

    words: str

    def __str__(self) -> str:
        return self.words


EMPTY = Odd("an empty cell")

CellValue = str | bool | int | float | date | Odd | None


def as_date(value: float, epoch: datetime = _EPOCH) -> date | None:
    """The day, or the second of a day, that a number stands for; None for what the calendar does not have."""
    try:
        moment = epoch + timedelta(seconds=round(value * 86_400))
    except (OverflowError, ValueError):
        return None
    return moment.date() if float(value).is_integer() else moment


@dataclass(frozen=True, slots=True, eq=False)
class Cells:
    """The cells of one sheet that hold something."""

    title: str
    values: dict[tuple[int, int], CellValue]
    percent: frozenset[tuple[int, int]]  # shown as a percentage
    last_row: int
    epoch: datetime

    def at(self, row: int, col: int) -> CellValue:
        """The value of a cell; None where it is empty."""
        return self.values.get((row, col))

    def words(self, row: int, col: int) -> str:
        """The text of a cell; "" where it holds anything else."""
        value = self.at(row, col)
        return value if isinstance(value, str) else ""


class Book:
    """The sheets of a workbook. Raises FileProblem where it is damaged or dangerous."""

    def __init__(self, archive: Archive) -> None:
        self._archive = archive
        main = next((one.target for one in self._linked("") if one.kind == "officeDocument"), _MAIN)
        outline = Outline()
        archive.parse(main, LARGEST_OTHER, outline)
        self._epoch = _EPOCH_1904 if outline.from_1904 else _EPOCH
        linked = self._linked(main)
        by_id = {one.key: one.target for one in linked}
        self._sheets = {title: by_id.get(key, "") for title, key in outline.sheets.items()}
        by_kind = {one.kind: one.target for one in linked}
        formats, texts = Formats(), Texts()
        if "styles" in by_kind:
            archive.parse(by_kind["styles"], LARGEST_OTHER, formats)
        if "sharedStrings" in by_kind:
            archive.parse(by_kind["sharedStrings"], LARGEST_TEXTS, texts)
        self._shown, self._texts = formats.shown, texts.found

    def cells(self, title: str, last_column: int) -> Cells:
        """The cells of a sheet up to a column."""
        if title not in self._sheets:
            there = listed(shown(name) for name in list(self._sheets)[:20])
            raise self._archive.refusal(f'has no sheet "{title}", only {there}')
        reader = _Reader(self._texts, self._shown, self._epoch, last_column)
        self._archive.parse(self._sheets[title], LARGEST_SHEET, reader)
        return Cells(title, reader.values, frozenset(reader.percent), reader.last_row, self._epoch)

    def _linked(self, part: str) -> list[Link]:
        """The parts that a part refers to."""
        folder, name = posixpath.split(part)
        links = Links(folder)
        self._archive.parse(posixpath.join(folder, "_rels", f"{name}.rels"), LARGEST_OTHER, links)
        return links.found


class _Reader(Handler):
    """The cells of a sheet, in the order of the part."""

    def __init__(self, texts: list[str], shown_as: list[Shown], epoch: datetime, last_column: int) -> None:
        super().__init__()
        self._texts, self._shown_as, self._epoch, self._last_column = texts, shown_as, epoch, last_column
        self.values: dict[tuple[int, int], CellValue] = {}
        self.percent: set[tuple[int, int]] = set()
        self.last_row = 0
        self._row = self._col = 0
        self._inside = self._wanted = self._formula = False
        self._kind = self._style = ""
        self._aside = 0
        self._pieces: list[str] = []

    def begin(self, name: str, attributes: dict[str, str]) -> None:
        if name == "c":
            self._inside, self._formula, self._wanted = True, False, False
            self._kind, self._style = attributes.get("t", "n"), attributes.get("s", "")
            self._pieces = []
            self._row, self._col = self._place(attributes.get("r"))
        elif name == "row":
            self._row, self._col = self._row_number(attributes.get("r")), 0
        elif self._inside:
            if name == "f":
                self._formula = True
            elif name == "rPh":
                self._aside += 1
            self._wanted = name == "v" or (name == "t" and not self._aside)

    def text(self, text: str) -> None:
        if self._wanted:
            self._pieces.append(text)

    def finish(self, name: str) -> None:
        self._wanted = False
        if name == "c":
            self._inside = False
            if self._col <= self._last_column:
                self._keep()
        elif name == "rPh" and self._inside:
            self._aside -= 1

    def _place(self, address: str | None) -> tuple[int, int]:
        """Row and column; a cell without an address stands beside the one before."""
        if address is None:
            return self._row, self._col + 1
        found = _ADDRESS.fullmatch(address)
        if found is None:
            raise Danger(f"a cell at {shown(address)}")
        return int(found[2]), _column(found[1])

    def _row_number(self, number: str | None) -> int:
        if number is None:
            return self._row + 1
        if not re.fullmatch("[1-9][0-9]{0,6}", number):
            raise Danger(f"a row {shown(number)}")
        return int(number)

    def _keep(self) -> None:
        value = self._value("".join(self._pieces))
        if value is None:
            return
        place = (self._row, self._col)
        self.values[place] = value
        self.last_row = max(self.last_row, self._row)
        if self._as() == "percent":
            self.percent.add(place)
        if len(self.values) > MOST_CELLS:
            raise Danger("more cells than a study can have")

    def _as(self) -> Shown:
        style = int(self._style) if self._style.isdigit() and len(self._style) < 7 else 0
        return self._shown_as[style] if style < len(self._shown_as) else "number"

    def _value(self, text: str) -> CellValue:
        """The value of the cell at hand, from what is stored and the kind that it says it has."""
        if self._kind == "inlineStr" or self._kind == "str":
            return unescaped(text) if text or self._formula else None
        if text == "":
            return Odd("a formula without a saved value") if self._formula else None
        if self._kind == "s":
            index = int(text) if text.isascii() and text.isdigit() and len(text) < 9 else len(self._texts)
            return self._texts[index] if index < len(self._texts) else Odd("a text that the file lacks")
        if self._kind == "b":
            return text.strip() in ("1", "true")
        if self._kind == "e":
            return Odd(f"the error {text}")
        if self._kind == "d":
            try:
                return datetime.fromisoformat(text)
            except ValueError:
                return Odd(f"{shown(text)} as a date")
        return self._number(text)

    def _number(self, text: str) -> CellValue:
        value = float(text) if _NUMBER.fullmatch(text.strip()) else math.nan
        if not math.isfinite(value):
            return Odd(f"{shown(text)} as a number")
        if self._as() == "date":
            return as_date(value, self._epoch) or Odd("a date that the calendar does not have")
        minus_zero = value == 0.0 and math.copysign(1.0, value) < 0.0
        return int(value) if value.is_integer() and abs(value) < 2**53 and not minus_zero else value


def _column(letters: str) -> int:
    number = 0
    for letter in letters:
        number = 26 * number + ord(letter) - 64
    return number


def column_letters(col: int) -> str:
    """Letters of a column: 1 is A."""
    letters = ""
    while col:
        col, rest = divmod(col - 1, 26)
        letters = chr(65 + rest) + letters
    return letters
