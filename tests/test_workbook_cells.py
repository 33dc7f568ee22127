"""What a page refuses where it is put, and what the check of the whole book refuses."""

import math
from datetime import date, datetime, timezone

import numpy as np
import pytest

from appraise.workbook.cells import (
    YEAR_ZERO,
    Page,
    Sheet,
    SheetFault,
    area,
    quoted,
    ref,
    ref_to,
    sheet_prefix,
    year_column,
)
from appraise.workbook.charts import Series, line_chart
from appraise.workbook.faults import check, faults_of, formula_faults
from appraise.workbook.looks import LEGEND, STYLES, is_input
from appraise.workbook.values import quoted_text


def one_cell(formula: str) -> Sheet:
    page = Page("Sums")
    page.formula(1, 1, formula, 1.0)
    return page.finish()


def test_addresses() -> None:
    assert [ref(5, 4), ref(5, 4, True), ref(5, 4, "row"), ref(5, 4, "column")] == ["D5", "$D$5", "D$5", "$D5"]
    assert area(5, 4, 6, 28) == "D5:AB6"
    assert ref_to("Cash flow", 5, 4) == "'Cash flow'!$D$5"
    assert ref_to("Prices", 5, 4, last_col=6) == "Prices!$D$5:$F$5"
    assert sheet_prefix("the town's") == "'the town''s'!"
    assert year_column(0) == YEAR_ZERO


@pytest.mark.parametrize("title", ["Year", "R1C1", "AB1", "Break-even", "Capex"])
def test_prefix_is_read_back_as_the_title(title: str) -> None:
    prefix = sheet_prefix(title)
    assert list(formula_faults(f"={prefix}A1", {title}, frozenset())) == []
    assert list(formula_faults(f"={prefix}A1", {"other"}, frozenset())) == [f"there is no sheet {title!r}"]


@pytest.mark.parametrize("number", [math.nan, math.inf, -math.inf, np.float64("nan")])
def test_what_is_no_number_is_refused_as_value_and_as_expectation(number: float) -> None:
    page = Page("Sums")
    with pytest.raises(SheetFault, match=r"^Sums!B3: (nan|-?inf) is no value for a cell$"):
        page.put(3, 2, number, "number")
    with pytest.raises(SheetFault, match=r"^Sums!B3: (nan|-?inf) is no value for a cell$"):
        page.formula(3, 2, "=1/0", number)


@pytest.mark.parametrize(
    "moment",
    [date(1900, 2, 28), datetime(1899, 1, 1), datetime(2026, 1, 1, tzinfo=timezone.utc)],  # noqa: UP017
)
def test_dates_that_the_format_miscounts_are_refused(moment: date) -> None:
    with pytest.raises(SheetFault, match="is no date for a cell"):
        Page("Sums").put(1, 1, moment, "date")


def test_numpy_scalars_become_plain() -> None:
    page = Page("Sums")
    given = [
        np.float64(1.5),
        np.int64(3),
        np.bool_(True),
        np.str_("text"),
        np.datetime64("2026-01-01T05", "ns"),
    ]
    page.row_of(1, "row", "", given)
    values = [cell.value for cell in page.finish().cells.values()][2:]
    assert values == [1.5, 3, True, "text", datetime(2026, 1, 1, 5)]
    assert [type(value) for value in values] == [float, int, bool, str, datetime]


def test_a_list_is_refused() -> None:
    with pytest.raises(SheetFault, match="a cell cannot hold list"):
        Page("Sums").put(1, 1, [1.0])


def test_a_cell_is_put_once() -> None:
    page = Page("Cash flow")
    page.put(2, 3, 1.0, "number")
    with pytest.raises(SheetFault, match=r"^'Cash flow'!C2 is put twice$"):
        page.formula(2, 3, "=1", 1.0)


def test_a_formula_needs_its_value_and_its_sign() -> None:
    page = Page("Sums")
    with pytest.raises(SheetFault, match=r"^Sums!A1: formula =1\+1 without its expected value$"):
        page.formula(1, 1, "=1+1", None)
    with pytest.raises(SheetFault, match="begins with ="):
        page.formula(1, 1, "1+1", 2.0)


def test_unknown_style_and_place_are_refused() -> None:
    page = Page("Sums")
    with pytest.raises(SheetFault, match="style 'purple' is unknown"):
        page.put(1, 1, 1.0, "purple")
    with pytest.raises(SheetFault, match="no cell in row 0, column 1"):
        page.put(0, 1, 1.0)
    with pytest.raises(SheetFault, match="highlight 'purple' unknown"):
        page.highlight("A1", "=A1>0", "purple")


