"""The written file: stored values, protection, print, hostile text, the same bytes, a second opinion."""

import io
import re
import subprocess
import sys
import time
import zipfile
from collections.abc import Sequence
from datetime import datetime
from pathlib import Path

import openpyxl
import pytest
from openpyxl.utils.escape import unescape

from appraise.workbook.cells import Page, Sheet, SheetFault, quoted
from appraise.workbook.charts import Series, bar_chart
from appraise.workbook.pack import maker, with_descriptions, with_values
from appraise.workbook.values import header_text, stored_text
from appraise.workbook.write import book_bytes
from tests.libreoffice import differences, needs_libreoffice, recalculate, values_in

CASE_TEXT = '<a> & "_x0041_" '
POWER = [50.0 * 1.02**t for t in range(10)]


def written(sheets: Sequence[Sheet], title: str = "Study of Marrowby", footer: str = "revision B") -> bytes:
    return book_bytes(sheets, title=title, author="The author", subject="A subject", footer=footer)


def book_of(data: bytes, values: bool = False) -> openpyxl.Workbook:
    return openpyxl.load_workbook(io.BytesIO(data), data_only=values)


def parts_of(data: bytes) -> dict[str, bytes]:
    with zipfile.ZipFile(io.BytesIO(data)) as archive:
        return {name: archive.read(name) for name in archive.namelist()}


def sample(growth: float = 0.02) -> list[Sheet]:
    """Two sheets with formulas of every kind of result, inputs, rules and a chart."""
    power = [50.0 * (1 + growth) ** t for t in range(10)]
    page = Page("Prices")
    page.head("Prices by year")
    page.width([30, 10, 12] + [9] * 10)
    page.headings(4, ["Line", "unit", "total"])
    page.row_of(5, "Year", "", range(2027, 2037), "year heading")
    page.row_of_formulas(
        6,
        "Power price",
        "EUR/MWh",
        lambda c: f"=start_price*(1+growth)^({c}5-$D$5)",
        power,
        "money2",
        name="power_row",
    )
    page.formula(6, 3, "=SUM(power_row)", sum(power), "money2 total")
    page.put(8, 1, "Growth", "label")
    page.put(8, 3, growth, "percent1 input", name="growth", note="a year, real")
    page.put(9, 3, 50.0, "money2 input", name="start_price")
    page.put(10, 3, "yes", "text input")
    page.put(11, 3, datetime(2027, 1, 1), "date as run")
    page.validate_number(8, 3, 0, 0.5)
    page.validate_list(10, 3, ["yes", "no"])
    page.highlight("C8:C9", "=C8>0", "ok")
    page.formula(12, 3, '=C10="yes"', True, "text_centre")
    page.formula(13, 3, "=NA()", "#N/A")
    page.formula(14, 3, '=IF(growth>9,1,"")', "")
    page.formula(15, 3, f"={quoted(CASE_TEXT)}&FIXED(growth*100,1)", f"{CASE_TEXT}{growth * 100:.1f}", "text")
    page.formula(16, 3, "=C11+0.5", datetime(2027, 1, 1, 12), "hour")
    page.freeze(6, 4)
    page.printed(repeat_rows=(4, 5))
    page.chart(
        bar_chart(
            "Power", [Series("power", "Prices", "D6:M6")], ("Prices", "D5:M5"), x="year", y="EUR", alt="bars",
            anchor="B20",
        )
    )  # fmt: skip
    other = Page("Cash flow", "as run")
    other.formula(1, 1, "=Prices!D6*2", 100.0, "money total")
    other.put(2, 1, "to the prices", "link", link="Prices")
    other.legend(4, 1)
    return [page.finish(), other.finish()]


def test_every_formula_carries_its_value() -> None:
    data = written(sample())
    values, formulas = book_of(data, values=True), book_of(data)
    page = values["Prices"]
    assert [page.cell(6, 4 + t).value for t in range(10)] == POWER
    assert formulas["Prices"]["E6"].value == "=start_price*(1+growth)^(E5-$D$5)"
    found = [page[address].value for address in ("C12", "C13", "C14", "C16")]
    assert found == [True, "#N/A", None, datetime(2027, 1, 1, 12)]
    assert unescape(page["C15"].value) == f"{CASE_TEXT}2.0"
    assert values["Cash flow"]["A1"].value == 100.0


def test_the_file_asks_to_be_recalculated_when_opened() -> None:
    assert b'fullCalcOnLoad="1"' in parts_of(written(sample()))["xl/workbook.xml"]


def test_a_formula_left_without_value_is_refused() -> None:
    part = b'<row><c r="A1" s="3"><f>1+1</f><v /></c><c r="B1"><f>2</f><v/></c></row>'
    filled = with_values(part, {"A1": 2, "B1": "<x>"}, "sheet")
    assert filled == (
        b'<row><c r="A1" s="3"><f>1+1</f><v>2</v></c><c r="B1" t="str"><f>2</f><v>&lt;x&gt;</v></c></row>'
    )
    with pytest.raises(SheetFault, match="no value for the formula in B1"):
        with_values(part, {"A1": 2}, "sheet")
    with pytest.raises(SheetFault, match="2 formulas, 3 values, 2 filled"):
        with_values(part, {"A1": 2, "B1": 1, "C1": 1}, "sheet")
    with pytest.raises(SheetFault, match="1 formulas, 0 values, 0 filled"):
        with_values(b'<c r="A1"><f>1</f><v>7</v></c>', {}, "sheet")


