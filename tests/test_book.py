"""A workbook as the case: unedited it changes nothing, edited it is the edited file, faults have cells."""

import io
import math
import random
import re
import shutil
import time
from collections.abc import Callable
from datetime import datetime
from pathlib import Path
from typing import Any
from zipfile import ZipFile

import openpyxl
import pytest
from books import (
    HOURS,
    INPUTS,
    addresses,
    arrays_of,
    small_book,
    two_sheets,
    typed,
    with_cells,
    with_inputs,
    with_part,
)
from cases import csv_text, minimal_case, synthetic_hours, write_case
from full_case import full_case
from libreoffice import needs_libreoffice, recalculate
from study_fixture import TODAY

from appraise import cli
from appraise.case.book import BookCase
from appraise.case.load import LoadedCase, load_case
from appraise.case.model import Case
from appraise.case.paths import edited
from appraise.errors import CaseError, FileProblem
from appraise.results import study_json
from appraise.study import Study, run_study


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with a small case, and its workbook in book/book.xlsx."""
    folder = tmp_path_factory.mktemp("small")
    small_book(folder)
    return folder


@pytest.fixture(scope="module")
def small(folder: Path) -> LoadedCase:
    """The small case, from its file."""
    return load_case(folder / "case.toml")


@pytest.fixture
def put(folder: Path, tmp_path: Path) -> Callable[..., Path]:
    """Writes the small workbook with other cells, and returns its path."""

    def write(cells: dict[str, str], sheet: str = INPUTS) -> Path:
        path = tmp_path / "book.xlsx"
        path.write_bytes(with_cells((folder / "book" / "book.xlsx").read_bytes(), cells, sheet))
        return path

    return write


@pytest.fixture(scope="module")
def at(folder: Path, small: LoadedCase) -> dict[str, str]:
    """Addresses of the inputs of the small workbook."""
    return addresses(small.case, (folder / "book" / "book.xlsx").read_bytes())


def faults(path: Path) -> list[str]:
    """What is said about a workbook that is refused."""
    with pytest.raises(CaseError) as refused:
        load_case(path)
    return str(refused.value).split("\n")


def _written(path: Path, content: bytes) -> Path:
    path.write_bytes(content)
    return path


def part_of(content: bytes, name: str) -> bytes:
    """One part of a workbook."""
    with ZipFile(io.BytesIO(content)) as archive:
        return archive.read(name)


def same(one: LoadedCase, other: LoadedCase) -> bool:
    """Whether both have the same case, the same hours to the last bit and the same doubts."""
    hours = dict(arrays_of(one)) == dict(arrays_of(other))
    return one.case == other.case and hours and one.doubts == other.doubts


def without_identity(study: Study) -> dict[str, Any]:
    """The results of a study, without the hashes of where the case came from."""
    told = study_json(study)
    for name in ("case_sha256", "hours_sha256"):
        assert len(told["study"].pop(name)) == 64
    return told


# --- unedited ----------------------------------------------------------------------------------------------


def test_the_demos_workbook_is_the_demo(marrowby: LoadedCase, marrowby_study: Study, tmp_path: Path) -> None:
    """The same case, hours and results; a workbook of that run is the same case again."""
    from appraise.workbook.book import workbook_bytes

    path = tmp_path / "marrowby.xlsx"
    path.write_bytes(workbook_bytes(marrowby_study))
    started = time.process_time()
    again = load_case(path)
    assert time.process_time() - started < 1.5
    assert same(again, marrowby)
    assert (again.path, again.hours_path) == (path, path)
    study = run_study(again, today=marrowby_study.dated)
    assert without_identity(study) == without_identity(marrowby_study)
    second = tmp_path / "second.xlsx"
    second.write_bytes(workbook_bytes(study))
    third = load_case(second)
    assert same(third, again)
    assert (third.case_sha256, third.hours_sha256) == (again.case_sha256, again.hours_sha256)


def test_every_table_and_form_of_a_value_comes_back_with_its_notes(small: LoadedCase) -> None:
    book = BookCase(two_sheets(small, full_case()), Path("full.xlsx"))
    assert book.problems == []
    assert Case.model_validate(book.data) == full_case()


def test_every_number_survives_to_the_last_bit(tmp_path: Path) -> None:
    """Sixteen digits, which spreadsheets' writers like, would not do."""
    draw = random.Random(3)
    rows = synthetic_hours()
    for row in rows[1:]:
        row[5] = repr(math.ldexp(draw.uniform(-1.0, 1.0), draw.randint(-30, 49)))
    rows[1][5], rows[2][5], rows[3][5] = "-0.0", "5e-324", "999999999999999.9"
    data = edited(minimal_case(), "plant.boiler.efficiency", 0.1 + 0.2 + 0.4)
    data = edited(data, "plant.turbine.efficiency", math.nextafter(0.84, 1.0))
    path = small_book(tmp_path, data, hours=rows)
    assert same(load_case(path), load_case(tmp_path / "case.toml"))


