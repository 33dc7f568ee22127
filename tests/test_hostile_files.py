"""Files as other programs leave them, places that cannot be read or written, and work that is cut short."""

import errno
import os
import random
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from calls import Answer, Call, contents
from cases import SERIES, csv_text, minimal_case, synthetic_hours, toml_text, write_case

from appraise import files, study
from appraise.case.load import load_case
from appraise.errors import SolveError

Read = pytest.CaptureFixture[str]
IS_ROOT = hasattr(os, "geteuid") and os.geteuid() == 0
FULL = OSError(errno.ENOSPC, "No space left on device")


def fault(text: str) -> Answer:
    """The refusal of a case with one fault."""
    return Answer(2, "", f"The case has 1 fault:\n  {text}\n")


# -- what other programs make of text


def rewritten(folder: Path, name: str, change: Callable[[str], bytes]) -> None:
    path = folder / name
    path.write_bytes(change(path.read_text(encoding="utf-8")))


def crlf(text: str) -> bytes:
    return text.replace("\n", "\r\n").encode()


def with_mark(text: str) -> bytes:
    return text.encode("utf-8-sig")


@pytest.mark.parametrize("change", [crlf, with_mark, lambda text: b"\xef\xbb\xbf" + crlf(text)])
@pytest.mark.parametrize("name", [SERIES, "case.toml"])
def test_line_ends_and_byte_order_marks_change_nothing(
    call: Call, case: Path, name: str, change: Callable[[str], bytes]
) -> None:
    before = call("balance", "case.toml", "--json", "-")
    rewritten(case.parent, name, change)
    assert call("balance", "case.toml", "--json", "-") == before
    assert before.status == 0


def test_a_case_in_latin_1_is_told_by_its_line(call: Call, case: Path) -> None:
    rewritten(case.parent, "case.toml", lambda text: text.replace("A small", "Größe").encode("latin-1"))
    assert call("check", "case.toml") == fault("case.toml line 1: not UTF-8; allowed: text in UTF-8")


def test_hours_in_latin_1_are_told_by_their_row(call: Call, case: Path) -> None:
    rewritten(case.parent, SERIES, lambda text: text.replace("T03:00", "T03:00\xb0", 1).encode("latin-1"))
    assert call("check", "case.toml") == fault("hours.csv row 5: not UTF-8; allowed: text in UTF-8")


def test_semicolons_and_decimal_commas_are_named(call: Call, tmp_path: Path) -> None:
    text = csv_text(synthetic_hours())
    write_case(tmp_path, minimal_case(), text.replace(",", ";").replace(".", ","))
    assert call("check", "case.toml") == fault(
        "hours.csv row 1: semicolons between the columns; allowed: commas between columns, a point in numbers"
    )


# -- what is no case at all


def junk(size: int) -> bytes:
    return random.Random(1).randbytes(size)


def test_ten_megabytes_are_no_case(call: Call, tmp_path: Path) -> None:
    (tmp_path / "case.toml").write_bytes(junk(10_000_000))
    told = "Error: case.toml: 10.0 MB; allowed: at most 5 MB\n"
    assert call("check", "case.toml") == Answer(2, "", told)


def test_junk_of_an_allowed_size_is_no_case(call: Call, tmp_path: Path) -> None:
    (tmp_path / "case.toml").write_bytes(junk(4_000_000))
    assert call("check", "case.toml") == fault("case.toml line 1: not UTF-8; allowed: text in UTF-8")


@pytest.mark.parametrize(
    ("content", "told"),
    [
        (junk(10_000_000), "hours.csv row 1: not UTF-8; allowed: text in UTF-8"),
        (
            b"x" * 10_000_000,
            "hours.csv: field larger than field limit (131072); allowed: comma-separated cells",
        ),
    ],
)
def test_ten_megabytes_are_no_hours(call: Call, case: Path, content: bytes, told: str) -> None:
    (case.parent / SERIES).write_bytes(content)
    assert call("check", "case.toml") == fault(told)


@pytest.mark.parametrize("command", ["check", "balance", "run", "optimum"])
def test_a_folder_is_no_case(call: Call, tmp_path: Path, command: str) -> None:
    (tmp_path / "case.toml").mkdir()
    assert call(command, "case.toml") == Answer(
        2,
        "",
        f"Usage: appraise {command} [OPTIONS] CASE\nTry 'appraise {command} --help' for help.\n\n"
        "Error: Invalid value for 'CASE': File 'case.toml' is a directory.\n",
    )


def test_a_folder_is_no_series(call: Call, tmp_path: Path) -> None:
    (tmp_path / "case.toml").write_text(toml_text(minimal_case()))
    (tmp_path / SERIES).mkdir()
    told = 'year.series: "hours.csv" given; hours.csv: is a folder; allowed: a file'
    assert call("check", "case.toml") == fault(told)


