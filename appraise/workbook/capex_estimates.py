"""Published estimates beside the chosen ones, for the items that name what they want to be compared with."""

from __future__ import annotations

from appraise.study import Study
from appraise.workbook.cells import LABEL, TOTAL, UNIT, YEAR_ZERO, Page

TITLE = "Published estimates beside the chosen one (as run; they enter no total)"
LAST = YEAR_ZERO + 6


def put_estimates(page: Page, row: int, study: Study) -> int:
    """The table, one row for each item, option and author; returns the first free row below it."""
    names = {option.key: option.name for option in study.case.options}
    items = {item.key: item.name for item in study.case.capex.items}
    unit = study.case.study.currency
    page.headings(row, ("item, option", "unit", "chosen", "published", "ratio"), "heading_left")
    page.put(row, YEAR_ZERO + 2, "by (seen: its source was read; from memory: recalled)", "heading_left")
    page.merge(row, YEAR_ZERO + 2, row, LAST)
    for one in study.estimates:
        row += 1
        page.put(row, LABEL, f"{items[one.item]}, {names[one.option]}", "label_wrap")
        page.put(row, UNIT, unit, "unit")
        page.put(row, TOTAL, one.chosen, "money as run")
        if one.amount is None or one.ratio is None:
            page.put(row, YEAR_ZERO, "–", "text_right as run")
            page.put(row, YEAR_ZERO + 1, "–", "text_right as run")
        else:
            page.put(row, YEAR_ZERO, one.amount, "money as run")
            page.put(row, YEAR_ZERO + 1, one.ratio, "number2 as run")
        said = "; ".join(part for part in (one.name, one.reason or one.source, *one.doubts) if part)
        page.paragraph(row, YEAR_ZERO + 2, LAST, said, "note_wrap_indent", least_lines=2)
    return row + 2