@pytest.mark.parametrize(
    "text",
    [
        "_x0041_",
        "=1+1",
        "  between blanks  ",
        "two\nlines",
        "1e3",
        "TRUE",
        "é € 😀",
        "'quoted'",
        "a & <b>",
        "-",
    ],
)
def test_every_text_survives(tmp_path: Path, text: str) -> None:
    data = edited(edited(minimal_case(), "study.title", text), "study.author", text)
    data = edited(data, "notes", {"study.title": text})
    path = small_book(tmp_path, data)
    assert same(load_case(path), load_case(tmp_path / "case.toml"))


def odd_case() -> dict[str, Any]:
    """The small case with what programs like to change: texts like numbers, days, truth values."""
    data = edited(minimal_case(), "year.outages", [{"from": "07-06", "to": "07-26"}])
    data = edited(data, "study.revision", "007")
    data = edited(data, "study.author", "=not a formula")
    data = edited(data, "year.extra_running", True)
    return edited(data, "finance.discount_rate", 0.0575)


def test_a_copy_by_openpyxl_is_the_same_case(tmp_path: Path) -> None:
    path = small_book(tmp_path, odd_case())
    book = openpyxl.load_workbook(path)
    assert book["Inputs"][addresses(load_case(path).case, path.read_bytes())["study.author"]].data_type == "s"
    copy = tmp_path / "copy.xlsx"
    book.save(copy)
    once, again = load_case(path), load_case(copy)
    assert same(again, once)
    assert (again.case_sha256, again.hours_sha256) == (once.case_sha256, once.hours_sha256)


@needs_libreoffice
def test_a_copy_by_libreoffice_is_the_same_case(tmp_path: Path) -> None:
    path = small_book(tmp_path, odd_case() | {"notes": {"study.title": "_x0041_ stays"}})
    recalculate(path, tmp_path)
    once, again = load_case(path), load_case(tmp_path / "recalculated" / "book.xlsx")
    assert again.case == once.case
    for (name, one), (_, other) in zip(arrays_of(once), arrays_of(again), strict=True):
        assert one == other, name
    assert again.case_sha256 == once.case_sha256


def test_days_may_be_counted_from_1904(folder: Path, small: LoadedCase, tmp_path: Path) -> None:
    content = (folder / "book" / "book.xlsx").read_bytes()
    outline = "xl/workbook.xml"
    assert b"<workbookPr" in part_of(content, outline)
    content = with_part(
        content, outline, lambda part: part.replace(b"<workbookPr", b'<workbookPr date1904="1"', 1)
    )
    pattern = rb'(<c r="A(?:9|\d{2,})" [^>]*><v>)([\d.]+)'
    content = with_part(
        content,
        HOURS,
        lambda part: re.sub(pattern, lambda old: old[1] + repr(float(old[2]) - 1462).encode(), part),
    )
    assert same(load_case(_written(tmp_path / "book.xlsx", content)), small)