@pytest.mark.skipif(IS_ROOT, reason="root reads everything")
def test_a_case_without_permission_is_told(call: Call, case: Path) -> None:
    case.chmod(0)
    answer = call("check", "case.toml")
    assert (answer.status, answer.out) == (2, "")
    assert "case.toml" in answer.err


# -- where results cannot go


REPORT = ("run", "case.toml", "--quiet", "--out", "out.xlsx", "--json", "out.json")


@pytest.fixture
def reports(case: Path, monkeypatch: pytest.MonkeyPatch) -> dict[str, bytes]:
    """Two reports of an earlier run beside the case; a run itself is not what is tried here."""
    (case.parent / "out.xlsx").write_bytes(b"old workbook")
    (case.parent / "out.json").write_bytes(b"old results")
    monkeypatch.setattr("appraise.study.run_study", lambda *arguments: None)
    monkeypatch.setattr("appraise.workbook.book.workbook_bytes", lambda made: b"new workbook")
    monkeypatch.setattr("appraise.results.study_json", lambda made: {"new": True})
    return contents(case.parent)


def test_reports_are_replaced_where_nothing_is_wrong(
    call: Call, tmp_path: Path, reports: dict[str, bytes]
) -> None:
    assert call(*REPORT) == Answer(0, "", "")
    new = {"out.xlsx": b"new workbook", "out.json": b'{\n  "new": true\n}\n'}
    assert contents(tmp_path) == reports | new


def failing(error: BaseException, function: Callable[..., Any], at: int) -> Callable[..., Any]:
    """A function that fails at its call of this number."""
    calls = []

    def called(*arguments: Any, **named: Any) -> Any:
        calls.append(arguments)
        if len(calls) == at:
            raise error
        return function(*arguments, **named)

    return called


@pytest.mark.parametrize("at", [1, 2])
@pytest.mark.parametrize("name", ["fsync", "replace"])
def test_a_full_disk_leaves_both_reports(
    call: Call, tmp_path: Path, reports: dict[str, bytes], monkeypatch: pytest.MonkeyPatch, name: str, at: int
) -> None:
    monkeypatch.setattr(files.os, name, failing(FULL, getattr(os, name), at))
    path = ("out.xlsx", "out.json")[at - 1]
    told = f"Error: {path}: cannot be written, No space left on device\n"
    assert call(*REPORT) == Answer(2, "", told)
    assert contents(tmp_path) == reports


@pytest.mark.parametrize("at", [1, 2])
@pytest.mark.parametrize("name", ["fsync", "replace", "link"])
def test_an_interruption_leaves_both_reports(
    call: Call, tmp_path: Path, reports: dict[str, bytes], monkeypatch: pytest.MonkeyPatch, name: str, at: int
) -> None:
    monkeypatch.setattr(files.os, name, failing(KeyboardInterrupt(), getattr(os, name), at))
    answer = call(*REPORT)
    assert (answer.status, answer.out, answer.err.strip()) == (1, "", "interrupted; nothing written")
    assert contents(tmp_path) == reports


def test_a_new_first_file_goes_again_where_the_second_fails(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "b").write_bytes(b"old")
    monkeypatch.setattr(files.os, "replace", failing(FULL, os.replace, 2))
    with pytest.raises(files.FileProblem, match=r"b: cannot be written, No space left on device$"):
        files.write_whole({tmp_path / "a": b"new", tmp_path / "b": b"new"})
    assert contents(tmp_path) == {"b": b"old"}


def test_a_disk_without_links_keeps_copies(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "a").write_bytes(b"old a")
    (tmp_path / "b").write_bytes(b"old b")

    def no_links(*arguments: Any) -> None:
        raise OSError(errno.EPERM, "Operation not permitted")

    for number in (1, 2):
        monkeypatch.setattr(files.os, "link", no_links)
        monkeypatch.setattr(files.os, "replace", failing(FULL, os.replace, number))
        with pytest.raises(files.FileProblem):
            files.write_whole({tmp_path / "a": b"new", tmp_path / "b": b"new"})
        monkeypatch.undo()
        assert contents(tmp_path) == {"a": b"old a", "b": b"old b"}


def held(number: int) -> PermissionError:
    """What Windows says of a file that another program holds open."""
    error = PermissionError(errno.EACCES, "The process cannot access the file")
    error.winerror = number  # type: ignore[attr-defined]
    return error


def held_told(name: str, option: str, free: str) -> Answer:
    what = "cannot be written, it seems to be open in another program; the old file is unchanged"
    return Answer(2, "", f"Error: {name}: {what}. Close it, or write with {option} {free}\n")


