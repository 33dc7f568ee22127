"""The Tornado sheet: live bars follow the inputs, the others keep their difference, the order both."""

from dataclasses import replace

import pytest
from libreoffice import needs_libreoffice, same
from sheet_money import Followed, cached_small_study, small_followed
from study_fixture import marrowby_study

from appraise.case.money import Driver
from appraise.study import Study
from appraise.workbook.cells import ref
from appraise.workbook.tornado import (
    DRIVER,
    FOULED,
    HIGH,
    HOW,
    LOW,
    NOW,
    PLACE,
    REASON,
    SWING,
    TITLE,
    TOP,
    UNIT,
    direction_words,
    tornado_sheet,
)
from appraise.workbook.tornado_bars import AT, NO_EFFECT
from appraise.workbook.tornado_drivers import live_bar, shown

pytestmark = pytest.mark.filterwarnings("ignore:Unable to read chart:UserWarning")


def bars_of(seen: Followed) -> list[dict[str, object]]:
    """The list of bars of the only option, by column."""
    sheet, cells = tornado_sheet(seen.study), seen.found[TITLE]
    heading = "Driver, in the order of the case"
    top = next(row for (row, _), cell in sheet.cells.items() if cell.value == heading) + 2
    number = len(seen.study.tornado[0].bars)
    return [{name: cells[ref(row, col)] for name, col in AT.items()} for row in range(top, top + number)]


@needs_libreoffice
@pytest.mark.parametrize("scenario", ["central", "low"])
def test_live_bars_follow_the_inputs(scenario: str) -> None:
    seen = small_followed(scenario)
    fresh = {(bar.label, bar.path): bar for bar in seen.fresh.tornado[0].bars}
    live = [bar for bar in bars_of(seen) if bar["how"] == "live"]
    assert len(live) == 16
    for bar in live:
        if scenario == "low" and bar["path"] == "scenario.power_premium.value":
            continue  # a scenario without a premium: Python refuses the path
        expected = fresh[str(bar["driver"]), str(bar["path"])]
        for end in ("low", "high"):
            told = getattr(expected, f"npv_{end}")
            assert same(bar[f"npv_{end}"], told), (bar["driver"], end, bar[f"npv_{end}"], told)


@needs_libreoffice
def test_bars_as_run_keep_their_difference_to_the_run() -> None:
    seen = small_followed("central")
    npv, base = seen.value("npv", "two-stage"), seen.study.tornado[0].base_npv
    assert isinstance(npv, float)
    assert npv != pytest.approx(base, rel=1e-3)
    kept = [bar for bar in bars_of(seen) if bar["how"] == "as run"]
    assert {bar["driver"] for bar in kept} == {"Impossible tax", "Nothing"}
    for bar in kept:
        for end in ("low", "high"):
            run = bar[f"run_{end}"]
            if isinstance(run, float):
                assert bar[f"npv_{end}"] == pytest.approx(npv + run - base, rel=1e-9)


@needs_libreoffice
def test_the_table_is_sorted_by_swing_and_says_why_an_end_has_no_value() -> None:
    seen = small_followed("central")
    cells, bars = seen.found[TITLE], bars_of(seen)
    rows = range(TOP + 2, TOP + 2 + len(bars))
    swings = [cells[ref(row, SWING)] for row in rows]
    assert swings == sorted((bar["swing"] for bar in bars), key=lambda swing: -float(str(swing)))
    assert sorted(int(str(cells[ref(row, PLACE)])) for row in rows) == list(range(1, len(bars) + 1))
    reasons = {cells[ref(row, DRIVER)]: cells[ref(row, REASON)] for row in rows}
    assert "tax_rate" in str(reasons["Impossible tax"])
    assert reasons["Nothing"] == NO_EFFECT
    texts = {
        cells[ref(row, DRIVER)]: [cells[ref(row, col)] for col in (UNIT, NOW, LOW, HIGH)] for row in rows
    }
    assert texts["Rate"] == ["%", "7 %", "−20 % of it", "10 %"]
    assert texts["Capital"] == ["times", "1.1", "0.9", "+30 %"]
    assert not reasons["Power"]
    order = [bar["driver"] for bar in sorted(bars, key=lambda bar: int(str(bar["rank"])))]
    assert [cells[ref(row, DRIVER)] for row in rows] == order


def test_which_bars_of_the_demo_are_live() -> None:
    study = marrowby_study()
    sheet = tornado_sheet(study)
    rows = range(TOP + 2, TOP + 2 + len(study.tornado[0].bars))
    how = {str(sheet.cells[row, DRIVER].value): sheet.cells[row, HOW].value for row in rows}
    for label in ("Power price", "Wood price", "Carbon price", "Capital", "Discount rate", "Tax rate"):
        assert how[label] == "live"
    for label in ("Main turbine efficiency", "Heat demand", "Years of operation"):
        assert how[label] == "as run"
    assert len(sheet.charts) == len(study.tornado)


def test_a_driver_that_seems_to_work_the_wrong_way_is_explained() -> None:
    study = marrowby_study()
    said = direction_words(study)
    fouled = [[bar for bar in one.bars if bar.path == FOULED] for one in study.tornado]
    assert all(bar.npv_high > bar.npv_low for bars in fouled for bar in bars)  # type: ignore[operator]
    assert "because the plant it is compared with is worse" in said
    assert all(f"“{option.name}”" in said for option in study.case.options if not option.baseline)
    turned = replace(fouled[0][0], npv_low=2.0, npv_high=1.0)
    assert direction_words(replace(study, tornado=(replace(study.tornado[0], bars=(turned,)),))) == ""


@pytest.mark.parametrize(
    ("floor", "low", "way"),
    [
        (None, "-20%", "scale"),
        (0.0, "-20%", "scale"),
        (20.0, "-20%", "run"),
        (0.0, "-120%", "run"),
        (0.0, 40.0, "run"),
    ],
)
def test_a_price_that_decides_hours_is_as_run(floor: float | None, low: float | str, way: str) -> None:
    """A floor counts other hours at another price, unless it is 0 and the prices keep their sign."""
    study = with_floor(cached_small_study(), floor)
    driver = Driver(label="Power", path="scenario.power", low=low, high="+20%")
    assert live_bar(study, 1, driver, study.tornado[0].bars[0]).way == way


def test_a_whole_path_moved_by_shares_may_be_as_run() -> None:
    """A path that changes over the years is no one number that a share could multiply."""
    study = with_floor(cached_small_study(), 20.0)
    sheet = tornado_sheet(study)
    (row,) = [
        row for (row, col), cell in sheet.cells.items() if (col, cell.value) == (AT["driver"], "Power")
    ][1:]
    assert sheet.cells[row, AT["how"]].value == "as run"
    assert sheet.cells[row, AT["low_text"]].value == "−20 %"


def with_floor(study: Study, floor: float | None) -> Study:
    """The study as if its premium had another floor."""
    scenario = study.case.scenarios["central"]
    assert scenario.power_premium is not None
    premium = scenario.power_premium.model_copy(update={"not_below": floor})
    scenario = scenario.model_copy(update={"power_premium": premium})
    scenarios = {**study.case.scenarios, "central": scenario}
    case = study.case.model_copy(update={"scenarios": scenarios})
    return replace(study, loaded=replace(study.loaded, case=case))


def test_values_as_a_reader_says_them() -> None:
    assert [shown(value) for value in ("-20%", "+5 %", -3.5, 1200000.0, 0.045, None)] == [
        "−20 %",
        "+5 %",
        "−3.5",
        "1,200,000",
        "0.045",
        "–",
    ]