def test_names_may_have_prefixes(folder: Path, small: LoadedCase, tmp_path: Path) -> None:
    def prefixed(part: bytes) -> bytes:
        return re.sub(rb"<(/?)([a-zA-Z])", rb"<\1x:\2", part).replace(b"xmlns=", b"xmlns:x=")

    content = (folder / "book" / "book.xlsx").read_bytes()
    for name in (INPUTS, HOURS, "xl/workbook.xml", "xl/styles.xml"):
        content = with_part(content, name, prefixed)
    assert same(load_case(_written(tmp_path / "book.xlsx", content)), small)


# --- edited ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("path", "value"),
    [
        ("finance.discount_rate", 0.08),  # the sheets of money follow at once
        ("tail.efficiency", 0.76),  # only a new run follows
        ("plant.turbine.generator_limit_MW", 9.5),  # was blank
        ("options.two-stage.bypass", True),
        ("study.years", 25),  # more than the workbook's own sheets can show
        ("scenarios.central.power", 70),
    ],
)
def test_an_edited_workbook_is_the_edited_file(
    small: LoadedCase, put: Callable[..., Path], at: dict[str, str], tmp_path: Path, path: str, value: object
) -> None:
    again = load_case(put(dict([typed(at[path], value)])))
    (tmp_path / "toml").mkdir()
    file = load_case(write_case(tmp_path / "toml", edited(minimal_case(), path, value)))
    assert same(again, file)
    assert again.case != small.case
    assert without_identity(run_study(again, today=TODAY)) == without_identity(run_study(file, today=TODAY))


def dated_book(folder: Path, given: str | None, number_format: str = "", value: object = None) -> Path:
    """A workbook of a case with this date, its cell typed over where a format is given."""
    data = minimal_case() if given is None else edited(minimal_case(), "study.date", given)
    path = small_book(folder, data)
    if number_format:
        book = openpyxl.load_workbook(path)
        cell = book["Inputs"][addresses(load_case(path).case, path.read_bytes())["study.date"]]
        cell.number_format, cell.value = number_format, value
        book.save(path)
    return path


def test_a_date_comes_back_and_so_does_none(tmp_path: Path) -> None:
    (tmp_path / "none").mkdir()
    assert load_case(dated_book(tmp_path, "2026-12-01")).case.study.date == "2026-12-01"
    assert load_case(dated_book(tmp_path / "none", None)).case.study.date is None


def test_a_cell_of_a_date_keeps_what_is_typed_as_a_text(tmp_path: Path) -> None:
    for given in ("2026-12-01", None):
        folder = tmp_path / str(given)
        folder.mkdir()
        path = dated_book(folder, given)
        cell = addresses(load_case(path).case, path.read_bytes())["study.date"]
        assert openpyxl.load_workbook(path)["Inputs"][cell].number_format == "@"


@pytest.mark.parametrize(
    ("number_format", "value", "found"),
    [
        ("yyyy-mm-dd", 46357, "2026-12-01"),  # a date made by the spreadsheet
        ("d.m.yyyy", datetime(2026, 12, 1), "2026-12-01"),
        ("@", "2026-12-24", "2026-12-24"),
        ("@", None, None),
    ],
)
def test_a_date_may_be_typed_as_a_text_or_a_date(
    tmp_path: Path, number_format: str, value: object, found: str | None
) -> None:
    assert load_case(dated_book(tmp_path, "2020-01-01", number_format, value)).case.study.date == found


@pytest.mark.parametrize(
    ("number_format", "value", "given"),
    [
        ("yyyy-mm-dd hh:mm", 46357.5, "2026-12-01T12:00:00"),
        ("General", 46357, "46357"),
        ("@", "1.12.2026", '"1.12.2026"'),
        ("@", "2026-02-30", '"2026-02-30"'),
    ],
)
def test_what_is_no_date_is_told_by_its_cell(
    tmp_path: Path, at: dict[str, str], number_format: str, value: object, given: str
) -> None:
    cell = at["study.date"]
    allowed = 'allowed: a date as "YYYY-MM-DD", such as "2026-12-01"'
    told = faults(dated_book(tmp_path, None, number_format, value))
    assert told == [f"Inputs!{cell} (study.date): {given} given; {allowed}"]


