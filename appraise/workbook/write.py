"""From finished sheets to the bytes of a workbook: check, build, pack."""

from __future__ import annotations

import io
from collections.abc import Sequence
from math import ceil
from typing import Any

from openpyxl import Workbook
from openpyxl.comments import Comment
from openpyxl.formatting.rule import Rule
from openpyxl.styles import Alignment, Border, Font, NamedStyle, PatternFill, Protection, Side
from openpyxl.styles.differential import DifferentialStyle
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.hyperlink import Hyperlink
from openpyxl.worksheet.pagebreak import Break
from openpyxl.worksheet.properties import PageSetupProperties

from appraise.workbook.addresses import area, column, corners, ref, sheet_prefix
from appraise.workbook.cells import (
    DEFAULT_HEIGHT,
    DEFAULT_WIDTH,
    Cell,
    HighlightRule,
    ListRule,
    NumberRule,
    Sheet,
)
from appraise.workbook.charts import Chart
from appraise.workbook.drawing import native_chart
from appraise.workbook.faults import check, defined_names
from appraise.workbook.looks import ACCENT, FONT, HIGHLIGHTS, RULE, SLATE, STYLES, Look
from appraise.workbook.pack import packed
from appraise.workbook.values import clean_text, header_text, needs_prefix, stored_text

STYLE_PREFIX = "Study "  # keeps the styles' names apart from those every spreadsheet program brings along
TAB_COLOURS = {"live": SLATE, "as run": RULE, "input": ACCENT}
HEADER_SHARE = 110  # of the 255 characters of a header or footer, what one of its texts may take
PIXELS_PER_CHARACTER, PIXELS_PER_POINT, PIXELS_PER_CM = 7.0, 96 / 72, 96 / 2.54
A4 = 9
LONGEST_MESSAGE = 220
MARGIN_INCH = 0.5


def book_bytes(sheets: Sequence[Sheet], *, title: str, author: str, subject: str, footer: str) -> bytes:
    """A workbook with these sheets; the same sheets give the same bytes.

    title, author, subject : document properties; the title also stands in every page's header
    footer : text at the foot of every page, beside the page number
    Raises SheetFault with every fault of the sheets.
    """
    check(sheets)
    book = Workbook()
    book.remove(book.worksheets[0])
    book.properties.title = clean_text(title)
    book.properties.creator = clean_text(author)
    book.properties.subject = clean_text(subject)
    book.calculation.fullCalcOnLoad = True
    _add_styles(book, sheets)
    for name, target in defined_names(sheets):
        book.defined_names[name] = DefinedName(name, attr_text=target)
    by_title = {sheet.title: sheet for sheet in sheets}
    for sheet in sheets:
        page = book.create_sheet(sheet.title)
        _write_cells(page, sheet)
        _set_view(page, sheet, first=sheet is sheets[0])
        _set_print(page, sheet, title, footer)
        _add_rules(page, sheet)
        for chart in sheet.charts:
            page.add_chart(native_chart(chart, by_title))
    saved = io.BytesIO()
    book.save(saved)
    return packed(
        saved.getvalue(),
        [_cached(sheet) for sheet in sheets],
        [[chart.alt for chart in sheet.charts] for sheet in sheets if sheet.charts],
    )


def _cached(sheet: Sheet) -> dict[str, Any]:
    """Address of every formula -> the value it comes to."""
    return {ref(*place): cell.value for place, cell in sheet.cells.items() if cell.formula}


def _write_cells(page: Any, sheet: Sheet) -> None:
    looks: dict[tuple[str, bool], Any] = {}
    for (row, col), cell in sheet.cells.items():
        target = page.cell(row, col)
        prefix = _write_value(target, cell)
        # Looking a style up by name is slow, so each is looked up once and its number copied.
        if (cell.style, prefix) not in looks:
            target.style = STYLE_PREFIX + cell.style
            target.quotePrefix = prefix
            looks[cell.style, prefix] = target._style
        target._style = looks[cell.style, prefix]
        if cell.note:
            target.comment = _comment(cell.note)
        if cell.link:
            location = f"{sheet_prefix(cell.link)}A1"
            target._hyperlink = Hyperlink(ref=target.coordinate, location=location)