@pytest.mark.parametrize(
    ("formula", "fault"),
    [
        ("=rate*2", "name rate is not defined"),
        ("=SUMM(A1)", "function SUMM is not known to the format"),
        ("=_xlfn.IFS(A1,2)", "function _xlfn.IFS is not known to the format"),
        ("=OFFSET(A1,1,1)", "function OFFSET is volatile"),
        ("=SUM('Cash flow'!A1:B2)", "there is no sheet 'Cash flow'"),
        ("=Prices!A1", "there is no sheet 'Prices'"),
        ("=SUM(A1", "a bracket is not closed"),
        ("=A1)", "a bracket too many is closed"),
        ("=[1]Other!A1", "'[' at character 2 has no meaning in a formula"),
        ("=" + '"' + "x" * 256 + '"', "a text constant is longer than 255 characters"),
    ],
)
def test_formula_faults(formula: str, fault: str) -> None:
    with pytest.raises(SheetFault) as caught:
        check([one_cell(formula)])
    assert str(caught.value) == f"Sums!A1: {fault}, in {formula}"


@pytest.mark.parametrize(
    "formula",
    [
        '=IF(AND(N(C9)<0,D9>=0),C$4-C9/D8,"")',
        '=FIXED(A1*100,1)&" %, ""quoted"" (name_in_text"',
        "=SUMPRODUCT($D$5:$H$5,Sums!D6:H6)*-1.5e-3^2",
        "=IFERROR(INDEX(A1:A9,MATCH(TRUE,B1:B9,0)),#N/A)",
        "=SUM(A:A)+SUM(2:3)+{1,2;3,4}",
        "=log10_x+LOG10(Growth)",
    ],
)
def test_sound_formulas_pass(formula: str) -> None:
    assert list(formula_faults(formula, {"Sums"}, frozenset({"growth", "log10_x"}))) == []


@pytest.mark.parametrize(
    "name", ["CO2", "NPV1", "irr10", "R1C1", "r", "C", "true", "a b", "1st", "é", "a-b", ""]
)
def test_names_that_are_none_are_refused(name: str) -> None:
    page = Page("Sums")
    page.put(1, 1, 1.0, "number")
    page.name(name, 1, 1)
    assert len(list(faults_of([page.finish()]))) == 1


def test_names_are_unique_without_regard_to_capitals() -> None:
    first, second = Page("First"), Page("Second")
    first.put(1, 1, 1.0, "number", name="discount_rate")
    second.row_of(1, "rates", "", [1.0, 2.0], name="Discount_Rate")
    assert list(faults_of([first.finish(), second.finish()])) == ["name discount_rate is defined 2 times"]
    second.name("rates", 1, 1)
    with pytest.raises(SheetFault, match="name RATES is defined twice"):
        second.name("RATES", 2, 1)


def test_names_may_be_used_across_sheets_in_any_capitals() -> None:
    page = Page("Inputs")
    page.put(1, 1, 1.0, "number", name="discount_rate")
    check([one_cell("=Discount_rate"), page.finish()])


@pytest.mark.parametrize("title", ["", "x" * 32, "a/b", "a:b", "[a]", "'a", "what?"])
def test_titles_that_are_none_are_refused(title: str) -> None:
    assert len(list(faults_of([Page(title).finish()]))) == 1


def test_titles_are_unique() -> None:
    assert list(faults_of([Page("Year").finish(), Page("YEAR").finish()])) == ["2 sheets are called 'year'"]


def test_merges_hide_nothing_and_do_not_overlap() -> None:
    page = Page("Sums")
    page.put(1, 1, "text")
    page.put(1, 2, None, "text")
    page.put(1, 3, "hidden")
    page.merge(1, 1, 1, 3)
    page.merge(1, 3, 2, 3)
    assert list(faults_of([page.finish()])) == [
        "Sums!C1: lies under the merge A1:C1",
        "Sums!C1:C2: overlaps another merge",
    ]


def test_rules_are_checked_as_formulas_are() -> None:
    page = Page("Sums")
    page.validate_list(1, 1, "=nowhere")
    page.validate_list(2, 1, ["yes", "no, never"])
    page.validate_number(3, 1)
    page.highlight("A4", "=gone>0", "ok")
    assert list(faults_of([page.finish()])) == [
        "Sums!A1: name nowhere is not defined, in the rule =nowhere",
        "Sums!A2: fixed words without comma or quote, 255 characters in all",
        "Sums!A3: a rule for numbers without a limit",
        "Sums!A4: name gone is not defined, in the rule =gone>0",
    ]


