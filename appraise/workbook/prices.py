"""The Prices sheet: every scenario's paths by year, live, and the chosen scenario picked out of them."""

from __future__ import annotations

from dataclasses import replace
from math import ceil
from typing import TYPE_CHECKING

import numpy as np

from appraise.numerics import Array
from appraise.workbook.calendar_rows import CASH_FLOW, ROWS, put_calendar
from appraise.workbook.cells import (
    LABEL,
    TOTAL,
    UNIT,
    YEAR_ZERO,
    Page,
    Sheet,
    area,
    column,
    ref,
    sheet_prefix,
)
from appraise.workbook.charts import Axis, Series, line_chart
from appraise.workbook.input_rows import plain_number
from appraise.workbook.looks import REDUCED_YEARS_POINTS
from appraise.workbook.naming import CHOSEN_SCENARIO, Timeline, input_name, name_of
from appraise.workbook.price_rows import (
    CHOSEN_ROW,
    INDEX_ROW,
    KINDS,
    OPERATING_YEAR_ROW,
    TITLE,
    YEAR_ROW,
    Kind,
    Place,
)

if TYPE_CHECKING:
    from appraise.case.fields import PricePath
    from appraise.study import Study

CHART_ROWS = 19
MOST_YEARS = 10  # named on the axis of a chart


CHARTED = ("power", "fuel", "peak_fuel", "carbon")


def prices_sheet(study: Study) -> Sheet:
    """All price paths by year, money of the price year per MWh (carbon: per tonne)."""
    return _Prices(study).sheet()


