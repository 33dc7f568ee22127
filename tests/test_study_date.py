"""The date of a study: that of the case, else the day of the run; it stands on every page."""

import io
from datetime import date
from pathlib import Path

import openpyxl
import pytest
from cases import minimal_case, write_case

from appraise import study
from appraise.case.load import load_case
from appraise.case.paths import edited
from appraise.results import study_json
from appraise.study import Study, run_study
from appraise.workbook.book import workbook_bytes

DAY, LATER = date(2026, 12, 1), date(2027, 1, 2)


def solved(folder: Path, given: str | None = None, today: date | None = DAY) -> Study:
    data = edited(minimal_case(), "drivers", [])
    data = data if given is None else edited(data, "study.date", given)
    return run_study(load_case(write_case(folder, data)), today=today)


def test_the_date_of_the_case_goes_before_the_day_of_the_run(tmp_path: Path) -> None:
    made = solved(tmp_path, "2020-02-29")
    assert made.dated == date(2020, 2, 29)
    assert study_json(made)["study"]["date"] == "2020-02-29"


def test_without_a_date_the_study_is_of_the_day_of_the_run(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    class Clock(date):
        @classmethod
        def today(cls) -> date:
            return LATER

    monkeypatch.setattr(study, "date", Clock)
    assert solved(tmp_path, today=None).dated == LATER
    assert solved(tmp_path).dated == DAY


def test_a_date_of_the_case_may_be_one_of_the_file_format(tmp_path: Path) -> None:
    path = write_case(tmp_path, minimal_case())
    text = path.read_text(encoding="utf-8")
    assert text.startswith("study = { ")
    path.write_text(text.replace("study = { ", "study = { date = 2026-12-24, ", 1), encoding="utf-8")
    assert load_case(path).case.study.date == "2026-12-24"


def test_every_page_has_the_date_of_the_study_and_none_of_printing(tmp_path: Path) -> None:
    book = openpyxl.load_workbook(io.BytesIO(workbook_bytes(solved(tmp_path))))
    for page in book:
        left, right = page.oddFooter.left.text, page.oddFooter.right.text
        assert left.startswith("Study of 2026-12-01 · appraise "), page.title
        assert right == "page &P of &N", page.title
    assert book["Decision"]["A3"].value == "Study of 2026-12-01"


def test_the_same_date_gives_the_same_bytes_and_another_one_others(tmp_path: Path) -> None:
    first = workbook_bytes(solved(tmp_path))
    assert workbook_bytes(solved(tmp_path)) == first
    assert workbook_bytes(solved(tmp_path, today=LATER)) != first
