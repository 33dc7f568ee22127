"""Workbooks that are none, broken or meant to do harm: one clear refusal, at once, and in little memory."""

import io
import json
import random
import struct
import subprocess
import sys
import zlib
from collections.abc import Callable, Iterator
from contextlib import suppress
from pathlib import Path
from zipfile import ZIP_BZIP2, ZIP_DEFLATED, ZipFile

import pytest
from books import HOURS, INPUTS, small_book, with_part, with_parts

from appraise.case.load import load_case
from appraise.errors import AppraiseError

ROOT = Path(__file__).parents[1]
OURS = "; allowed: a workbook (.xlsx) that `appraise run` wrote\n"
COMPOUND = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
LAUGHS = (
    '<?xml version="1.0"?><!DOCTYPE x [<!ENTITY a "ha">'
    + "".join(f'<!ENTITY {b} "{f"&{a};" * 20}">' for a, b in zip("abcdefgh", "bcdefghi", strict=True))
    + "]>"
)
OUTSIDE = '<?xml version="1.0"?><!DOCTYPE x SYSTEM "file:///etc/hostname">'

Make = Callable[[bytes], bytes]

# Calls the program once for every file given, and tells how each call went, in seconds of its own and MB.
TRYING = """
import contextlib, io, json, re, resource, sys, time
from pathlib import Path
from appraise.cli import main

def largest_MB():
    status = Path("/proc/self/status")
    if status.exists():  # there the other figure counts what the parent had before this program was started
        return int(re.search(r"VmHWM:\\s+(\\d+) kB", status.read_text())[1]) / 1e3
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / (1e6 if sys.platform == "darwin" else 1e3)

from appraise.case import load
for name in sys.argv[1:]:
    out, err = io.StringIO(), io.StringIO()
    started = time.process_time()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        status = main(["check", name])
    seconds = time.process_time() - started
    print(json.dumps([status, out.getvalue(), err.getvalue(), seconds, largest_MB()]))
"""


def begun(prolog: str) -> Callable[[bytes], bytes]:
    """A part with another beginning."""
    return lambda part: prolog.encode() + part[part.index(b"<", 2) if part.startswith(b"<?") else 0 :]


