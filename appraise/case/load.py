"""From a case file to a `Case` and its `Hours`, with every fault of both at once.

Faults name keys by their dotted path; the tables of a list by their keys ("options.two-stage.shares"), or,
where they have none, by position counted from 1 ("options[2].key").
"""

from __future__ import annotations

import hashlib
import re
import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from appraise.case.archive import LARGEST_BOOK, WORKBOOK_SUFFIXES, is_book
from appraise.case.book import BookCase
from appraise.case.book_layout import HOURS
from appraise.case.consistency import Found, contradictions, hours_contradictions
from appraise.case.doubts import doubts_of
from appraise.case.fields import Table
from appraise.case.hours import Hours, Needed, parsed_hours
from appraise.case.kinds import Place
from appraise.case.model import Case
from appraise.case.paths import positions
from appraise.case.words import shown, utf8_text
from appraise.errors import CaseError, FileProblem, Problem

__all__ = ["Case", "LoadedCase", "case_from", "doubts_of", "load_case"]

_LARGEST_CASE = 5_000_000  # bytes
_LARGEST_HOURS = 200_000_000


@dataclass(frozen=True, slots=True, eq=False)
class LoadedCase:
    """A case with its hours, and where both came from. `data` is the mapping as read."""

    case: Case
    hours: Hours
    doubts: tuple[Problem, ...]
    path: Path
    hours_path: Path
    data: Mapping[str, Any]
    case_sha256: str
    hours_sha256: str


def case_from(data: Mapping[str, Any]) -> Case:
    """A case from a mapping of tables as a file has them. Raises CaseError with every fault found."""
    case, problems = _read(data)
    if case is None or problems:
        raise CaseError(problems)
    return case


def load_case(path: Path | str) -> LoadedCase:
    """Read a case and its series, from a case file or from a workbook that was written for one.

    A workbook's `hours_path` is itself where it holds the rows of the series; then `hours_sha256` is that of
    these rows as comma-separated text. Its `case_sha256` is that of `data`, as `BookCase` has it.
    Raises FileProblem where the case cannot be read at all, CaseError with every fault of case and hours.
    """
    path = Path(path)
    content = _content(path, LARGEST_BOOK if path.suffix.lower() in WORKBOOK_SUFFIXES else _LARGEST_CASE)
    book = BookCase(content, path) if is_book(content, path) else None
    data = _parsed(content, path) if book is None else book.data
    case, problems = _read(data)
    series = _series(data)
    hours_path, hours_content, hours = path, b"", None
    if series:
        try:
            hours_path, hours_content = _series_content(path, series, book)
            name = hours_path.name if hours_path != path else HOURS
            hours = parsed_hours(hours_content, name, needed_of(data))
            problems += _hours_problems(case, hours)
        except FileProblem as error:
            problems.append(Problem("year.series", f"{shown(series)} given; {error}"))
        except CaseError as error:
            problems += error.problems
    if book is not None:
        problems = book.located(problems)
    if problems or case is None or hours is None:
        raise CaseError(problems)
    return LoadedCase(
        case=case,
        hours=hours,
        doubts=doubts_of(case, hours),
        path=path,
        hours_path=hours_path,
        data=data,
        case_sha256=hashlib.sha256(content).hexdigest() if book is None else book.sha256,
        hours_sha256=hashlib.sha256(hours_content).hexdigest(),
    )


def _read(data: Mapping[str, Any]) -> tuple[Case | None, list[Problem]]:
    """The case, None where a table is faulty, and every fault of it."""
    tables: list[Table] = []
    try:
        case: Case | None = Case.model_validate(data, context=tables)
        problems = []
    except ValidationError as error:
        case = None
        faults = error.errors(include_url=False, include_context=False, include_input=False)
        problems = [Problem(dotted(fault["loc"], data), fault["msg"]) for fault in faults]
    problems += contradictions(Found(tables, data))
    return case, problems


