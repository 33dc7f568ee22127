"""The charts of the Draws sheet: cumulative curves, rank correlations, histograms."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from math import ceil

from appraise.draws import OptionRisk
from appraise.workbook.cells import LABEL, TOTAL, UNIT, area, ref
from appraise.workbook.charts import Axis, Chart, Series, bar_chart, scatter_chart
from appraise.workbook.draws_figures import Figures
from appraise.workbook.draws_words import per_cent
from appraise.workbook.looks import REDUCED_CHART_POINTS
from appraise.workbook.scenario_words import thousands

TITLE = "Draws"
WIDTHS = (46.0, 14.0, *([12.0] * 8))
LAST = len(WIDTHS)
CURVE_CM, HISTOGRAM_CM, LEAST_BARS_CM = 8.5, 8.0, 7.5
NAMED_BINS = 12  # at most so many bins have their edge named on the axis
POINTS = REDUCED_CHART_POINTS - 1.5


def bars_cm(risk: OptionRisk) -> float:
    """Height of the chart of an option's rank correlations."""
    return max(LEAST_BARS_CM, 0.62 * len(risk.rank_correlation) + 2.0)


def cumulative_curves(figures: Figures, row: int) -> Chart:
    """Share of the draws below a value, for every option but the baseline."""
    series = [
        Series(name, TITLE, figures.shares, x=figures.quantiles(number))
        for number, name in enumerate(figures.names)
    ]
    said = "; ".join(
        f"{name} {per_cent(1.0 - risk.chance_npv_positive)}"
        for name, risk in zip(figures.names, figures.risks, strict=True)
    )
    chart = scatter_chart(
        "Share of the draws below a net present value; where a curve meets zero, the chance of a loss",
        series,
        x=Axis(f"net present value, thousand {figures.currency}", "#,##0,"),
        y=Axis("share of draws below", "0%", low=0.0, high=1.0, step=0.2),
        alt="Cumulative distribution of the net present value of each option, as run. "
        f"Draws not above zero: {said}.",
        anchor=ref(row, LABEL),
        size_cm=(_centimetres(LABEL), CURVE_CM),
    )
    return replace(chart, points=POINTS)


def rank_bars(name: str, risk: OptionRisk, row: int) -> Chart:
    """Rank correlation of every driver, the strongest on top; `row` is the table's heading."""
    end = row + len(risk.rank_correlation)
    first = ", ".join(f"{label} {rank:+.2f}" for label, rank in risk.rank_correlation[:3])
    chart = bar_chart(
        "Rank correlation of driver and net present value",
        [Series("rank correlation", TITLE, area(row + 1, UNIT, end, UNIT))],
        (TITLE, area(row + 1, LABEL, end, LABEL)),
        x="",
        y=Axis("", "0.0", low=-1.0, high=1.0, step=0.5),
        alt=f"Rank correlation of the drivers with the net present value of {name}, as run. "
        f"The strongest: {first}.",
        anchor=ref(row, TOTAL),
        size_cm=(_centimetres(TOTAL), bars_cm(risk)),
        horizontal=True,
        labels="0.00",
        gap=40,
    )
    return replace(chart, points=POINTS)


def histogram(figures: Figures, number: int, row: int) -> Chart:
    """Number of draws by bins of the net present value, those below zero hatched."""
    risk, name, currency = figures.risks[number], figures.names[number], figures.currency
    edges, below, above = figures.bin_cells(number)
    bins = figures.bins[number]
    step = max(1, ceil(len(bins.counts) / NAMED_BINS))
    # Where all draws lie on one side, the cells of the other are empty.
    sides = (
        (bins.edges[1] <= 0.0, Series("below zero", TITLE, below, slot=1)),
        (bins.edges[-1] > 0.0, Series("zero and above", TITLE, above, slot=0)),
    )
    chart = bar_chart(
        f"Draws by net present value; hatched: below zero, {per_cent(1.0 - risk.chance_npv_positive)}",
        [series for there, series in sides if there],
        (TITLE, edges),
        x=Axis(f"lower edge of the bin, thousand {currency}", "General", step=float(step)),
        y=Axis("number of draws"),
        alt=f"Histogram of the net present value of {name}, as run: half of the draws are below "
        f"{thousands(risk.p50, currency)}, nine in ten lie between {thousands(risk.p5, currency)} and "
        f"{thousands(risk.p95, currency)}.",
        anchor=ref(row, LABEL),
        size_cm=(_centimetres(LABEL), HISTOGRAM_CM),
        stacked=True,
        gap=0,
    )
    return replace(chart, points=POINTS)


def option_charts(figures: Figures, places: Sequence[tuple[int, int]]) -> list[Chart]:
    """Bars and histogram of every option; places : rows of the two."""
    made = []
    for number, (bars_row, histogram_row) in enumerate(places):
        made.append(rank_bars(figures.names[number], figures.risks[number], bars_row))
        made.append(histogram(figures, number, histogram_row))
    return made


def _centimetres(first: int) -> float:
    """Width of the page from a column on."""
    return sum(width * 7.0 + 5.0 for width in WIDTHS[first - 1 :]) / 96.0 * 2.54 - 0.2
