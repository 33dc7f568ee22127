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
CHECK, RESULT, UNIT, VALUE, LIMIT, OVER, _, SAYS = range(1, 9)
WIDTHS = (54.0, 10.0, 7.0, 11.0, 11.0, 11.0, 2.0, 98.0)
_HEADS = ("Check", "Result", "unit", "Value", "Limit", "over the limit by", "", "What it says")
FIRST_ROW = 9
# Of what is checked, by how its name begins.
UNITS = {
    "draws": "%",
    "moisture": "%",
    "drain into": "K",
    "existing exhaust": "m³/s",
    "existing condenser": "MW",
    "live steam at": "kg/s",
    "heat at": "MW",
    "hours": "h",
    "comparison with meters": "%",
    "live steam of the steady test": "%",
    "closure": "–",
    "lines sum": "–",
    "net present value": "–",
    "value left": "–",
}
# What a check says, and how a reader of this sheet, with its unit beside it, hears it better.
_PLAINER = (
    ("existing exhaust", "greatest flow or duty, m³/s,", "greatest volume flow through the exhaust,"),
    ("existing condenser", "greatest flow or duty, MW,", "greatest duty of the condenser,"),
    ("drain into", "provide for it", "size nozzle and vent for flash steam"),
    ("drain into", "colder shell, K:", "colder shell:"),
    ("live steam at", "kg/s; ", ""),
    ("heat at", "MW, ", ""),
)


def checks_sheet(study: Study) -> Sheet:
    """Every check of the study, what needs a look first."""
    page = Page(TITLE, "as run")
    page.width(WIDTHS)
    page.head(
        TITLE,
        "LOOK is no error of the study: it is news about the plant or the data that someone must judge.",
    )
    ordered = sorted(study.checks, key=lambda check: check.passed)
    results = area(FIRST_ROW, RESULT, FIRST_ROW + len(ordered) - 1, RESULT, absolute=True)
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
    page.height(FIRST_ROW - 1, 30)
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
    unit, message = unit_of(check), _sentence(plainer(check))
    page.put(row, CHECK, title, "label_wrap")
    page.put(row, RESULT, OK if check.passed else LOOK, "text_centre")
    page.put(row, UNIT, unit, "unit")
    for col, value in ((VALUE, check.value), (LIMIT, check.limit)):
        if value is None:
            page.put(row, col, "–", "text_right as run")
        else:
            kind = kind_of(value, unit)
            page.put(row, col, residual(value) if kind == "tiny" else value, f"{kind} as run")
    page.put(row, OVER, over(check, unit), "text_right as run")
    page.put(row, SAYS, message, "text_wrap")
    lines = max(_lines(title, WIDTHS[CHECK - 1]), _lines(message, WIDTHS[SAYS - 1]))
    page.height(row, lines * LINE_POINTS + 3.0)


def unit_of(check: Check) -> str:
    """Unit of value and limit, "" where there is none or it is not known."""
    if check.value is None:
        return ""
    found = [name for name in UNITS if check.name.startswith(name)]
    return UNITS[max(found, key=len)] if found else ""


def plainer(check: Check) -> str:
    """What a check says, in the words of this sheet."""
    message = check.message
    for name, said, better in _PLAINER:
        if check.name.startswith(name):
            message = message.replace(said, better)
    return message


def over(check: Check, unit: str) -> str:
    """By how much a limit is exceeded: a share of it, of a limit of 0 the amount; "" where none is."""
    value, limit = check.value, check.limit
    if check.passed or value is None or limit is None or value <= limit:
        return ""
    if limit == 0.0:
        return f"{value:,.3g} {unit}".rstrip()
    share = 100.0 * (value / limit - 1.0)
    return f"{share:,.0f} %" if share >= 10.0 else f"{share:.2g} %"


def kind_of(value: float, unit: str = "") -> str:
    """Kind of number that shows a value of any size readably."""
    size = abs(value)
    if unit == "%":
        return "percent1"
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