@pytest.mark.parametrize("word", ["TRUE", "true", " True "])
def test_a_truth_value_may_be_a_text(put: Callable[..., Path], at: dict[str, str], word: str) -> None:
    again = load_case(put(dict([typed(at["options.two-stage.bypass"], word)])))
    assert again.case.options[1].bypass is True


def test_what_may_be_left_out_may_be_emptied(small: LoadedCase, folder: Path, tmp_path: Path) -> None:
    data = edited(minimal_case(), "plant.turbine.generator_limit_MW", 9.5)
    data = edited(data, "study.author", "somebody")
    path = small_book(tmp_path, data)
    loaded = load_case(path)
    assert loaded.case != small.case
    values = {"plant.turbine.generator_limit_MW": None, "study.author": None}
    path.write_bytes(with_inputs(path.read_bytes(), loaded.case, values))
    assert same(load_case(path), small)


def test_a_text_may_have_several_looks(put: Callable[..., Path], at: dict[str, str]) -> None:
    """Its runs are put together; a reading aid beside it is no part of it."""
    cell = at["study.author"]
    runs = '<is><r><rPr><b/></rPr><t>Mar</t></r><r><t xml:space="preserve">row </t></r><rPh><t>x</t>'
    again = load_case(
        put({cell: f'<c r="{cell}" s="{{style}}" t="inlineStr">{runs}</rPh><r><t>by</t></r></is></c>'})
    )
    assert again.case.study.author == "Marrow by"


def test_the_saved_value_of_a_formula_counts(put: Callable[..., Path], at: dict[str, str]) -> None:
    cell = at["tail.efficiency"]
    again = load_case(put({cell: f'<c r="{cell}" s="{{style}}"><f>0.7+0.05</f><v>0.75</v></c>'}))
    assert again.case.tail.efficiency == 0.75


def test_the_scenario_shown_is_not_the_reference(marrowby_study: Study, tmp_path: Path) -> None:
    from appraise.workbook.book import workbook_bytes

    book = openpyxl.load_workbook(io.BytesIO(workbook_bytes(marrowby_study)))
    (place,) = book.defined_names["chosen_scenario"].destinations
    title, cell = place[0], place[1].replace("$", "")
    assert book[title][cell].value == "central"
    book[title][cell].value = "cheap_power"
    book.save(tmp_path / "book.xlsx")
    assert load_case(tmp_path / "book.xlsx").case.study.reference_scenario == "central"


# --- faults ------------------------------------------------------------------------------------------------

NUMBER = "allowed: a number above 0, at most 1"
AGAIN = f"{NUMBER}; the cell holds a text, type the number again"
CURVE = "or a curve { load = [..], value = [..] }"
APOSTROPHE = "an apostrophe before what is typed makes it a text"
DATE_HINT = "; the spreadsheet made a date of what was typed, an apostrophe before it keeps it: '07-06"