def _write_value(target: Any, cell: Cell) -> bool:
    """Write value or formula; returns whether the cell must show that it holds text, not a formula."""
    if cell.formula:
        target.value = cell.formula
        return False
    if isinstance(cell.value, str):
        # Text is told to be text: left to itself, openpyxl takes what begins with "=" for a formula.
        target.value = stored_text(cell.value)
        target.data_type = "s"
        return needs_prefix(cell.value)
    if isinstance(cell.value, float):
        # openpyxl would write sixteen digits, which are too few to tell all numbers apart.
        target.value = repr(cell.value)
        target.data_type = "n"
        return False
    number_format = target.number_format
    target.value = cell.value
    target.number_format = number_format  # openpyxl gives dates one of its own
    return False


def _comment(text: str) -> Comment:
    note = Comment(clean_text(text)[:2000], "")
    note.width = 280
    note.height = 30 + 18 * ceil(len(text) / 40)
    return note


def _add_styles(book: Workbook, sheets: Sequence[Sheet]) -> None:
    for style in sorted({cell.style for sheet in sheets for cell in sheet.cells.values()}):
        book.add_named_style(_named_style(style, STYLES[style]))


def _named_style(style: str, look: Look) -> NamedStyle:
    top, bottom = look.frame or look.top, look.frame or look.bottom
    return NamedStyle(
        name=STYLE_PREFIX + style,
        font=Font(name=FONT, size=look.points, bold=look.bold, italic=look.italic, color=look.colour),
        fill=PatternFill("solid", fgColor=look.fill) if look.fill else PatternFill(),
        border=Border(
            left=_side(look.frame, look),
            right=_side(look.frame, look),
            top=_side(top, look),
            bottom=_side(bottom, look),
        ),
        alignment=Alignment(
            horizontal=look.across,
            vertical=look.upright,
            wrap_text=look.wrap,
            shrink_to_fit=look.shrink,
            indent=look.indent,
        ),
        number_format=look.number_format,
        protection=Protection(locked=not look.unlocked),
    )


def _side(line: Any, look: Look) -> Side:
    return Side(line, look.border_colour) if line else Side()


def _set_view(page: Any, sheet: Sheet, first: bool) -> None:
    page.sheet_view.showGridLines = False
    page.sheet_view.zoomScale = 100
    page.sheet_view.tabSelected = first  # two selected sheets would be edited together
    page.sheet_properties.tabColor = TAB_COLOURS[sheet.marking]
    page.sheet_format.defaultRowHeight = DEFAULT_HEIGHT
    page.freeze_panes = sheet.freeze or None
    for col, width in sheet.widths.items():
        page.column_dimensions[column(col)].width = width
    for row, points in sheet.heights.items():
        page.row_dimensions[row].height = points
    for address in sheet.merges:
        page.merge_cells(address)
    page.protection.sheet = True  # against slips, without a password: whoever wants to may lift it
    page.protection.formatColumns = False  # "False" leaves the reader free to set widths and heights
    page.protection.formatRows = False


