"""What a cell can hold, and how text from a case is made harmless before it is written."""

import math
import re
from datetime import date, datetime
from typing import Any

Value = str | bool | int | float | datetime | None

FIRST_DATE = datetime(1900, 3, 1)  # before it the format counts a day that never was
ERROR_CODES = ("#N/A", "#NUM!", "#DIV/0!", "#VALUE!", "#REF!", "#NAME?", "#NULL!")
LONGEST_TEXT = 32_767
LONGEST_CONSTANT = 255
_PIECE = 120  # of a long text: characters are counted in UTF-16 units, of which one may have two
CUT_MARK = " … [cut]"

# Control characters, lone surrogates, what XML cannot hold, and marks that turn the direction of reading.
_UNSAFE = re.compile(
    "[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\ud800-\udfff\ufffe\uffff\u061c\u200e\u200f\u202a-\u202e\u2066-\u2069]"
)
_ESCAPE_ALIKE = re.compile("_(?=x[0-9A-Fa-f]{4}_)")


class SheetFault(ValueError):
    """A sheet that must not be written: a mistake in the program, never in a case."""


def plain_value(value: object, where: str) -> Value:
    """A value as the file can hold it; numpy's scalars become Python's. Raises SheetFault, naming `where`."""
    item: Any = value
    if type(item).__name__ == "datetime64":  # counted in nanoseconds, it would turn into a bare integer
        item = item.astype("datetime64[us]")
    if hasattr(item, "dtype") and hasattr(item, "item"):
        item = item.item()
    if item is None or isinstance(item, bool | str | int):
        return item
    if isinstance(item, float):
        if not math.isfinite(item):
            raise SheetFault(f"{where}: {item} is no value for a cell")
        return item
    if isinstance(item, date):
        moment = item if isinstance(item, datetime) else datetime(item.year, item.month, item.day)
        if moment.tzinfo is not None or moment < FIRST_DATE:
            raise SheetFault(f"{where}: {moment} is no date for a cell; local times from 1900-03-01 are")
        return moment
    raise SheetFault(f"{where}: a cell cannot hold {type(value).__name__}")


def quoted(text: str) -> str:
    """A text as a constant inside a formula. Raises SheetFault above the format's 255 characters.

    Programs differ on whether "_x0041_" in a formula is an escape for "A"; a text that has such a thing is
    put together from two constants, which is the same to all of them.
    """
    if len(text) > LONGEST_CONSTANT:
        raise SheetFault(f"a text constant in a formula has {len(text)} characters; 255 are allowed")
    doubled = clean_text(text).replace('"', '""')
    return '"' + _ESCAPE_ALIKE.sub('_"&"', doubled) + '"'


def quoted_text(text: str) -> str:
    """A text of any length as an expression of constants joined in a formula."""
    pieces = [text[start : start + _PIECE] for start in range(0, len(text), _PIECE)]
    return "&".join(quoted(piece) for piece in pieces) or '""'


def clean_text(text: str) -> str:
    """The text without what XML cannot hold or a reader cannot see; each such character becomes U+FFFD."""
    return _UNSAFE.sub("\ufffd", text.replace("\r\n", "\n").replace("\r", "\n"))


def stored_text(text: str) -> str:
    """Text of a cell as it is stored: clean, escaped, and cut with a mark where the format ends.

    "_x0041_" would be read as "A", so its first "_" is escaped itself.
    """
    safe = _ESCAPE_ALIKE.sub("_x005F_", clean_text(text))
    if _units(safe) <= LONGEST_TEXT:
        return safe
    room = LONGEST_TEXT - len(CUT_MARK)
    return safe.encode("utf-16-le")[: 2 * room].decode("utf-16-le", errors="ignore") + CUT_MARK


def header_text(text: str, longest: int) -> str:
    """Text for a header or footer: one line, "&" doubled so that it starts no code, cut at `longest`."""
    pieces: list[str] = []
    used = 0
    for character in " ".join(clean_text(text).split()):
        piece = "&&" if character == "&" else character
        if used + _units(piece) > longest - 1:
            return "".join(pieces) + "…"
        pieces.append(piece)
        used += _units(piece)
    return "".join(pieces)


def needs_prefix(text: str) -> bool:
    """Whether a spreadsheet would take this text for a formula if a reader confirmed the cell again."""
    return text[:1] in ("=", "+", "-", "@", "\t")


def _units(text: str) -> int:
    """Length as the format counts it, in UTF-16 units."""
    return len(text.encode("utf-16-le")) // 2
