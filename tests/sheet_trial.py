"""Sheets on trial: written to a book, inputs typed into it, recalculated by LibreOffice, and read by name."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import openpyxl
from libreoffice import Recalculated, recalculate

from appraise.capex import OptionCapital
from appraise.case.load import Case
from appraise.sizing import OptionSize
from appraise.workbook.cells import Sheet
from appraise.workbook.faults import defined_names
from appraise.workbook.write import book_bytes


@dataclass(frozen=True)
class Unsized:
    """Physics without sizes: the sheet of capital then says nothing of them."""

    sizes: tuple[OptionSize, ...] = ()


@dataclass(frozen=True)
class Money:
    """The part of a study that the sheets of inputs and capital show."""

    case: Case
    capital: tuple[OptionCapital, ...]
    physics: Unsized = Unsized()
    estimates: tuple[object, ...] = ()


def address_of(sheets: Sequence[Sheet], name: str) -> tuple[str, str]:
    """Sheet and cell that a name stands for."""
    target = dict(defined_names(sheets))[name]
    title, _, cell = target.rpartition("!")
    return title.strip("'"), cell.replace("$", "")


def recalculated(
    sheets: Sequence[Sheet], folder: Path, typed: Mapping[str, object] | None = None
) -> Recalculated:
    """All values after `typed` (by name of the cell) was entered and all formulas computed again."""
    folder.mkdir(parents=True, exist_ok=True)
    path = folder / "book.xlsx"
    path.write_bytes(book_bytes(sheets, title="t", author="a", subject="s", footer="f"))
    if typed:
        book = openpyxl.load_workbook(path)
        for name, value in typed.items():
            title, cell = address_of(sheets, name)
            book[title][cell].value = value
        book.save(path)
    return recalculate(path, folder)


def value_of(sheets: Sequence[Sheet], found: Recalculated, name: str) -> object:
    """The value of a named cell."""
    title, cell = address_of(sheets, name)
    return found[title][cell]