def _set_print(page: Any, sheet: Sheet, title: str, footer: str) -> None:
    printing = sheet.printing
    page.page_setup.orientation = "landscape" if printing.landscape else "portrait"
    page.page_setup.paperSize = A4
    page.sheet_properties.pageSetUpPr = PageSetupProperties(fitToPage=True)
    page.page_setup.fitToWidth = 1
    page.page_setup.fitToHeight = printing.pages_tall
    page.print_options.horizontalCentered = True
    page.page_margins.left = page.page_margins.right = MARGIN_INCH
    page.page_margins.top = page.page_margins.bottom = 1.25 * MARGIN_INCH
    page.page_margins.header = page.page_margins.footer = 0.6 * MARGIN_INCH
    page.oddHeader.left.text = header_text(title, HEADER_SHARE)
    page.oddHeader.right.text = header_text(sheet.title, HEADER_SHARE)
    page.oddFooter.left.text = header_text(footer, HEADER_SHARE)
    page.oddFooter.right.text = "page &P of &N"
    page.HeaderFooter.scaleWithDoc = False  # as large on a page that is fitted as on any other
    if printing.repeat_rows:
        page.print_title_rows = "{}:{}".format(*printing.repeat_rows)
    page.print_area = printing.area or _used_area(sheet)
    for row in printing.breaks_after:
        page.row_breaks.append(Break(id=row))


def _used_area(sheet: Sheet) -> str:
    """Everything in use, with the ground that charts cover."""
    ends = list(sheet.cells) + [corners(address)[2:] for address in sheet.merges]
    ends += [_chart_end(sheet, chart) for chart in sheet.charts]
    return area(1, 1, max((row for row, _ in ends), default=1), max((col for _, col in ends), default=1))


def _chart_end(sheet: Sheet, chart: Chart) -> tuple[int, int]:
    """Row and column under the lower right corner of a chart."""
    row, col = corners(chart.anchor)[:2]
    right, down = (size * PIXELS_PER_CM for size in chart.size_cm)
    while (right := right - sheet.widths.get(col, DEFAULT_WIDTH) * PIXELS_PER_CHARACTER) > 0:
        col += 1
    while (down := down - sheet.heights.get(row, DEFAULT_HEIGHT) * PIXELS_PER_POINT) > 0:
        row += 1
    return row, col


def _add_rules(page: Any, sheet: Sheet) -> None:
    for rule in sheet.rules:
        if isinstance(rule, HighlightRule):
            page.conditional_formatting.add(rule.area, _conditional_format(rule))
        else:
            validation = _list_validation(rule) if isinstance(rule, ListRule) else _number_validation(rule)
            validation.add(rule.area)
            page.add_data_validation(validation)


def _conditional_format(rule: HighlightRule) -> Any:
    look = HIGHLIGHTS[rule.look]
    fill = PatternFill("solid", start_color=look.fill, end_color=look.fill) if look.fill else None
    font = Font(bold=look.bold, italic=look.italic, color=look.colour)
    style = DifferentialStyle(font=font, fill=fill)
    return Rule(type="expression", dxf=style, formula=[rule.formula[1:]])


def _list_validation(rule: ListRule) -> DataValidation:
    source = rule.source[1:] if rule.source else '"' + ",".join(map(clean_text, rule.choices)) + '"'
    return DataValidation(
        type="list",
        formula1=source,
        allow_blank=False,
        showErrorMessage=True,
        errorTitle="Not in the list",
        error="Choose one of the list.",
    )


def _number_validation(rule: NumberRule) -> DataValidation:
    noun = "a whole number" if rule.whole else "a number"
    operator: Any
    limits: tuple[float | None, float | None]
    if rule.low is not None and rule.high is not None:
        operator, limits, allowed = "between", (rule.low, rule.high), f"from {rule.low:g} to {rule.high:g}"
    elif rule.high is not None:
        operator, limits, allowed = "lessThanOrEqual", (rule.high, None), f"not above {rule.high:g}"
    else:
        operator, limits, allowed = "greaterThanOrEqual", (rule.low, None), f"not below {rule.low:g}"
    first, second = (None if limit is None else repr(limit) for limit in limits)
    return DataValidation(
        type="whole" if rule.whole else "decimal",
        operator=operator,
        formula1=first,
        formula2=second,
        allow_blank=True,
        showErrorMessage=True,
        errorTitle="Out of range",
        error=clean_text(rule.message or f"Allowed: {noun} {allowed}.")[:LONGEST_MESSAGE],
    )
