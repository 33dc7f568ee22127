"""The starter case that comes with the package."""

import shlex
from collections.abc import Iterable
from importlib.resources import files
from pathlib import Path

from appraise.errors import FileProblem


def starter_files() -> dict[str, bytes]:
    """Names and contents of the starter case, the case file first. Raises FileProblem if it is missing."""
    folder = files("appraise") / "starter"
    found = [entry for entry in folder.iterdir() if entry.is_file()] if folder.is_dir() else []
    if not found:
        raise FileProblem("the starter case is missing from this installation")
    found.sort(key=lambda entry: (not entry.name.endswith(".toml"), entry.name))
    return {entry.name: entry.read_bytes() for entry in found}


def next_command(written: Iterable[Path]) -> str:
    """What to type after the starter case was written."""
    case = next(path for path in written if path.suffix == ".toml")
    return f"appraise check {shlex.quote(str(case))}"
