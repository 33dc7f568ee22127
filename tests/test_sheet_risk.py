"""Break-even follows the inputs; Draws and Design choice say what the run found, and what it means."""

from dataclasses import replace
from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st
from libreoffice import Recalculated, differences, needs_libreoffice, same
from sheet_money import cached_small_study, fresh, money_sheets, small_study
from sheet_trial import recalculated
from study_fixture import marrowby_study

from appraise.capex import ItemCost, OptionCapital
from appraise.case.money import Distribution
from appraise.draws import METHOD_LIMIT, MethodError
from appraise.grid import BreakEvenGrid, break_even_grid
from appraise.measures import break_even_price
from appraise.optimum import Curve, DesignChoice
from appraise.study import Study
from appraise.workbook import book
from appraise.workbook.break_even import TITLE, break_even_sheet
from appraise.workbook.cells import LABEL, TOTAL, UNIT, YEAR_ZERO, Sheet, ref
from appraise.workbook.design_choice import design_choice_sheet
from appraise.workbook.design_words import Stated, caveat_of, cost_words, curve_words, joint_words
from appraise.workbook.draws import draws_sheet
from appraise.workbook.draws_figures import WANTED_BINS, bins_of, round_step
from appraise.workbook.draws_leaning import below_stated, leaning_badly, lower_words, slopes
from appraise.workbook.draws_words import distribution_words, method_words, option_words
from appraise.workbook.faults import faults_of
from appraise.workbook.naming import CHOSEN_SCENARIO, input_name

pytestmark = pytest.mark.filterwarnings("ignore:Unable to read chart:UserWarning")

DRAWN: list[dict[str, Any]] = [
    {
        "label": "Tail",
        "path": "tail.efficiency",
        "distribution": {"kind": "normal", "mean": 0.79, "standard_deviation": 0.02},
    },
    {
        "label": "Approach",
        "path": "plant.condenser.terminal_difference_K",
        "distribution": {"kind": "pert", "low": 2.0, "mode": 3.0, "high": 6.0},
    },
    {
        "label": "Power",
        "path": "scenario.power",
        "distribution": {"kind": "lognormal", "p10": 0.8, "p90": 1.25},
    },
    {
        "label": "Capital",
        "path": "capex.multiplier",
        "distribution": {"kind": "pert", "low": 0.85, "mode": 1.0, "high": 1.4},
    },
]
PAIR = {"between": ["Power", "Capital"], "rank": 0.3}


@cache
def drawn_study() -> Study:
    """The small case with drivers that move plant and money, drawn 300 times."""
    draws = {"number": 300, "seed": 7, "correlations": [PAIR]}
    with TemporaryDirectory() as folder:
        return small_study(Path(folder), drivers=DRAWN, draws=draws)


def place_of(sheet: Sheet, text: str, col: int = LABEL) -> int:
    """Row of a text in a column."""
    return next(row for (row, c), cell in sheet.cells.items() if c == col and cell.value == text)


def text_of(sheet: Sheet) -> str:
    """All texts of a sheet."""
    return "\n".join(str(cell.value) for cell in sheet.cells.values() if isinstance(cell.value, str))


# -- Break-even


def grid_top(sheet: Sheet) -> int:
    """First row of the only grid."""
    return place_of(sheet, "Power price down")


def wrong_cells(found: Recalculated, top: int, grid: BreakEvenGrid) -> list[str]:
    """Cells of the recalculated grid, its heads included, that are not Python's."""
    cells, wrong = found[TITLE], []
    for i in range(len(grid.factors)):
        for where, expected in (
            (ref(top + i, TOTAL), grid.power_price[i]),
            (ref(top - 1, YEAR_ZERO + i), grid.fuel_price[i]),
        ):
            if not same(cells[where], float(expected)):
                wrong.append(f"{where} is {cells[where]}, expected {expected}")
        for j in range(len(grid.factors)):
            where, expected = ref(top + i, YEAR_ZERO + j), grid.npv[j, i]
            if not same(cells[where], float(expected)):
                wrong.append(f"{where} is {cells[where]}, expected {expected}")
    return wrong


