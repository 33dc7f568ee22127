"""The Decision sheet: its sentences in words and as formulas, and what it takes from the run."""

from dataclasses import replace
from pathlib import Path

import pytest
from libreoffice import differences, needs_libreoffice
from sheet_trial import recalculated, value_of
from study_fixture import marrowby_study

from appraise.study import Study
from appraise.workbook.book import sheets_of
from appraise.workbook.cash_flow_measures import NOT_REACHED, NOTHING_TO_PAY
from appraise.workbook.cells import LABEL, TOTAL, Page, ref
from appraise.workbook.decision import VERDICT_ROW, decision_sheet
from appraise.workbook.decision_run_words import better_words, leaning, loss_words, run_formula, run_words
from appraise.workbook.decision_table import BEYOND
from appraise.workbook.decision_words import (
    Best,
    Cells,
    reason,
    reason_formula,
    standing,
    standing_formula,
    verdict,
    verdict_formula,
)
from appraise.workbook.naming import CHOSEN_SCENARIO
from appraise.workbook.write import book_bytes

pytestmark = pytest.mark.filterwarnings("ignore:Unable to read chart:UserWarning")

NAMES = ["As it is", "Larger", 'Two "new" stages']
ROWS = ("npv", "capital", "payback", "discounted", "worst", "times", "regret", "above", "below")
# The rows of one figure of `ROWS` by option; between them they reach every branch of the sentences.
FIGURES: dict[str, tuple[tuple[float | str, ...], ...]] = {
    "pays, second within the band": (
        (0.0, 3e5, 4e5),
        (0.0, 1e5, 9e5),
        ("–", 4.0, 5.24),
        ("–", 5.0, 7.78),
        (0.0, -1e4, -2e5),
        (0, 1, 2),
        (4e5, 1e5, 2e5),
        (0.0, 1e4, 2e5),
        (0.0, 1e4, 1e5),
    ),
    "pays, second out of the band, least regret its own": (
        (0.0, 3e5, 4e5),
        (0.0, 1e5, 9e5),
        ("–", 4.0, 5.24),
        ("–", 5.0, NOT_REACHED),
        (0.0, -1e4, 2e5),
        (0, 1, 2),
        (4e5, 1e5, 5e4),
        (0.0, 1e4, 1e5),
        (0.0, 1e4, 1e5),
    ),
    "never paid back in operation": (
        (0.0, 4e5, 3e5),
        (0.0, 1e5, 9e5),
        ("–", NOT_REACHED, 5.24),
        ("–", NOT_REACHED, 7.78),
        (0.0, -1e4, -2e5),
        (0, 3, 0),
        (4e5, 1e5, 2e5),
        (0.0, 1e4, 2e5),
        (0.0, 1e4, 1e5),
    ),
    "nothing to pay back": (
        (0.0, 4e5, 3e5),
        (0.0, 0.0, 9e5),
        ("–", NOTHING_TO_PAY, 5.24),
        ("–", NOTHING_TO_PAY, 7.78),
        (0.0, 1e4, -2e5),
        (1, 2, 0),
        (4e5, 1e5, 2e5),
        (0.0, 2e5, 2e5),
        (0.0, 1e4, 1e5),
    ),
    "baseline, second out of the band": (
        (0.0, -2e5, -1e5),
        (0.0, 1e5, 9e5),
        ("–", 4.0, 5.24),
        ("–", 5.0, 7.78),
        (0.0, -1e6, -2e5),
        (3, 0, 0),
        (0.0, 1e6, 2e5),
        (0.0, 9e5, 9e5),
        (0.0, 9e5, 9e4),
    ),
    "baseline, second within the band": (
        (0.0, -2e5, -1e5),
        (0.0, 1e5, 9e5),
        ("–", 4.0, 5.24),
        ("–", 5.0, 7.78),
        (0.0, -1e6, 2e5),
        (2, 0, 1),
        (7e5, 1e6, 2e5),
        (0.0, 9e5, 9e5),
        (0.0, 1e4, 1.5e5),
    ),
}


def best_of(figures: tuple[tuple[float | str, ...], ...]) -> tuple[int, Best]:
    """Place of the best option, and the numbers of the sentences."""
    of = dict(zip(ROWS, figures, strict=True))
    npv = [float(value) for value in of["npv"]]
    regret = [float(value) for value in of["regret"]]
    place = npv.index(max(npv))
    second = max((i for i in range(3) if i != place), key=lambda i: npv[i])
    calmest = regret.index(min(regret))
    return place, Best(
        name=NAMES[place],
        npv=npv[place],
        capital=float(of["capital"][place]),
        payback=of["payback"][place],
        discounted=of["discounted"][place],
        worst=float(of["worst"][place]),
        is_baseline=place == 0,
        scenario="Middle",
        times=int(of["times"][place]),
        scenarios=3,
        regret=regret[place],
        calmest=NAMES[calmest],
        least_regret=regret[calmest],
        second=NAMES[second],
        behind=npv[place] - npv[second],
        above=float(of["above"][place]),
        below=float(of["below"][second]),
    )


