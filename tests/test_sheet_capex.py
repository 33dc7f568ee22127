"""The sheet of capital: it comes to Python's capital as written, and again after inputs were typed."""

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import pytest
from full_case import full_case
from libreoffice import Recalculated, differences, needs_libreoffice
from sheet_trial import Money, recalculated, value_of
from study_fixture import marrowby, marrowby_study

from appraise.capex import capital, estimate_class
from appraise.case.load import Case, case_from
from appraise.case.money import SIZE_NAMES
from appraise.case.paths import edited
from appraise.sizing import OptionSize, StageSize
from appraise.workbook.addresses import cells_in, ref
from appraise.workbook.capex import CHART_SERIES, capex_sheet
from appraise.workbook.cells import Sheet
from appraise.workbook.inputs import inputs_sheet
from appraise.workbook.naming import input_name, name_of

NOTHING = StageSize(1, False, **dict.fromkeys(SIZE_NAMES, 0.0))
SIZES = (
    OptionSize("single", (NOTHING,)),
    OptionSize(
        "two",
        (
            replace(NOTHING, new=True, area_m2=1500.0, condensate_pump_kW=20.0),
            replace(NOTHING, stage=2, area_m2=0.0),
        ),
    ),
)
INDEX = {"year": [2001, 2010, 2026], "value": [400.0, 550.0, 800.0]}


def rich_case(**capex: Any) -> Case:
    """Published and own correlations, parallel units, shares of shares, and spending that is avoided."""
    old = full_case()
    table = {
        "index": INDEX,
        "exchange": {"USD": 0.9},
        "multiplier": 1.1,
        "spend": [0.25, 0.75],
        "items": [
            *(
                {key: value for key, value in item.model_dump(exclude_unset=True).items()}
                for item in old.capex.items
            ),
            {"key": "permits", "name": "Permits", "share_of": ["rest", "works"], "share": 0.05},
            {"key": "repair", "name": "Repair", "amount": 5e4, "year": 2015, "only": ["single"]},
            {"key": "each", "name": "For each new stage", "amount": 7e3, "per": "new_stage"},
        ],
    }
    return old.model_copy(update={"capex": type(old.capex).model_validate(table | capex)})


def sheets_of(money: Money) -> list[Sheet]:
    return [inputs_sheet(money), capex_sheet(money)]  # type: ignore[arg-type]


def rich() -> Money:
    case = rich_case()
    return Money(case, capital(case, SIZES))


def assert_totals(sheets: list[Sheet], found: Recalculated, fresh: Money) -> None:
    """Every option's total, band and increment as a fresh run has them."""
    for one in fresh.capital:
        for name, expected in (
            ("capital_total", one.total),
            ("capital_low", one.low),
            ("capital_high", one.high),
            ("capital_increment", one.extra),
        ):
            value = value_of(sheets, found, name_of(name, one.option))
            assert value == pytest.approx(expected, rel=1e-12, abs=1e-6), (name, one.option)


# --- as written --------------------------------------------------------------------------------------------


@needs_libreoffice
def test_demo_comes_to_what_the_study_has(tmp_path) -> None:
    sheets = sheets_of(marrowby_study())  # type: ignore[arg-type]
    found = recalculated(sheets, tmp_path)
    assert differences(sheets, found) == []
    assert_totals(sheets, found, marrowby_study())  # type: ignore[arg-type]


@needs_libreoffice
def test_every_kind_of_item_comes_to_its_cost(tmp_path) -> None:
    money = rich()
    assert {item.basis for one in money.capital for item in one.items} == {
        "quotation",
        "correlation",
        "share",
    }
    assert max(item.units for one in money.capital for item in one.items) == 2
    assert money.capital[0].total > 0.0
    sheets = sheets_of(money)
    assert differences(sheets, recalculated(sheets, tmp_path)) == []


@needs_libreoffice
@pytest.mark.parametrize(
    ("index", "item"),
    [(None, {}), ({"year": [2026], "value": [107.0]}, {}), ({"year": [2030, 2031], "value": [1.0, 2.0]}, {})],
    ids=["no table", "one year", "table elsewhere"],
)
def test_money_of_the_price_year_needs_no_table(index, item, tmp_path) -> None:
    old = full_case().model_copy()
    items = [{"key": "works", "name": "Works", "amount": 1e5} | item]
    capex = {"items": items} | ({} if index is None else {"index": index})
    case = old.model_copy(update={"capex": type(old.capex).model_validate(capex)})
    money = Money(case, capital(case, SIZES))
    sheets = sheets_of(money)
    found = recalculated(sheets, tmp_path)
    assert differences(sheets, found) == []
    assert value_of(sheets, found, "capital_total__two") == 1e5