@pytest.mark.parametrize(
    ("path", "xml", "told"),
    [
        ("tail.efficiency", "<v>1.2</v>", f"1.2 given; {NUMBER}"),
        ("tail.efficiency", None, f"an empty cell given; {NUMBER}"),
        ("finance.tax_rate", None, "an empty cell given; allowed: a number from 0 to below 1"),
        ("plant.boiler.efficiency", None, f"an empty cell given; {NUMBER}, {CURVE}"),
        ("study.title", None, "an empty cell given; allowed: a text, not empty"),
        ("tail.efficiency", "text:0.8", f'"0.8" given; {AGAIN}'),
        ("tail.efficiency", "text:80%", f'"80%" given; {AGAIN}'),
        ("tail.efficiency", "text:0,8", f'"0,8" given; {AGAIN}'),
        ("tail.efficiency", "text:good", f'"good" given; {NUMBER}'),
        ("tail.efficiency", "error:#N/A", f"the error #N/A given; {NUMBER}"),
        ("plant.boiler.max_fuel_MW", "error:#REF!", "the error #REF! given; allowed: a number above 0"),
        ("tail.efficiency", "<f>1/2</f>", f"a formula without a saved value given; {NUMBER}"),
        ("tail.efficiency", "<f>1/2</f><v/>", f"a formula without a saved value given; {NUMBER}"),
        ("tail.efficiency", "<v>1e999</v>", f'"1e999" as a number given; {NUMBER}'),
        ("tail.efficiency", "<v>0x1</v>", f'"0x1" as a number given; {NUMBER}'),
        ("tail.efficiency", "<v>1_0</v>", f'"1_0" as a number given; {NUMBER}'),
        ("study.revision", "<v>2</v>", f"2 given; allowed: a text; {APOSTROPHE}: '2"),
        ("study.years", "<v>2.5</v>", "2.5 given; allowed: a whole number from 1 to 50"),
        ("options.two-stage.bypass", "<v>2</v>", "2 given; allowed: true or false"),
        ("options.two-stage.drain", "text:subcoold", '"subcoold" given; allowed: "saturated" or "subcooled"'),
        ("study.reference_scenario", "text:centrl", '"centrl" given; nearest known scenario: central'),
    ],
)  # fmt: skip
def test_a_wrong_value_is_told_by_cell_and_path(
    put: Callable[..., Path], at: dict[str, str], path: str, xml: str | None, told: str
) -> None:
    cell = at[path]
    kind, _, what = (xml or "").partition(":")
    if xml is None:
        new = typed(cell, None)[1]
    elif kind == "text":
        new = typed(cell, what)[1]
    elif kind == "error":
        new = f'<c r="{cell}" s="{{style}}" t="e"><v>{what}</v></c>'
    else:
        new = f'<c r="{cell}" s="{{style}}">{xml}</c>'
    assert faults(put({cell: new})) == [f"Inputs!{cell} ({path}): {told}"]


def test_a_date_that_the_spreadsheet_made_is_told(tmp_path: Path) -> None:
    """As Excel and LibreOffice do when 07-06 is typed into a cell that is not told to hold text."""
    path = small_book(tmp_path, odd_case())
    cell = addresses(load_case(path).case, path.read_bytes())["year.outages[0].from"]
    book = openpyxl.load_workbook(path)
    book["Inputs"][cell].number_format = "d/m"
    book["Inputs"][cell].value = 46209
    book.save(path)
    allowed = 'allowed: a day of the year as "MM-DD", such as "07-01"'
    assert faults(path) == [f"Inputs!{cell} (year.outages[0].from): 2026-07-06 given; {allowed}{DATE_HINT}"]


def test_a_percentage_in_the_place_of_a_change_is_no_replacing_number(tmp_path: Path) -> None:
    """-20% typed without an apostrophe is the number -0.2, which would replace the price."""
    path = small_book(tmp_path)
    cell = addresses(load_case(path).case, path.read_bytes())["drivers[0].low"]
    book = openpyxl.load_workbook(path)
    book["Inputs"][cell].number_format = "0%"
    book["Inputs"][cell].value = -0.2
    book.save(path)
    given = "the number -0.2, shown as a percentage, given"
    assert faults(path) == [
        f'Inputs!{cell} (drivers[0].low): {given}; allowed: a number, or a text like "-20%"'
        "; an apostrophe before what is typed keeps it: '-20%"
    ]


