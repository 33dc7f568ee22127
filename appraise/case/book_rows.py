"""Rows of the sheet of inputs, and the mapping of a case that they make."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from types import NoneType
from typing import Any, get_args

from appraise.case import book_layout as layout
from appraise.case.fields import keys_of
from appraise.case.kinds import Place, is_number
from appraise.case.model import Case
from appraise.case.paths import NoSuchPath, target_of
from appraise.case.sheets import EMPTY, Cells, CellValue, Odd, column_letters
from appraise.case.words import shown
from appraise.errors import Problem

_LONGEST_PATH, _DEEPEST_PATH = 200, 8
_LOOKS_LIKE_PATH = re.compile(rf"({'|'.join(keys_of(Case))})[.\[]\S+")
_STEP = re.compile(r"([^.\[\]]+)|\[(\d{1,3})\]")
# The first value of a list, curve, price path or table of lists has the note of the whole.
_FIRST_OF_MANY = re.compile(r"(.+)\.(start|(year|load|outdoor_C)\[0\])")


# Some programs save a truth value as a number or, where it was typed, as a text.
_TRUTH = {"TRUE": True, "FALSE": False, "1": True, "0": False}


def cell(row: int, col: int = layout.VALUE) -> str:
    """Address of a cell of the sheet, by default that of a value."""
    return f"{layout.INPUTS}!{column_letters(col)}{row}"


@dataclass(frozen=True, slots=True)
class Input:
    """One row of the sheet of inputs."""

    row: int
    path: str
    place: Place
    value: CellValue
    as_run: CellValue
    note: str

    @property
    def where(self) -> str:
        """Cell and path."""
        return f"{cell(self.row)} ({self.path})"


def inputs_of(cells: Cells) -> tuple[list[Input], list[Problem]]:
    """The rows that hold a value of the case, and those that are out of order."""
    found: dict[str, Input] = {}
    problems = []
    for row in range(layout.HEADING_ROW + 1, cells.last_row + 1):
        path, value = cells.words(row, layout.PATH), cells.at(row, layout.VALUE)
        where = cell(row, layout.PATH)
        if cells.at(row, layout.ACTS) not in layout.ACTIONS:
            if _LOOKS_LIKE_PATH.fullmatch(path):
                given = f"{shown(path)} is a row that no run wrote"
                allowed = "changed values only; new keys belong into a case file"
                problems.append(Problem(where, f"{given}; allowed: {allowed}"))
            continue
        place = _place(path)
        if place is None:
            problems.append(Problem(where, f"{shown(path)} given; allowed: the path that the run wrote here"))
        elif path in found:
            message = f"{shown(path)} stands in row {found[path].row} already; allowed: once"
            problems.append(Problem(where, message))
        else:
            note = cells.words(row, layout.NOTE)
            as_run = cells.at(row, layout.AS_RUN)
            value = _typed(place, value, as_run, (row, layout.VALUE) in cells.percent)
            found[path] = Input(row, path, place, value, as_run, note)
    return list(found.values()), problems


def _place(path: str) -> Place | None:
    """The keys and positions of a path; None where it is none."""
    if not _LOOKS_LIKE_PATH.fullmatch(path) or len(path) > _LONGEST_PATH:
        return None
    if path.startswith("capex.exchange."):  # its keys may be any text
        return "capex", "exchange", path.removeprefix("capex.exchange.")
    steps = [step for part in path.split(".") for step in _STEP.findall(part)]
    place = tuple(int(number) if number else name for name, number in steps)
    return place if len(place) <= _DEEPEST_PATH and _as_path(place) == path else None


def _as_path(place: Place) -> str:
    return "".join(f"[{step}]" if isinstance(step, int) else f".{step}" for step in place).lstrip(".")


def _typed(place: Place, value: CellValue, as_run: CellValue, percent: bool) -> CellValue:
    """What a cell says, given what belongs there."""
    declared = _declared(place)
    if value is None or value == "":
        return _emptied(declared)
    if declared == (bool,) and str(value).strip().upper() in _TRUTH:
        return _TRUTH[str(value).strip().upper()]
    if percent and is_number(value) and isinstance(as_run, str) and as_run.endswith("%"):
        return Odd(f"the number {value:g}, shown as a percentage,")
    return value


def _emptied(declared: tuple[Any, ...]) -> CellValue:
    """An empty cell: leaves out what may be left out, is an empty text where that may be, else a fault."""
    if NoneType in declared:
        return None
    return "" if "" in declared else EMPTY


def _declared(place: Place) -> tuple[Any, ...]:
    """What may stand at a place: the types of its key, and "" where that is its default."""
    if any(isinstance(step, int) for step in place):
        return ()
    skeleton: dict[str, Any] = {}
    match place:
        case ("options", str(key), *_):
            skeleton = {"options": [{"key": key}]}
        case ("capex", "items", str(key), *_):
            skeleton = {"capex": {"items": [{"key": key}]}}
        case ("scenarios" | "capex" as table, str(name), *rest) if rest:
            skeleton = {table: {name: {str(rest[0]): 1.0} if name == "exchange" else {}}}
    try:
        target = target_of(skeleton, ".".join(map(str, place)))
    except NoSuchPath:
        return ()
    types = get_args(target.annotation) or (target.annotation,)
    return (*types, "") if target.default == "" else types


def data_of(inputs: Sequence[Input]) -> tuple[dict[str, Any], list[Problem]]:
    """The mapping that the rows make, and where they contradict each other."""
    tree: dict[Any, Any] = {}
    problems = []
    for one in inputs:
        node: Any = tree
        for step in one.place[:-1]:
            node = node.setdefault(step, {}) if isinstance(node, dict) else None
        if not isinstance(node, dict) or isinstance(node.get(one.place[-1]), dict):
            problems.append(
                Problem(one.where, "given beside another row that excludes it; allowed: one of them")
            )
        elif one.value is not None:
            node[one.place[-1]] = one.value
        else:
            node.pop(one.place[-1], None)
    data = _finished(tree, (), problems)
    notes: dict[str, str] = {}
    for one in inputs:
        if one.note.strip() and not one.note.startswith(layout.BLANK_NOTE):
            path = _note_path(one, inputs)
            notes[path] = f"{notes[path]}; {one.note}" if path in notes else one.note
    return data | ({"notes": notes} if notes else {}), problems


def _finished(node: Any, way: Place, problems: list[Problem]) -> Any:
    """Numbered entries become lists, options and capital items lists of tables with their keys."""
    if not isinstance(node, dict):
        return node
    inner = {step: _finished(one, (*way, step), problems) for step, one in node.items()}
    if way in (("options",), ("capex", "items")):
        return [{"key": key} | table for key, table in inner.items() if isinstance(table, dict)]
    if not any(isinstance(step, int) for step in inner):
        return inner
    if set(inner) != set(range(len(inner))):
        missing = next(number for number in range(len(inner)) if number not in inner)
        path = _as_path((*way, missing))
        problems.append(
            Problem(f"{layout.INPUTS} ({path})", "its row is missing; allowed: every element of the list")
        )
    return [one for step, one in sorted(inner.items(), key=lambda item: str(item[0]).zfill(9))]


def _note_path(one: Input, inputs: Sequence[Input]) -> str:
    """What a note belongs to: lists, curves, price paths and exchange rates have one for the whole."""
    whole = _FIRST_OF_MANY.fullmatch(one.path)
    if whole is not None:
        return whole[1]
    if one.place[:2] == ("capex", "exchange"):
        first = next(other for other in inputs if other.place[:2] == ("capex", "exchange"))
        return "capex.exchange" if one is first else one.path
    return one.path.partition("[")[0]
