"""Sheet of the heat balances: every option at the design point, its stages and states, and what of the
design point's gain is left over the year."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from functools import partial

from appraise.cycle.balance import Balance, StageBalance, State
from appraise.study import Study
from appraise.trade import YearFigures
from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page, Sheet
from appraise.workbook.side_by_side import (
    Line,
    group,
    heading_height,
    line_of,
    put_line,
    put_section,
    put_table,
    put_value,
    residual,
)

TITLE = "Heat balance"
MOST_COLUMNS = 6  # beside each other; more options or stages follow in a band below
WIDTH = 13.0
LAST_COLUMN = UNIT + MOST_COLUMNS
PER_MILLE = 1e3  # MW per MW is shown as kW per MW

MEANINGS = (
    "“Extra” is always against the plant as it stands, at the same heat to the network. Incremental "
    "efficiency is extra net power over extra fuel. The ideal gain is that of sixteen stages with the same "
    "terminal difference: what ever finer steps could still add. TTD, terminal temperature difference: "
    "saturation of the steam less the water leaving. A dash: no such value, as the quality of steam that is "
    "not wet."
)

_STATE_HEADS = (
    ("Flow", "kg/s", "number3"),
    ("Pressure", "bar", "number3"),
    ("Temperature", "°C", "number2"),
    ("Enthalpy", "kJ/kg", "number2"),
    ("Entropy", "kJ/kgK", "number4"),
    ("Quality", "kg/kg", "number4"),
)


def heat_balance_sheet(study: Study) -> Sheet:
    """Heat balances at the design point, options side by side."""
    page = Page(TITLE, "as run")
    page.width([38, 13] + [WIDTH] * MOST_COLUMNS)
    page.head(TITLE, "Every option at the design point, at equal heat; stage 1 is the cold end.")
    row = _design_point(page, 4, study)
    row = _side_by_side(page, row, study)
    row = _year_beside_design(page, row, study)
    row = _moves(page, row, study)
    stages_row = row
    row = _stage_tables(page, row, study)
    _state_tables(page, row, study.balances)
    page.freeze(4, TOTAL)
    page.printed(landscape=False, breaks_after=[stages_row - 1])
    return page.finish()


def _moves(page: Page, row: int, study: Study) -> int:
    """What moves the gain, at the design point and over the year."""
    put_section(page, row, "What moves the gain: change of the extra net power", LAST_COLUMN)
    names = [balance.name for balance in study.balances]
    lines: list[Line] = []
    for title, unit, values in (
        ("At the design point", "kW", [move.design_kW for move in study.moves]),
        ("Over the first year", "MWh", [move.year_MWh for move in study.moves]),
    ):
        lines.append(group(title))
        pairs = zip(study.moves, values, strict=True)
        lines += [Line(move.label, unit, "number1", [float(v) for v in value]) for move, value in pairs]
    return put_table(
        page, row + 1, "Against the baseline under the same change", names, lines, WIDTH, MOST_COLUMNS
    )


def _design_point(page: Page, row: int, study: Study) -> int:
    case, plant = study.case, study.physics.design.plant
    at = case.plant.design
    put_section(page, row, "Design point", LAST_COLUMN)
    lines = (
        Line("Heat of the turbine condensers", "MW", "number2", [at.heat_MW]),
        Line("Supply temperature", "°C", "number1", [at.supply_C]),
        Line("Return temperature", "°C", "number1", [at.return_C]),
        Line("Live steam pressure", "bar", "number1", [case.plant.live_steam.pressure_bar]),
        Line("Live steam temperature", "°C", "number1", [case.plant.live_steam.temperature_C]),
        Line("Main section, isentropic efficiency", "", "percent1", [plant.main_efficiency]),
        Line(
            "Existing condenser, conductance (UA)",
            "kW/K",
            "integer",
            [study.physics.design.existing_conductance_kW_K],
        ),
    )
    for offset, line in enumerate(lines, 1):
        put_line(page, row + offset, line)
    return row + len(lines) + 2


def _side_by_side(page: Page, row: int, study: Study) -> int:
    put_section(page, row, "Options side by side", LAST_COLUMN)
    row = put_table(
        page,
        row + 1,
        "At the design point",
        [balance.name for balance in study.balances],
        list(balance_lines(study.balances, study.physics.years.baseline)),
        WIDTH,
        MOST_COLUMNS,
    )
    page.paragraph(row - 1, LABEL, LAST_COLUMN, MEANINGS, "note_wrap")
    return row + 1


def balance_lines(balances: Sequence[Balance], baseline: int) -> Iterator[Line]:
    """The rows that compare the options."""
    base = balances[baseline]
    line = partial(line_of, balances)
    yield line("Heat", "MW", "number3", "heat_MW")
    yield line("Gross power", "MW", "number3", "power_gross_MW")
    yield line("Net power", "MW", "number3", "power_net_MW")
    yield line("Fuel", "MW", "number3", "fuel_MW")
    yield line("Live steam", "kg/s", "number3", "live_steam_kg_s")
    yield line("Steam to the deaerator", "kg/s", "number3", "bleed_kg_s")
    yield line("Bleed pressure", "bar", "number3", "bleed_bar")
    yield Line(
        "Deaerator lives on",
        "",
        "text",
        ["live steam" if balance.deaerator_on_live_steam else "bleed" for balance in balances],
    )
    if any(balance.heater_bleed_kg_s for balance in balances):
        yield line("Steam to the feed heater", "kg/s", "number3", "heater_bleed_kg_s")
    yield line("Network water", "kg/s", "number2", "network_kg_s")
    yield line("Power-to-heat ratio, gross", "MW/MW", "number4", "power_to_heat")
    yield line("Total efficiency, gross", "", "percent2", "total_efficiency")
    yield Line(
        "Extra net power",
        "kW",
        "number1",
        [(balance.power_net_MW - base.power_net_MW) * PER_MILLE for balance in balances],
    )
    yield Line(
        "Extra fuel",
        "kW",
        "number1",
        [(balance.fuel_MW - base.fuel_MW) * PER_MILLE for balance in balances],
    )
    yield line("Extra net power per heat", "kW/MW", "number2", "extra_power_per_heat", PER_MILLE)
    yield line("Incremental efficiency", "", "percent1", "incremental_efficiency")
    yield line("Share of the ideal gain", "", "percent1", "ideal_gain_share")
    yield Line(
        "Energy balance, relative residual",
        "",
        "tiny",
        [residual(balance.closure) for balance in balances],
    )


def _year_beside_design(page: Page, row: int, study: Study) -> int:
    name = study.case.study.reference_scenario
    title = study.case.scenarios[name].title or name
    put_section(page, row, "What the year leaves of the design point's gain", LAST_COLUMN)
    row = put_table(
        page,
        row + 1,
        "Design point and first year",
        [balance.name for balance in study.balances],
        list(gain_lines(study.balances, study.year_figures[study.reference])),
        WIDTH,
        MOST_COLUMNS,
    )
    page.paragraph(
        row - 1,
        LABEL,
        LAST_COLUMN,
        f"The year is the first of operation in the scenario “{title}”. All money in this study rests on the "
        "year, none on the design point. At part load the bleed may fall below the deaerator's pressure; the "
        "deaerator then takes throttled live steam, and the gain is another one: hence the two apart.",
        "note_wrap",
    )
    return row + 1


def gain_lines(balances: Sequence[Balance], figures: Sequence[YearFigures]) -> Iterator[Line]:
    """Gain at the design point and over the year, and its two parts by what the deaerator lives on."""

    def per_heat(power_MWh: float, heat_MWh: float) -> float | None:
        return PER_MILLE * power_MWh / heat_MWh if heat_MWh else None

    design = [PER_MILLE * balance.extra_power_per_heat for balance in balances]
    year = [
        None if figure.extra_power_per_heat is None else PER_MILLE * figure.extra_power_per_heat
        for figure in figures
    ]
    yield Line("Extra net power per heat, design point", "kW/MW", "number2", design)
    yield Line("Extra net power per heat, year", "kWh/MWh", "number2", year)
    left = [y / d if y is not None and d else None for y, d in zip(year, design, strict=True)]
    yield Line("Year against design point", "", "percent1", left)
    for where, label in (
        ("on_bleed", "deaerator on bleed"),
        ("on_live_steam", "deaerator on live steam"),
    ):
        power = [getattr(figure, f"extra_power_{where}_MWh") for figure in figures]
        heat = [getattr(figure, f"heat_{where}_MWh") for figure in figures]
        yield Line(f"Extra net power, {label}", "MWh", "integer", power)
        yield Line(f"Heat, {label}", "MWh", "integer", heat)
        yield Line(
            f"Gain, {label}",
            "kWh/MWh",
            "number2",
            [per_heat(p, q) for p, q in zip(power, heat, strict=True)],
        )
    yield Line(
        "Incremental efficiency, design point",
        "",
        "percent1",
        [balance.incremental_efficiency for balance in balances],
    )
    yield Line(
        "Incremental efficiency, year", "", "percent1", [figure.incremental_efficiency for figure in figures]
    )


def _stage_tables(page: Page, row: int, study: Study) -> int:
    put_section(page, row, "Stages, cold to hot", LAST_COLUMN)
    columns = [
        (balance, study.physics.design.options[i].surface[j].total_m2, j)
        for i, balance in enumerate(study.balances)
        for j in range(len(balance.stages))
    ]
    return put_table(
        page,
        row + 1,
        "At the design point",
        [f"{balance.name}: {_stage_name(j, len(balance.stages))}" for balance, _, j in columns],
        list(stage_lines([balance.stages[j] for balance, _, j in columns], [m2 for _, m2, _ in columns])),
        WIDTH,
        MOST_COLUMNS,
    )


def _stage_name(index: int, number: int) -> str:
    if number == 1:
        return "the only stage"
    end = " (cold)" if index == 0 else " (hot)" if index == number - 1 else ""
    return f"stage {index + 1}{end}"


def stage_lines(stages: Sequence[StageBalance], surface_m2: Sequence[float]) -> Iterator[Line]:
    """Everything that is known of the stages. `surface_m2` : to be bought, also beside the existing one."""
    line = partial(line_of, stages)
    yield line("Shell pressure", "bar", "number3", "shell_bar")
    yield line("Saturation temperature", "°C", "number2", "saturation_C")
    yield line("Water in", "°C", "number2", "water_in_C")
    yield line("Water after the drain zone", "°C", "number2", "drain_zone_C")
    yield line("Water out", "°C", "number2", "water_out_C")
    yield line("Terminal temperature difference", "K", "number2", "terminal_difference_K")
    yield line("Steam condensed", "kg/s", "number3", "steam_kg_s")
    yield line("Steam enthalpy at the flange", "kJ/kg", "number2", "steam_kJ_kg")
    yield line("Moisture at the flange", "", "percent1", "moisture")
    yield line("Volume through the exhaust", "m³/s", "number2", "exhaust_m3_s")
    yield line("Drain temperature", "°C", "number2", "drain_C")
    yield line("Drain enthalpy", "kJ/kg", "number2", "drain_kJ_kg")
    yield line("Heat to the water", "MW", "number3", "heat_MW")
    yield Line(
        "Surface of a new condenser",
        "m²",
        "number1",
        ["existing" if stage.area_m2 is None else stage.area_m2 for stage in stages],
    )
    yield Line("Surface to be bought", "m²", "number1", surface_m2)


def _state_tables(page: Page, row: int, balances: Sequence[Balance]) -> None:
    put_section(page, row, "States of steam and water", LAST_COLUMN)
    row += 1
    for balance in balances:
        titles = [f"{name}, {unit}" for name, unit, _ in _STATE_HEADS]
        page.put(row, LABEL, balance.name, "heading_left")
        page.headings(row, titles, first=UNIT)
        page.height(row, heading_height(titles, WIDTH))
        for state in balance.states:
            row += 1
            _state_row(page, row, state)
        row += 2


def _state_row(page: Page, row: int, state: State) -> None:
    page.put(row, LABEL, state.label, "label")
    values = (
        state.flow_kg_s,
        state.pressure_bar,
        state.temperature_C,
        state.enthalpy_kJ_kg,
        state.entropy_kJ_kgK,
        state.quality,
    )
    for offset, ((_, _, kind), value) in enumerate(zip(_STATE_HEADS, values, strict=True)):
        put_value(page, row, UNIT + offset, value, kind)