def test_all_faults_are_told_at_once(put: Callable[..., Path], at: dict[str, str]) -> None:
    wrong = {"tail.efficiency": 3, "plant.feed.bleed_bar": 1.0, "study.title": None, "capex.spend[0]": 0.9}
    path = put(dict(typed(at[name], value) for name, value in wrong.items()))
    assert {line.partition(" ")[0] for line in faults(path)} == {f"Inputs!{at[name]}" for name in wrong} - {
        f"Inputs!{at['capex.spend[0]']}"
    } | {f"Inputs!{at['capex.spend[0]'].replace('C', 'A')}"}


def test_faults_in_lists_name_the_element(tmp_path: Path) -> None:
    path = small_book(tmp_path, edited(minimal_case(), "capex.spend", [0.4, 0.6]))
    case = load_case(path).case
    at = addresses(case, path.read_bytes())
    path.write_bytes(with_inputs(path.read_bytes(), case, {"capex.spend[1]": None}))
    allowed = "an empty cell given; allowed: a number from 0 to 1"
    assert faults(path) == [f"Inputs!{at['capex.spend[1]']} (capex.spend[1]): {allowed}"]


def test_an_emptied_text_of_a_list_is_told(tmp_path: Path) -> None:
    data = minimal_case()
    data["capex"]["items"][0]["only"] = ["two-stage"]
    path = small_book(tmp_path, data)
    case = load_case(path).case
    at = addresses(case, path.read_bytes())
    path.write_bytes(with_inputs(path.read_bytes(), case, {"capex.items.tail.only[0]": None}))
    allowed = "an empty cell given; allowed: a text or a list of texts, not empty"
    where = f"Inputs!{at['capex.items.tail.only[0]']} (capex.items.tail.only[0])"
    assert faults(path) == [f"{where}: {allowed}"]


def test_a_row_that_was_added_is_refused(put: Callable[..., Path], at: dict[str, str], folder: Path) -> None:
    """At the foot, and in the place of a heading; nobody shall believe that it had an effect."""
    content = (folder / "book" / "book.xlsx").read_bytes()
    row = max(int(cell[1:]) for cell in at.values()) + 7
    added = (
        f'<row r="{row}"><c r="A{row}" t="inlineStr"><is><t>plant.feed.heater.bleed_bar</t></is></c>'
        f'<c r="C{row}"><v>12</v></c></row></sheetData>'
    )
    path = put({})
    path.write_bytes(
        with_part(content, INPUTS, lambda part: part.replace(b"</sheetData>", added.encode(), 1))
    )
    assert faults(path) == [
        f'Inputs!A{row}: "plant.feed.heater.bleed_bar" is a row that no run wrote; allowed: changed values '
        "only; new keys belong into a case file"
    ]


def test_paths_that_were_changed_are_refused(put: Callable[..., Path], at: dict[str, str]) -> None:
    def named(path: str, name: str) -> tuple[str, str]:
        cell = at[path].replace("C", "A")
        return cell, typed(cell, name)[1]

    author, revision = at["study.author"].replace("C", "A"), at["study.revision"].replace("C", "A")
    told = faults(put(dict([named("study.author", "study..author"), named("study.revision", "study.title")])))
    assert told == [
        f'Inputs!{author}: "study..author" given; allowed: the path that the run wrote here',
        f'Inputs!{revision}: "study.title" stands in row {at["study.title"][1:]} already; allowed: once',
    ]
    told = faults(put(dict([named("tail.efficiency", "tail.eficiency")])))
    assert any(
        line.startswith(f"Inputs!{at['tail.efficiency']} (tail.eficiency): unknown key") for line in told
    )
    assert any(line.endswith("missing; required: a number above 0, at most 1") for line in told)


def test_a_list_without_one_of_its_rows_is_refused(tmp_path: Path) -> None:
    path = small_book(tmp_path, edited(minimal_case(), "capex.spend", [0.4, 0.3, 0.3]))
    at = addresses(load_case(path).case, path.read_bytes())
    row = at["capex.spend[1]"][1:]
    gone = re.compile(rf'<row r="{row}".*?</row>'.encode(), re.DOTALL)
    path.write_bytes(with_part(path.read_bytes(), INPUTS, lambda part: gone.sub(b"", part)))
    assert "Inputs (capex.spend[1]): its row is missing; allowed: every element of the list" in faults(path)


