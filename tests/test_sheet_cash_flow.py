"""The Cash flow sheet follows its inputs as Python does."""

import re
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from libreoffice import differences, needs_libreoffice, same
from sheet_money import cached_small_study, followed, money_sheets, small_study, wrong_measures
from sheet_trial import recalculated, value_of
from study_fixture import marrowby_study

from appraise.cash_flow import LINE_NAMES
from appraise.study import Study
from appraise.workbook.calendar_rows import CALENDAR_TOP
from appraise.workbook.cash_flow import cash_flow_sheet
from appraise.workbook.cash_flow_marks import crossings
from appraise.workbook.cash_flow_measures import LOWEST_RATE, NOTHING
from appraise.workbook.cells import YEAR_ZERO, column
from appraise.workbook.naming import Timeline

# openpyxl cannot read back the date axis that LibreOffice writes for the load duration; no cell is touched.
pytestmark = [needs_libreoffice, pytest.mark.filterwarnings("ignore:Unable to read chart:UserWarning")]


def check(study: Study, folder: Path, edits: Mapping[str, Any], typed: Mapping[str, object]) -> None:
    """Type inputs, recalculate, and compare every measure and line with Python on the edited case."""
    seen = followed(study, folder, edits, typed)
    new = seen.fresh
    assert wrong_measures(seen) == []
    for index, option in enumerate(new.case.options):
        if option.baseline:
            continue
        flow = new.runs[new.reference].flows[index]
        for line in LINE_NAMES:
            expected = np.zeros(Timeline.of(study.case).number)
            expected[: flow.net.size] = getattr(flow.lines, line)
            assert seen.row("line", line, option.key) == pytest.approx(expected, rel=1e-9, abs=1e-6), line


def test_every_formula_of_the_demo_agrees_with_python(tmp_path: Path) -> None:
    sheets = money_sheets(marrowby_study())
    found = recalculated(sheets, tmp_path)
    assert differences(sheets, found) == []


def test_every_formula_of_the_small_case_agrees_with_python(tmp_path: Path) -> None:
    sheets = money_sheets(cached_small_study())
    found = recalculated(sheets, tmp_path)
    assert differences(sheets, found) == []


@pytest.mark.parametrize(
    "edits",
    [
        {"finance.discount_rate": 0.09, "finance.tax_rate": 0.3, "capex.multiplier": 1.25},
        {"study.reference_scenario": "dear_fuel", "study.years": 12, "study.first_year": 2029},
        {
            "scenarios.central.fuel.change_per_year": 0.02,
            "scenarios.central.power_premium.years": 5,
            "finance.basis": "nominal",
            "finance.depreciation.method": "declining_balance",
            "finance.depreciation.rate": 0.25,
            "finance.grant": 150000.0,
            "finance.reinvestment_rate": 0.03,
        },
    ],
    ids=["rate, tax, capital", "scenario, years", "prices, basis, depreciation, grant"],
)
def test_the_demo_follows_changed_inputs(edits: Mapping[str, Any], tmp_path: Path) -> None:
    check(marrowby_study(), tmp_path, edits, {})


@pytest.mark.parametrize(
    ("edits", "typed"),
    [
        ({"study.years": 1}, {}),
        ({"study.years": 4, "finance.basis": "real", "finance.inflation": 0.04}, {}),
        (
            {"scenarios.central.power.value": [80.0, 60.0, 150.0], "capex.spend": [0.9, 0.1]},
            {"in_scenarios_central_power_value_1": 60.0}
            | {"in_scenarios_central_power_value_2": 150.0}
            | {"in_capex_spend_0": 0.9, "in_capex_spend_1": 0.1},
        ),
        ({"study.reference_scenario": "low", "finance.grant_reduces_depreciation": False}, {}),
        ({"finance.depreciation.method": "straight_line", "finance.depreciation.years": 12}, {}),
        ({"capex.multiplier": 0.0, "capex.tie_in.multiplier": 0.0}, {}),
    ],
    ids=[
        "one year",
        "four years, real",
        "price list, spend",
        "other scenario",
        "straight line",
        "nothing spent",
    ],
)
def test_the_small_case_follows_changed_inputs(
    edits: Mapping[str, Any], typed: Mapping[str, object], tmp_path: Path
) -> None:
    check(cached_small_study(), tmp_path, edits, typed)


def test_depreciation_by_table_and_none_and_a_case_without_extras(tmp_path: Path) -> None:
    table = {"method": "table", "shares": [0.5, 0.2, 0.1]}
    finance = {"discount_rate": 0.05, "tax_rate": 0.2, "depreciation": table}
    plain = {"items": [{"key": "tail", "name": "Tail turbine", "amount": 5.0e6}]}
    for number, tables in enumerate(
        (
            {"finance": finance, "capex": plain, "opex": {}, "drivers": []},
            {"finance": {"discount_rate": 0.05, "tax_rate": 0.2}, "capex": {"items": []}},
        )
    ):
        folder = tmp_path / str(number)
        folder.mkdir()
        study = small_study(folder, **tables)
        sheets = money_sheets(study)
        found = recalculated(sheets, folder / "book")
        assert differences(sheets, found) == []
        told, shown = study.measures[study.reference][1], value_of(sheets, found, "irr_reason__two_stage")
        assert same(shown, told.irr_reason or "")


def test_marks_stand_where_the_running_sum_comes_back() -> None:
    assert crossings(np.array([-100.0, 50.0, 50.0, 50.0]), 1) == ["", "", 2.0, ""]
    assert crossings(np.array([-100.0, -100.0, 400.0, -300.0, 200.0]), 2) == ["", "", 0.5, "", 2.5]
    assert crossings(np.array([-100.0, 10.0]), 1) == ["", ""]


def test_formulas_of_a_row_are_one_formula() -> None:
    """The same text in every column once the column's own letters are taken out."""
    sheet = cash_flow_sheet(cached_small_study())
    number = Timeline.of(cached_small_study().case).number
    for row in {row for row, _ in sheet.cells}:
        texts = set()
        for t in range(number):
            cell = sheet.cells.get((row, YEAR_ZERO + t))
            if cell is None or not cell.formula or row < CALENDAR_TOP:
                continue
            here, left = column(YEAR_ZERO + t), column(YEAR_ZERO + t - 1)
            text = re.sub(rf"(?<![A-Z$]){here}(?=\$?\d)", "@", cell.formula)
            texts.add(re.sub(rf"N\({left}(?=\d)", "N(<", text))
        assert len(texts) <= 1, (row, texts)


@pytest.mark.parametrize("multiplier", [0.15, 100.0, 1000.0])
def test_rates_of_return_far_from_the_usual(multiplier: float, tmp_path: Path) -> None:
    """Above 100 %, deep below zero, and below −50 %, where the sheet has none on purpose."""
    plain = ("opex.fixed_share_of_capex", "opex.fixed_per_year", "finance.tax_rate", "finance.residual_share")
    edits = {"capex.multiplier": multiplier, **dict.fromkeys(plain, 0.0)}
    seen = followed(cached_small_study(), tmp_path, edits)
    rate, shown = seen.fresh.measures(1).irr, seen.value("irr", "two-stage")
    assert rate is not None
    assert rate > 1.0 or rate < -0.3
    assert shown == (pytest.approx(rate, rel=1e-9) if rate > LOWEST_RATE else NOTHING)
    assert seen.value("irr_reason", "two-stage") is None
