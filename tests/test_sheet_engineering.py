"""The sheets of heat balance, diagrams, year, hours, checks and cautions against the study they show."""

import re
from collections.abc import Callable, Iterator
from dataclasses import replace
from functools import cache
from io import BytesIO
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
import openpyxl
import pytest
from cases import minimal_case, synthetic_hours, write_case
from libreoffice import differences, needs_libreoffice, recalculate
from study_fixture import marrowby_study

from appraise.case.load import load_case
from appraise.checks import Check
from appraise.numerics import Array
from appraise.steam_fits import enthalpy_ps, saturation
from appraise.study import Study, run_study
from appraise.workbook.addresses import cells_in, corners
from appraise.workbook.cautions import cautions_sheet
from appraise.workbook.cells import LABEL, TOTAL, UNIT, YEAR_ZERO, Cell, Sheet
from appraise.workbook.checks import LIMIT, OVER, SAYS, VALUE, checks_sheet, over, plainer, title_of, unit_of
from appraise.workbook.diagram_data import (
    Window,
    dome,
    exhausts,
    expansion_window,
    isobar,
    isobar_pressures,
    main_line,
    moisture_line,
    tail_line,
    temperature_curves,
    vapour_line,
)
from appraise.workbook.diagrams import diagrams_sheet
from appraise.workbook.heat_balance import heat_balance_sheet
from appraise.workbook.hours import FIRST_ROW, HEADER_ROW, STATISTICS_ROW, hours_sheet
from appraise.workbook.looks import STYLES
from appraise.workbook.naming import Timeline, name_of
from appraise.workbook.write import book_bytes
from appraise.workbook.year import year_sheet
from appraise.workbook.year_data import by_month, counted_MW, demanded_MW, load_duration

MAKERS: tuple[Callable[[Study], Sheet], ...] = (
    heat_balance_sheet,
    diagrams_sheet,
    year_sheet,
    checks_sheet,
    cautions_sheet,
    hours_sheet,
)
POINTS_PER_CM = 72 / 2.54
PIXELS_PER_CM = 96 / 2.54


@cache
def demo_sheets() -> dict[str, Sheet]:
    """The sheets of the demo study by title."""
    return {sheet.title: sheet for sheet in (make(marrowby_study()) for make in MAKERS)}


@cache
def three_stage_study() -> Study:
    """Two stages that may be bypassed, three with cooled drains, and no prices in the hours."""
    data = minimal_case()
    data["options"][1]["bypass"] = True
    data["options"].append({"key": "three", "name": "Three stages", "stages": 3, "drain": "subcooled"})
    rows = [row[:-1] for row in synthetic_hours()]
    with TemporaryDirectory() as folder:
        return run_study(load_case(write_case(Path(folder), data, rows)))


def demo(title: str) -> Sheet:
    """One sheet of the demo study."""
    return demo_sheets()[title]


def rows_labelled(sheet: Sheet, label: str, first: int = 1, last: int = 10**6) -> list[int]:
    """Rows whose label is this, from top to bottom."""
    return [
        row
        for (row, col), cell in sheet.cells.items()
        if col == LABEL and cell.value == label and first <= row <= last
    ]


def values_right_of(sheet: Sheet, row: int, number: int, first: int = TOTAL) -> list[object]:
    """The values of one row from a column on."""
    return [sheet.cells[row, first + i].value for i in range(number)]


def text_of(sheet: Sheet) -> str:
    """All text of a sheet."""
    return "\n".join(str(cell.value) for cell in sheet.cells.values() if isinstance(cell.value, str))


def named(sheet: Sheet, name: str) -> list[object]:
    """Values under a name, of a range or of one cell."""
    if name in sheet.names:
        return [sheet.cells[place].value for place in cells_in(sheet.names[name])]
    return [cell.value for cell in sheet.cells.values() if cell.name == name]


# --- every sheet ------------------------------------------------------------------------------------------


@pytest.mark.parametrize("study", [marrowby_study, three_stage_study])
def test_all_sheets_are_written(study: Callable[[], Study]) -> None:
    sheets = [make(study()) for make in MAKERS]
    book = openpyxl.load_workbook(BytesIO(book_bytes(sheets, title="t", author="a", subject="s", footer="f")))
    assert book.sheetnames == ["Heat balance", "Diagrams", "Year", "Checks", "Cautions", "Hours"]