def test_a_case_without_items_has_its_names_and_no_chart() -> None:
    old = full_case()
    case = old.model_copy(update={"capex": type(old.capex)()})
    sheet = capex_sheet(Money(case, capital(case, SIZES)))  # type: ignore[arg-type]
    named = {cell.name: cell.value for cell in sheet.cells.values() if cell.name}
    assert named["capital_total__two"] == named["capital_increment__two"] == 0.0
    assert sheet.charts == ()


# --- after inputs were typed -------------------------------------------------------------------------------

TYPED: Mapping[str, Mapping[str, Any]] = {
    "amounts": {
        "capex.multiplier": 1.25,
        "capex.items.tail.amount": 1.2e6,
        "capex.items.contingency.share": 0.2,
        "capex.items.tail.low": -0.05,
        "capex.items.piping.high": 0.9,
    },
    "factors": {
        "capex.location_factor": 0.97,
        "capex.exchange.USD": 1.02,
        "capex.items.tail.year": 2023,
        "capex.items.civil.year": 2024,
    },
    "price year": {"study.price_year": 2025},
}


@needs_libreoffice
@pytest.mark.parametrize("typed", TYPED.values(), ids=TYPED.keys())
def test_demo_follows_its_inputs_as_a_fresh_run_does(typed: Mapping[str, Any], tmp_path) -> None:
    study = marrowby_study()
    data = marrowby().data
    for path, value in typed.items():
        data = edited(data, path, value)
    case = case_from(data)
    fresh = Money(case, capital(case, study.physics.sizes))
    sheets = sheets_of(study)  # type: ignore[arg-type]
    found = recalculated(sheets, tmp_path, {input_name(path): value for path, value in typed.items()})
    assert fresh.capital != study.capital
    assert_totals(sheets, found, fresh)


@needs_libreoffice
def test_index_and_avoided_spending_follow(tmp_path) -> None:
    """Index, a blank year filled in and price year, with published costs and a baseline that buys."""
    typed = {
        input_name("capex.index.value[1]"): 600.0,
        input_name("capex.items.each.year"): 2012,
        input_name("study.price_year"): 2020,
        input_name("capex.items.repair.amount"): 6e4,
    }
    money = rich()
    sheets = sheets_of(money)
    found = recalculated(sheets, tmp_path, typed)
    items = [item.model_dump(exclude_unset=True) for item in money.case.capex.items]
    for item in items:
        item |= {"each": {"year": 2012}, "repair": {"amount": 6e4}}.get(item["key"], {})
    case = rich_case(index=INDEX | {"value": [400.0, 600.0, 800.0]}, items=items)
    case = case.model_copy(update={"study": case.study.model_copy(update={"price_year": 2020})})
    assert_totals(sheets, found, Money(case, capital(case, SIZES)))


@needs_libreoffice
def test_spending_by_year_follows_the_shares(tmp_path) -> None:
    study = marrowby_study()
    sheets = sheets_of(study)  # type: ignore[arg-type]
    typed = {input_name("capex.spend[0]"): 0.6, input_name("capex.spend[1]"): 0.4}
    found = recalculated(sheets, tmp_path, typed | {input_name("study.first_year"): 2029})["Capex"]
    sheet = sheets[1]
    (top,) = (row for (row, _), cell in sheet.cells.items() if cell.value == "calendar year")
    assert [found[ref(top, col)] for col in (4, 5)] == [2027, 2028]
    names = [option.name for option in study.case.options if not option.baseline]
    extra = [
        one.extra
        for one, option in zip(study.capital, study.case.options, strict=True)
        if not option.baseline
    ]
    for row, (name, amount) in enumerate(zip(names, extra, strict=True), top + 2):
        assert found[ref(row, 1)] == name
        assert found[ref(row, 4)] == pytest.approx(0.6 * amount)
        assert found[ref(row, 5)] == pytest.approx(0.4 * amount)


# --- chart and words ---------------------------------------------------------------------------------------


def test_chart_holds_the_whole_capital_in_few_series() -> None:
    study = marrowby_study()
    sheet = capex_sheet(study)
    (chart,) = sheet.charts
    assert chart.stacked
    assert len(chart.series) <= CHART_SERIES
    for number, one in enumerate(study.capital):
        parts = [sheet.cells[cells_in(series.values)[number]].value for series in chart.series]
        assert sum(float(part) for part in parts) == pytest.approx(one.total)  # type: ignore[arg-type]


def test_sources_stages_and_doubts_are_told() -> None:
    money = rich()
    sheet = capex_sheet(money)  # type: ignore[arg-type]
    texts = [cell.value for cell in sheet.cells.values() if isinstance(cell.value, str)]
    assert "Shell, stage 1" in texts
    assert any(text.startswith("a quotation") for text in texts)
    assert any("Turton" in text for text in texts)
    assert any("2 equal parallel units" in text for text in texts)
    assert any("an order of magnitude only" in text for text in texts)
    for one in money.capital:
        grade, words = estimate_class(one)
        assert any(text.endswith(words) for text in texts), grade
