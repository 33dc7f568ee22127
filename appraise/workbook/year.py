"""Sheet of the year: what every option makes and burns, by which rules, and the energies behind the money."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from functools import partial

from appraise.emissions import HIGH_EFFICIENCY_SAVING, carbon_change, plant_saving
from appraise.study import Study
from appraise.trade import YearFigures
from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page, Sheet, area, column
from appraise.workbook.charts import Axis, Chart, Series, bar_chart
from appraise.workbook.naming import Timeline
from appraise.workbook.side_by_side import Line, group, line_of, put_section, put_table
from appraise.workbook.year_energies import (
    CHART_CM,
    CHART_ROWS,
    put_duration,
    put_months,
    put_tie_in,
    put_years,
)

TITLE = "Year"
WIDTH = 11.0
MakeLine = Callable[[str, str, str, str], Line]  # label, unit, kind and attribute of the figures

LEAST_COLUMNS, MOST_COLUMNS = 4, 10  # options beside each other; charts need the least
PER_MILLE = 1e3  # MWh per MWh is shown as kWh per MWh


def year_sheet(study: Study) -> Sheet:
    """The first operating year of every option, and the energies of all years."""
    page = Page(TITLE, "as run")
    timeline = Timeline.of(study.case)
    last_col = UNIT + max(LEAST_COLUMNS, min(len(study.case.options), MOST_COLUMNS))
    page.width([38, 12, 14] + [WIDTH] * max(timeline.number, MOST_COLUMNS - 1))
    page.head(TITLE, "Energies a year, availability included; hours as solved.")
    page.put(3, 1, "The months in figures stand below what is printed.", "note")
    row = _figures(page, 4, study, last_col)
    breaks = [row - 1]
    row, gains = _by_scenario(page, row, study, last_col)
    gain_chart = _gain_chart(study, gains, f"A{row}")
    row += CHART_ROWS
    breaks.append(row - 1)
    put_section(page, row, "Load and months, first year of operation", last_col)
    anchors = [f"A{row + 1 + i * CHART_ROWS}" for i in range(3)]
    row += 1 + 3 * CHART_ROWS
    last_printed = row - 1
    put_section(page, row, "What other sheets and the charts draw on; not printed", last_col)
    row, heat_chart, extra_chart = put_months(page, row + 1, study, (anchors[1], anchors[2]), last_col)
    row = put_tie_in(page, row, study)
    row = put_years(page, row, study, timeline)
    charts = (put_duration(page, row, study, anchors[0]), heat_chart, extra_chart, gain_chart)
    for chart in charts:
        if chart is not None:
            page.chart(chart)
    page.freeze(4, TOTAL)
    page.printed(landscape=False, area=f"A1:{column(last_col)}{last_printed}", breaks_after=breaks)
    return page.finish()


def _option_names(study: Study) -> list[str]:
    return [option.name for option in study.case.options]


def _scenario_title(study: Study, name: str) -> str:
    return study.case.scenarios[name].title or name


# --- the first year ---------------------------------------------------------------------------------------


def _figures(page: Page, row: int, study: Study, last_col: int) -> int:
    about = study.case.study
    scenario = _scenario_title(study, about.reference_scenario)
    put_section(
        page, row, f"First year of operation, {about.first_year}, in the scenario “{scenario}”", last_col
    )
    lines = list(figure_lines(study, study.year_figures[study.reference]))
    return put_table(page, row + 1, "Options side by side", _option_names(study), lines, WIDTH, MOST_COLUMNS)


def figure_lines(study: Study, figures: Sequence[YearFigures]) -> Iterator[Line]:
    """All figures of the year, in groups."""
    line = partial(line_of, figures)
    yield group("Energy")
    yield line("Heat from the plant", "MWh", "integer", "heat_MWh")
    if any(figure.flue_gas_heat_MWh for figure in figures):
        yield line("of it from the flue gas", "MWh", "integer", "flue_gas_heat_MWh")
    yield line("Heat from peak boilers", "MWh", "integer", "peak_heat_MWh")
    yield line("Gross power", "MWh", "integer", "power_gross_MWh")
    yield line("Net power", "MWh", "integer", "power_net_MWh")
    yield line("Fuel of the plant", "MWh", "integer", "fuel_MWh")
    yield line("Fuel of peak boilers", "MWh", "integer", "peak_fuel_MWh")
    yield group("Against the baseline")
    yield line("Extra net power", "MWh", "integer", "extra_power_MWh")
    yield line("Extra fuel of the plant", "MWh", "integer", "extra_fuel_MWh")
    yield line("Extra fuel of peak boilers", "MWh", "integer", "extra_peak_fuel_MWh")
    yield line("Extra net power per heat", "kWh/MWh", "number2", "extra_power_per_heat", PER_MILLE)
    yield line("Incremental efficiency", "", "percent1", "incremental_efficiency")
    yield from _deaerator_lines(figures)
    yield from _hours_lines(figures, line)
    yield from _carbon_lines(study, figures)
    currency = study.case.study.currency
    yield group("Money of the price year")
    yield line("Value of all net power", currency, "money", "power_value")
    yield line("Capture price of the extra power", f"{currency}/MWh", "number2", "capture_price")
    yield line("Capture price over the mean price", "", "number3", "capture_ratio")
    yield line("Gain of the first year, before tax", currency, "money", "first_year_gain")


def _deaerator_lines(figures: Sequence[YearFigures]) -> Iterator[Line]:
    yield group("Gain by what the deaerator lives on")
    for where, label in (("on_bleed", "bleed"), ("on_live_steam", "live steam")):
        power = [float(getattr(figure, f"extra_power_{where}_MWh")) for figure in figures]
        heat = [float(getattr(figure, f"heat_{where}_MWh")) for figure in figures]
        gain = [PER_MILLE * p / q if q else None for p, q in zip(power, heat, strict=True)]
        yield Line(f"Extra net power on {label}", "MWh", "integer", power)
        yield Line(f"Heat on {label}", "MWh", "integer", heat)
        yield Line(f"Extra net power per heat on {label}", "kWh/MWh", "number2", gain)


def _hours_lines(figures: Sequence[YearFigures], line: MakeLine) -> Iterator[Line]:
    """Hours in which each rule decides; rules that few plants have are left out where they never did."""
    yield group("Hours by rule")
    yield line("In operation", "h", "integer", "hours_on")
    yield line("At the limit of live steam or heat", "h", "integer", "hours_at_limit")
    yield line("Deaerator on live steam", "h", "integer", "hours_deaerator_on_live_steam")
    yield line("Bypassed: the baseline earns more", "h", "integer", "hours_bypassed")
    yield line("Run as the baseline: no operation found", "h", "integer", "hours_as_baseline")
    yield line("At the generator's limit", "h", "integer", "hours_at_generator_limit")
    yield line("Could run where the baseline cannot", "h", "integer", "hours_could_gain")
    rare = (
        ("Power lost at the generator's limit", "MWh", "power_lost_MWh"),
        ("At the limit of fuel", "h", "hours_at_fuel_limit"),
        ("New section below its least flow", "h", "hours_below_tail_minimum"),
        ("Valves hold the temperatures", "h", "hours_throttled"),
        ("Feed heater in use", "h", "hours_with_heater"),
    )
    for label, unit, name in rare:
        if any(getattr(figure, name) for figure in figures):
            yield line(label, unit, "integer", name)


def _carbon_lines(study: Study, figures: Sequence[YearFigures]) -> Iterator[Line]:
    """Stack CO2 and primary energy saving by `appraise.emissions`."""
    changes = [
        carbon_change(study.case, f.extra_power_MWh, f.extra_fuel_MWh, f.extra_peak_fuel_MWh) for f in figures
    ]
    saving = [plant_saving(study.case, f.heat_MWh, f.power_gross_MWh, f.fuel_MWh) for f in figures]
    yield group("Carbon dioxide and primary energy")
    yield Line("CO₂ from the stacks", "t", "integer", [f.co2_t for f in figures])
    yield Line("Change against the baseline", "t", "number1", [float(c.stack) for c in changes])
    yield Line("Change with grid power displaced", "t", "number1", [float(c.with_displaced) for c in changes])
    yield Line("Primary energy saving of the plant", "", "percent1", saving)
    yield Line("  least for high efficiency", "", "percent1", [HIGH_EFFICIENCY_SAVING] * len(saving))
    reference = study.case.emissions
    yield Line("  reference efficiency, heat", "", "percent1", [reference.heat_reference] * len(saving))
    yield Line("  reference efficiency, power", "", "percent1", [reference.power_reference] * len(saving))


def _by_scenario(page: Page, row: int, study: Study, last_col: int) -> tuple[int, tuple[int, int]]:
    """What prices change; returns the next row, and first and last row of the first-year gains."""
    put_section(page, row, "First year in every scenario", last_col)
    lines: list[Line] = []
    for label, unit, kind, name in _scenario_figures(study):
        lines.append(group(label))
        for scenario, figures in zip(study.case.scenarios, study.year_figures, strict=True):
            values = [getattr(figure, name) for figure in figures]
            lines.append(Line(_scenario_title(study, scenario), unit, kind, values))
    number = len(study.case.scenarios)
    next_row = put_table(page, row + 1, "By scenario", _option_names(study), lines, WIDTH, MOST_COLUMNS)
    last = row + 1 + len(lines)  # of the first band
    return next_row, (last - number + 1, last)


def _scenario_figures(study: Study) -> Iterator[tuple[str, str, str, str]]:
    """Label, unit, kind and attribute; energies where the price decides on hours. The gain comes last."""
    currency = study.case.study.currency
    if any(option.bypass for option in study.case.options):
        yield "Extra net power", "MWh", "integer", "extra_power_MWh"
        yield "Hours bypassed", "h", "integer", "hours_bypassed"
    yield "Value of all net power", currency, "money", "power_value"
    yield "Capture price of the extra power", f"{currency}/MWh", "number2", "capture_price"
    yield "Capture price over the mean price", "", "number3", "capture_ratio"
    yield "Gain of the first year, before tax", currency, "money", "first_year_gain"


def _gain_chart(study: Study, rows: tuple[int, int], anchor: str) -> Chart | None:
    """Gain of the first year by scenario, one set of bars for each option but the baseline."""
    first, last = rows
    chosen = [i for i in range(len(study.case.options)) if i != study.physics.years.baseline]
    if not chosen:
        return None
    currency = study.case.study.currency
    gains = [figure.first_year_gain for figures in study.year_figures for figure in figures]
    return bar_chart(
        "Gain of the first year by scenario",
        [
            Series(study.case.options[i].name, TITLE, area(first, TOTAL + i, last, TOTAL + i))
            for i in chosen[: MOST_COLUMNS - 1]
        ],
        (TITLE, area(first, LABEL, last, LABEL)),
        x="",
        y=Axis(f"{currency} a year, before tax"),
        alt=f"First-year gain of every option in every scenario, from {min(gains):,.0f} to "
        f"{max(gains):,.0f} {currency}.",
        anchor=anchor,
        size_cm=CHART_CM,
    )
