"""Mutations of what a user hands in: the case as a mapping or as text, the hours, the workbook, the call.

Each is drawn from a seed and a number alone, so that naming both makes it again.
"""

import copy
from collections.abc import Callable
from dataclasses import dataclass
from random import Random
from typing import Any

from books import HOURS, INPUTS, addresses, typed, with_cells, with_part
from cases import SERIES, csv_text, synthetic_hours, toml_text

from appraise.case.load import case_from
from fuzz.seeds import quick_case, rich_case
from fuzz.values import EXTREMES, FACTORS, is_number, is_table, other_text, shown, spots

CASE, BOOK = "case.toml", "book.xlsx"
ROWS = synthetic_hours()
SERIES_TEXT = csv_text(ROWS)


@dataclass(frozen=True)
class Attempt:
    """One call of the program on bent files; `told` says what was bent."""

    number: int
    told: str
    files: dict[str, bytes]
    arguments: tuple[str, ...]


def attempt(seed: int, number: int, book: Callable[[], bytes]) -> Attempt:
    """The mutation of this number. `book` gives the workbook of the quick case."""
    rng = Random(f"{seed}/{number}")
    (kind,) = rng.choices((_tables, _text, _hours, _cells, _call), (60, 8, 14, 12, 6))
    return kind(rng, number, book)


def _command(rng: Random, name: str, quick: bool) -> tuple[str, ...]:
    """A quick case is often run whole."""
    if quick and rng.random() < 0.12:
        return ("run", name, "--quiet", "--out", "out.xlsx", "--json", "out.json")
    return ("check", name) if rng.random() < 0.3 else ("balance", name, "--json", "-")


def _with_hours(case: bytes, hours: str | bytes = SERIES_TEXT) -> dict[str, bytes]:
    return {CASE: case, SERIES: hours if isinstance(hours, bytes) else hours.encode()}


# -- the tables of a case


def _tables(rng: Random, number: int, book: Callable[[], bytes]) -> Attempt:
    quick = rng.random() < 0.6
    data = quick_case() if quick else rich_case()
    told = [_bent(rng, data) for _ in range(rng.choice((1, 1, 1, 2, 3)))]
    files = _with_hours(toml_text(data).encode("utf-8", "surrogatepass"))
    return Attempt(number, "; ".join(told), files, _command(rng, CASE, quick))


def _bent(rng: Random, data: dict[str, Any]) -> str:
    """Bend one place of a case; tells how."""
    places = list(spots(data))
    (how,) = rng.choices((_scaled, _swapped, _deleted, _renamed, _moved, _reordered), (55, 25, 7, 5, 4, 4))
    return how(rng, data, places)


def _scaled(rng: Random, data: dict[str, Any], places: list[Any]) -> str:
    node, key = rng.choice([(node, key) for node, key in places if is_number(node[key])])
    factor, old = rng.choice(FACTORS), node[key]
    node[key] = old * factor if isinstance(old, float) else int(old * factor)
    return f"{key}: {old!r} times {factor:g}"


def _swapped(rng: Random, data: dict[str, Any], places: list[Any]) -> str:
    node, key = rng.choice(places)
    old, node[key] = node[key], copy.deepcopy(rng.choice(EXTREMES))
    return f"{key}: {shown(node[key])} for {shown(old)}"


def _deleted(rng: Random, data: dict[str, Any], places: list[Any]) -> str:
    node, key = rng.choice(places)
    old = node[key]
    del node[key]
    return f"{key}: {shown(old)} deleted"


def _renamed(rng: Random, data: dict[str, Any], places: list[Any]) -> str:
    node, key = rng.choice([(node, key) for node, key in places if is_table(node)])
    new = other_text(rng, key)
    node[new] = node.pop(key)
    return f"{key}: renamed {new!r}"


def _moved(rng: Random, data: dict[str, Any], places: list[Any]) -> str:
    node, key = rng.choice([(node, key) for node, key in places if is_table(node)])
    value = node.pop(key)
    target = rng.choice([data, *(n[k] for n, k in spots(data) if is_table(n[k]))])
    target[key] = value
    return f"{key}: moved beside {', '.join(map(str, target))[:60]}"


def _reordered(rng: Random, data: dict[str, Any], places: list[Any]) -> str:
    node, key = rng.choice([(node, key) for node, key in places if isinstance(node[key], list)])
    values = node[key]
    how = rng.choice(("reversed", "repeated", "cut"))
    node[key] = {"reversed": values[::-1], "repeated": values + values[-1:], "cut": values[:-1]}[how]
    return f"{key}: {how}"


# -- the text of a case


def _text(rng: Random, number: int, book: Callable[[], bytes]) -> Attempt:
    text = toml_text(rng.choice((quick_case, rich_case))()).encode()
    how = rng.choice(("flipped", "cut", "line twice", "key twice", "Latin-1", "junk"))
    at = rng.randrange(len(text))
    if how == "flipped":
        text = _flipped(rng, text)
    elif how == "cut":
        text = text[:at]
    elif how == "line twice":
        text += rng.choice(text.splitlines(keepends=True))
    elif how == "key twice":
        words = [word for word in text.decode().split() if word.isidentifier()]
        word = rng.choice(words)
        text = text.replace(f"{word} = ".encode(), f"{word} = 1, {word} = ".encode(), 1)
    elif how == "Latin-1":
        text = text.replace(b"small", "größer".encode("latin-1"), 1)
    else:
        text = text[:at] + rng.randbytes(20) + text[at:]
    return Attempt(number, f"text {how} at {at}", _with_hours(text), _command(rng, CASE, False))