@needs_libreoffice
@pytest.mark.parametrize("scenario", ["central", "low"])
def test_the_grid_follows_rate_tax_prices_and_the_chosen_scenario(scenario: str, tmp_path: Path) -> None:
    study = cached_small_study()
    sheets = [*money_sheets(study), break_even_sheet(study)]
    edits = {
        "study.reference_scenario": scenario,
        "finance.discount_rate": 0.04,
        "finance.tax_rate": 0.31,
        "scenarios.central.fuel.change_per_year": 0.03,
        "scenarios.low.fuel": 15.0,
        "capex.multiplier": 0.8,
    }
    typed: dict[str, object] = {input_name(path): value for path, value in edits.items()}
    found = recalculated(sheets, tmp_path, typed | {CHOSEN_SCENARIO: scenario})
    now = fresh(study, edits)
    flow = now.runs[now.reference].flows[1]
    grid, top = break_even_grid(flow), grid_top(sheets[-1])
    assert not np.allclose(grid.npv, study.grids[0].npv, rtol=0.01)
    assert wrong_cells(found, top, grid) == []
    even = place_of(sheets[-1], "Zero at a power price of")
    for i, factor in enumerate(grid.factors):
        price = found[TITLE][ref(even, YEAR_ZERO + i)]
        assert isinstance(price, float)
        scale = price / flow.prices.power[0]
        npv = np.interp(scale, grid.factors, grid.npv[i]) if 0.5 < scale < 1.5 else 0.0
        assert npv == pytest.approx(0.0, abs=1.0)
        if factor == 1.0:
            assert price == pytest.approx(break_even_price(flow, flow.prices.power, flow.lines.power))
    said = str(found[TITLE][ref(place_of(sheets[-1], "Net present value as stated") - 1, LABEL)])
    assert said.startswith("Pays" if flow.npv > 0 else "Does not pay")


@needs_libreoffice
def test_every_formula_of_the_demo_agrees_in_the_whole_book(tmp_path: Path) -> None:
    study = marrowby_study()
    sheets = book.sheets_of(study)
    new = [sheet for sheet in sheets if sheet.title in (TITLE, "Draws", "Design choice")]
    found = recalculated(sheets, tmp_path)
    assert sum(1 for cell in new[0].cells.values() if cell.formula) > 121 * len(study.grids)
    assert differences(new, found) == []


@needs_libreoffice
def test_an_option_whose_power_is_worth_nothing_has_no_line_of_zero(tmp_path: Path) -> None:
    scenarios = {"central": {"title": "Free power", "power": 0.0, "fuel": 20.0, "peak_fuel": 40.0}}
    study = small_study(tmp_path, scenarios=scenarios, drivers=[])
    sheets = [*money_sheets(study), break_even_sheet(study)]
    sheet = sheets[-1]
    even = place_of(sheet, "Zero at a power price of")
    assert sheet.cells[even, YEAR_ZERO].value == "n/a"
    assert "the power price does not decide" in text_of(sheet)
    assert differences([sheet], recalculated(sheets, tmp_path)) == []


def test_the_chart_has_a_line_for_each_option_and_the_prices_as_stated() -> None:
    study = marrowby_study()
    (chart,) = break_even_sheet(study).charts
    names = [option.name for option in study.case.options if not option.baseline]
    assert [series.label for series in chart.series] == [*names, "prices as stated"]
    assert (chart.series[-1].line, chart.series[-1].markers) == (False, True)
    assert len({series.slot for series in chart.series}) == len(chart.series)


# -- Draws


def test_draws_shows_the_figures_of_the_run() -> None:
    study = drawn_study()
    risk, sheet = study.risk, draws_sheet(study)
    assert risk is not None
    assert sheet is not None
    one = risk.options[1]
    assert one.number == 300
    for label, value in (
        ("Mean", one.mean),
        ("Standard deviation", one.standard_deviation),
        ("P5: one draw in twenty is lower", np.percentile(one.npv, 5)),
        ("P95: one draw in twenty is higher", np.percentile(one.npv, 95)),
        ("Standard error of the mean, by the number", one.standard_deviation / np.sqrt(300)),
        ("Chance of a positive value", (one.npv > 0).mean()),
        ("  its standard error, by the number", (one.npv > 0).std() / np.sqrt(300)),
        ("Number of draws", 300),
    ):
        assert sheet.cells[place_of(sheet, label), TOTAL + 1].value == pytest.approx(value), label
    top = place_of(sheet, "Driver, strongest first")
    ranks = [(sheet.cells[top + i, LABEL].value, sheet.cells[top + i, UNIT].value) for i in range(1, 5)]
    assert ranks == list(one.rank_correlation)
    sizes = [abs(rank) for _, rank in one.rank_correlation]
    assert sizes == sorted(sizes, reverse=True)
    said = text_of(sheet)
    assert "Drawn together: Power with Capital, rank correlation 0.3." in said
    assert "PERT: low 2, mode 3, high 6" in said
    row = place_of(sheet, "Approach")
    drawn = risk.values[:, risk.labels.index("Approach")]
    assert sheet.cells[row, TOTAL + 2].value == pytest.approx(np.median(drawn))
    assert sheet.cells[row, UNIT].value == "K"
    assert sheet.cells[place_of(sheet, "Power"), UNIT].value == "× path"
    assert all(not cell.formula for cell in sheet.cells.values())


