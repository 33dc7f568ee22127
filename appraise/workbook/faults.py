"""What can only be seen with the whole book at hand: names, references, titles, merges, charts.

All faults are found before anything is written, and told together.
"""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterable, Iterator, Sequence

from openpyxl.utils import FORMULAE

from appraise.workbook.addresses import cells_in, ref, sheet_prefix
from appraise.workbook.cells import HighlightRule, ListRule, NumberRule, Sheet
from appraise.workbook.charts import Chart
from appraise.workbook.values import LONGEST_CONSTANT, SheetFault

LONGEST_FORMULA = 8_192
LONGEST_TITLE = 31
VOLATILE = frozenset({"OFFSET", "INDIRECT", "NOW", "TODAY", "RAND", "RANDBETWEEN", "CELL", "INFO"})

_TOKEN = re.compile(
    r"""
      (?P<text>"(?:[^"]|"")*")
    | (?P<sheet>'(?:[^']|'')+'!|[A-Za-z_][A-Za-z0-9_.]*!)
    | (?P<function>[A-Za-z_][A-Za-z0-9_.]*)\(
    | (?P<error>\#(?:N/A|NUM!|DIV/0!|VALUE!|REF!|NAME\?|NULL!))
    | (?P<cell>\$?[A-Za-z]{1,3}\$?[0-9]{1,7}(?![A-Za-z0-9_.]))
    | (?P<columns>\$?[A-Z]{1,3}:\$?[A-Z]{1,3}(?![A-Za-z0-9_.]))
    | (?P<rows>\$?[0-9]+:\$?[0-9]+)
    | (?P<number>(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)
    | (?P<name>[A-Za-z_][A-Za-z0-9_.]*)
    | (?P<open>\()
    | (?P<close>\))
    | (?P<other>[-+*/^&=<>,:%{};\s])
    """,
    re.VERBOSE,
)
_NAME = re.compile(r"[A-Za-z_][A-Za-z0-9_.]{0,254}")
_ADDRESS_ALIKE = re.compile(r"[A-Za-z]{1,3}[0-9]+|[Rr][0-9]*(?:[Cc][0-9]*)?|[Cc][0-9]*|(?i:true|false)")


def check(sheets: Sequence[Sheet]) -> None:
    """Raise SheetFault with every fault found in the book."""
    found = list(faults_of(sheets))
    if found:
        raise SheetFault("\n".join(found))


def faults_of(sheets: Sequence[Sheet]) -> Iterator[str]:
    """Every fault of a book, with its place."""
    titles = {sheet.title for sheet in sheets}
    known = frozenset(name.lower() for name, _ in defined_names(sheets))
    yield from _title_faults(sheets)
    yield from _name_faults(sheets)
    for sheet in sheets:
        yield from _formula_faults(sheet, titles, known)
        yield from _link_faults(sheet, titles)
        yield from _merge_faults(sheet)
        yield from _rule_faults(sheet, titles, known)
        for chart in sheet.charts:
            yield from _chart_faults(sheet, chart, sheets)


def defined_names(sheets: Iterable[Sheet]) -> Iterator[tuple[str, str]]:
    """Every defined name of the book and what it stands for, "'Cash flow'!$D$5"."""
    for sheet in sheets:
        prefix = sheet_prefix(sheet.title)
        for (row, col), cell in sheet.cells.items():
            if cell.name:
                yield cell.name, prefix + ref(row, col, True)
        for name, address in sheet.names.items():
            yield name, prefix + address


def formula_faults(formula: str, titles: set[str], names: frozenset[str]) -> Iterator[str]:
    """What is wrong with one formula.

    titles : titles of the sheets there are
    names : defined names in small letters, which is how they are compared
    """
    if len(formula) > LONGEST_FORMULA:
        yield f"{len(formula)} characters; {LONGEST_FORMULA} are allowed"
    position, depth = 1, 0
    while position < len(formula):
        token = _TOKEN.match(formula, position)
        if token is None:
            yield f"{formula[position]!r} at character {position + 1} has no meaning in a formula"
            return
        depth += {"function": 1, "open": 1, "close": -1}.get(token.lastgroup or "", 0)
        if depth < 0:
            yield "a bracket too many is closed"
            return
        yield from _token_faults(token.lastgroup or "", token[token.lastgroup or 0], titles, names)
        position = token.end()
    if depth:
        yield "a bracket is not closed"


def _token_faults(kind: str, text: str, titles: set[str], names: frozenset[str]) -> Iterator[str]:
    if kind == "text" and len(text[1:-1].replace('""', '"')) > LONGEST_CONSTANT:
        yield f"a text constant is longer than {LONGEST_CONSTANT} characters"
    elif kind == "sheet":
        title = text[1:-2].replace("''", "'") if text.startswith("'") else text[:-1]
        if title not in titles:
            yield f"there is no sheet {title!r}"
    elif kind == "function" and text not in FORMULAE:
        yield f"function {text} is not known to the format"
    elif kind == "function" and text in VOLATILE:
        yield f"function {text} is volatile"
    elif kind == "name" and text.lower() not in names and text not in ("TRUE", "FALSE"):
        yield f"name {text} is not defined"