@pytest.mark.parametrize(
    ("cell", "xml", "told"),
    [
        ("B10", "<v>-3</v>", ["Hours row 10, column heat_MW: -3 given; allowed: a number, at least 0"]),
        ("B9", None, ["Hours row 9, column heat_MW: empty cell; allowed: a number, at least 0"]),
        ("A11", "<v>45658.0625</v>", ['Hours row 11, column time: "2025-01-01T01:30" given; allowed: the '
         "start of an hour in local standard time, such as 2025-01-01T00:00"]),
        ("E12", "<v>100.5</v>", ["Hours row 12, column return_C: 100.5 °C given; allowed: below the supply "
         "of 100 °C"]),
        ("B5", "text:heat", ['Hours row 5: "heat" is no known column; nearest known column: heat_MW',
         "Hours row 5: column heat_MW is missing; required: heat_MW, or year.heat_signature"]),
    ],
)  # fmt: skip
def test_faults_of_hours_name_their_cell(
    put: Callable[..., Path], cell: str, xml: str | None, told: list[str]
) -> None:
    if xml is None:
        new = typed(cell, None)[1]
    elif xml.startswith("text:"):
        new = typed(cell, xml.removeprefix("text:"))[1]
    else:
        new = f'<c r="{cell}" s="{{style}}">{xml}</c>'
    assert faults(put({cell: new}, HOURS)) == told


def test_hours_that_offsets_cross_name_the_row_of_the_sheet(
    put: Callable[..., Path], at: dict[str, str]
) -> None:
    cell = at["year.return_offset_K"]
    (told,) = faults(put(dict([typed(cell, 45)])))
    assert told.startswith(f"Inputs!{at['year.series']} (year.series): ")
    found = re.search(r"first row (\d+) \(([\d.]+) and", told)
    assert found is not None
    rows = synthetic_hours()
    index = next(i for i, row in enumerate(rows[1:]) if float(row[4]) + 45 >= float(row[3]))
    assert int(found[1]) == 9 + index
    assert float(found[2]) == pytest.approx(float(rows[1 + index][4]) + 45, abs=1e-3)


def test_a_series_that_was_edited_is_read(folder: Path, small: LoadedCase, put: Callable[..., Path]) -> None:
    again = load_case(put(dict([typed("B10", 12.5)]), HOURS))
    assert again.hours.heat_MW is not None
    assert small.hours.heat_MW is not None
    assert again.hours.heat_MW[1] == 12.5
    assert (again.hours.heat_MW != small.hours.heat_MW).sum() == 1
    assert again.case_sha256 == load_case(folder / "book" / "book.xlsx").case_sha256
    assert again.hours_sha256 != load_case(folder / "book" / "book.xlsx").hours_sha256


# --- series in files ---------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def two_years(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A small case with two years of hours, and its workbook in book/book.xlsx."""
    folder = tmp_path_factory.mktemp("two")
    small_book(folder, hours=synthetic_hours(hours=2 * 8760))
    return folder


@pytest.mark.parametrize("place", ["beside", "by its path"])
def test_a_series_of_years_is_found_by_its_hash(two_years: Path, tmp_path: Path, place: str) -> None:
    data = edited(minimal_case(), "year.series", "data/hours.csv")
    (tmp_path / "data").mkdir()
    shutil.copy(two_years / "hours.csv", tmp_path / "data" / "hours.csv")
    case_path = write_case(tmp_path, data)
    loaded = load_case(case_path)
    book = tmp_path / "there" / "book.xlsx"
    series = book.parent / ("hours.csv" if place == "beside" else "data/hours.csv")
    series.parent.mkdir(parents=True)
    book.write_bytes(two_sheets(loaded))
    shutil.copy(two_years / "hours.csv", series)
    again = load_case(book)
    assert same(again, loaded)
    assert (again.hours_path, again.hours_sha256) == (series, loaded.hours_sha256)
    assert load_case(_written(tmp_path / "there" / "second.xlsx", two_sheets(again))).case == again.case