def test_curve_and_histogram_hold_all_draws_and_hatch_the_losses() -> None:
    study = drawn_study()
    risk, sheet = study.risk, draws_sheet(study)
    assert risk is not None
    assert sheet is not None
    npv = risk.options[1].npv
    curve, bars, histogram = sheet.charts
    top = place_of(sheet, "Share of draws below") + 1
    assert curve.series[0].values == f"A{top}:A{top + 100}"
    for share in (0, 25, 50, 100):
        assert sheet.cells[top + share, LABEL].value == share / 100.0
        assert sheet.cells[top + share, TOTAL].value == pytest.approx(np.quantile(npv, share / 100.0))
    first = place_of(sheet, "Two stages: draws by net present value") + 2
    last = max(row for row, _ in sheet.cells)
    counts = [[sheet.cells[row, col].value or 0 for row in range(first, last + 1)] for col in (3, 4)]
    assert sum(map(int, counts[0])) == (npv < 0).sum() > 0
    assert sum(map(int, counts[1])) == (npv >= 0).sum() > 0
    assert [(one.values, one.slot) for one in histogram.series] == [
        (f"C{first}:C{last}", 1),
        (f"D{first}:D{last}", 0),
    ]
    assert (histogram.gap, histogram.stacked) == (0, True)
    assert bars.horizontal


@pytest.mark.parametrize(("shift", "sides"), [(-1e9, ["below zero"]), (1e9, ["zero and above"])])
def test_a_histogram_of_losses_or_gains_alone_has_one_kind_of_bars(shift: float, sides: list[str]) -> None:
    study = drawn_study()
    assert study.risk is not None
    options = tuple(replace(one, npv=one.npv + shift) for one in study.risk.options)
    sheets = book.sheets_of(replace(study, risk=replace(study.risk, options=options)))
    (sheet,) = [sheet for sheet in sheets if sheet.title == "Draws"]
    assert [series.label for series in sheet.charts[-1].series] == sides
    assert list(faults_of(sheets)) == []


@example(np.array([0.0, 5e-324]))
@example(np.array([-1.0, *[1e7] * 600, 1e7 + 1e-3]))
@example(np.array([*[-1e6] * 600, 3.0]))
@example(np.full(7, 12_345.0))
@given(
    st.lists(st.floats(-1e7, 1e7, allow_subnormal=False), min_size=1, max_size=200).map(np.array),
)
def test_bins_hold_every_value_and_never_mix_losses_and_gains(values: np.ndarray[Any, Any]) -> None:
    bins = bins_of(values)
    edges = np.array(bins.edges)
    assert sum(bins.counts) == values.size
    assert len(bins.counts) <= WANTED_BINS + 2
    below = sum(count for count, high in zip(bins.counts, edges[1:], strict=True) if high <= 0.0)
    assert below == (values < 0.0).sum()
    assert np.allclose(np.diff(edges), bins.step)
    assert np.allclose(edges / bins.step, np.round(edges / bins.step))
    for i in range(1, len(bins.counts) - 1):
        inside = (np.floor(values / bins.step) == np.round(edges[i] / bins.step)).sum()
        assert bins.counts[i] == inside


@pytest.mark.parametrize(
    ("step", "rounded"), [(1.0, 1.0), (1.1, 2.0), (230.0, 250.0), (0.6, 1.0), (3e4, 5e4)]
)
def test_steps_are_round(step: float, rounded: float) -> None:
    assert round_step(step) == pytest.approx(rounded)