@pytest.mark.parametrize("links", [True, False])
@pytest.mark.parametrize("number", [5, 32])
@pytest.mark.parametrize(
    ("at", "told"),
    [
        (1, held_told("out.xlsx", "--out", "out-2.xlsx")),
        (2, held_told("out.json", "--json", "out-2.json")),
    ],
)
def test_a_report_that_is_opened_during_the_run_stays_and_so_does_the_other(
    call: Call,
    tmp_path: Path,
    reports: dict[str, bytes],
    monkeypatch: pytest.MonkeyPatch,
    at: int,
    told: Answer,
    number: int,
    links: bool,
) -> None:
    """The open file cannot be replaced again when the others are put back; nothing stays beside the old."""
    replace, calls = os.replace, []

    def replaced(source: Path, target: Path) -> None:
        calls.append(target.name)
        if target.name == ("out.xlsx", "out.json")[at - 1]:
            raise held(number)
        replace(source, target)

    monkeypatch.setattr(files.os, "replace", replaced)
    if not links:
        monkeypatch.setattr(files.os, "link", failing(OSError(errno.EPERM, "no links"), os.link, 1))
    assert call(*REPORT) == told
    assert len(calls) == (1 if at == 1 else 3)  # the second fault also puts the first report back
    assert contents(tmp_path) == reports


@pytest.mark.parametrize(
    ("name", "option", "free", "taken"),
    [
        ("out.xlsx", "--out", "out-2.xlsx", ()),
        ("out.xlsx", "--out", "out-4.xlsx", ("out-2.xlsx", "out-3.xlsx")),
        ("out.json", "--json", "out-2.json", ("out-3.json",)),
    ],
)
def test_a_report_that_is_open_is_told_before_the_run(
    call: Call,
    tmp_path: Path,
    reports: dict[str, bytes],
    monkeypatch: pytest.MonkeyPatch,
    name: str,
    option: str,
    free: str,
    taken: tuple[str, ...],
) -> None:
    def renamed(source: Path, target: Path) -> None:
        assert source == target
        if source.name == name:
            raise held(32)

    for other in taken:
        (tmp_path / other).write_bytes(b"taken")
    monkeypatch.setattr(files.os, "rename", renamed)
    monkeypatch.setattr("appraise.study.run_study", failing(AssertionError("solved"), print, 1))
    assert call(*REPORT) == held_told(name, option, free)
    assert contents(tmp_path) == reports | dict.fromkeys(taken, b"taken")