def test_a_series_of_years_that_is_absent_or_another_is_refused(two_years: Path, tmp_path: Path) -> None:
    path = tmp_path / "book.xlsx"
    shutil.copy(two_years / "book" / "book.xlsx", path)
    cell = addresses(load_case(two_years / "case.toml").case, path.read_bytes())["year.series"]
    here = tmp_path / "hours.csv"
    assert faults(path) == [
        f'Inputs!{cell} (year.series): "hours.csv" given; the workbook does not hold its rows, and there '
        f"is no {here}"
    ]
    here.write_text(csv_text(synthetic_hours()), encoding="utf-8")
    (told,) = faults(path)
    assert re.fullmatch(
        re.escape(
            f'Inputs!{cell} (year.series): "hours.csv" given; the workbook belongs to a file with SHA-256 '
        )
        + "[0-9a-f]{64}; "
        + re.escape(f"{here} has ")
        + "[0-9a-f]{64}",
        told,
    )


def test_another_series_is_read_where_another_is_named(
    put: Callable[..., Path], at: dict[str, str], tmp_path: Path, small: LoadedCase
) -> None:
    path = put(dict([typed(at["year.series"], "warm.csv")]))
    (told,) = faults(path)
    assert told.endswith(f"the workbook does not hold its rows, and there is no {tmp_path / 'warm.csv'}")
    rows = synthetic_hours()
    rows[1][1] = "12.5"
    (tmp_path / "warm.csv").write_text(csv_text(rows), encoding="utf-8")
    again = load_case(path)
    assert again.hours_path == tmp_path / "warm.csv"
    assert again.hours.heat_MW is not None
    assert again.hours.heat_MW[0] == 12.5
    assert again.case.tail == small.case.tail


# --- commands ----------------------------------------------------------------------------------------------


def test_run_again_keeps_the_workbook_it_read(
    folder: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "reports").mkdir()
    book = tmp_path / "reports" / "book.xlsx"
    shutil.copy(folder / "book" / "book.xlsx", book)
    before = book.read_bytes()
    assert cli.main(["run", "reports/book.xlsx", "--out", "reports/../reports/book.xlsx"]) == 2
    assert capsys.readouterr().err.endswith("would overwrite the case itself; give another name\n")
    assert cli.main(["run", "reports/book.xlsx"]) == 0
    assert capsys.readouterr().out.endswith("wrote reports/book-again.xlsx\n")
    assert book.read_bytes() == before
    assert same(load_case(tmp_path / "reports" / "book-again.xlsx"), load_case(book))


def test_check_and_balance_read_a_workbook(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    book = folder / "book" / "book.xlsx"
    assert cli.main(["check", str(book)]) == 0
    assert "book.xlsx: A small plant" in capsys.readouterr().out
    assert cli.main(["balance", str(book)]) == 0
    told = capsys.readouterr().out
    assert cli.main(["balance", str(folder / "case.toml")]) == 0
    assert capsys.readouterr().out == told


def test_a_workbook_may_have_any_name(folder: Path, small: LoadedCase, tmp_path: Path) -> None:
    shutil.copy(folder / "book" / "book.xlsx", tmp_path / "case.toml")
    assert same(load_case(tmp_path / "case.toml"), small)


def test_a_refusal_names_what_is_read(tmp_path: Path) -> None:
    (tmp_path / "book.xlsx").write_bytes(b"a,b\n1,2\n")
    with pytest.raises(FileProblem, match=r"book\.xlsx: is no workbook, .*; allowed: a workbook"):
        load_case(tmp_path / "book.xlsx")