def dotted(place: Place, data: object) -> str:
    """A place as a dotted path: tables of a list by their key, or by position counted from 1."""
    text, node = "", data
    for part in place:
        if isinstance(part, int):
            key = next((key for key, at in positions(node).items() if at == part), None)
            named = key is not None and re.fullmatch(r"[a-z0-9-]+", key)
            text += f".{key}" if named else f"[{part + 1}]"
            node = node[part] if isinstance(node, list | tuple) and part < len(node) else None
        else:
            name = " ".join(str(part).split())
            text += f".{name}" if text else name
            node = node.get(part) if isinstance(node, Mapping) else None
    return text


def needed_of(data: Mapping[str, Any]) -> Needed:
    """What the series must give for this case, as far as the data is good enough to say."""

    def table(*way: str) -> Mapping[str, Any]:
        node: Any = data
        for key in way:
            node = node.get(key) if isinstance(node, Mapping) else None
        return node if isinstance(node, Mapping) else {}

    columns = [s.get("price_column") for s in table("scenarios").values() if isinstance(s, Mapping)]
    return Needed(
        heat="heat_signature" not in table("year"),
        temperatures="heating_curve" not in table("network"),
        price_columns=tuple(dict.fromkeys(c for c in columns if isinstance(c, str) and c.strip())),
    )


def _series(data: Mapping[str, Any]) -> str:
    year = data.get("year")
    series = year.get("series") if isinstance(year, Mapping) else None
    return series if isinstance(series, str) and series.strip() and "\0" not in series else ""


def _series_content(path: Path, series: str, book: BookCase | None) -> tuple[Path, bytes]:
    """Where the series of a case is, and its bytes: a CSV file, or the rows that a workbook holds."""
    if book is None:
        return path.parent / series, _content(path.parent / series, _LARGEST_HOURS)
    if book.hours_csv is not None:
        return path, book.hours_csv
    tried = book.series_places(series, path.parent)
    return book.right_series(
        tried, {place: _content(place, _LARGEST_HOURS) for place in tried if _is_file(place)}
    )


def _is_file(path: Path) -> bool:
    """Whether there is a file; a name that no file can have counts as none."""
    try:
        return path.is_file()
    except OSError:
        return False


def _hours_problems(case: Case | None, hours: Hours) -> Iterator[Problem]:
    """What is wrong with hours that are in order by themselves."""
    if case is not None:
        yield from hours_contradictions(case, hours)


def _content(path: Path, largest: int) -> bytes:
    """The bytes of a file. Raises FileProblem for what is no readable file of a sensible size."""
    try:
        if path.is_dir():
            raise FileProblem(f"{path}: is a folder; allowed: a file")
        if path.exists() and not path.is_file():
            raise FileProblem(f"{path}: is no regular file")
        size = path.stat().st_size
        if size > largest:
            raise FileProblem(f"{path}: {size / 1e6:.1f} MB; allowed: at most {largest / 1e6:g} MB")
        return path.read_bytes()
    except FileNotFoundError:
        raise FileProblem(f"{path}: no such file") from None
    except OSError as error:
        raise FileProblem(f"{path}: cannot be read, {error.strerror or error}") from None


def _parsed(content: bytes, path: Path) -> dict[str, Any]:
    """The tables of a TOML file. Raises CaseError at the line and column where it is none."""
    text = utf8_text(content, path.name, "line")
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        what, at = _syntax(str(error))
        raise CaseError([Problem(f"{path.name}{at}", f"not TOML: {what}")]) from None
    except (ValueError, RecursionError):
        message = "not TOML that can be read: a number or a nesting without end"
        raise CaseError([Problem(path.name, message)]) from None


def _syntax(text: str) -> tuple[str, str]:
    """The parser's words, and the place it names as " line 3, column 5"."""
    found = re.fullmatch(r"(.*) \(at (line \d+, column \d+|end of document)\)", text, re.DOTALL)
    if found is None:
        return text, ""
    what, at = found.groups()
    return what[:1].lower() + what[1:], f" {at}" if at.startswith("line") else " at its end"