def grown(filling: bytes, size: int) -> Make:
    """The sheet of inputs with so much more of something, in bytes, before its end."""

    def make(book: bytes) -> bytes:
        result = io.BytesIO()
        with (
            ZipFile(io.BytesIO(book)) as source,
            ZipFile(result, "w", ZIP_DEFLATED, compresslevel=1) as target,
        ):
            for name in source.namelist():
                part = source.read(name)
                with target.open(name, "w") as stream:
                    head, mark, tail = part.partition(b"</sheetData>")
                    stream.write(head)
                    if name == INPUTS:
                        block = filling * (1_000_000 // len(filling))
                        for _ in range(size // len(block)):
                            stream.write(block)
                    stream.write(mark + tail)
        return result.getvalue()

    return make


def texts(book: bytes) -> bytes:
    """The book with ten million shared texts."""
    rel = b'<Relationship Id="rIdX" Type="x/sharedStrings" Target="/xl/sharedStrings.xml"/></Relationships>'
    linked = with_part(
        book, "xl/_rels/workbook.xml.rels", lambda part: part.replace(b"</Relationships>", rel)
    )
    result = io.BytesIO(linked)
    with ZipFile(result, "a", ZIP_DEFLATED) as archive:
        archive.writestr("xl/sharedStrings.xml", b"<sst>" + b"<si/>" * 1_900_000 + b"</sst>")
    return result.getvalue()


def many_parts(book: bytes) -> bytes:
    """The book with a directory of some hundred thousand entries, most of them the same."""
    end = book.rindex(b"PK\x05\x06")
    size, start = struct.unpack("<LL", book[end + 12 : end + 20])
    entry = book[start : book.index(b"PK\x01\x02", start + 4)]
    more = entry * 300_000
    tail = bytearray(book[end:])
    tail[12:16] = struct.pack("<L", size + len(more))
    return book[:end] + more + bytes(tail)


def lying(book: bytes) -> bytes:
    """The book, its sheet of inputs larger than the directory says."""
    with ZipFile(io.BytesIO(book)) as archive:
        size = archive.getinfo(INPUTS).file_size
    return book.replace(struct.pack("<L", size), struct.pack("<L", size // 2))


def encrypted(book: bytes) -> bytes:
    """The book with the mark of encryption at every entry of its directory."""
    pieces = book.split(b"PK\x01\x02")
    return b"PK\x01\x02".join([pieces[0], *(one[:4] + b"\x01" + one[5:] for one in pieces[1:])])


def packed_otherwise(book: bytes) -> bytes:
    """The book packed by another method."""
    result = io.BytesIO()
    with ZipFile(io.BytesIO(book)) as source, ZipFile(result, "w", ZIP_BZIP2) as target:
        for name in source.namelist():
            target.writestr(name, source.read(name))
    return result.getvalue()


def twice(book: bytes) -> bytes:
    """The book with a second sheet of inputs under the same name."""
    return with_part(book, "docProps/app.xml", lambda part: part).replace(
        b"xl/worksheets/sheet2.xml", INPUTS.encode()
    )


def open_document(book: bytes) -> bytes:
    """What begins as a file of the other office format."""
    result = io.BytesIO()
    with ZipFile(result, "w") as archive:
        archive.writestr("mimetype", "application/vnd.oasis.opendocument.spreadsheet")
        archive.writestr("content.xml", "<x/>")
    return result.getvalue()


def archived(name: str) -> Make:
    """An archive with this one part."""

    def make(book: bytes) -> bytes:
        result = io.BytesIO()
        with ZipFile(result, "w") as archive:
            archive.writestr(name, "<x/>")
        return result.getvalue()

    return make


def junk(start: bytes) -> Make:
    """Ten million bytes of nothing."""
    return lambda book: start + random.Random(1).randbytes(10_000_000)


def named_otherwise(old: str, new: str) -> Make:
    """The book with another title of a sheet."""
    return lambda book: with_part(
        book, "xl/workbook.xml", lambda part: part.replace(f'name="{old}"'.encode(), f'name="{new}"'.encode())
    )


def within(name: str, old: bytes, new: bytes) -> Make:
    """The book with something else in a part."""
    return lambda book: with_part(book, name, lambda part: part.replace(old, new, 1))


PART = f'its part "{INPUTS}"'
DOCTYPE = "has a DOCTYPE, which could define entities without end"
ELEMENTS = "has more elements than a study can have"

HOSTILE: dict[str, tuple[Make, str]] = {
    "a bomb": (grown(b" ", 300_000_000), "would unpack from"),
    "a large sheet": (
        grown(b"<c><v>1</v></c>" + bytes(range(48, 58)) * 9, 60_000_000),
        f"{PART} has 60 MB, more than 20 MB",
    ),
    "many elements": (grown(b"<a/>", 8_000_000), f"{PART} {ELEMENTS}"),
    "many cells": (grown(b"<row><c><v>1</v></c></row>", 14_000_000), f"{PART} {ELEMENTS}"),
    "many wide cells": (
        grown(b"<row>" + b"<c><v>1</v></c>" * 8 + b"</row>", 6_000_000),
        f"{PART} has more cells than a study can have",
    ),
    "many texts": (texts, 'its part "xl/sharedStrings.xml" has more'),
    "deep elements": (grown(b"<a>", 1_000_000), f"{PART} {ELEMENTS}"),
    "many attributes": (grown(b"<a " + b'b="" ' * 40 + b"/>", 9_000_000), f"{PART} is damaged"),
    "many parts": (many_parts, "more than 1000 parts"),
    "a lie about a size": (lying, "is damaged"),
    "laughs": (lambda book: with_part(book, INPUTS, begun(LAUGHS)), f"{PART} {DOCTYPE}"),
    "laughs in the outline": (
        lambda book: with_part(book, "xl/workbook.xml", begun(LAUGHS)),
        f'its part "xl/workbook.xml" {DOCTYPE}',
    ),
    "a file from outside": (lambda book: with_part(book, HOURS, begun(OUTSIDE)), DOCTYPE),
    "no inputs": (named_otherwise("Inputs", "Input"), 'has no sheet "Inputs", only "Input", "Hours"'),
    "no hours": (named_otherwise("Hours", "Ours"), 'has no sheet "Hours", only "Inputs", "Ours"'),
    "no sheet": (lambda book: with_part(book, INPUTS, lambda part: None), f"{PART} is missing"),
    "no outline": (
        lambda book: with_part(book, "xl/workbook.xml", lambda part: None),
        'its part "xl/workbook.xml" is missing',
    ),
    "no headings": (within(INPUTS, b">what it is<", b">what it was<"), "row 4 of sheet"),
    "no cells": (
        lambda book: with_part(book, INPUTS, lambda part: b"<worksheet/>"),
        'row 4 of sheet "Inputs" has not the headings path, what it is, value, as run, changed, unit, acts, '
        "source or note",
    ),
    "a cell nowhere": (within(INPUTS, b'r="A30"', b'r="30A"'), f'{PART} has a cell at "30A"'),
    "a row nowhere": (within(INPUTS, b'<row r="30"', b'<row r="-1"'), f'{PART} has a row "-1"'),
    "no XML": (lambda book: with_part(book, INPUTS, lambda part: b"path,value"), f"{PART} is damaged"),
    "an unknown encoding": (
        lambda book: with_part(book, INPUTS, begun('<?xml version="1.0" encoding="klingon"?>')),
        f"{PART} is damaged",
    ),
    "cut": (lambda book: book[: len(book) // 2], "is damaged or cut short"),
    "cut at its end": (lambda book: book[:-30], "is damaged or cut short"),
    "encrypted": (encrypted, "is protected with a password"),
    "encrypted as a whole": (
        lambda book: COMPOUND + bytes(600) + "EncryptedPackage".encode("utf-16-le") + bytes(5000),
        "is protected with a password: save it without",
    ),
    "the old format": (
        lambda book: COMPOUND + bytes(600) + "Workbook".encode("utf-16-le") + bytes(5000),
        "is a workbook of the old binary format: save it as .xlsx",
    ),
    "another office": (open_document, "is an OpenDocument file: save it as .xlsx"),
    "a binary workbook": (archived("xl/workbook.bin"), "is a binary workbook: save it as .xlsx"),
    "some archive": (archived("hello.txt"), "is an archive, but no workbook"),
    "packed otherwise": (packed_otherwise, "is packed in an unusual way"),
    "a part twice": (twice, f'has the part "{INPUTS}" twice'),
    "comma-separated": (
        lambda book: b"path,value\nstudy.title,x\n",
        "is no workbook, whatever its name says",
    ),
    "a case file": (lambda book: b'[study]\ntitle = "x"\n', "is no workbook, whatever its name says"),
    "empty": (lambda book: b"", "is empty"),
    "junk": (junk(b""), "is no workbook, whatever its name says"),
    "junk that begins well": (junk(b"PK\x03\x04"), "is damaged or cut short"),
    "too large": (lambda book: b"PK\x03\x04" + bytes(25_000_000), "25.0 MB; allowed: at most 20 MB"),
}


@pytest.fixture(scope="module")
def book(tmp_path_factory: pytest.TempPathFactory) -> bytes:
    """A workbook without fault."""
    return small_book(tmp_path_factory.mktemp("small")).read_bytes()


def test_hostile_files_are_refused_at_once(book: bytes, tmp_path: Path) -> None:
    """Each by one message and exit status 2, within a second of computing and 200 MB, one process for all."""
    names = [f"{number:02d}.xlsx" for number in range(len(HOSTILE) + 1)]
    (tmp_path / names[0]).write_bytes(book)
    for name, (make, _) in zip(names[1:], HOSTILE.values(), strict=True):
        (tmp_path / name).write_bytes(make(book))
    done = subprocess.run(
        [sys.executable, "-c", TRYING, *names],
        cwd=tmp_path,
        env={"PYTHONPATH": str(ROOT), "OPENBLAS_NUM_THREADS": "1"},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.stderr == ""
    good, *told = map(json.loads, done.stdout.splitlines())
    assert (good[0], good[2]) == (0, "")
    wrong = []
    for (case, (_, what)), name, (status, out, err, seconds, memory) in zip(
        HOSTILE.items(), names[1:], told, strict=True
    ):
        clear = err.startswith(f"Error: {name}: ") and what in err and err.count("\n") == 1
        refused = clear and err.endswith(("at most 20 MB\n", OURS))
        if (status, out) != (2, "") or not refused or seconds > 1.0 or memory > 200.0:
            wrong.append(f"{case}: status {status}, {seconds:.2f} s, {memory:.0f} MB, {out}{err}")
    assert wrong == []


def broken(book: bytes) -> Iterator[bytes]:
    """The book cut anywhere, and with bytes changed anywhere, half of them within its directory and parts."""
    draw = random.Random(7)
    for _ in range(40):
        yield book[: draw.randrange(len(book))]
    for _ in range(60):
        changed = bytearray(book)
        for _ in range(draw.randint(1, 20)):
            changed[draw.randrange(len(book))] = draw.randrange(256)
        yield bytes(changed)
    end = book.rindex(b"PK\x05\x06")
    start = struct.unpack("<L", book[end + 16 : end + 20])[0]
    for _ in range(60):
        changed = bytearray(book)
        for _ in range(draw.randint(1, 5)):
            changed[draw.randrange(start, len(book))] = draw.randrange(256)
        yield bytes(changed)


def changed_parts(book: bytes) -> Iterator[bytes]:
    """The book with its XML changed here and there, so that its archive is in order and its parts are not."""
    draw = random.Random(11)
    pieces = [
        b"<",
        b">",
        b"/",
        b'"',
        b"&amp;",
        b"",
        b"99999999999",
        b"-",
        b"s",
        b"<v>",
        b"</v>",
        b"\x00",
        b"\xff",
    ]

    def mixed(name: str, part: bytes) -> bytes:
        if name not in (INPUTS, "xl/workbook.xml", "xl/styles.xml", "xl/_rels/workbook.xml.rels"):
            return part
        at = draw.randrange(len(part))
        return part[:at] + draw.choice(pieces) + part[at + draw.randint(0, 3) :]

    for _ in range(30):
        yield with_parts(book, mixed)


@pytest.mark.parametrize("damage", [broken, changed_parts])
def test_whatever_is_broken_there_is_no_other_error(
    book: bytes, tmp_path: Path, damage: Callable[[bytes], Iterator[bytes]]
) -> None:
    """A file that is still in order may be read; anything else is refused in plain words."""
    path, refused = tmp_path / "book.xlsx", 0
    for content in damage(book):
        path.write_bytes(content)
        with suppress(AppraiseError):
            load_case(path)
            continue
        refused += 1
    assert refused > 10


def test_parts_that_are_not_read_do_no_harm(book: bytes, tmp_path: Path) -> None:
    """Macros, links to other workbooks and whatever else a program put beside the sheets stay closed."""
    result = io.BytesIO(book)
    with ZipFile(result, "a", ZIP_DEFLATED) as archive:
        archive.writestr("xl/vbaProject.bin", b"macro")
        archive.writestr("xl/externalLinks/externalLink1.xml", LAUGHS + "<x>&i;</x>")
        archive.writestr("docProps/custom.xml", zlib.compress(b"no XML"))
    path = tmp_path / "book.xlsx"
    path.write_bytes(book)
    once = load_case(path)
    path.write_bytes(result.getvalue())
    assert load_case(path).case == once.case