def put_case(page: Page, top: int, figures: tuple[tuple[float | str, ...], ...]) -> tuple[Cells, Best]:
    """The rows of one case from `top` on."""
    place, best = best_of(figures)
    at = {name: f"$B${top + i}:$D${top + i}" for i, name in enumerate(("names", *ROWS, "others"))}
    for col, name in enumerate(NAMES, 2):
        page.put(top, col, name)
        for row, values in enumerate(figures, top + 1):
            page.put(row, col, values[col - 2], "text" if isinstance(values[col - 2], str) else "money")
        page.put(top + 10, col, None if col - 2 == place else figures[0][col - 2], "money")
    page.put(top + 11, 2, place + 1, "integer")
    page.put(top + 11, 3, best.scenario)
    return Cells(best=f"$B${top + 11}", baseline=1, scenario=f"$C${top + 11}", **at), best


@needs_libreoffice
def test_the_sentences_say_the_same_in_words_and_as_formulas(tmp_path: Path) -> None:
    page, said = Page("Words"), {}
    for number in range(3):
        page.put(1 + number, 10, f"scenario {number}")
    page.name("scenario_titles", 1, 10, 3, 10)
    for number, (about, figures) in enumerate(FIGURES.items()):
        top = 1 + 20 * number
        cells, best = put_case(page, top, figures)
        said[about] = (
            verdict(best, "EUR"),
            reason(best, "EUR"),
            standing(best, "EUR"),
            standing(replace(best, second=""), "EUR"),
        )
        formulas = (
            verdict_formula(cells, "EUR"),
            reason_formula(cells, "EUR"),
            standing_formula(cells, "EUR", several=True),
            standing_formula(cells, "EUR", several=False),
        )
        for col, (formula, text) in enumerate(zip(formulas, said[about], strict=True), 1):
            page.formula(top + 13, col, formula, text, "text")
    sheet = page.finish()
    assert differences([sheet], recalculated([sheet], tmp_path)) == []
    words = said["pays, second within the band"]
    assert words[0] == (
        'Best in scenario “Middle”: “Two "new" stages”, worth 400 thousand EUR more than leaving the plant '
        "as it stands; take it to quotations."
    )
    assert words[1] == (
        "It asks for 900 thousand EUR of capital and pays it back in 5.2 years of operation, undiscounted "
        "(7.8 discounted); in its worst scenario it loses 200 thousand EUR."
    )
    assert words[2] == (
        "It is best in 2 of 3 scenarios; its largest regret is 200 thousand EUR; least is that of “Larger”, "
        "100 thousand EUR. “Larger” is only 100 thousand EUR behind, and the capital of the best may come "
        "out 200 thousand EUR higher: quotations must decide between the two."
    )
    assert "behind" not in words[3]
    words = said["pays, second out of the band, least regret its own"]
    assert "(discounted it does not); in its worst scenario it still gains" in words[1]
    assert words[2].endswith("its largest regret, 50 thousand EUR, is the least of all.")
    assert "does not pay it back in operation" in said["never paid back in operation"][1]
    assert "has nothing to pay back" in said["nothing to pay back"][1]
    words = said["baseline, second out of the band"]
    assert words[0] == "Best in scenario “Middle”: the plant as it stands; no option earns its capital."
    assert words[2].startswith("The plant as it stands is best in 3 of 3 scenarios")
    assert "behind" not in words[2]
    words = said["baseline, second within the band"]
    assert "is only 100 thousand EUR behind, and its capital may come out 150 thousand EUR lower" in words[2]


@needs_libreoffice
@pytest.mark.parametrize("scenario", ["cheap_power", "dear_fuel"])
def test_another_scenario_gives_another_best_and_hides_what_the_run_knows(
    scenario: str, tmp_path: Path
) -> None:
    study = marrowby_study()
    sheets = sheets_of(study)
    found = recalculated(sheets, tmp_path, {CHOSEN_SCENARIO: scenario})
    place = study.comparison.best[list(study.case.scenarios).index(scenario)]
    option = study.case.options[place]
    assert place != study.comparison.best[study.reference]
    assert value_of(sheets, found, "live_best") == place + 1
    said = [str(found["Decision"][ref(VERDICT_ROW + i, LABEL)]) for i in range(4)]
    assert (f"“{option.name}”, worth" in said[0]) != option.baseline
    assert ("the plant as it stands; no option" in said[0]) == option.baseline
    times = study.comparison.best.count(place)
    assert f"best in {times} of {len(study.runs)} scenarios" in said[2]
    assert "Tornado and Draws" in said[3]
    assert "leans most" not in said[3]