@needs_libreoffice
@pytest.mark.filterwarnings("ignore:Unable to read chart")  # an axis of dates, as LibreOffice writes it
def test_formulas_come_to_what_the_study_says(tmp_path: Path) -> None:
    sheets = list(demo_sheets().values())
    path = tmp_path / "book.xlsx"
    path.write_bytes(book_bytes(sheets, title="t", author="a", subject="s", footer="f"))
    assert sum(bool(cell.formula) for sheet in sheets for cell in sheet.cells.values()) > 50
    assert differences(sheets, recalculate(path, tmp_path)) == []


@pytest.mark.parametrize("study", [marrowby_study, three_stage_study])
def test_charts_draw_numbers_and_cover_none(study: Callable[[], Study]) -> None:
    for sheet in (diagrams_sheet(study()), year_sheet(study())):
        assert sheet.charts
        for chart in sheet.charts:
            for series in chart.series:
                drawn = _numbers(sheet, series.values)
                assert any(value is not None for value in drawn), (chart.title, series.label)
                if series.x:
                    assert len(_numbers(sheet, series.x)) == len(drawn)
                    assert None not in _numbers(sheet, series.x)
                else:
                    assert chart.categories is not None
                    assert len(cells_in(chart.categories[1])) == len(drawn)
                    assert all(place in sheet.cells for place in cells_in(chart.categories[1]))
            covered = [sheet.cells[place].value for place in _under(sheet, chart.anchor, chart.size_cm)]
            assert covered == [None] * len(covered), chart.title


def _numbers(sheet: Sheet, address: str) -> list[float | None]:
    found: list[float | None] = []
    for place in cells_in(address):
        value = sheet.cells.get(place, Cell(None)).value
        assert value is None or isinstance(value, int | float)
        found.append(value)
    return found


def _under(sheet: Sheet, anchor: str, size_cm: tuple[float, float]) -> Iterator[tuple[int, int]]:
    """Cells in use under a chart."""
    row, col, _, _ = corners(anchor)
    last_row, points = row - 1, size_cm[1] * POINTS_PER_CM
    while points > 0.0:
        last_row += 1
        points -= sheet.heights.get(last_row, 15.0)
    last_col, pixels = col - 1, size_cm[0] * PIXELS_PER_CM
    while pixels > 0.0:
        last_col += 1
        pixels -= sheet.widths.get(last_col, 9.0) * 7.0 + 5.0
    yield from (p for p in sheet.cells if row <= p[0] <= last_row and col <= p[1] <= last_col)


def test_printed_area_holds_every_chart() -> None:
    for sheet in (demo("Diagrams"), demo("Year")):
        _, _, last_row, last_col = corners(sheet.printing.area)
        for chart in sheet.charts:
            row, col, _, _ = corners(chart.anchor)
            assert row + chart.size_cm[1] * POINTS_PER_CM / 15.0 <= last_row + 1
            width = sum(sheet.widths[c] * 7.0 + 5.0 for c in range(col, last_col + 1))
            assert chart.size_cm[0] * PIXELS_PER_CM <= width


def test_values_of_the_run_are_marked_as_such() -> None:
    for title in ("Heat balance", "Year", "Diagrams", "Hours"):
        for place, cell in demo(title).cells.items():
            plain = isinstance(cell.value, int | float) and not cell.formula
            if plain and "heading" not in cell.style:
                assert STYLES[cell.style].italic, (title, place, cell)