def _flipped(rng: Random, content: bytes) -> bytes:
    """Some bytes with another value."""
    flipped = bytearray(content)
    for _ in range(rng.choice((1, 1, 2, 5, 50))):
        flipped[rng.randrange(len(flipped))] ^= 1 << rng.randrange(8)
    return bytes(flipped)


# -- the hours


CELLS = (
    "", "warm", "-1", "0", "1e308", "-1e308", "1e999", "nan", "inf", "1,5", "1.5", "٣", " 44 ", '"', '"44"',
    "9" * 5000, "0x10", "1_000", "44;45", "2025-01-01T00:00", "\x00", "-0", "1e-308", "200", "60", "1e6",
)  # fmt: skip


def _hours(rng: Random, number: int, book: Callable[[], bytes]) -> Attempt:
    rows = [list(row) for row in ROWS]
    row, column = rng.randrange(len(rows)), rng.randrange(len(rows[0]))
    name = rows[0][column]
    how = rng.choice(("cell", "cell", "column", "scaled", "gone", "repeated", "swapped", "head", "bytes"))
    content: bytes | None = None
    told = f"hours {how}, row {row + 1}, {name}"
    if how == "cell":
        rows[row][column] = rng.choice(CELLS)
        told += f": {rows[row][column][:30]!r}"
    elif how == "column":
        cell = rng.choice(CELLS)
        rows[1:] = [[*one[:column], cell, *one[column + 1 :]] for one in rows[1:]]
        told += f": {cell[:30]!r}"
    elif how == "scaled" and column:
        factor = rng.choice(FACTORS)
        for one in rows[1:]:
            one[column] = repr(float(one[column]) * factor)
        told += f": times {factor:g}"
    elif how == "gone":
        del rows[row : row + rng.choice((1, 1, 24, 10_000))]
    elif how == "repeated":
        rows.insert(row, rows[row])
    elif how == "swapped":
        other = rng.randrange(len(rows))
        rows[row], rows[other] = rows[other], rows[row]
    elif how == "head":
        rows[0][column] = rng.choice((other_text(rng, name), rng.choice(rows[0])))
    else:
        content = _flipped(rng, SERIES_TEXT.encode())
    files = _with_hours(toml_text(quick_case()).encode(), content or csv_text(rows))
    return Attempt(number, told, files, _command(rng, CASE, True))


# -- the workbook


def _cells(rng: Random, number: int, book: Callable[[], bytes]) -> Attempt:
    content = book()
    how = rng.choice(("cell", "cell", "cell", "cell", "part", "hours", "file"))
    told = f"workbook {how}"
    if how == "cell":
        at = addresses(case_from(quick_case()), content)
        for path in rng.sample(sorted(at), rng.choice((1, 1, 2))):
            value = rng.choice(
                (None, True, False, 0, 1, -1, 1e308, 1e-308, 2, 0.5, 1e6, "", "x", "-20%", "5,5")
            )
            content = with_cells(content, dict([typed(at[path], value)]))
            told += f"; {path}: {value!r}"
    elif how == "hours":
        old = rng.choice((b"<v>44</v>", b"<v>20.005</v>", b"<v>50</v>"))
        new = rng.choice((b"", b"<v>1e308</v>", b"<v>-1</v>", b"<v>x</v>", b"<v>nan</v>", b"<v></v>"))
        content = with_part(content, HOURS, lambda part: part.replace(old, new, 1))
        told += f"; {old.decode()} to {new.decode()}"
    elif how == "part":
        part = rng.choice((INPUTS, HOURS, "xl/workbook.xml", "xl/styles.xml", "[Content_Types].xml"))
        content = with_part(content, part, lambda old: _flipped(rng, old))
        told += f"; {part} flipped"
    else:
        content = _flipped(rng, content)
    return Attempt(number, told, {BOOK: content}, _command(rng, BOOK, True))


# -- the call


def _call(rng: Random, number: int, book: Callable[[], bytes]) -> Attempt:
    """Another operating point, likely or absurd."""
    heat = rng.choice(
        ("0", "-1", "nan", "inf", "1e9", "1e308", "1e-9", "1e-308", "40", "1", "0.1", "100", "x", "")
    )
    supply = rng.choice(("98", "47", "46.0001", "170", "175", "200", "400", "1e308", "nan", "0"))
    back = rng.choice(("46", "0", "-5", "97", "60", "1e-308", "nan", ""))
    case = rng.choice((quick_case, rich_case))()
    arguments = ("balance", CASE, "--json", "-", f"--at={heat},{supply},{back}")
    return Attempt(number, arguments[-1], _with_hours(toml_text(case).encode()), arguments)
