"""The Scenarios sheet: all scenarios at once, and the sentence that says what the matrix says."""

from pathlib import Path

import numpy as np
import pytest
from libreoffice import needs_libreoffice, recalculate
from sheet_money import small_followed
from study_fixture import marrowby_study

from appraise.workbook.cells import Page
from appraise.workbook.scenario_words import best_formula, best_words, regret_formula, regret_words
from appraise.workbook.scenarios import WORDS_ROW, scenarios_sheet
from appraise.workbook.write import book_bytes

pytestmark = pytest.mark.filterwarnings("ignore:Unable to read chart:UserWarning")
NAMES = ["As it is", "Larger", 'Two "new" stages']


@needs_libreoffice
@pytest.mark.parametrize("scenario", ["central", "low"])
def test_matrix_and_regret_follow_the_inputs_in_every_scenario(scenario: str) -> None:
    seen = small_followed(scenario)
    comparison, case = seen.fresh.comparison, seen.fresh.case
    for number, name in enumerate(case.scenarios):
        assert seen.value("best", name) == case.options[comparison.best[number]].name
        for index, option in enumerate(case.options):
            regret = pytest.approx(comparison.regret[number, index], rel=1e-9, abs=1e-6)
            assert seen.value("regret", name, option.key) == regret
            if not option.baseline:
                npv = pytest.approx(comparison.npv[number, index], rel=1e-9)
                assert seen.value("npv", name, option.key) == npv
    for index, option in enumerate(case.options):
        assert seen.value("worst", option.key) == pytest.approx(comparison.worst[index], rel=1e-9)
        largest = pytest.approx(comparison.largest_regret[index], rel=1e-9, abs=1e-6)
        assert seen.value("largest_regret", option.key) == largest
    names = [option.name for option in case.options]
    said = [seen.found["Scenarios"][f"A{row}"] for row in (WORDS_ROW, WORDS_ROW + 1)]
    assert said[0] == best_words(comparison.best, names, 0)
    assert said[1] == regret_words(comparison.largest_regret, comparison.worst, names, "EUR")


@needs_libreoffice
def test_the_sentences_say_the_same_in_words_and_as_formulas(tmp_path: Path) -> None:
    """Each matrix is [scenario, option]; between them they reach every branch."""
    matrices = [
        [[0.0, 5e5, 9e5], [0.0, 1.0, 2e6]],
        [[0.0, -5e5, -1e3], [0.0, -4.0, -5.0]],
        [[0.0, 7e5, 3e5], [0.0, -2e5, -4.1e6], [0.0, 4e5, 3e5]],
        [[0.0, 0.0, 0.0], [0.0, 1234567.0, 2e5]],
    ]
    page, expected = Page("Words"), []
    for number, rows in enumerate(matrices):
        npv, top = np.array(rows), 1 + 10 * number
        best, worst = tuple(int(i) for i in npv.argmax(axis=1)), npv.min(axis=0)
        largest = (npv.max(axis=1, keepdims=True) - npv).max(axis=0)
        for col, name in enumerate(NAMES):
            page.put(top, 2 + col, name)
            page.put(top + 1, 2 + col, best.count(col), "integer")
            page.put(top + 2, 2 + col, float(worst[col]), "money")
            page.put(top + 3, 2 + col, float(largest[col]), "money")
        for scenario in range(len(rows)):
            page.put(top + 4 + scenario, 1, f"scenario {scenario}")
        names, counts, low, regret = (f"B{top + i}:D{top + i}" for i in range(4))
        scenarios = f"A{top + 4}:A{top + 3 + len(rows)}"
        words = best_words(best, NAMES, 0), regret_words(largest, worst, NAMES, "EUR")
        page.formula(top + 8, 1, best_formula(counts, names, scenarios, 0), words[0], "text")
        page.formula(top + 8, 2, regret_formula(regret, low, names, "EUR"), words[1], "text")
        expected += [(f"A{top + 8}", words[0]), (f"B{top + 8}", words[1])]
    path = tmp_path / "words.xlsx"
    path.write_bytes(book_bytes([page.finish()], title="t", author="a", subject="s", footer="f"))
    found = recalculate(path, tmp_path)["Words"]
    assert [(cell, found[cell]) for cell, _ in expected] == expected
    assert expected[0][1] == '“Two "new" stages” is best in every scenario.'
    assert expected[2][1] == "No option beats the plant as it stands (“As it is”) in any scenario."
    assert expected[4][1].startswith("No option is best in every scenario; “Larger” is best in 2 of 3")


def test_the_chart_shows_every_option_but_the_baseline() -> None:
    study = marrowby_study()
    (chart,) = scenarios_sheet(study).charts
    names = [option.name for option in study.case.options if not option.baseline]
    assert [series.label for series in chart.series] == names
    assert study.case.baseline.name in chart.title
