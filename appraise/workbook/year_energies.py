"""Energies of the sheet of the year: by month, by operating year, in the tie-in, and sorted by load."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from math import fsum

from appraise.numerics import Array
from appraise.study import Study
from appraise.workbook.cells import LABEL, TOTAL, UNIT, YEAR_ZERO, Page, area
from appraise.workbook.charts import Axis, Chart, Series, area_duration_chart, bar_chart
from appraise.workbook.naming import Timeline, name_of
from appraise.workbook.side_by_side import group, put_headings, put_line, put_section
from appraise.workbook.year_data import by_month, counted_MW, demanded_MW, load_duration

CHART_CM = (18.2, 8.0)
CHART_ROWS = 17
WIDTH = 11.0
MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")

ENERGY_KINDS: tuple[tuple[str, str, str], ...] = (
    ("power", "power_MWh", "extra net power"),
    ("weighted_power", "weighted_power_MWh", "extra net power × price over mean"),
    ("premium", "premium_MWh", "extra net power with premium"),
    ("fuel", "fuel_MWh", "extra fuel"),
    ("peak_fuel", "peak_fuel_MWh", "extra peak fuel"),
)
"""Kind in the names, attribute of `Increment` and of `TieIn`, and what it is."""

TIE_LABELS = {
    "power": "Net power not made",
    "weighted_power": "Net power × price over mean",
    "premium": "Net power with premium",
    "fuel": "Fuel not burned",
    "peak_fuel": "Fuel of peak boilers instead",
}


def put_months(
    page: Page, row: int, study: Study, anchors: tuple[str, str], last_col: int
) -> tuple[int, Chart, Chart | None]:
    """Monthly energies of all options; returns the next row, and charts of heat and of extra power."""
    put_section(page, row, "Energy by month, first year of operation", last_col)
    put_headings(page, row + 1, "Month", _names(study), WIDTH)
    row += 2
    blocks: dict[str, tuple[int, int]] = {}  # first and last row of the months
    for key, label, hourly in _monthly(study):
        put_line(page, row, group(label))
        blocks[key] = row + 1, row + 12
        for col, values in enumerate(hourly, TOTAL):
            _month_column(page, row + 1, col, by_month(study, values))
        for offset, month in enumerate((*MONTHS, "Year"), 1):
            page.put(row + offset, LABEL, month, "label_total" if month == "Year" else "label")
            page.put(row + offset, UNIT, "MWh", "unit_total" if month == "Year" else "unit")
        row += 14
    heat = _heat_chart(study, page.title, blocks["plant"], blocks["peak"], anchors[0])
    others = [i for i in range(len(study.case.options)) if i != study.physics.years.baseline]
    extra = _extra_chart(study, page.title, others, blocks["extra"], anchors[1]) if others else None
    return row + 1, heat, extra


def _names(study: Study) -> list[str]:
    return [option.name for option in study.case.options]


def _monthly(study: Study) -> Iterator[tuple[str, str, list[Array]]]:
    """Key, label, and by option the hourly values of each block of the monthly table."""
    base, options = study.physics.years.baseline, range(len(study.case.options))
    asked = demanded_MW(study)
    plant = [counted_MW(study, i, "heat_MW") for i in options]
    net = [counted_MW(study, i, "power_net_MW") for i in options]
    yield "plant", "Heat from the plant", plant
    yield "peak", "Heat from peak boilers", [asked - heat for heat in plant]
    yield "extra", "Extra net power", [power - net[base] for power in net]


def _month_column(page: Page, row: int, col: int, values: Sequence[float]) -> None:
    for offset, value in enumerate(values):
        page.put(row + offset, col, value, "integer as run")
    cells = area(row, col, row + len(values) - 1, col)
    page.formula(row + len(values), col, f"=SUM({cells})", expect=fsum(values), style="integer total")


def _put_total(page: Page, row: int, values: Sequence[float]) -> None:
    """The sum of a row, in the column of totals."""
    cells = area(row, YEAR_ZERO, row, YEAR_ZERO + len(values) - 1)
    page.formula(row, TOTAL, f"=SUM({cells})", expect=fsum(values), style="integer bold")


Rows = tuple[int, int]


def _heat_chart(study: Study, sheet: str, plant: Rows, peak: Rows, anchor: str) -> Chart:
    base = study.physics.years.baseline
    figure, col = study.year_figures[study.reference][base], TOTAL + base
    return bar_chart(
        f"Heat by month: {study.case.baseline.name}",
        [
            Series("plant", sheet, area(plant[0], col, plant[1], col), slot=0),
            Series("peak boilers", sheet, area(peak[0], col, peak[1], col), slot=1),
        ],
        (sheet, area(plant[0], LABEL, plant[1], LABEL)),
        x="",
        y=Axis("MWh a month"),
        alt=f"Heat of each month from the plant, {figure.heat_MWh:,.0f} MWh a year, and from peak boilers, "
        f"{figure.peak_heat_MWh:,.0f} MWh a year.",
        anchor=anchor,
        size_cm=CHART_CM,
        stacked=True,
    )


def _extra_chart(study: Study, sheet: str, options: Sequence[int], rows: Rows, anchor: str) -> Chart:
    figures = study.year_figures[study.reference]
    told = ", ".join(f"{study.case.options[i].name} {figures[i].extra_power_MWh:,.0f} MWh" for i in options)
    return bar_chart(
        "Extra net power by month",
        [
            Series(study.case.options[i].name, sheet, area(rows[0], TOTAL + i, rows[1], TOTAL + i))
            for i in options
        ],
        (sheet, area(rows[0], LABEL, rows[1], LABEL)),
        x="",
        y=Axis("MWh a month"),
        alt=f"Extra net power of each month against the baseline; over the year: {told}.",
        anchor=anchor,
        size_cm=CHART_CM,
    )


# --- for other sheets -------------------------------------------------------------------------------------


def put_tie_in(page: Page, row: int, study: Study) -> int:
    """The baseline's energies in the dates of the tie-in, by scenario; returns the next row."""
    period = study.case.capex.tie_in
    dates = "no dates given" if period is None else f"{period.from_} to {period.to}, both included"
    titles = [scenario.title or name for name, scenario in study.case.scenarios.items()]
    put_headings(page, row, f"Tie-in, baseline: {dates}", titles, WIDTH)
    for kind, attribute, _ in ENERGY_KINDS:
        row += 1
        page.put(row, LABEL, TIE_LABELS[kind], "label")
        page.put(row, UNIT, "MWh", "unit")
        for offset, (name, run) in enumerate(zip(study.case.scenarios, study.runs, strict=True)):
            value = getattr(run.traded[0].tie_in, attribute)
            page.put(row, TOTAL + offset, value, "number1 as run", name=name_of("tie", kind, name))
    return row + 2


