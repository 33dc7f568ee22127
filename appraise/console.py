"""Where the commands put their results, and how they tell how far the work is."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

import click

from appraise.errors import FileProblem

if TYPE_CHECKING:
    from appraise.case.load import LoadedCase

Progress = Callable[[float, str], None]

STANDARD_OUTPUT = Path("-")


def default_out(case_path: Path) -> Path:
    """The workbook of a case; a workbook that is itself the case is kept."""
    out = Path("reports", f"{case_path.stem}.xlsx")
    return out.with_stem(f"{out.stem}-again") if out.resolve() == case_path.resolve() else out


def files(json_path: Path | None) -> list[Path]:
    return [] if json_path in (None, STANDARD_OUTPUT) else [json_path]


def check_targets(loaded: LoadedCase, *targets: Path) -> None:
    """Refuse targets that cannot be written or would bury what was read, before any solving."""
    from appraise.files import check_target

    taken = {loaded.hours_path.resolve(): "the hours of the case", loaded.path.resolve(): "the case itself"}
    for target in targets:
        check_target(target)
        holder = taken.setdefault(target.resolve(), "another result")
        if holder != "another result" or len({t.resolve() for t in targets}) < len(targets):
            raise FileProblem(f"{target}: would overwrite {holder}; give another name")


def deliver(contents: dict[Path, bytes], json_path: Path | None, text: str, quiet: bool) -> None:
    """Write the files together, or the JSON to standard output, and say what was written."""
    from appraise.files import write_whole

    contents = contents | {path: text.encode() for path in files(json_path)}
    write_whole(contents)
    if json_path == STANDARD_OUTPUT:
        click.echo(text, nl=False)
    elif not quiet:
        for path in contents:
            click.echo(f"wrote {path}")


@contextmanager
def progress_bar(shown: bool) -> Iterator[Progress]:
    """A bar on standard error while a person watches; nothing in a log or a pipe."""
    if not (shown and sys.stderr.isatty()):
        yield lambda fraction, label: None
        return
    with click.progressbar(length=1000, file=sys.stderr, show_eta=False) as bar:

        def advance(fraction: float, label: str) -> None:
            bar.label = f"{label:<24.24}"
            bar.update(max(0, round(1000 * fraction) - bar.pos))
            bar.render_progress()

        yield advance