def test_a_folder_that_refuses_is_not_taken_for_an_open_file(
    call: Call, tmp_path: Path, reports: dict[str, bytes], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Access denied where there is no old file, or by a disk that does not say what Windows says."""
    monkeypatch.setattr(files.os, "replace", failing(held(5), os.replace, 1))
    (tmp_path / "out.xlsx").unlink()
    answer = call(*REPORT)
    assert answer.err == "Error: out.xlsx: cannot be written, The process cannot access the file\n"
    monkeypatch.setattr(files.os, "replace", failing(PermissionError(errno.EACCES, "no"), os.replace, 2))
    assert call(*REPORT).err == "Error: out.json: cannot be written, no\n"
    assert contents(tmp_path) == {name: data for name, data in reports.items() if name != "out.xlsx"}


def folders(folder: Path) -> set[str]:
    return {str(path.relative_to(folder)) for path in folder.rglob("*") if path.is_dir()}


@pytest.mark.parametrize("error", [FULL, KeyboardInterrupt()])
@pytest.mark.parametrize("name", ["fsync", "replace"])
def test_folders_that_were_made_for_nothing_go_again(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str, error: BaseException
) -> None:
    (tmp_path / "there").mkdir()
    monkeypatch.setattr(files.os, name, failing(error, getattr(os, name), 2))
    new = {tmp_path / "there" / "a" / "b" / "1": b"new", tmp_path / "there" / "a" / "c" / "2": b"new"}
    with pytest.raises((files.FileProblem, KeyboardInterrupt)):
        files.write_whole(new)
    assert folders(tmp_path) == {"there"}
    monkeypatch.undo()
    files.write_whole(new)
    assert folders(tmp_path) == {"there", "there/a", "there/a/b", "there/a/c"}


def test_a_folder_that_somebody_else_uses_by_now_stays(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def replaced(source: Path, target: Path) -> None:
        (target.parent / "theirs").write_bytes(b"theirs")
        raise FULL

    monkeypatch.setattr(files.os, "replace", replaced)
    with pytest.raises(files.FileProblem):
        files.write_whole({tmp_path / "a" / "b" / "mine": b"new"})
    assert contents(tmp_path) == {os.path.join("a", "b", "theirs"): b"theirs"}


@pytest.mark.parametrize("name", ["out.xlsx", "out.json"])
def test_a_read_only_report_is_left_alone(
    call: Call, tmp_path: Path, reports: dict[str, bytes], name: str
) -> None:
    (tmp_path / name).chmod(0o444)
    told = f"Error: {name}: cannot be written, it is read-only\n"
    assert call(*REPORT) == Answer(2, "", told)
    assert contents(tmp_path) == reports


# -- points that cannot be


def wrong_call(told: str) -> Answer:
    head = "Usage: appraise balance [OPTIONS] CASE\nTry 'appraise balance --help' for help.\n\n"
    return Answer(2, "", f"{head}Error: --at: {told}\n")


@pytest.mark.parametrize("heat", ["1e9", "1e308", "400.1"])
def test_absurd_heat_is_a_wrong_call(call: Call, case: Path, heat: str) -> None:
    told = f"heat is {float(heat):g} MW; allowed is at most 10 times the design point's 40 MW"
    assert call("balance", "case.toml", "--at", f"{heat},98,46") == wrong_call(told)


def test_the_greatest_heat_that_may_be_asked_has_a_balance(call: Call, case: Path) -> None:
    assert call("balance", "case.toml", "--at", "400,98,46").status == 0


def test_a_supply_that_boils_is_a_wrong_call(call: Call, case: Path) -> None:
    told = "supply: 175 °C; must stay at or below 174.9 °C, 5 K under boiling at the network's 10 bar"
    assert call("balance", "case.toml", "--at", "40,175,46") == wrong_call(told)


def test_a_case_that_boils_is_told_before_the_point(call: Call, tmp_path: Path) -> None:
    data = minimal_case()
    data["plant"]["design"]["supply_C"] = 176.0
    write_case(tmp_path, data)
    told = (
        "plant.design.supply_C: 176 °C; must stay at or below 174.9 °C, 5 K under boiling at the network's "
        "10 bar"
    )
    assert call("balance", "case.toml", "--at", "40,175,46") == fault(told)


def test_no_balance_at_a_point_names_the_point(
    call: Call, case: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(study, "point_balances", failing(SolveError("no root"), study.point_balances, 1))
    told = "Error: no heat balance at 30 MW, 98/46 °C: no root\n"
    assert call("balance", "case.toml", "--at", "30,98,46") == Answer(1, "", told)


# -- numbers beyond all plants and money


@pytest.mark.parametrize(
    ("way", "value", "told"),
    [
        (
            ("capex", "location_factor"),
            1e308,
            "capex.location_factor: 1e+308 given; allowed: a number above 0, in size from 1e-09 to 1e+15",
        ),
        (
            ("opex", "fixed_per_year"),
            -1e16,
            "opex.fixed_per_year: -1e+16 given; allowed: a finite number, in size at most 1e+15",
        ),
        (
            ("tail", "efficiency"),
            1e-10,
            "tail.efficiency: 1e-10 given; allowed: a number above 0, at most 1, in size from 1e-09 to 1e+15",
        ),
    ],
)
def test_numbers_that_would_overflow_are_refused(
    call: Call, tmp_path: Path, way: tuple[str, str], value: float, told: str
) -> None:
    data = minimal_case()
    data.setdefault(way[0], {})[way[1]] = value
    write_case(tmp_path, data)
    assert call("check", "case.toml") == fault(told)


def test_hours_that_would_overflow_are_refused(call: Call, tmp_path: Path) -> None:
    rows = synthetic_hours()
    rows[5][1] = "1e308"
    write_case(tmp_path, minimal_case(), rows)
    told = "row 6, column heat_MW: 1e308 given; allowed: a number, at least 0, in size at most 1e+15"
    assert call("check", "case.toml") == fault(f"hours.csv {told}")


@pytest.mark.parametrize("value", [0.0, 1e15, -1e15, 5.6e-17, 5e-324])
def test_large_money_and_rounding_errors_are_taken(call: Call, tmp_path: Path, value: float) -> None:
    data = minimal_case()
    data["opex"] = {"fixed_per_year": value}
    write_case(tmp_path, data)
    assert call("check", "case.toml").status == 0


def test_a_break_even_price_beyond_all_numbers_is_none(case: Path) -> None:
    data = minimal_case()
    data["plant"]["boiler"]["co2_kg_per_MWh"] = 1e-308
    data["scenarios"]["central"]["carbon"] = 60.0
    made = study.run_study(load_case(write_case(case.parent, data)))
    assert [one.break_even_carbon_price for one in made.measures[0]] == [None, None]
