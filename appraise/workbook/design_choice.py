"""The Design choice sheet: is the second condenser of the right size? Curves and flat ranges, as run."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from appraise.optimum import Curve, DesignChoice
from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page, Sheet, area, ref
from appraise.workbook.charts import Axis, Series, scatter_chart
from appraise.workbook.design_words import (
    Stated,
    caveat_of,
    cost_words,
    curve_words,
    joint_words,
    value_words,
)
from appraise.workbook.looks import REDUCED_CHART_POINTS

if TYPE_CHECKING:
    from appraise.study import Study

TITLE = "Design choice"
LABEL_WIDTH, UNIT_WIDTH, CELL_WIDTH, COLUMNS = 44.0, 13.0, 10.5, 11
LAST = TOTAL + COLUMNS - 1
CHART_CM, CHART_ROWS = 9.0, 18
KINDS = {
    "terminal_difference_K": "number1",
    "shares": "percent0",
    "stages": "integer",
    "drain_route": "text_right",
    "existing_area_factor": "number2",
}
DRAWN = ("terminal_difference_K", "shares")  # curves with a chart
STATED_SLOT = 1


def design_choice_sheet(study: Study) -> Sheet | None:
    """What the curves say, best values and flat ranges, charts, all points; None where there is no choice."""
    return None if study.design_choice is None else _Choice(study, study.design_choice).sheet()


class _Choice:
    """The page from top to bottom; `row` is the next free one."""

    def __init__(self, study: Study, choice: DesignChoice) -> None:
        self.study, self.case, self.choice, self.page = study, study.case, choice, Page(TITLE, "as run")
        self.currency = study.case.study.currency
        self.place = [option.key for option in study.case.options].index(choice.option)
        self.option = study.case.options[self.place]
        self.stated = Stated.of(study.case, self.option, choice.stated_npv)
        self.row = 4
        self.points: dict[str, tuple[str, str]] = {}  # key -> cells of values, cells of net present values
        self.stated_rows: dict[str, int] = {}

    def sheet(self) -> Sheet:
        """Put everything on the page. The charts come last: they need the places of the points."""
        page = self.page
        page.head(f"Design choice: {self.option.name}")
        page.width([LABEL_WIDTH, UNIT_WIDTH] + [CELL_WIDTH] * COLUMNS)
        self._words()
        self._summary()
        charts_row = self.row
        self.row += CHART_ROWS + 1
        first_page = self.row - 1
        self._curves()
        self._joint()
        self._charts(charts_row)
        page.freeze(4, 1)
        page.printed(breaks_after=[first_page])
        return page.finish()

    def _section(self, title: str) -> None:
        self.page.put(self.row, LABEL, title, "section")
        for col in range(UNIT, LAST + 1):
            self.page.put(self.row, col, None, "section")
        self.row += 1

    def _paragraph(self, text: str, style: str = "text_wrap") -> None:
        self.page.paragraph(self.row, LABEL, LAST, text, style)
        self.row += 1

    def _words(self) -> None:
        scenarios, capital = list(self.case.scenarios), self.study.capital[self.place]
        title = self.study.runs[scenarios.index(self.choice.scenario)].prices.title
        self._paragraph(
            "One value of the option is changed at a time, the others stay as stated; it is sized, costed "
            f"and run through the year again, in the scenario {title}. Flat: as far as the value may move "
            "before the net present value is 1 % below the best, by a smooth curve through the points. The "
            f"gains do not add up. Money in thousand {self.currency}, cells hold {self.currency}.",
            "note_wrap",
        )
        for curve in self.choice.curves:
            words = curve_words(curve, self.stated, self.currency, caveat_of(curve.key, capital))
            self._paragraph(words, "text_wrap bold")
        words = joint_words(self.choice, self.currency, caveat_of("shares", capital))
        self._paragraph(words, "text_wrap bold")
        self._paragraph(cost_words(capital), "text_wrap")
        self.row += 1

    def _summary(self) -> None:
        page, money = self.page, f"thousand {self.currency}"
        self._section(f"As stated and best; NPV: net present value, {money}")
        page.headings(
            self.row,
            [
                "Value",
                "unit",
                "as stated",
                "its NPV",
                "best tried",
                "its NPV",
                "gain",
                "flat from",
                "flat to",
            ],
        )
        for curve in self.choice.curves:
            self.row += 1
            kind, row = KINDS[curve.key], self.row
            self.stated_rows[curve.key] = row
            page.put(row, LABEL, curve.label, "label")
            page.put(row, UNIT, curve.unit or "–", "unit")
            page.put(row, TOTAL, self.stated.value(curve.key), f"{kind} as run")
            page.put(row, TOTAL + 1, self.choice.stated_npv, "thousand as run")
            if curve.best is None or curve.best_npv is None:
                continue
            page.put(row, TOTAL + 2, curve.best, f"{kind} as run")
            page.put(row, TOTAL + 3, curve.best_npv, "thousand as run")
            page.put(row, TOTAL + 4, curve.best_npv - self.choice.stated_npv, "thousand as run")
            for offset, end in enumerate(curve.flat or ("–", "–"), 5):
                style = "text_right" if isinstance(end, str) else kind
                page.put(row, TOTAL + offset, end, f"{style} as run")
        self.row += 2

    # -- all points

    def _curves(self) -> None:
        self._section(f"All points: net present value, thousand {self.currency}")
        for curve in self.choice.curves:
            self._curve(curve)

    def _curve(self, curve: Curve) -> None:
        """Values across; below them the net present values, the difference to the option as stated, marks."""
        page, row, stated = self.page, self.row, self.stated.value(curve.key)
        page.put(row, LABEL, curve.label, "heading_left")
        page.put(row, UNIT, curve.unit, "heading")
        page.put(row + 1, LABEL, "Net present value", "label")
        page.put(row + 2, LABEL, "  against the option as stated", "label")
        for offset in (1, 2):
            page.put(row + offset, UNIT, f"thousand {self.currency}", "unit")
        for index, (value, npv) in enumerate(zip(curve.values, curve.npv, strict=True)):
            col = TOTAL + index
            kind = "text_centre" if isinstance(value, str) else KINDS[curve.key]
            page.put(row, col, value, f"{kind} heading")
            page.put(row + 1, col, npv, "thousand as run")
            marks = [word for word, one in (("stated", stated), ("best", curve.best)) if same(value, one)]
            if npv is None:
                page.put(row + 2, col, "not built", "text_right as run")
            else:
                page.put(row + 2, col, npv - self.choice.stated_npv, "thousand as run")
            if marks:
                page.put(row + 3, col, "▲ " + ", ".join(marks), "text_right bold")
        last = TOTAL + len(curve.values) - 1
        self.points[curve.key] = area(row, TOTAL, row, last), area(row + 1, TOTAL, row + 1, last)
        page.highlight(area(row + 1, TOTAL, row + 1, last), f"={ref(row + 1, TOTAL)}<0", "negative")
        self.row += 4
        self._reasons(curve)

    def _reasons(self, curve: Curve) -> None:
        """Why points cannot be built; values with the same reason together."""
        why: dict[str, list[str]] = {}
        for value, reason in zip(curve.values, curve.reason, strict=True):
            if reason is not None:
                why.setdefault(" ".join(reason.split()), []).append(value_words(curve.key, value))
        for reason, values in why.items():
            self._paragraph(f"Not built at {', '.join(values)}: {reason}.", "note_wrap")

    def _joint(self) -> None:
        page, choice = self.page, self.choice
        self.row += 1
        self._section(f"Terminal difference and cold stage's share together, thousand {self.currency}")
        page.put(self.row, LABEL, "Terminal difference down, cold stage's share across", "heading_left")
        page.put(self.row, UNIT, "K", "heading")
        for index, share in enumerate(choice.joint_cold_share):
            page.put(self.row, TOTAL + index, share, "percent0 heading")
        first = self.row + 1
        last_col = TOTAL + len(choice.joint_cold_share) - 1
        best = choice.best_difference_K, choice.best_cold_share
        for difference, values in zip(choice.joint_difference_K, choice.joint_npv, strict=True):
            self.row += 1
            page.put(self.row, UNIT, difference, "number1 heading")
            for index, npv in enumerate(values):
                if npv is None:
                    page.put(self.row, TOTAL + index, "not built", "text_right as run")
                else:
                    page.put(self.row, TOTAL + index, npv, "thousand as run")
            if best[0] == difference and best[1] is not None:
                page.put(self.row, LABEL, f"best, at {best[1]:.0%} ►".replace("%", " %"), "text_right bold")
        cells = area(first, TOTAL, self.row, last_col)
        fixed = area(first, TOTAL, self.row, last_col, absolute=True)
        page.highlight(cells, f"=AND(ISNUMBER({ref(first, TOTAL)}),{ref(first, TOTAL)}=MAX({fixed}))", "ok")
        page.highlight(cells, f"={ref(first, TOTAL)}<0", "negative")
        self.row += 1

    # -- charts

    def _charts(self, row: int) -> None:
        half = _centimetres(LABEL, LAST) / 2.0
        second = TOTAL + 3
        left = _centimetres(LABEL, second - 1)
        sizes = (min(left, half + 2.0), _centimetres(second, LAST))
        for key, col, width in zip(DRAWN, (LABEL, second), sizes, strict=True):
            curve = next(one for one in self.choice.curves if one.key == key)
            if curve.best is not None:
                self._chart(curve, ref(row, col), width)

    def _chart(self, curve: Curve, anchor: str, width: float) -> None:
        values, npv = self.points[curve.key]
        row = self.stated_rows[curve.key]
        share = curve.key == "shares"
        stated = Series(
            "as stated",
            TITLE,
            ref(row, TOTAL + 1),
            x=ref(row, TOTAL),
            line=False,
            markers=True,
            slot=STATED_SLOT,
            direct=True,
        )
        flat = ""
        if curve.flat is not None:
            ends = " to ".join(value_words(curve.key, end) for end in curve.flat)
            flat = f" It stays within 1 % of the best from {ends}."
        assert curve.best is not None
        chart = scatter_chart(
            curve.label,
            [Series("other values", TITLE, npv, x=values), stated],
            x=Axis(
                "share of the rise" if share else f"terminal difference, {curve.unit}", "0%" if share else "0"
            ),
            y=Axis(f"net present value, thousand {self.currency}", "#,##0,"),
            alt=f"Net present value of {self.option.name}, as run, over: {curve.label}. Best of the points: "
            f"{value_words(curve.key, curve.best)}.{flat}",
            anchor=anchor,
            size_cm=(width, CHART_CM),
        )
        self.page.chart(replace(chart, points=REDUCED_CHART_POINTS - 1.5, legend=False))


def same(value: object, other: object) -> bool:
    """Whether a tried value is another one; numbers to rounding."""
    if isinstance(value, float) and isinstance(other, int | float):
        return abs(value - other) < 1e-9
    return value == other


def _centimetres(first: int, last: int) -> float:
    """Width of these columns."""
    widths = [LABEL_WIDTH, UNIT_WIDTH] + [CELL_WIDTH] * COLUMNS
    return sum(width * 7.0 + 5.0 for width in widths[first - 1 : last]) / 96.0 * 2.54 - 0.2