def test_links_lead_to_sheets_there_are() -> None:
    page = Page("Sums")
    page.put(1, 1, "on", "link", link="Nowhere")
    assert list(faults_of([page.finish()])) == ["Sums!A1: there is no sheet 'Nowhere' to lead to"]


def test_charts_draw_from_cells_there_are() -> None:
    page = Page("Sums")
    page.row_of(1, "row", "", [1.0, 2.0, 3.0])
    series = [Series("a", "Sums", "D1:F1"), Series("b", "Sums", "D2:E2"), Series("c", "Gone", "D1:F1")]
    page.chart(line_chart("Chart", series, ("Sums", "D1:F1"), x="x", y="y", alt="a line", anchor="A5"))
    assert list(faults_of([page.finish()])) == [
        "Sums, chart 'Chart': series and categories differ in length: [2, 3]",
        "Sums, chart 'Chart': Sums!D2:E2 is empty",
        "Sums, chart 'Chart': there is no sheet 'Gone'",
    ]


def test_all_faults_are_told_at_once() -> None:
    page = Page("Sums")
    page.formula(1, 1, "=gone", 1.0)
    page.formula(2, 1, "=ABSOLUTE(1)", 1.0)
    with pytest.raises(SheetFault) as caught:
        check([page.finish()])
    assert len(str(caught.value).splitlines()) == 2


def test_quoted_text_stays_one_constant() -> None:
    assert quoted('say "1"') == '"say ""1"""'
    assert list(formula_faults("=" + quoted('"&gone&"') + "&A1", set(), frozenset())) == []
    assert quoted("_x0041_") == '"_"&"x0041_"'
    with pytest.raises(SheetFault, match="255 are allowed"):
        quoted("x" * 256)


def test_a_text_of_any_length_is_quoted_in_pieces() -> None:
    assert quoted_text("") == '""'
    text = 'say "a" ' * 100
    pieces = quoted_text(text).split('"&"')
    assert len(pieces) > 3
    assert max(len(piece) for piece in pieces) <= 255
    assert "".join(pieces)[1:-1].replace('""', '"') == text
    assert list(formula_faults("=" + quoted_text(text), set(), frozenset())) == []


def test_a_paragraph_may_be_a_formula_and_is_as_high_as_its_words() -> None:
    page, words = Page("Words"), "many words " * 40
    page.width([20, 20])
    page.paragraph(1, 1, 2, words)
    page.paragraph(2, 1, 2, words, formula="=A9")
    sheet = page.finish()
    assert sheet.heights[1] == sheet.heights[2] > 60.0
    assert (sheet.cells[2, 1].formula, sheet.cells[2, 1].value) == ("=A9", words)
    assert sheet.merges == ("A1:B1", "A2:B2")


def test_rows_carry_label_unit_and_one_formula() -> None:
    page = Page("Sums")
    page.row_of(1, "a", "MW", [1.0, 2.0])
    where = page.row_of_formulas(2, "b", "MW", lambda c: f"={c}1*2", [2.0, 4.0], "number1", name="twice")
    sheet = page.finish()
    assert where == "D2:E2"
    assert dict(sheet.names) == {"twice": "$D$2:$E$2"}
    assert [sheet.cells[2, col].formula for col in (4, 5)] == ["=D1*2", "=E1*2"]
    assert [sheet.cells[2, col].value for col in (1, 2, 4, 5)] == ["b", "MW", 2.0, 4.0]


def test_a_paragraph_gets_the_height_it_needs() -> None:
    page = Page("Sums")
    page.width([30, 30])
    page.paragraph(1, 1, 2, "short")
    page.paragraph(2, 1, 2, "a longer text " * 30)
    sheet = page.finish()
    assert sheet.merges == ("A1:B1", "A2:B2")
    assert sheet.heights[2] > 4 * sheet.heights[1]


def test_only_inputs_are_unlocked_and_differ_by_more_than_colour() -> None:
    inputs = {name for name in STYLES if is_input(name)}
    assert inputs == {name for name in STYLES if name.endswith(" input")}
    assert {STYLES[name].frame for name in inputs} == {"dotted"}
    runs = {name for name in STYLES if " as run" in name}
    assert all(STYLES[name].italic for name in runs)
    assert not [style for style, _, _ in LEGEND if is_input(style)]