def test_a_chart_left_without_description_is_refused() -> None:
    part = b'<xdr:cNvPr id="1" name="Chart 1" /><xdr:cNvPr id="2" name="Chart 2"/>'
    assert with_descriptions(part, ['a "b"', "c"], "drawing").count(b"descr=") == 2
    with pytest.raises(SheetFault, match="2 charts, 1 descriptions"):
        with_descriptions(part, ["a"], "drawing")


def test_the_same_sheets_give_the_same_bytes() -> None:
    assert written(sample()) == written(sample())
    assert written(sample()) != written(sample(growth=0.03))


def test_the_file_names_its_maker() -> None:
    told = parts_of(written(sample()))["docProps/app.xml"].decode()
    assert "<Application>appraise</Application>" in told
    (version,) = re.findall("<AppVersion>([^<]*)</AppVersion>", told)
    assert re.fullmatch(r"\d{1,2}\.\d{4}", version)  # as the format demands
    assert maker("1.2.3") == b"<Application>appraise</Application><AppVersion>1.0203</AppVersion>"


def test_bytes_depend_neither_on_the_clock_nor_on_the_order_of_hashes() -> None:
    code = (
        "import hashlib, tests.test_workbook_write as t;"
        "print(hashlib.sha256(t.written(t.sample())).hexdigest())"
    )
    root = Path(__file__).parent.parent
    seen = {
        subprocess.run(
            [sys.executable, "-c", code],
            env={"PYTHONHASHSEED": seed, "PYTHONPATH": str(root), "TZ": zone},
            cwd=root,
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        for seed, zone in [("1", "UTC"), ("2", "Asia/Tokyo")]
    }
    assert len(seen) == 1


def test_only_inputs_are_unlocked_and_sheets_are_protected_without_password() -> None:
    book = book_of(written(sample()))
    unlocked = {
        f"{page.title}!{cell.coordinate}"
        for page in book
        for row in page.iter_rows()
        for cell in row
        if not cell.protection.locked
    }
    assert unlocked == {"Prices!C8", "Prices!C9", "Prices!C10"}
    assert all(page.protection.sheet and page.protection.password is None for page in book)


def test_view_and_print() -> None:
    book = book_of(written(sample(), footer="revision B & C"))
    page = book["Prices"]
    assert (page.page_setup.orientation, page.page_setup.paperSize) == ("landscape", 9)
    assert (page.page_setup.fitToWidth, page.page_setup.fitToHeight) == (1, 0)
    assert page.sheet_properties.pageSetUpPr.fitToPage
    assert page.print_title_rows == "$4:$5"
    assert page.freeze_panes == "D6"
    assert not page.sheet_view.showGridLines
    assert [one.sheet_view.tabSelected for one in book] == [True, False]
    assert (page.oddHeader.left.text, page.oddHeader.right.text) == ("Study of Marrowby", "Prices")
    assert page.oddFooter.left.text == "revision B && C"
    assert page.oddFooter.center.text is None  # beside it, the left part may be long
    assert page.oddFooter.right.text == "page &P of &N"
    assert page.HeaderFooter.scaleWithDoc is False


def test_the_printed_area_holds_the_charts() -> None:
    page = book_of(written(sample()))["Prices"]
    found = re.fullmatch(r"'Prices'!\$A\$1:\$([A-Z]+)\$(\d+)", page.print_area)
    assert found
    # 8.5 cm are 321 pixels, 17 rows of 20; the chart begins in row 20.
    assert int(found[2]) == 36


def test_names_rules_and_notes_arrive() -> None:
    book = book_of(written(sample()))
    assert {name: one.attr_text for name, one in book.defined_names.items()} == {
        "growth": "Prices!$C$8",
        "start_price": "Prices!$C$9",
        "power_row": "Prices!$D$6:$M$6",
    }
    page = book["Prices"]
    assert [(one.type, str(one.sqref)) for one in page.data_validations.dataValidation] == [
        ("decimal", "C8"),
        ("list", "C10"),
    ]
    assert [str(one.sqref) for one in page.conditional_formatting] == ["C8:C9"]
    assert page["C8"].comment.text == "a year, real"
    assert book["Cash flow"]["A2"].hyperlink.location == "Prices!A1"


HOSTILE = [
    "=1+1",
    '=HYPERLINK("http://example.invalid","x")',
    "+1",
    "-1",
    "@SUM(A1)",
    "\t=1+1",
    "#N/A",
    "http://example.invalid",
    "1e5",
    "2026-01-01",
    "TRUE",
    "<b>&amp;</b>",
    "  spaces  ",
    "two\nlines",
]


@pytest.mark.parametrize("text", HOSTILE)
def test_text_stays_the_text_it_was(text: str) -> None:
    page = Page("Sums")
    page.put(1, 1, text, "text input")
    data = written([page.finish()])
    cell = book_of(data)["Sums"]["A1"]
    assert (cell.data_type, cell.value) == ("s", text)
    assert cell.hyperlink is None
    assert cell.quotePrefix == (text[0] in "=+-@\t")
    assert b"<f>" not in parts_of(data)["xl/worksheets/sheet1.xml"]


@pytest.mark.parametrize(
    ("text", "stored"),
    [
        ("a\x00b\x1fc", "a\ufffdb\ufffdc"),
        ("lone \ud800 half", "lone \ufffd half"),
        ("\u202egnp.exe", "\ufffdgnp.exe"),
        ("\u2066x\u2069", "\ufffdx\ufffd"),
        ("\uffff", "\ufffd"),
        ("_x0041_", "_x005F_x0041_"),
        ("_x0041_x0042_", "_x005F_x0041_x005F_x0042_"),
        ("_xyz_ stays", "_xyz_ stays"),
        ("one\r\ntwo", "one\ntwo"),
        ("Δη − 20 °C", "Δη − 20 °C"),
    ],
)
def test_text_that_is_no_text_is_made_harmless(text: str, stored: str) -> None:
    assert stored_text(text) == stored
    page = Page("Sums")
    page.put(1, 1, text)
    assert written([page.finish()], title=text, footer=text)


@pytest.mark.parametrize("text", ["x" * 40_000, "𝄞" * 20_000, "_x0041_" * 4_000])
def test_text_is_cut_with_a_mark_where_the_format_ends(text: str) -> None:
    stored = stored_text(text)
    assert stored.endswith(" … [cut]")
    assert 32_700 < len(stored.encode("utf-16-le")) // 2 <= 32_767
    assert stored_text("x" * 32_767) == "x" * 32_767


def test_headers_start_no_codes_and_keep_their_length() -> None:
    assert header_text("A&B &P", 50) == "A&&B &&P"
    assert header_text("one\ntwo", 50) == "one two"
    cut = header_text("&" * 99, 50)
    assert len(cut) <= 50
    assert cut.rstrip("…").count("&") % 2 == 0
    data = written(sample(), title="&P" * 500, footer="𝄞" * 500)
    page = parts_of(data)["xl/worksheets/sheet1.xml"].decode()
    header = re.search("<oddHeader>(.*?)</oddHeader>", page)
    footer = re.search("<oddFooter>(.*?)</oddFooter>", page)
    assert header
    assert footer
    for found in (header, footer):
        assert len(found[1].replace("&amp;", "&").encode("utf-16-le")) // 2 <= 255


def test_ten_thousand_formulas_are_written_within_two_seconds() -> None:
    page = Page("Sums")
    page.put(1, 1, 1.0, "number", name="first")
    for row in range(2, 1002):
        for col in range(1, 11):
            page.formula(row, col, f"=IF(first>0,SUM($A$1,{row}*{col}),0)", 1.0 + row * col, "number2 total")
    sheet = page.finish()
    start = time.process_time()
    data = written([sheet])
    assert time.process_time() - start < 2.0
    assert parts_of(data)["xl/worksheets/sheet1.xml"].count(b"<v>") == 10_001


@needs_libreoffice
def test_an_independent_program_computes_the_same(tmp_path: Path) -> None:
    sheets = sample()
    path = tmp_path / "book.xlsx"
    path.write_bytes(written(sheets))
    found = recalculate(path, tmp_path)
    assert differences(sheets, found) == []
    assert found["Prices"]["C10"] == "yes"


@needs_libreoffice
def test_poisoned_values_come_back_corrected(tmp_path: Path) -> None:
    """Without this, the test above could pass on values that nobody computed again."""
    poisoned = sample()
    cells = poisoned[0].cells
    wrong = {
        place: cell.__class__(999.0, cell.style, cell.formula)
        for place, cell in cells.items()
        if cell.formula
    }
    named = {place: cells[place] for place in cells if place not in wrong}
    first = Sheet(
        "Prices",
        "live",
        dict(sorted((named | wrong).items())),
        names=poisoned[0].names,
    )
    path = tmp_path / "poison.xlsx"
    path.write_bytes(written([first, poisoned[1]]))
    stored = values_in(path)["Prices"]
    assert {stored[address] for address in ("D6", "M6", "C6")} == {999.0}
    found = recalculate(path, tmp_path)
    assert differences(sample(), found) == []
    assert len(differences([first], found)) == len(wrong)


@needs_libreoffice
def test_hostile_text_survives_an_independent_program(tmp_path: Path) -> None:
    texts = [*HOSTILE, "_x0041_"]
    page = Page("Sums")
    for row, text in enumerate(texts, 1):
        page.put(row, 1, text)
    path = tmp_path / "hostile.xlsx"
    path.write_bytes(written([page.finish()]))
    found = recalculate(path, tmp_path)["Sums"]
    assert [found[f"A{row}"] for row in range(1, len(texts) + 1)] == texts
