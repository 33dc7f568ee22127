"""One attempt, made and judged: what a user may be told, and what must never happen."""

import io
import json
import os
import re
import signal
import warnings
from collections.abc import Iterator
from contextlib import contextmanager, redirect_stderr, redirect_stdout
from dataclasses import dataclass
from pathlib import Path
from types import FrameType
from typing import Any
from zipfile import ZipFile

from cases import SERIES, minimal_case

from appraise.checks import CLOSURE_LIMIT
from appraise.cli import main
from fuzz.mutations import BOOK, CASE, Attempt

LONGEST = 10.0  # seconds of the processor for one call
PLACES = {*minimal_case(), "network", "opex", "emissions", "notes", "draws", "drivers"}
SOUND = ("closure", "lines sum to", "net present value", "value left at")


class TooLong(BaseException):
    """A call that does not end; no `Exception`, so that the program cannot take it for one of its own."""


@dataclass(frozen=True)
class Outcome:
    """How an attempt ended.

    kind : "accepted", "refused" or "failed"; reason : first words of the fault, or what went wrong.
    """

    attempt: Attempt
    kind: str
    reason: str


def tried(attempt: Attempt, folder: Path) -> Outcome:
    """Make an attempt in an empty folder."""
    for name, content in attempt.files.items():
        (folder / name).write_bytes(content)
    out, err = io.StringIO(), io.StringIO()
    try:
        with (
            _in_folder(folder),
            _limited(LONGEST),
            redirect_stdout(out),
            redirect_stderr(err),
            warnings.catch_warnings(),
        ):
            warnings.simplefilter("error")
            status = main(attempt.arguments)
    except TooLong:
        return Outcome(attempt, "failed", f"more than {LONGEST:g} s")
    except BaseException as error:
        return Outcome(attempt, "failed", f"escaped: {error!r}")
    left = {path.name: path.read_bytes() for path in folder.iterdir()}
    wrong = _wrong(attempt, status, out.getvalue(), err.getvalue(), left)
    if wrong:
        return Outcome(attempt, "failed", wrong)
    return Outcome(attempt, "accepted" if status == 0 else "refused", _first_words(err.getvalue()))


@contextmanager
def _in_folder(folder: Path) -> Iterator[None]:
    before = Path.cwd()
    os.chdir(folder)
    try:
        yield
    finally:
        os.chdir(before)


@contextmanager
def _limited(seconds: float) -> Iterator[None]:
    """Stop what is inside after so many seconds of the processor, or six times as many of the clock."""

    def stop(number: int, frame: FrameType | None) -> None:
        raise TooLong

    kinds = ((signal.SIGPROF, signal.ITIMER_PROF, seconds), (signal.SIGALRM, signal.ITIMER_REAL, 6 * seconds))
    before = [signal.signal(number, stop) for number, _, _ in kinds]
    for _, timer, limit in kinds:
        signal.setitimer(timer, limit)
    try:
        yield
    finally:
        for (number, timer, _), handler in zip(kinds, before, strict=True):
            signal.setitimer(timer, 0.0)
            signal.signal(number, handler)


def _wrong(attempt: Attempt, status: int, out: str, err: str, left: dict[str, bytes]) -> str:
    """What must not be, or an empty text."""
    results = {"out.xlsx", "out.json"} if status == 0 and attempt.arguments[0] == "run" else set()
    if {name: left.get(name) for name in attempt.files} != attempt.files:
        return "an input was changed"
    if set(left) - set(attempt.files) != results:
        return f"files left: {sorted(set(left) - set(attempt.files))}, status {status}"
    if "Traceback" in out + err:
        return f"a traceback: {err[-200:]}"
    if status == 2:
        return _wrong_refusal(out, err)
    if status != 0:
        return f"status {status}: {err.strip()[:300]}"
    if attempt.arguments[0] == "check":
        return "" if out.startswith(Path(attempt.arguments[1]).name) else f"check says {out[:80]!r}"
    text = left["out.json"].decode() if results else out
    return _wrong_results(text) or _wrong_workbook(left.get("out.xlsx"))


def _wrong_refusal(out: str, err: str) -> str:
    """A refusal has a place and a reason for every fault, each on its line."""
    if out:
        return f"a refusal that prints {out[:80]!r}"
    lines = err.splitlines()
    if lines and lines[0].startswith("Usage: "):
        return "" if re.match(r"Error: .+--?\w+.+", lines[-1]) else f"a wrong call, told as {lines[-1]!r}"
    if len(lines) == 1 and re.match(rf"Error: ({CASE}|{BOOK}|{SERIES}|out)\S*: \S", lines[0]):
        return ""
    count = re.fullmatch(r"The case has (\d+) faults?:", lines[0] if lines else "")
    if count is None or int(count[1]) != len(lines) - 1 or not int(count[1]):
        return f"a refusal without form: {err[:200]!r}"
    for line in lines[1:]:
        where, _, message = line.strip().partition(": ")
        root = re.split(r"[.\[ ,:(!]", where)[0]
        files = where.startswith((CASE, BOOK, SERIES, "Inputs", "Hours"))
        known = files or root in PLACES or message.startswith("unknown key")
        if not (message.strip() and known):
            return f"a fault without a place: {line[:200]!r}"
    return ""


def _number(text: str) -> Any:
    raise ValueError(f"{text} in the JSON")


def _wrong_results(text: str) -> str:
    try:
        found = json.loads(text, parse_constant=_number)
    except ValueError as error:
        return f"JSON: {error}"
    for option in found.get("options", ()):
        if not option["closure"] <= CLOSURE_LIMIT:
            return f"closure {option['closure']} of {option['key']}"
    for check in found.get("checks", ()):
        if check["name"].startswith(SOUND) and not check["passed"]:
            return f"check {check['name']}: {check['value']}"
    return ""


def _wrong_workbook(content: bytes | None) -> str:
    if content is None:
        return ""
    with ZipFile(io.BytesIO(content)) as archive:
        broken = archive.testzip()
    return f"workbook: {broken}" if broken else ""


def _first_words(err: str) -> str:
    """The beginning of the first fault, without what was given."""
    lines = [line for line in err.splitlines() if line.startswith(("  ", "Error: "))]
    if not lines:
        return ""
    text = lines[0].partition(": ")[2]
    text = re.sub(r'".*?"', '"…"', text)
    text = re.sub(r"^.{0,80}? given; ", "… given; ", text)
    return " ".join(re.sub(r"[-+]?\d[\d.e+-]*", "#", text).split()[:7])
