"""Opening a workbook that may come from anywhere: its archive is looked at before any part of it is unpacked.

A workbook is a zip archive of XML parts. A small one can unpack to gigabytes, and XML can expand by itself;
both are refused here. How large a part is, is known from the directory before it is read, and a part that
lies about it is cut there and fails its checksum.
"""

from __future__ import annotations

import io
import struct
import zlib
from collections import Counter
from pathlib import Path
from typing import Any
from xml.parsers import expat
from zipfile import ZIP_DEFLATED, ZIP_STORED, BadZipFile, ZipFile

from appraise.case.words import shown
from appraise.errors import FileProblem

WORKBOOK_SUFFIXES = frozenset({".xlsx", ".xlsm", ".xltx", ".xltm", ".xlsb", ".xls", ".ods"})
LARGEST_BOOK = 20_000_000  # bytes of the file; a study of one year has less than one million
MOST_PARTS = 1000
LARGEST_UNPACKED = 200_000_000  # bytes of all parts
LARGEST_RATIO = 100  # of unpacked to packed; a study has about 10
RATIO_MATTERS = 10_000_000  # bytes unpacked, below which no ratio is dangerous
MOST_ELEMENTS = 600_000  # of one part: a year with twenty columns has 360,000
DEEPEST = 64  # elements within elements
_CHUNK = 1 << 16

_ZIP = b"PK\x03\x04"
_COMPOUND = (
    b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"  # container of the old binary format, and of encrypted workbooks
)
_ENCRYPTED = "EncryptedPackage".encode("utf-16-le")
# What the libraries raise on an archive or a part that is broken, whatever the kind of breakage.
_DAMAGES = (
    BadZipFile,
    zlib.error,
    struct.error,
    expat.ExpatError,
    EOFError,
    LookupError,
    NotImplementedError,
    OverflowError,
    ValueError,
)
_DIRECTORY_ENTRY = b"PK\x01\x02"

OURS = "a workbook (.xlsx) that `appraise run` wrote"


def is_book(content: bytes, path: Path) -> bool:
    """Whether a file is, or claims to be, a workbook."""
    return content.startswith((_ZIP, _COMPOUND)) or path.suffix.lower() in WORKBOOK_SUFFIXES


class Archive:
    """The parts of a workbook, by their names. Raises FileProblem for everything that is no harmless one."""

    def __init__(self, content: bytes, path: Path) -> None:
        self._path = path
        if not content.startswith(_ZIP):
            raise self.refusal(_what_else(content))
        if content.count(_DIRECTORY_ENTRY) > MOST_PARTS:  # before a directory of that length is read
            raise self.refusal(f"more than {MOST_PARTS} parts")
        try:
            self._zip = ZipFile(io.BytesIO(content))
        except _DAMAGES:
            raise self.refusal("is damaged or cut short") from None
        self._look(len(content))

    def refusal(self, what: str) -> FileProblem:
        """The refusal of this file."""
        return FileProblem(f"{self._path}: {what}; allowed: {OURS}")

    def _look(self, packed: int) -> None:
        """The directory alone says whether it is safe to unpack anything."""
        entries = self._zip.infolist()
        names = Counter(entry.filename for entry in entries)
        unpacked = sum(entry.file_size for entry in entries)
        if any(entry.flag_bits & 1 for entry in entries):
            raise self.refusal("is protected with a password")
        if any(entry.compress_type not in (ZIP_STORED, ZIP_DEFLATED) for entry in entries):
            raise self.refusal("is packed in an unusual way")
        twice = next((name for name, times in names.items() if times > 1), None)
        if twice is not None:
            raise self.refusal(f"has the part {shown(twice)} twice")
        if unpacked > LARGEST_UNPACKED or unpacked > max(RATIO_MATTERS, LARGEST_RATIO * packed):
            raise self.refusal(f"would unpack from {packed / 1e6:.1f} to {unpacked / 1e6:.0f} MB")
        if "mimetype" in names:
            raise self.refusal("is an OpenDocument file: save it as .xlsx")
        if "xl/workbook.bin" in names:
            raise self.refusal("is a binary workbook: save it as .xlsx")
        if "[Content_Types].xml" not in names:
            raise self.refusal("is an archive, but no workbook")

    def parse(self, name: str, largest: int, handler: Handler) -> None:
        """Send one part through a handler of its XML; `largest` is what it may have unpacked, in bytes."""
        try:
            entry = self._zip.getinfo(name)
        except KeyError:
            raise self.refusal(f"its part {shown(name)} is missing") from None
        if entry.file_size > largest:
            size = entry.file_size / 1e6
            raise self.refusal(f"its part {shown(name)} has {size:.0f} MB, more than {largest / 1e6:g} MB")
        parser = expat.ParserCreate()
        parser.buffer_text = True
        parser.StartElementHandler = handler.start
        parser.EndElementHandler = handler.end
        parser.CharacterDataHandler = handler.text
        parser.StartDoctypeDeclHandler = _doctype
        try:
            with self._zip.open(entry) as stream:
                while chunk := stream.read(_CHUNK):
                    parser.Parse(chunk, False)
                parser.Parse(b"", True)
        except _DAMAGES:
            raise self.refusal(f"its part {shown(name)} is damaged") from None
        except Danger as danger:
            raise self.refusal(f"its part {shown(name)} has {danger}") from None


class Danger(Exception):
    """Something in a part that no workbook needs and that can do harm."""


class Handler:
    """What is done with the elements of a part, by names without prefix; counts them and their depth."""

    def __init__(self) -> None:
        self._elements = 0
        self._depth = 0

    def start(self, name: str, attributes: dict[str, str]) -> None:
        """An element begins."""
        self._elements += 1
        self._depth += 1
        if self._elements > MOST_ELEMENTS or self._depth > DEEPEST:
            raise Danger("more elements than a study can have")
        self.begin(name.rpartition(":")[2], attributes)

    def end(self, name: str) -> None:
        """An element ends."""
        self._depth -= 1
        self.finish(name.rpartition(":")[2])

    def text(self, text: str) -> None:
        """Text within an element, possibly in pieces."""

    def begin(self, name: str, attributes: dict[str, str]) -> None:
        """An element begins, for the subclass."""

    def finish(self, name: str) -> None:
        """An element ends, for the subclass."""


def _doctype(*_: Any) -> None:
    raise Danger("a DOCTYPE, which could define entities without end")


def _what_else(content: bytes) -> str:
    if content.startswith(_COMPOUND):
        if _ENCRYPTED in content:
            return "is protected with a password: save it without"
        return "is a workbook of the old binary format: save it as .xlsx"
    return "is empty" if not content.strip() else "is no workbook, whatever its name says"
