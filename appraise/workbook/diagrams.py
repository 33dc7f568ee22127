"""Sheet of the diagrams: condensers over their heat, expansion over entropy. Native charts of cells below."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from math import ceil

from appraise.checks import MOISTURE_LIMIT
from appraise.cycle.balance import Balance, StageBalance
from appraise.cycle.design import OptionDesign
from appraise.study import Study
from appraise.workbook.cells import Page, Sheet, area, ref
from appraise.workbook.charts import Axis, Series, scatter_chart
from appraise.workbook.diagram_data import (
    Curve,
    bleed_points,
    dome,
    expansion_window,
    isobar,
    isobar_pressures,
    main_line,
    moisture_line,
    tail_line,
    temperature_curves,
    temperature_window,
    vapour_line,
    water_points,
)
from appraise.workbook.side_by_side import heading_height, put_section, put_value

TITLE = "Diagrams"
WIDTH, GAP = 9.0, 2.0
HALF = 8  # columns of one chart; two stand beside each other, with a narrow column between
LAST = 2 * HALF + 1
CHART_CM = (14.2, 12.0)
CHART_ROWS = 24
TALL_ROWS = 32
EXPANSION_CM, DOME_CM = (18.2, 16.0), (10.6, 16.0)
DOME_COLUMN = "L"
EXPANSION_SLOTS = (0, 1, 2, 4, 5)  # 3 is the grey of the lines behind

_STAGE_HEADS = (
    "Stage",
    "Steam, °C",
    "Water in, °C",
    "Water out, °C",
    "TTD, K",
    "Drain, °C",
    "DCA, K",
    "Heat, MW",
)


ABBREVIATIONS = (
    "TTD, terminal temperature difference: steam less water out. "
    "DCA, drain cooler approach: drain less water in."
)


@dataclass(frozen=True, slots=True)
class Drawn:
    """A curve with the way it is drawn and, once it is on the sheet, its cells."""

    curve: Curve
    slot: int
    smooth: bool = False
    line: bool = True
    markers: bool = False
    direct: bool = False


def diagrams_sheet(study: Study) -> Sheet:
    """Temperature–heat diagram of every option, and the expansion in the enthalpy–entropy diagram."""
    page = Page(TITLE, "as run")
    page.width([WIDTH] * HALF + [GAP] + [WIDTH] * HALF)
    page.head(TITLE, "All at the design point. The cells behind the charts stand below and are not printed.")
    page.put(3, 1, ABBREVIATIONS, "note")
    pairs = ceil(len(study.balances) / 2)
    table_rows = max(len(balance.stages) for balance in study.balances) + 2
    pair_rows = 1 + CHART_ROWS + table_rows + 1
    expansion_row = 4 + pairs * pair_rows
    data_row = expansion_row + TALL_ROWS + 3
    put_section(page, data_row, "Data of the charts", LAST)
    next_row = _temperature_pages(page, study, pair_rows, data_row + 1)
    _expansion_page(page, study, expansion_row, next_row)
    page.printed(
        area=area(1, 1, expansion_row + TALL_ROWS, LAST),
        breaks_after=[3 + pair_rows * (i + 1) for i in range(pairs)],
    )
    return page.finish()


# --- temperature over heat --------------------------------------------------------------------------------


def _temperature_pages(page: Page, study: Study, pair_rows: int, data_row: int) -> int:
    """Charts and stage tables, two options beside each other; returns the first free row of the data."""
    window = temperature_window(study.balances)
    water = study.physics.design.plant.network
    deepest = data_row
    for index, balance in enumerate(study.balances):
        row, left = 4 + index // 2 * pair_rows, 1 + index % 2 * (HALF + 1)
        if left == 1:
            put_section(page, row, "Temperature over heat, from the cold end", LAST)
        slots = {"condensing steam": 1, "drain": 2, "network water": 0}
        curves = [Drawn(c, slots[c.label]) for c in temperature_curves(balance, water)]
        series, end = _put_curves(page, data_row, 1 + 7 * index, balance.name, curves, ("MW", "°C"))
        deepest = max(deepest, end)
        page.chart(
            scatter_chart(
                balance.name,
                series,
                x=Axis("Heat to the network water, MW", "0", window.x_low, window.x_high),
                y=Axis("Temperature, °C", "0", window.y_low, window.y_high, 10.0),
                alt=temperature_alt(balance),
                anchor=ref(row + 1, left),
                size_cm=CHART_CM,
            )
        )
        _stage_table(page, row + 1 + CHART_ROWS, left, study.physics.design.options[index], balance)
    return deepest + 1


def temperature_alt(balance: Balance) -> str:
    """What the temperature–heat diagram of an option shows."""
    cold, hot = balance.stages[0], balance.stages[-1]
    steps = ", ".join(f"{stage.saturation_C:.1f} °C" for stage in balance.stages)
    return (
        f"{balance.name}: network water warms from {cold.water_in_C:.1f} to {hot.water_out_C:.1f} °C over "
        f"{balance.heat_MW:.1f} MW; steam condenses, from the cold end, at {steps}."
    )


def _stage_table(page: Page, row: int, left: int, option: OptionDesign, balance: Balance) -> None:
    page.headings(row, _STAGE_HEADS, first=left)
    page.height(row, heading_height(_STAGE_HEADS, WIDTH))
    for i, stage in enumerate(balance.stages):
        approach = drain_approach(stage, cooled=option.train.stages[i].drain_approach_K is not None)
        values = (
            (i + 1, "integer"),
            (stage.saturation_C, "number1"),
            (stage.water_in_C, "number1"),
            (stage.water_out_C, "number1"),
            (stage.terminal_difference_K, "number2"),
            (stage.drain_C, "number1"),
            (approach, "number2"),
            (stage.heat_MW, "number2"),
        )
        for offset, (value, kind) in enumerate(values):
            put_value(page, row + 1 + i, left + offset, value, kind)


def drain_approach(stage: StageBalance, *, cooled: bool) -> float | None:
    """Drain over entering water, K (DCA); None where the drain leaves saturated."""
    return stage.drain_C - stage.water_in_C if cooled else None


# --- enthalpy over entropy --------------------------------------------------------------------------------


def _expansion_page(page: Page, study: Study, row: int, data_row: int) -> None:
    put_section(page, row, "Expansion of the steam: enthalpy over entropy", LAST)
    window = expansion_window(study.balances)
    axes = ("kJ/(kg K)", "kJ/kg")
    close, next_row = _put_curves(page, data_row, 1, "Expansion", list(_close_curves(study)), axes)
    page.chart(
        scatter_chart(
            "Expansion in every option",
            close,
            x=Axis("Entropy, kJ/(kg K)", "0.00", window.x_low, window.x_high, 0.25),
            y=Axis("Enthalpy, kJ/kg", "#,##0", window.y_low, window.y_high, 100.0),
            alt=expansion_alt(study),
            anchor=f"A{row + 1}",
            size_cm=EXPANSION_CM,
        )
    )
    whole, _ = _put_curves(page, next_row + 1, 1, "Whole cycle", list(_whole_curves(study)), axes)
    chart = scatter_chart(
        "Whole cycle; dots: condensate, feed water",
        whole,
        x=Axis("Entropy, kJ/(kg K)", "0", 0.0, 9.0, 1.0),
        y=Axis("Enthalpy, kJ/kg", "#,##0", 0.0, 4000.0, 500.0),
        alt="The saturation dome with the expansion lines of all options in its upper right, and "
        "condensate and feed water on the line of boiling water in its lower left.",
        anchor=f"{DOME_COLUMN}{row + 1}",
        size_cm=DOME_CM,
    )
    page.chart(replace(chart, legend=False))


def expansion_alt(study: Study) -> str:
    """What the enthalpy–entropy diagram shows."""
    live = study.balances[0].states[0]
    wettest = max(stage.moisture for balance in study.balances for stage in balance.stages)
    return (
        f"Steam expands from {live.pressure_bar:g} bar and {live.temperature_C:g} °C through the existing "
        "section; in options with more stages new sections carry on to lower pressures. "
        f"The wettest exhaust has {wettest:.1%} moisture."
    )


def _expansions(study: Study) -> Iterator[Drawn]:
    plant = study.physics.design.plant
    for index, balance in enumerate(study.balances):
        slot = EXPANSION_SLOTS[index % len(EXPANSION_SLOTS)]
        yield Drawn(main_line(balance, study.physics.design.options[index], plant), slot)
        tail = tail_line(balance)
        if tail is not None:
            yield Drawn(tail, slot, markers=True)


def _close_curves(study: Study) -> Iterator[Drawn]:
    """Expansion lines in front of isobars, dry saturated steam and the moisture that blades bear."""
    window = expansion_window(study.balances)
    yield Drawn(vapour_line(window.inside(0.08)), 3, smooth=True, direct=True)
    wet = moisture_line(MOISTURE_LIMIT, window.inside(0.08))
    if wet is not None:
        yield Drawn(wet, 3, direct=True)
    for pressure in isobar_pressures(study.balances, study.physics.years.baseline):
        curve = isobar(pressure, window.inside(0.05))
        if curve is not None:
            yield Drawn(curve, 3, direct=True)
    yield from _expansions(study)
    baseline = study.balances[study.physics.years.baseline]
    yield Drawn(bleed_points(baseline), 5, line=False, markers=True)


def _whole_curves(study: Study) -> Iterator[Drawn]:
    yield Drawn(dome(), 3, smooth=True)
    yield from _expansions(study)
    baseline = study.balances[study.physics.years.baseline]
    yield Drawn(water_points(baseline), 0, line=False, markers=True)


# --- data of the charts -----------------------------------------------------------------------------------


def _put_curves(
    page: Page, row: int, left: int, title: str, drawn: Sequence[Drawn], axes: tuple[str, str]
) -> tuple[list[Series], int]:
    """Curves as pairs of columns from row and column on; returns their series and the last row in use."""
    page.put(row, left, title, "label")
    series: list[Series] = []
    for offset, one in enumerate(drawn):
        col, curve, first = left + 2 * offset, one.curve, row + 3
        last = first + len(curve.x) - 1
        page.put(row + 1, col, curve.label, "note")
        page.put(row + 2, col, axes[0], "unit")
        page.put(row + 2, col + 1, axes[1], "unit")
        for point, (x, y) in enumerate(zip(curve.x, curve.y, strict=True)):
            page.put(first + point, col, x, "number3 as run")
            if y is not None:
                page.put(first + point, col + 1, y, "number3 as run")
        series.append(
            Series(
                curve.label,
                page.title,
                area(first, col + 1, last, col + 1),
                x=area(first, col, last, col),
                smooth=one.smooth,
                line=one.line,
                markers=one.markers,
                slot=one.slot,
                direct=one.direct,
            )
        )
    return series, row + 2 + max(len(one.curve.x) for one in drawn)