def test_what_the_run_knows_is_said_while_its_best_option_is_the_best() -> None:
    study = marrowby_study()
    sheet = decision_sheet(study)
    text = str(sheet.cells[VERDICT_ROW + 3, LABEL].value)
    assert text == run_words(study)
    assert all(part and part in text for part in (leaning(study), loss_words(study), better_words(study)))
    assert "−25 %" in leaning(study)
    assert "-" not in leaning(study).replace("as-run", "")
    assert len(run_formula(study, "live_best")) < 8192


def test_the_chance_of_a_loss_stands_beside_that_of_the_least_risky_option() -> None:
    study = marrowby_study()
    risk, place = study.risk, study.comparison.best[study.reference]
    assert risk is not None
    chances = (1.0, 0.9, 0.7, 0.745)
    options = tuple(
        replace(one, chance_npv_positive=chance) for one, chance in zip(risk.options, chances, strict=True)
    )
    assert study.case.options[place].key == "two-stage-subcooled"
    drawn = replace(study, risk=replace(risk, options=options))
    assert loss_words(drawn) == (
        "It loses in 26 % of the draws, “Single stage, 50 % more surface”, the least risky option, in 10 %."
    )
    safest = (*options[:3], replace(options[3], chance_npv_positive=0.95))
    assert "in 5 % of the draws, no option in fewer" in loss_words(
        replace(study, risk=replace(risk, options=safest))
    )
    other = next(name for name in study.case.scenarios if name != risk.scenario)
    assert "of the draws (scenario “" in loss_words(replace(study, risk=replace(risk, scenario=other)))
    assert loss_words(replace(study, risk=None)) == ""


@pytest.mark.parametrize(
    ("stated", "best", "told"),
    [(1e6, 1.04e6, False), (1e6, 1.07e6, True), (-1e5, -5e4, False), (-1e5, 5e4, True), (0.0, 10.0, True)],
)
def test_a_clearly_better_design_is_told(stated: float, best: float, told: bool) -> None:
    """Better by more than a twentieth, and worth something at all."""
    study: Study = marrowby_study()
    choice = study.design_choice
    assert choice is not None
    curves = tuple(replace(curve, best_npv=min(stated, best)) for curve in choice.curves)
    curves = (*curves[:2], replace(curves[2], best=3, best_npv=best), *curves[3:])
    words = better_words(replace(study, design_choice=replace(choice, stated_npv=stated, curves=curves)))
    assert bool(words) == told
    if told:
        assert "is not at its best: see Design choice (number of stages 3 instead of 2 would add" in words
        assert "at costs that do not all follow the size" in words
    assert better_words(replace(study, design_choice=None)) == ""


def test_break_even_prices_far_beyond_the_planned_are_not_told_to_the_unit() -> None:
    study = marrowby_study()
    sheet = decision_sheet(study)
    row = next(
        row for (row, col), cell in sheet.cells.items() if str(cell.value).startswith("Carbon price, fi")
    )
    planned = study.runs[study.reference].prices.carbon[0]
    for index, told in enumerate(study.measures[study.reference]):
        if study.case.options[index].baseline:
            continue
        value = told.break_even_carbon_price
        assert value is not None
        shown = sheet.cells[row, TOTAL + index].value
        assert shown == (BEYOND if value > 10.0 * planned else pytest.approx(value))
    assert BEYOND in [cell.value for cell in sheet.cells.values()]


def test_the_page_is_one_and_shows_both_kinds_of_carbon() -> None:
    study = marrowby_study()
    sheet = decision_sheet(study)
    assert sheet.printing.pages_tall == 1
    labels = {str(cell.value): row for (row, col), cell in sheet.cells.items() if col == LABEL}
    row = labels["Change of CO₂ from the stacks"]
    assert labels["  less grid power displaced, 250 kg/MWh"] == row + 1
    figures = study.year_figures[study.reference]
    for index, figure in enumerate(figures):
        stacks, net = (sheet.cells[at, TOTAL + index].value for at in (row, row + 1))
        assert net == pytest.approx(float(str(stacks)) - 0.25 * figure.extra_power_MWh)
    assert any("CO₂ of forest wood chips counts as zero." in label for label in labels)
    assert book_bytes(sheets_of(study), title="t", author="a", subject="s", footer="f")