def _formula_faults(sheet: Sheet, titles: set[str], names: frozenset[str]) -> Iterator[str]:
    for (row, col), cell in sheet.cells.items():
        if not cell.formula:
            continue
        where = f"{sheet_prefix(sheet.title)}{ref(row, col)}"
        if cell.value is None:
            yield f"{where}: formula {cell.formula} without its expected value"
        for fault in formula_faults(cell.formula, titles, names):
            yield f"{where}: {fault}, in {cell.formula}"


def _title_faults(sheets: Sequence[Sheet]) -> Iterator[str]:
    if not sheets:
        yield "a workbook without a sheet"
    for title, number in Counter(sheet.title.lower() for sheet in sheets).items():
        if number > 1:
            yield f"{number} sheets are called {title!r}"
    for sheet in sheets:
        title = sheet.title
        if (
            not title.strip()
            or len(title) > LONGEST_TITLE
            or re.search(r"[\[\]:*?/\\\x00-\x1f]|^'|'$", title)
        ):
            yield f"{title!r} is no title for a sheet: 1 to {LONGEST_TITLE} characters, none of []:*?/\\"


def _name_faults(sheets: Sequence[Sheet]) -> Iterator[str]:
    names = list(defined_names(sheets))
    for name, target in names:
        if not _NAME.fullmatch(name):
            yield f"{target}: {name!r} is no name: letters, digits, _ and . only, a letter or _ first"
        elif _ADDRESS_ALIKE.fullmatch(name):
            yield f"{target}: name {name} is read as an address or a truth value"
    for name, number in Counter(name.lower() for name, _ in names).items():
        if number > 1:
            yield f"name {name} is defined {number} times"


def _link_faults(sheet: Sheet, titles: set[str]) -> Iterator[str]:
    for (row, col), cell in sheet.cells.items():
        if cell.link and cell.link not in titles:
            yield f"{sheet_prefix(sheet.title)}{ref(row, col)}: there is no sheet {cell.link!r} to lead to"


def _merge_faults(sheet: Sheet) -> Iterator[str]:
    taken: set[tuple[int, int]] = set()
    for address in sheet.merges:
        covered = cells_in(address)
        if taken.intersection(covered):
            yield f"{sheet_prefix(sheet.title)}{address}: overlaps another merge"
        taken.update(covered)
        for place in covered[1:]:
            cell = sheet.cells.get(place)
            if cell is not None and (cell.value is not None or cell.formula):
                yield f"{sheet_prefix(sheet.title)}{ref(*place)}: lies under the merge {address}"


def _rule_faults(sheet: Sheet, titles: set[str], names: frozenset[str]) -> Iterator[str]:
    for rule in sheet.rules:
        where = f"{sheet_prefix(sheet.title)}{rule.area}"
        for formula in _formulas_of(rule):
            if not formula.startswith("="):
                yield f"{where}: a rule begins with =, this one is {formula!r}"
            for fault in formula_faults(formula, titles, names):
                yield f"{where}: {fault}, in the rule {formula}"
        if isinstance(rule, ListRule) and not rule.source:
            words = ",".join(rule.choices)
            if (
                not rule.choices
                or len(words) > LONGEST_CONSTANT
                or any('"' in w or "," in w for w in rule.choices)
            ):
                yield f"{where}: fixed words without comma or quote, {LONGEST_CONSTANT} characters in all"
        if isinstance(rule, NumberRule) and rule.low is None and rule.high is None:
            yield f"{where}: a rule for numbers without a limit"


def _formulas_of(rule: ListRule | NumberRule | HighlightRule) -> tuple[str, ...]:
    if isinstance(rule, HighlightRule):
        return (rule.formula,)
    return (rule.source,) if isinstance(rule, ListRule) and rule.source else ()


def _chart_faults(sheet: Sheet, chart: Chart, sheets: Sequence[Sheet]) -> Iterator[str]:
    by_title = {one.title: one for one in sheets}
    where = f"{sheet.title}, chart {chart.title!r}"
    sources = [(one.sheet, one.values) for one in chart.series]
    lengths = {len(cells_in(one.values)) for one in chart.series if not one.x}
    if chart.categories:
        sources.append(chart.categories)
        lengths.add(len(cells_in(chart.categories[1])))
    if len(lengths) > 1:
        yield f"{where}: series and categories differ in length: {sorted(lengths)}"
    for one in chart.series:
        if one.x:
            sources.append((one.sheet, one.x))
            if len(cells_in(one.x)) != len(cells_in(one.values)):
                yield f"{where}: {one.label!r} has {one.x} against {one.values}, of another length"
        if one.label_cell:
            sources.append((one.sheet, one.label_cell))
    if chart.title_cell:
        sources.append(chart.title_cell)
    for title, address in sources:
        source = by_title.get(title)
        if source is None:
            yield f"{where}: there is no sheet {title!r}"
            continue
        places = cells_in(address)
        if len({row for row, _ in places}) > 1 and len({col for _, col in places}) > 1:
            yield f"{where}: {address} is neither one row nor one column"
        if all(source.cells.get(place) is None or source.cells[place].value is None for place in places):
            yield f"{where}: {sheet_prefix(title)}{address} is empty"
    if not re.fullmatch(r"[A-Z]{1,3}[0-9]{1,7}", chart.anchor):
        yield f"{where}: anchor {chart.anchor!r} is no cell"