def test_what_the_draws_mean_is_said_in_words() -> None:
    exact = MethodError(12, 0.5 * METHOD_LIMIT, 0.012, 0.0, 40, 4380)
    assert "12 draws cannot check a chance finer than 8 points (`--verify 200` would)." in method_words(exact)
    assert "finer than 0 points." in method_words(replace(exact, checked=400))
    rough = replace(exact, root_mean_square=2.0 * METHOD_LIMIT)
    assert "above the limit" in method_words(rough)
    assert "off by 2.0 %" in method_words(rough)
    assert "computed in full" in method_words(None)
    risk = drawn_study().risk
    assert risk is not None
    option = replace(
        risk.options[1], chance_npv_positive=0.874, chance_best=0.6, p5=-123_400.0, p95=2_345_600.0
    )
    assert option_words("Two stages", option, False, "EUR") == (
        "“Two stages” is worth more than the plant as it stands in 87 % of the draws and best of all in "
        "60 %; nine draws in ten lie between −123 and 2,346 thousand EUR."
    )
    assert "in those no option pays" in option_words("As it is", option, True, "EUR")
    normal = Distribution(kind="normal", mean=-0.5, standard_deviation=0.02)
    assert distribution_words(normal) == "normal: mean −0.5, standard deviation 0.02"
    lognormal = Distribution(kind="lognormal", p10=0.8, p90=1.25)
    assert distribution_words(lognormal) == "lognormal: P10 0.8, P90 1.25"


def test_a_mean_below_the_value_as_stated_is_explained_by_what_leans_to_the_bad_side() -> None:
    study = drawn_study()
    risk = study.risk
    assert risk is not None
    one = replace(risk.options[1], mean=100.0, standard_error=10.0)
    assert [below_stated(one, stated) for stated in (119.0, 121.0)] == [False, True]
    drivers = [driver for driver in study.case.drivers if driver.distribution is not None]
    leaning = leaning_badly(study.case, risk, drivers, one)
    slope = dict(zip(risk.labels, slopes(risk.values, one.npv), strict=True))
    assert slope["Capital"] < 0.0 < slope["Tail"]
    assert "Capital" not in {driver.label for driver in leaning}  # stated at 1.1, more than is drawn
    dearer = risk.values.copy()
    dearer[:, risk.labels.index("Capital")] += 0.5
    leaning = leaning_badly(study.case, replace(risk, values=dearer), drivers, one)
    capital = leaning[0]
    assert (capital.label, capital.stated) == ("Capital", 1.1)
    assert capital.loss == pytest.approx(slope["Capital"] * (1.1 - capital.median), rel=1e-6)
    assert all(driver.loss > 0.0 for driver in leaning)
    words = lower_words(["A", "B"], leaning)
    assert words.startswith("The mean of “A” and “B” is below the value as stated, because the ranges lean")
    assert "medians: Capital at 1." in words
    assert "(stated 1.1)" in words
    assert lower_words(["A", "B", "C"], leaning).startswith("The mean of “A”, “B” and “C” is below")
    assert lower_words(["A"], leaning).startswith("The mean of “A” is below")
    assert lower_words(["A"], ()) == ""


def test_slopes_are_those_of_each_driver_alone_though_drawn_together() -> None:
    random = np.random.default_rng(1)
    first = random.normal(size=500)
    second = 0.9 * first + 0.3 * random.normal(size=500)
    values = np.column_stack([first, 1e3 * second, np.full(500, 4.0)])
    found = slopes(values, 7.0 + 3.0 * first - 2.0 * second)
    assert np.corrcoef(values[:, 1], 3.0 * first - 2.0 * second)[0, 1] > 0.5
    assert found == pytest.approx([3.0, -2e-3, 0.0])


# -- Design choice

STATED = Stated(3.0, 0.5, 2, "cascade", 1.0, 100_000.0)


def curve(npv: list[float | None], flat: tuple[float, float] | None) -> Curve:
    """A curve over the terminal difference."""
    values = (1.0, 2.0, 3.0, 4.0, 5.0)[: len(npv)]
    built = [(worth, value) for worth, value in zip(npv, values, strict=True) if worth is not None]
    best_npv, best = max(built) if built else (None, None)
    reasons = tuple(None if worth is not None else "too wet" for worth in npv)
    return Curve(
        "Difference", "terminal_difference_K", "K", values, tuple(npv), reasons, best, best_npv, flat
    )


@pytest.mark.parametrize(
    ("npv", "flat", "said"),
    [
        (
            [80e3, 100.5e3, 100e3, 90e3],
            (1.8, 3.2),
            "on the flat top of the curve, 1.8 K to 3.2 K: nothing to",
        ),
        (
            [80e3, 150e3, 100e3, 90e3],
            (1.9, 2.1),
            "2.0 K instead of 3.0 K would add 50 thousand EUR before costs; from 1.9",
        ),
        (
            [150e3, 120e3, 100e3],
            (1.0, 1.1),
            "before costs, and more may lie beyond that last value that was tried or can be built",
        ),
        ([80e3, 100.5e3, 100e3], None, "nothing tried is better by more than 1 %"),
        ([-80e3, -50e3, -60e3], None, "does not pay at any value tried; 2.0 K loses least"),
        ([None, None], None, "none of the values can be built"),
    ],
)
def test_a_curve_is_read_for_the_option_as_stated(
    npv: list[float | None], flat: tuple[float, float] | None, said: str
) -> None:
    stated = STATED if npv[0] is None or npv[0] > 0 else replace(STATED, npv=-60e3)
    assert said in curve_words(curve(npv, flat), stated, "EUR", " before costs")