# --- heat balance -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("label", "attribute", "scale"),
    [
        ("Heat", "heat_MW", 1.0),
        ("Gross power", "power_gross_MW", 1.0),
        ("Net power", "power_net_MW", 1.0),
        ("Fuel", "fuel_MW", 1.0),
        ("Live steam", "live_steam_kg_s", 1.0),
        ("Steam to the deaerator", "bleed_kg_s", 1.0),
        ("Bleed pressure", "bleed_bar", 1.0),
        ("Network water", "network_kg_s", 1.0),
        ("Power-to-heat ratio, gross", "power_to_heat", 1.0),
        ("Total efficiency, gross", "total_efficiency", 1.0),
        ("Extra net power per heat", "extra_power_per_heat", 1e3),
        ("Incremental efficiency", "incremental_efficiency", 1.0),
        ("Share of the ideal gain", "ideal_gain_share", 1.0),
    ],
)
def test_options_side_by_side(label: str, attribute: str, scale: float) -> None:
    sheet, balances = demo("Heat balance"), marrowby_study().balances
    (row,) = rows_labelled(sheet, label)
    found = [getattr(balance, attribute) for balance in balances]
    assert values_right_of(sheet, row, len(balances)) == [
        "–" if value is None else value * scale for value in found
    ]


STAGE_ROWS = {
    "Shell pressure": "shell_bar",
    "Saturation temperature": "saturation_C",
    "Water in": "water_in_C",
    "Water after the drain zone": "drain_zone_C",
    "Water out": "water_out_C",
    "Terminal temperature difference": "terminal_difference_K",
    "Steam condensed": "steam_kg_s",
    "Steam enthalpy at the flange": "steam_kJ_kg",
    "Moisture at the flange": "moisture",
    "Volume through the exhaust": "exhaust_m3_s",
    "Drain temperature": "drain_C",
    "Drain enthalpy": "drain_kJ_kg",
    "Heat to the water": "heat_MW",
}


@pytest.mark.parametrize("study", [marrowby_study, three_stage_study])
def test_stages_of_every_option(study: Callable[[], Study]) -> None:
    sheet = heat_balance_sheet(study())
    stages = [stage for balance in study().balances for stage in balance.stages]
    for label, attribute in STAGE_ROWS.items():
        (row,) = rows_labelled(sheet, label)
        assert values_right_of(sheet, row, len(stages)) == [getattr(stage, attribute) for stage in stages]


def test_new_surface_is_that_of_the_sizes() -> None:
    sheet, study = demo("Heat balance"), marrowby_study()
    (row,) = rows_labelled(sheet, "Surface to be bought")
    stages = [stage for size in study.physics.sizes for stage in size.stages]
    assert values_right_of(sheet, row, len(stages)) == [stage.area_m2 for stage in stages]


def test_states_of_every_option() -> None:
    sheet, study = demo("Heat balance"), marrowby_study()
    (start,) = rows_labelled(sheet, "States of steam and water")
    for balance in study.balances:
        (head,) = rows_labelled(sheet, balance.name, first=start)
        for row, state in enumerate(balance.states, head + 1):
            assert sheet.cells[row, LABEL].value == state.label
            assert values_right_of(sheet, row, 6, first=UNIT) == [
                state.flow_kg_s,
                state.pressure_bar,
                state.temperature_C,
                state.enthalpy_kJ_kg,
                state.entropy_kJ_kgK,
                "–" if state.quality is None else state.quality,
            ]


def test_year_stands_beside_the_design_point() -> None:
    sheet, study = demo("Heat balance"), marrowby_study()
    figures, number = study.year_figures[study.reference], len(study.balances)
    (row,) = rows_labelled(sheet, "Extra net power per heat, design point")
    assert values_right_of(sheet, row, number) == [1e3 * b.extra_power_per_heat for b in study.balances]
    year = [1e3 * (f.extra_power_per_heat or 0.0) for f in figures]
    assert values_right_of(sheet, row + 1, number) == year
    power = [0.0] * number
    for where in ("bleed", "live steam"):
        (row,) = rows_labelled(sheet, f"Extra net power, deaerator on {where}")
        found = values_right_of(sheet, row, number)
        power = [p + float(str(v)) for p, v in zip(power, found, strict=True)]
    assert power == pytest.approx([f.extra_power_MWh for f in figures], rel=1e-9)