class _Prices:
    """The page and where its parts stand: chosen scenario, charts, scenarios, places in the listed paths."""

    def __init__(self, study: Study) -> None:
        self.study, self.case = study, study.case
        self.time = Timeline.of(study.case)
        self.page = Page(TITLE, "live")
        self.scenarios = list(study.case.scenarios)
        self.charts_row = CHOSEN_ROW + len(KINDS) + 3
        self.first_scenario_row = self.charts_row + 2 * CHART_ROWS + 1
        self.block = len(KINDS) + 2
        self.lists_row = self.first_scenario_row + self.block * len(self.scenarios)
        self.columns = [column(YEAR_ZERO + t) for t in range(self.time.number)]

    def row(self, scenario: int, kind: int) -> int:
        """Row of one price of one scenario."""
        return self.first_scenario_row + self.block * scenario + 1 + kind

    def unit(self, kind: Kind) -> str:
        """Such as EUR/MWh."""
        return f"{self.case.study.currency}/{kind.per}"

    def sheet(self) -> Sheet:
        """Put everything on the page."""
        page, last = self.page, self.time.number
        page.head(
            "Prices by year",
            f"Money of {self.case.study.price_year}, before inflation; no price before operation begins.",
        )
        page.width([34, 8.5, 9.5] + [7.0] * last)
        self._years()
        self._chosen()
        places = self._lists()
        for scenario in range(len(self.scenarios)):
            self._scenario(scenario, places)
        for number, kind in enumerate(k for k in KINDS if k.name in CHARTED):
            self._chart(number, kind)
        page.freeze(YEAR_ROW + 2, YEAR_ZERO)
        page.printed(repeat_rows=(YEAR_ROW, OPERATING_YEAR_ROW), breaks_after=[self.first_scenario_row - 1])
        return page.finish()

    def _years(self) -> None:
        there = sheet_prefix(CASH_FLOW)
        put_calendar(
            self.page,
            YEAR_ROW,
            "Calendar year",
            lambda c: f"={there}{c}{ROWS.calendar_year}",
            self.time.calendar,
            "mean of operation",
        )
        self.page.height(YEAR_ROW, 30)
        self.page.row_of_formulas(
            OPERATING_YEAR_ROW,
            "Year of operation",
            "–",
            lambda c: f"={there}{c}{ROWS.operating_year}",
            [int(k) for k in self.time.operating(list(np.arange(1, self.time.years + 1)))],
            "integer",
        )

    def _mean(self, row: int, values: Array, style: str) -> None:
        self.page.formula(
            row,
            TOTAL,
            f"=SUMPRODUCT({self.time.row(row)},operating)/SUM(operating)",
            expect=float(np.mean(values)),
            style=style,
        )

    def _chosen(self) -> None:
        page, reference = self.page, self.study.reference
        page.put(INDEX_ROW, LABEL, "Chosen scenario, number in the list", "label")
        page.formula(
            INDEX_ROW,
            TOTAL,
            f"=MATCH({CHOSEN_SCENARIO},scenario_names,0)",
            expect=reference + 1,
            style="integer",
            name="chosen_index",
        )
        page.formula(
            INDEX_ROW + 1,
            LABEL,
            '="Chosen: "&INDEX(scenario_titles,chosen_index)',
            f"Chosen: {self.study.runs[reference].prices.title}",
            "section",
        )
        self._rule(INDEX_ROW + 1)
        prices = self.study.runs[reference].prices
        for number, kind in enumerate(KINDS):
            row, values = CHOSEN_ROW + number, getattr(prices, kind.name)
            rows = [self.row(scenario, number) for scenario in range(len(self.scenarios))]
            page.row_of_formulas(
                row,
                kind.label,
                self.unit(kind),
                lambda c, rows=rows: f"=CHOOSE(chosen_index,{','.join(f'{c}{r}' for r in rows)})",  # type: ignore[misc]
                self.time.operating(values.tolist()),
                "money2",
                name=name_of("chosen", kind.name),
            )
            self._mean(row, values, "money2")

        self._chosen_premium()

    def _chosen_premium(self) -> None:
        """Level and duration of the chosen scenario's premium."""
        page, row = self.page, CHOSEN_ROW + len(KINDS)
        premiums = [self.case.scenarios[name].power_premium for name in self.scenarios]
        given = premiums[self.study.reference]
        for offset, (key, label, unit, style) in enumerate(
            (
                ("value", "Premium while it is paid", self.unit(KINDS[4]), "money2"),
                ("years", "Years of the premium", "a", "integer"),
            )
        ):
            cells = ",".join(
                "0" if premium is None else input_name(f"scenarios.{name}.power_premium.{key}")
                for name, premium in zip(self.scenarios, premiums, strict=True)
            )
            page.put(row + offset, LABEL, label, "label_indent")
            page.put(row + offset, UNIT, unit, "unit")
            page.formula(
                row + offset,
                TOTAL,
                f"=CHOOSE(chosen_index,{cells})",
                0 if given is None else getattr(given, key),
                style,
                name_of("chosen_premium", key),
            )

    def _rule(self, row: int) -> None:
        """The section's rule over the whole width."""
        for col in range(UNIT, YEAR_ZERO + self.time.number):
            self.page.put(row, col, None, "section")

    def _scenario(self, scenario: int, places: dict[tuple[str, str], Place]) -> None:
        name = self.scenarios[scenario]
        prices, top = self.study.runs[scenario].prices, self.row(scenario, 0) - 1
        self.page.put(top, LABEL, prices.title, "section")
        self._rule(top)
        for number, kind in enumerate(KINDS):
            row, values = self.row(scenario, number), getattr(prices, kind.name)
            self.page.row_of_formulas(
                row,
                kind.label,
                self.unit(kind),
                lambda c, kind=kind: self._formula(name, kind, places, c),  # type: ignore[misc]
                self.time.operating(values.tolist()),
                "money2",
                name=name_of("price", kind.name, name),
            )
            self._mean(row, values, "money2")

    def _formula(self, scenario: str, kind: Kind, places: dict[tuple[str, str], Place], c: str) -> str:
        """Price in the column `c`; 0 before operation begins."""
        begun = f"({c}${YEAR_ROW}>=in_study_first_year)"
        path = f"scenarios.{scenario}.{kind.key}"
        if kind.name == "premium":
            if self.case.scenarios[scenario].power_premium is None:
                return f"=0*{begun}"
            k, years = f"{c}${OPERATING_YEAR_ROW}", input_name(f"{path}.years")
            return f"=({k}>=1)*({k}<={years})*{input_name(f'{path}.value')}"
        if kind.name == "fee":
            return f"={begun}*{input_name(path)}"
        if (scenario, kind.name) in places:
            return f"={begun}*{places[scenario, kind.name].price(c)}"
        if plain_number(getattr(self.case.scenarios[scenario], kind.key)) is not None:
            return f"={begun}*{input_name(path)}"
        start, change = input_name(f"{path}.start"), input_name(f"{path}.change_per_year")
        return f"={begun}*{start}*(1+{change})^MAX(0,{c}${YEAR_ROW}-in_study_first_year)"

    # -- listed paths

    def _lists(self) -> dict[tuple[str, str], Place]:
        """For every path given by year, where between its points each year lies."""
        listed = [
            (name, kind, path)
            for name in self.scenarios
            for kind in KINDS
            if kind.name not in ("premium", "fee")
            for path in (getattr(self.case.scenarios[name], kind.key),)
            if path.year is not None
        ]
        row = self.lists_row + 2
        places = {}
        for name, kind, path in listed:
            place = places[name, kind.name] = Place(row, f"scenarios.{name}.{kind.key}", len(path.year))
            if place.number > 1:
                self._place(place, name, kind, path)
                row += 2
        if row > self.lists_row + 2:
            title = (
                "Prices given by year: the point in the inputs before each year, and the weight of the next"
            )
            self.page.put(self.lists_row, LABEL, title, "section")
            self._rule(self.lists_row)
        return places

    def _place(self, place: Place, scenario: str, kind: Kind, path: PricePath) -> None:
        title = self.study.runs[self.scenarios.index(scenario)].prices.title
        x = np.asarray(path.year, dtype=float)
        years = np.asarray(self.time.calendar, dtype=float)
        at = np.clip(np.searchsorted(x, years, side="right"), 1, x.size - 1)
        weight = np.clip((years - x[at - 1]) / (x[at] - x[at - 1]), 0.0, 1.0)
        label = f"{title}: {kind.key.replace('_', ' ')}, point"
        self.page.row_of_formulas(place.row, label, "–", place.before, at.tolist(), "integer")
        self.page.row_of_formulas(
            place.row + 1,
            "weight of the next point",
            "–",
            place.weight,
            weight.tolist(),
            "number3",
            label_style="label_indent",
        )

    # -- charts

    def _chart(self, number: int, kind: Kind) -> None:
        first, last = YEAR_ZERO + self.time.spend, YEAR_ZERO + self.time.number - 1
        series, says = [], []
        for scenario in range(len(self.scenarios)):
            prices = self.study.runs[scenario].prices
            values = getattr(prices, kind.name)
            row = self.row(scenario, KINDS.index(kind))
            series.append(Series(prices.title, TITLE, area(row, first, row, last)))
            says.append(f"{prices.title} from {values[0]:.3g} to {values[-1]:.3g}")
        chart = line_chart(
            f"{kind.label}, {self.unit(kind)}",
            series,
            (TITLE, area(YEAR_ROW, first, YEAR_ROW, last)),
            x=Axis("year", "0", step=float(ceil(self.time.years / MOST_YEARS))),
            y=Axis(self.unit(kind), "0"),
            alt=f"{kind.label} by year in every scenario, {self.unit(kind)}: {'; '.join(says)}.",
            anchor=ref(
                self.charts_row + CHART_ROWS * (number // 2), LABEL if number % 2 == 0 else YEAR_ZERO + 8
            ),
            size_cm=(19.4, 9.6),
        )
        self.page.chart(replace(chart, points=REDUCED_YEARS_POINTS))