def item(name: str, basis: str, size: tuple[str, float] | None = None) -> ItemCost:
    """An item of capital."""
    return ItemCost(name, name, basis, 1e5, 8e4, 1.2e5, size, 1, 2026, "EUR", 1.0, 1.0, 1.0, None, "", "", ())


def test_costs_that_do_not_follow_the_size_are_named() -> None:
    def of(*items: ItemCost) -> OptionCapital:
        return OptionCapital("two-stage", items, 1.0, 1e5, 8e4, 1.2e5, 0.0)

    tail, shell = item("Tail", "quotation"), item("Shell", "correlation", ("condensing_area_m2", 500.0))
    share = item("Setting", "share")
    assert "none comes from a correlation" in cost_words(of(tail))
    assert "No item is a fixed amount" in cost_words(of(shell, share))
    both = cost_words(of(tail, shell, share))
    assert "by correlation: Shell; shares of other items move with those: Setting" in both
    assert "whatever its size: Tail." in both
    assert caveat_of("existing_area_factor", of(shell)) == caveat_of("shares", of(shell, share)) == ""
    later = of(tail, replace(shell, stage=2))
    assert "before the price of that surface" in caveat_of("existing_area_factor", later)
    assert caveat_of("shares", later) == " at costs that do not all follow the size"
    pump = replace(shell, size=("condensate_pump_kW", 5.0))
    assert "without a cost of the route" in caveat_of("drain_route", of(shell))
    assert caveat_of("drain_route", of(pump)) == ""


def with_blank(study: Study) -> tuple[Study, DesignChoice]:
    """The study with the first terminal difference and the first corner of the table not built."""
    choice = study.design_choice
    assert choice is not None
    ttd = choice.curves[0]
    cut = replace(ttd, npv=(None, *ttd.npv[1:]), reason=("too wet\n at the end", *ttd.reason[1:]))
    rows = ((None, *choice.joint_npv[0][1:]), *choice.joint_npv[1:])
    changed = replace(choice, curves=(cut, *choice.curves[1:]), joint_npv=rows)
    return replace(study, design_choice=changed), changed


def test_design_choice_marks_best_and_stated_and_leaves_blank_what_cannot_be_built() -> None:
    study, choice = with_blank(marrowby_study())
    sheet = design_choice_sheet(study)
    assert sheet is not None
    ttd = choice.curves[0]
    heads = [row for (row, col), cell in sheet.cells.items() if col == LABEL and cell.value == ttd.label]
    row = heads[-1]  # of the points; the first is in the summary
    for i, (value, npv) in enumerate(zip(ttd.values, ttd.npv, strict=True)):
        assert sheet.cells[row, TOTAL + i].value == value
        assert (
            sheet.cells[row + 1, TOTAL + i].value == npv
        )  # an empty cell is a gap, a text would be drawn as 0
        mark = sheet.cells.get((row + 3, TOTAL + i))
        assert ("best" in str(mark.value) if mark else False) == (value == ttd.best)
    assert sheet.cells[row + 2, TOTAL].value == "not built"
    said = text_of(sheet)
    assert "Not built at 1.0 K: too wet at the end." in said
    assert "Not built at 1: one stage has no tail section" in said
    place = [option.key for option in study.case.options].index(choice.option)
    caveat = caveat_of("shares", study.capital[place])
    assert caveat
    assert joint_words(choice, study.case.study.currency, caveat) in said
    difference, share = sheet.charts
    assert difference.series[0].values == f"C{row + 1}:M{row + 1}"
    assert difference.series[0].x == f"C{row}:M{row}"
    assert share.title == choice.curves[1].label
    assert all(not cell.formula for cell in sheet.cells.values())


def test_sheets_of_what_the_study_does_not_have_are_left_out() -> None:
    study = marrowby_study()
    titles = [sheet.title for sheet in book.sheets_of(study)]
    start = titles.index("Tornado")
    assert titles[start : start + 5] == ["Tornado", "Break-even", "Draws", "Design choice", "Checks"]
    without = [sheet.title for sheet in book.sheets_of(replace(study, risk=None, design_choice=None))]
    assert without == [title for title in titles if title not in ("Draws", "Design choice")]