def test_tables_fold_where_there_are_many_stages() -> None:
    """More stages than fit beside each other stand in a second band."""
    study = marrowby_study()
    twice = replace(
        study,
        balances=study.balances * 2,
        physics=replace(
            study.physics, design=replace(study.physics.design, options=study.physics.design.options * 2)
        ),
        year_figures=tuple(figures * 2 for figures in study.year_figures),
    )
    sheet = heat_balance_sheet(twice)
    stages = [stage.shell_bar for balance in twice.balances for stage in balance.stages]
    rows = rows_labelled(sheet, "Shell pressure")
    assert len(rows) == 2
    assert [v for row in rows for v in values_right_of(sheet, row, len(stages) // 2)] == stages


# --- diagrams ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize("study", [marrowby_study, three_stage_study])
def test_temperature_curves_keep_the_stages_differences(study: Callable[[], Study]) -> None:
    water_line = study().physics.design.plant.network
    for balance in study().balances:
        curves = {curve.label: curve for curve in temperature_curves(balance, water_line)}
        water, steam = curves["network water"], curves["condensing steam"]
        assert water.x[-1] == pytest.approx(balance.heat_MW, rel=1e-12)
        assert (water.y[0], water.y[-1]) == (balance.stages[0].water_in_C, balance.stages[-1].water_out_C)
        levels = [(x, y) for x, y in zip(steam.x, steam.y, strict=True) if y is not None]
        for i, stage in enumerate(balance.stages):
            end, level = levels[2 * i + 1]  # every stage has the two ends of its level line
            assert level == stage.saturation_C
            out = np.interp(end, np.array(water.x), np.array(water.y, dtype=float))
            assert level - out == pytest.approx(stage.terminal_difference_K, abs=1e-9)
        cooled = any(stage.drain_zone_C > stage.water_in_C for stage in balance.stages)
        assert ("drain" in curves) == cooled


def test_drain_approach_is_shown_where_drains_are_cooled() -> None:
    """The demo's subcooled option is cooled to 7 K above the entering water in its hot stage."""
    sheet, study = demo("Diagrams"), marrowby_study()
    index = next(i for i, o in enumerate(study.case.options) if o.drain == "subcooled")
    heads = [place for place, cell in sheet.cells.items() if cell.value == "DCA, K"]
    row, col = sorted(heads)[index]
    shown = [sheet.cells[row + 1, col].value, sheet.cells[row + 2, col].value]
    assert shown[0] == "–"
    assert shown[1] == pytest.approx(study.case.new_condenser.drain_approach_K, abs=1e-6)


def _inside(window: Window, x: Array, y: Array) -> bool:
    slack = 1e-6
    return bool(
        (x >= window.x_low - slack).all()
        and (x <= window.x_high + slack).all()
        and (y >= window.y_low * (1 - slack)).all()
        and (y <= window.y_high * (1 + slack)).all()
    )


def test_isobars_are_isobars_and_stay_inside() -> None:
    balances = marrowby_study().balances
    window = expansion_window(balances)
    pressures = isobar_pressures(balances, 0)
    assert balances[0].states[0].pressure_bar in pressures
    assert exhausts(balances[0])[0].pressure_bar in pressures
    for pressure in pressures:
        curve = isobar(pressure, window)
        assert curve is not None
        s, h = np.array(curve.x), np.array(curve.y, dtype=float)
        at = saturation(np.full(s.shape, pressure))
        assert h == pytest.approx(enthalpy_ps(at, s), rel=1e-6)
        assert _inside(window, s, h)


def test_lines_of_the_dome() -> None:
    window = expansion_window(marrowby_study().balances)
    dry, wet = vapour_line(window), moisture_line(0.12, window)
    assert wet is not None
    for curve in (dry, wet):
        assert len(curve.x) > 5
        assert _inside(window, np.array(curve.x), np.array(curve.y, dtype=float))
    whole = np.array(dome().y, dtype=float)
    assert whole[0] < 100.0  # cold water
    assert 2700.0 < whole.max() < 2850.0  # the vapour line's maximum is 2804 kJ/kg near 30 bar


def test_expansion_lines_end_in_the_states() -> None:
    study = marrowby_study()
    for balance, option in zip(study.balances, study.physics.design.options, strict=True):
        states = exhausts(balance)
        line = main_line(balance, option, study.physics.design.plant)
        live = balance.states[0]
        assert (line.x[0], line.y[0]) == pytest.approx((live.entropy_kJ_kgK, live.enthalpy_kJ_kg), rel=1e-9)
        hot = states[0].entropy_kJ_kgK, states[0].enthalpy_kJ_kg
        assert (line.x[-1], line.y[-1]) == pytest.approx(hot, rel=1e-9)
        tail = tail_line(balance)
        assert (tail is None) == (len(balance.stages) == 1)
        if tail is not None:
            assert len(tail.x) == len(balance.stages)
            assert list(tail.x) == sorted(tail.x)  # entropy only grows


# --- year -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("label", "attribute", "scale"),
    [
        ("Heat from the plant", "heat_MWh", 1.0),
        ("Heat from peak boilers", "peak_heat_MWh", 1.0),
        ("Gross power", "power_gross_MWh", 1.0),
        ("Net power", "power_net_MWh", 1.0),
        ("Fuel of the plant", "fuel_MWh", 1.0),
        ("Fuel of peak boilers", "peak_fuel_MWh", 1.0),
        ("Extra net power", "extra_power_MWh", 1.0),
        ("Extra fuel of the plant", "extra_fuel_MWh", 1.0),
        ("Extra fuel of peak boilers", "extra_peak_fuel_MWh", 1.0),
        ("Extra net power per heat", "extra_power_per_heat", 1e3),
        ("Incremental efficiency", "incremental_efficiency", 1.0),
        ("Extra net power on bleed", "extra_power_on_bleed_MWh", 1.0),
        ("Heat on live steam", "heat_on_live_steam_MWh", 1.0),
        ("In operation", "hours_on", 1.0),
        ("At the limit of live steam or heat", "hours_at_limit", 1.0),
        ("Deaerator on live steam", "hours_deaerator_on_live_steam", 1.0),
        ("Could run where the baseline cannot", "hours_could_gain", 1.0),
        ("CO₂ from the stacks", "co2_t", 1.0),
        ("Value of all net power", "power_value", 1.0),
        ("Capture price of the extra power", "capture_price", 1.0),
        ("Gain of the first year, before tax", "first_year_gain", 1.0),
    ],
)
def test_year_figures(label: str, attribute: str, scale: float) -> None:
    sheet, study = demo("Year"), marrowby_study()
    figures = study.year_figures[study.reference]
    row = min(rows_labelled(sheet, label))
    found = [getattr(figure, attribute) for figure in figures]
    assert values_right_of(sheet, row, len(figures)) == [
        "–" if value is None else value * scale for value in found
    ]


def test_every_scenario_has_its_gain() -> None:
    sheet, study = demo("Year"), marrowby_study()
    head = max(rows_labelled(sheet, "Gain of the first year, before tax"))
    for row, (name, figures) in enumerate(
        zip(study.case.scenarios, study.year_figures, strict=True), head + 1
    ):
        assert sheet.cells[row, LABEL].value == (study.case.scenarios[name].title or name)
        assert values_right_of(sheet, row, len(figures)) == [f.first_year_gain for f in figures]


def test_energies_by_year_are_named_and_follow_the_timeline() -> None:
    sheet, study = demo("Year"), marrowby_study()
    timeline = Timeline.of(study.case)
    kinds = ("power", "weighted_power", "premium", "fuel", "peak_fuel")
    for scenario, run in zip(study.case.scenarios, study.runs, strict=True):
        for index, traded in enumerate(run.traded):
            key = study.case.options[index].key
            for kind in kinds:
                name = name_of("energy", kind, scenario, key)
                if index == study.physics.years.baseline:
                    assert name not in sheet.names
                    continue
                assert corners(sheet.names[name])[1] == YEAR_ZERO
                values = named(sheet, name)
                assert values[: timeline.spend] == [0.0] * timeline.spend
                assert values[timeline.spend :] == list(getattr(traded.increment, f"{kind}_MWh"))


def test_tie_in_energies_are_named() -> None:
    sheet, study = demo("Year"), marrowby_study()
    for scenario, run in zip(study.case.scenarios, study.runs, strict=True):
        lost = run.traded[0].tie_in
        for kind in ("power", "weighted_power", "premium", "fuel", "peak_fuel"):
            assert named(sheet, name_of("tie", kind, scenario)) == [getattr(lost, f"{kind}_MWh")]
    assert named(sheet, "tie__power__central") != [0.0]


@pytest.mark.parametrize("study", [marrowby_study, three_stage_study])
def test_hours_and_months_add_up_to_the_year(study: Callable[[], Study]) -> None:
    figures = study().year_figures[study().reference]
    for index, figure in enumerate(figures):
        heat = counted_MW(study(), index, "heat_MW")
        assert sum(by_month(study(), heat)) == pytest.approx(figure.heat_MWh, rel=1e-12)
        peak = sum(by_month(study(), demanded_MW(study()) - heat))
        assert peak == pytest.approx(figure.peak_heat_MWh, rel=1e-9)
        curve = load_duration(study(), index)
        assert curve.hours.sum() == 8760.0
        assert curve.plant_MW @ curve.hours == pytest.approx(figure.heat_MWh, rel=1e-12)
        assert curve.peak_MW @ curve.hours == pytest.approx(figure.peak_heat_MWh, rel=1e-9)
        demand = curve.plant_MW + curve.peak_MW
        assert (np.diff(demand) <= 1e-9).all()


def test_monthly_extra_power_on_the_sheet_adds_up() -> None:
    sheet, study = demo("Year"), marrowby_study()
    totals = rows_labelled(sheet, "Year")
    figures = study.year_figures[study.reference]
    extra = [sheet.cells[totals[-1], TOTAL + i].value for i in range(len(figures))]
    assert extra == pytest.approx([f.extra_power_MWh for f in figures], rel=1e-9, abs=1e-6)


# --- hours ------------------------------------------------------------------------------------------------


def test_hours_are_those_that_were_read() -> None:
    sheet, study = demo("Hours"), marrowby_study()
    hours = study.hours
    heads = [sheet.cells[HEADER_ROW, col].value for col in range(1, 7)]
    assert heads == ["time", "heat_MW", "outdoor_C", "supply_C", "return_C", "power_price"]
    rows = range(FIRST_ROW, FIRST_ROW + 8760)
    assert [np.datetime64(str(sheet.cells[row, 1].value), "h") for row in rows] == list(hours.time)
    for col, values in enumerate((hours.heat_MW, hours.outdoor_C, hours.supply_C, hours.return_C), 2):
        assert values is not None
        assert [sheet.cells[row, col].value for row in rows] == values.tolist()
    assert max(row for row, _ in sheet.cells) == rows[-1]
    assert study.loaded.hours_sha256 in text_of(sheet)
    assert study.loaded.hours_path.name in text_of(sheet)


def test_hours_print_no_ream() -> None:
    for sheet in (demo("Hours"), hours_sheet(three_stage_study())):
        assert corners(sheet.printing.area)[2] == FIRST_ROW + 23  # the first day as a sample


def test_longer_series_are_named_only() -> None:
    study = marrowby_study()
    hours = replace(study.hours, number_of_years=2)
    sheet = hours_sheet(replace(study, loaded=replace(study.loaded, hours=hours)))
    assert max(row for row, _ in sheet.cells) < FIRST_ROW
    assert corners(sheet.printing.area)[2] < FIRST_ROW
    assert "sample" not in text_of(sheet)
    assert study.loaded.hours_sha256 in text_of(sheet)
    assert hours.heat_MW is not None
    assert sheet.cells[STATISTICS_ROW, 2].value == pytest.approx(hours.heat_MW.mean(), rel=1e-12)
    assert not any(cell.formula for cell in sheet.cells.values())


def test_hours_without_prices_have_no_column_of_them() -> None:
    assert "power_price" not in text_of(hours_sheet(three_stage_study()))


# --- checks and cautions ----------------------------------------------------------------------------------


def test_every_check_is_listed() -> None:
    sheet, study = demo("Checks"), marrowby_study()
    for check in study.checks:
        (row,) = rows_labelled(sheet, title_of(study.case, check))
        assert sheet.cells[row, 2].value == ("OK" if check.passed else "LOOK")
        for col, value in ((VALUE, check.value), (LIMIT, check.limit)):
            shown = sheet.cells[row, col].value
            assert shown == "–" if value is None else shown == pytest.approx(value, rel=0.05)
        assert str(sheet.cells[row, SAYS].value).lower() == plainer(check).lower()
        assert bool(sheet.cells[row, OVER].value) == (not check.passed and check.limit is not None)
        assert bool(unit_of(check)) == (check.value is not None)
    assert named(sheet, "checks_total") == [len(study.checks)]
    assert named(sheet, "checks_passed") == [sum(check.passed for check in study.checks)]


def test_checks_tell_units_and_by_how_much_a_limit_is_exceeded() -> None:
    moist = Check("moisture, two-stage", False, 0.1512, 0.12, "x")
    assert (unit_of(moist), over(moist, "%")) == ("%", "26 %")
    assert over(replace(moist, value=0.1206), "%") == "0.5 %"
    assert over(replace(moist, passed=True, value=0.11), "%") == ""
    drain = Check(
        "drain into stage 1, a", False, 4.0, 0.0, "colder shell, K: it still flashes; provide for it"
    )
    assert (unit_of(drain), over(drain, "K")) == ("K", "4 K")
    assert plainer(drain) == "colder shell: it still flashes; size nozzle and vent for flash steam"
    live = Check("live steam of the steady test", True, 0.01, 0.03, "x")
    assert (unit_of(live), unit_of(replace(live, name="live steam at the design point"))) == ("%", "kg/s")
    assert over(Check("comparison with meters", False, None, None, "x"), "") == ""
    said = text_of(demo("Checks"))
    assert "Greatest volume flow through the exhaust, at 2025" in said
    assert "Greatest duty of the condenser, at 2025" in said


def test_checks_name_options_and_items_as_people_do_and_hours_by_the_clock() -> None:
    study = marrowby_study()
    about = {check.name: title_of(study.case, check) for check in study.checks}
    assert about["moisture, two-stage"] == "Moisture, “Two stages”"
    assert about["drain into stage 1, two-stage-subcooled"] == (
        "Drain into stage 1, “Two stages, drain cooler”"
    )
    bought = Check("capital, two-stage, condenser", False, None, None, "x", "two-stage", "condenser")
    assert title_of(study.case, bought) == "Capital, “Two stages”, “New condenser with vacuum unit”"
    keys = [option.key for option in study.case.options if "-" in option.key]
    text = text_of(demo("Checks"))
    assert keys
    assert not [key for key in keys if re.search(rf"(?<![\w-]){key}(?![\w-])", text)]
    said = [check.message for check in study.checks if check.name.startswith("moisture")]
    assert all(re.search(r", at (2025-\d\d-\d\d \d\d:00|the design point); ", one) for one in said)


def test_checks_count_a_failure() -> None:
    study = marrowby_study()
    bad = tuple(replace(check, passed=False) for check in study.checks)
    good = tuple(replace(check, passed=True) for check in study.checks)
    assert named(checks_sheet(replace(study, checks=bad)), "checks_passed") == [0]
    assert named(checks_sheet(replace(study, checks=bad)), "checks_overall") == ["LOOK"]
    assert named(checks_sheet(replace(study, checks=good)), "checks_overall") == ["OK"]


def test_cautions_say_what_must_be_said() -> None:
    sheet = demo("Cautions")
    text = text_of(sheet)
    for must in (
        "pre-feasibility",
        "no investment advice",
        "licensed engineers",
        "thrust",
        "critical speeds",
        "overspeed",
        "tube rupture",
        "source of water to the turbine",
        "flashing of drains",
        "eat storage",
        "start and stop costs",
        "balancing and reserve markets",
        "not compared with metered",
        "grid operator",
        "above 12%",
    ):
        assert must in re.sub(r"\s+", " ", text), must
    assert sheet.printing.pages_tall == 1


def test_cautions_follow_the_study() -> None:
    flat = text_of(cautions_sheet(three_stage_study()))
    assert "no hourly power price" in flat
    assert "no hourly power price" not in text_of(demo("Cautions"))
    failing = sum(not check.passed for check in marrowby_study().checks)
    assert f"{failing} of its {len(marrowby_study().checks)} checks" in text_of(demo("Cautions"))
