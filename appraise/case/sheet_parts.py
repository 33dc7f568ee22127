"""The small parts of a workbook: what refers to what, titles of sheets, number formats, shared texts."""

from __future__ import annotations

import posixpath
import re
from dataclasses import dataclass
from typing import Literal

from appraise.case.archive import Danger, Handler

MOST_TEXTS = 300_000

_ESCAPE = re.compile(r"_x([0-9A-Fa-f]{4})_")
_NOT_CODE = re.compile(r'"[^"]*"|\[[^\]]*\]|\\.|_.|\*.')  # parts of a number format that stand for themselves
_DATE_FORMATS = frozenset({*range(14, 23), *range(27, 37), *range(45, 48), *range(50, 59)})  # without a code
_PERCENT_FORMATS = frozenset({9, 10})

Shown = Literal["number", "percent", "date"]


def unescaped(text: str) -> str:
    """Text with the format's escapes undone: "_x0041_" stands for "A", "_x005F_x0041_" for "_x0041_"."""
    return _ESCAPE.sub(_meant, text) if "_x" in text else text


def _meant(found: re.Match[str]) -> str:
    code = int(found[1], 16)
    return "\ufffd" if 0xD800 <= code <= 0xDFFF else chr(code)  # half of a pair is no character


@dataclass(frozen=True, slots=True)
class Link:
    """One reference from a part to another."""

    key: str
    kind: str  # last word of its type
    target: str  # name of the part


class Links(Handler):
    """All references of one part, those to other files left out."""

    def __init__(self, folder: str) -> None:
        super().__init__()
        self._folder = folder
        self.found: list[Link] = []

    def begin(self, name: str, attributes: dict[str, str]) -> None:
        if name == "Relationship" and attributes.get("TargetMode") != "External":
            target = posixpath.normpath(posixpath.join("/", self._folder, attributes.get("Target", "")))
            kind = attributes.get("Type", "").rpartition("/")[2]
            self.found.append(Link(attributes.get("Id", ""), kind, target.lstrip("/")))


class Outline(Handler):
    """Titles of the sheets, and from when days are counted."""

    def __init__(self) -> None:
        super().__init__()
        self.sheets: dict[str, str] = {}
        self.from_1904 = False

    def begin(self, name: str, attributes: dict[str, str]) -> None:
        if name == "sheet":
            key = next((value for word, value in attributes.items() if word.endswith(":id")), "")
            self.sheets[attributes.get("name", "")] = key
        elif name == "workbookPr":
            self.from_1904 = attributes.get("date1904") in ("1", "true")


class Formats(Handler):
    """How numbers are shown, by the number of the cell's style."""

    def __init__(self) -> None:
        super().__init__()
        self._codes: dict[str, str] = {}
        self._within_cells = False
        self.shown: list[Shown] = []

    def begin(self, name: str, attributes: dict[str, str]) -> None:
        if name == "numFmt":
            self._codes.setdefault(attributes.get("numFmtId", ""), attributes.get("formatCode", ""))
        elif name == "cellXfs":
            self._within_cells = True
        elif name == "xf" and self._within_cells:
            self.shown.append(self._as(attributes.get("numFmtId", "0")))

    def finish(self, name: str) -> None:
        if name == "cellXfs":
            self._within_cells = False

    def _as(self, number: str) -> Shown:
        code = self._codes.get(number)
        if code is None:
            known = int(number) if number.isascii() and number.isdigit() and len(number) < 5 else 0
            return "date" if known in _DATE_FORMATS else "percent" if known in _PERCENT_FORMATS else "number"
        plain = "" if code == "General" else _NOT_CODE.sub("", code)
        return "percent" if "%" in plain else "date" if re.search("[dmyhs]", plain, re.I) else "number"


class Texts(Handler):
    """Texts that cells share, without the reading aids that some languages add."""

    def __init__(self) -> None:
        super().__init__()
        self.found: list[str] = []
        self._pieces: list[str] = []
        self._wanted = False
        self._aside = 0

    def begin(self, name: str, attributes: dict[str, str]) -> None:
        if name == "si":
            self._pieces = []
        elif name == "rPh":
            self._aside += 1
        self._wanted = name == "t" and not self._aside

    def text(self, text: str) -> None:
        if self._wanted:
            self._pieces.append(text)

    def finish(self, name: str) -> None:
        self._wanted = False
        if name == "rPh":
            self._aside -= 1
        elif name == "si":
            self.found.append(unescaped("".join(self._pieces)))
            if len(self.found) > MOST_TEXTS:
                raise Danger("more texts than a study can have")
