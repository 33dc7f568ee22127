"""Sheet of the checks: what a careful reader would verify, what came of it, and one count over all."""

from __future__ import annotations

from math import ceil

from appraise.case.load import Case
from appraise.checks import Check
from appraise.study import Study
from appraise.workbook.cells import Page, Sheet, area
from appraise.workbook.side_by_side import LINE_POINTS, residual

TITLE = "Checks"
OK, LOOK = "OK", "LOOK"
WIDTHS = (54.0, 10.0, 11.0, 11.0, 2.0, 96.0)
_HEADS = ("Check", "Result", "Value", "Limit", "", "What it says")
FIRST_ROW = 9


def checks_sheet(study: Study) -> Sheet:
    """Every check of the study, what needs a look first."""
    page = Page(TITLE, "as run")
    page.width(WIDTHS)
    page.head(
        TITLE,
        "LOOK is no error of the study: it is news about the plant or the data that someone must judge.",
    )
    ordered = sorted(study.checks, key=lambda check: check.passed)
    results = area(FIRST_ROW, 2, FIRST_ROW + len(ordered) - 1, 2, absolute=True)
    good = sum(check.passed for check in ordered)
    page.put(4, 1, "Checks in order", "label")
    page.formula(4, 2, f'=COUNTIF({results},"{OK}")', expect=good, style="integer bold", name="checks_passed")
    page.put(5, 1, "Checks in all", "label")
    page.formula(5, 2, f"=ROWS({results})", expect=len(ordered), style="integer bold", name="checks_total")
    page.put(6, 1, "Overall", "label")
    page.formula(
        6,
        2,
        f'=IF(checks_passed=checks_total,"{OK}","{LOOK}")',
        expect=OK if good == len(ordered) else LOOK,
        style="text_centre bold",
        name="checks_overall",
    )
    page.headings(FIRST_ROW - 1, _HEADS)
    for row, check in enumerate(ordered, FIRST_ROW):
        _check_row(page, row, check, title_of(study.case, check))
    for cells in (results.replace("$", ""), "B6"):
        first = cells.split(":")[0]
        page.highlight(cells, f'={first}="{OK}"', "ok")
        page.highlight(cells, f'={first}="{LOOK}"', "caution")
    page.freeze(FIRST_ROW, 1)
    page.printed(repeat_rows=(FIRST_ROW - 1, FIRST_ROW - 1))
    return page.finish()


def title_of(case: Case, check: Check) -> str:
    """What is checked, with option and capital item by their names."""
    what, names = check.name, []
    if check.item is not None:
        what = what.removesuffix(f", {check.item}")
        names.append(next(item.name for item in case.capex.items if item.key == check.item))
    if check.option is not None:
        what = what.removesuffix(f", {check.option}")
        names.insert(0, next(option.name for option in case.options if option.key == check.option))
    return ", ".join([_sentence(what), *(f"“{name}”" for name in names)])


def _check_row(page: Page, row: int, check: Check, title: str) -> None:
    one_line = _lines(title, WIDTHS[0]) == _lines(check.message, WIDTHS[5]) == 1
    page.put(row, 1, title, "label" if one_line else "label_wrap")
    page.put(row, 2, OK if check.passed else LOOK, "text_centre")
    for col, value in ((3, check.value), (4, check.limit)):
        if value is None:
            page.put(row, col, "–", "text_right as run")
        else:
            kind = kind_of(value)
            page.put(row, col, residual(value) if kind == "tiny" else value, f"{kind} as run")
    page.put(row, 6, _sentence(check.message), "text" if one_line else "text_wrap")
    lines = max(_lines(title, WIDTHS[0]), _lines(check.message, WIDTHS[5]))
    page.height(row, lines * LINE_POINTS + 3.0)


def kind_of(value: float) -> str:
    """Kind of number that shows a value of any size readably."""
    size = abs(value)
    if value == int(value):
        return "integer"
    if size < 1e-3:
        return "tiny"
    return "number3" if size < 10 else "number2"


def _lines(text: str, width: float) -> int:
    return max(1, ceil(len(text) / (1.25 * width)))


def _sentence(text: str) -> str:
    """The text with a capital, unless it begins with a unit."""
    first = text.split(" ", 1)[0].rstrip(",;:")
    return text[:1].upper() + text[1:] if first.isalpha() else text