def put_years(page: Page, row: int, study: Study, timeline: Timeline) -> int:
    """Increments of every scenario and option over all t; returns the next row."""
    put_headings(page, row, "Increments by year, t", ["Total"], WIDTH)
    page.headings(row, list(range(timeline.number)), "general heading", first=YEAR_ZERO)
    page.row_of(row + 1, "Calendar year", "", timeline.calendar, "year as run")
    row += 2
    base = study.physics.years.baseline
    for name, run in zip(study.case.scenarios, study.runs, strict=True):
        put_line(page, row, group(study.case.scenarios[name].title or name))
        row += 1
        for index, traded in enumerate(run.traded):
            if index == base:
                continue
            for kind, attribute, label in ENERGY_KINDS:
                key = study.case.options[index].key
                values = timeline.operating([float(v) for v in getattr(traded.increment, attribute)])
                page.row_of(
                    row,
                    f"{study.case.options[index].name}: {label}",
                    "MWh",
                    values,
                    "number1 as run",
                    label_style="label_indent",
                    name=name_of("energy", kind, name, key),
                )
                _put_total(page, row, values)
                row += 1
    return row + 1


def put_duration(page: Page, row: int, study: Study, anchor: str) -> Chart:
    """The sorted hours of the baseline, and their chart."""
    base = study.physics.years.baseline
    curve = load_duration(study, base)
    page.put(row, LABEL, "Hours sorted by the network's demand, means of 24", "heading_left")
    page.headings(row, ["hour", "plant, MW", "peak boilers, MW"], first=UNIT)
    first, last = row + 1, row + 1 + curve.start.size
    rows = [*zip(curve.start, curve.plant_MW, curve.peak_MW, strict=True)]
    rows.append((curve.hours.sum(), curve.plant_MW[-1], curve.peak_MW[-1]))
    for offset, (hour, plant, peak) in enumerate(rows, first):
        page.put(offset, UNIT, round(float(hour)), "integer as run")
        page.put(offset, TOTAL, float(plant), "number2 as run")
        page.put(offset, TOTAL + 1, float(peak), "number2 as run")
    return area_duration_chart(
        f"Load duration: {study.case.baseline.name}",
        [
            Series("plant", page.title, area(first, TOTAL, last, TOTAL), slot=0),
            Series("peak boilers", page.title, area(first, TOTAL + 1, last, TOTAL + 1), slot=1),
        ],
        (page.title, area(first, UNIT, last, UNIT)),
        x=Axis("hours of the year, sorted by demand", "#,##0", step=1000.0),
        y=Axis("MW, means of 24 sorted hours"),
        alt=f"Heat demand sorted from {curve.plant_MW[0] + curve.peak_MW[0]:.0f} MW down to "
        f"{curve.plant_MW[-1] + curve.peak_MW[-1]:.0f} MW, below it what the plant delivers; the rest comes "
        "from peak boilers.",
        anchor=anchor,
        size_cm=CHART_CM,
    )
