"""The command line: declares options, calls one function, returns a status.

Heavy libraries are imported inside the commands, so that `appraise --help` answers at once.
"""

from __future__ import annotations

import os
import sys
import traceback
from collections.abc import Sequence
from io import TextIOWrapper
from pathlib import Path
from typing import TYPE_CHECKING, NamedTuple

import click

from appraise import __version__
from appraise.console import STANDARD_OUTPUT, check_targets, default_out, deliver, files, progress_bar
from appraise.errors import AppraiseError, CaseError, FileProblem, SolveError

if TYPE_CHECKING:
    from appraise.case.load import Case, LoadedCase
    from appraise.cycle.balance import Balance

# The matrices here are so small that threads of the linear algebra library only wait for one another: on a
# busy machine they take four times as long. It reads this when numpy is imported, which comes later.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")


MOST_HEAT = 10.0  # of `--at`, over the design point's; far above what any plant can do


class Point(NamedTuple):
    """An operating point of the turbine condensers."""

    heat_MW: float
    supply_C: float
    return_C: float


def _point(ctx: click.Context, param: click.Parameter, value: str | None) -> Point | None:
    """HEAT,SUPPLY,RETURN as in 25,85,48, with heat above 0 and the supply above the return."""
    if value is None:
        return None
    try:
        point = Point(*map(float, value.split(",")))
    except (ValueError, TypeError):
        told = f"'{value}' is not three numbers HEAT,SUPPLY,RETURN in MW, °C, °C, as in 25,85,48"
        raise click.BadParameter(told) from None
    if not (0.0 < point.heat_MW < float("inf")):
        raise click.BadParameter(f"heat is {point.heat_MW:g} MW; allowed is more than 0")
    if not (0.0 <= point.return_C < point.supply_C < float("inf")):
        given = f"supply is {point.supply_C:g} °C, return {point.return_C:g} °C"
        raise click.BadParameter(f"{given}; allowed is a return from 0 °C up and a supply above it")
    return point


class Workflow(click.Group):
    """Lists its commands in the order of the work."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Names in the order of definition."""
        return list(self.commands)


case_argument = click.argument(
    "case_path", metavar="CASE", type=click.Path(exists=True, dir_okay=False, path_type=Path)
)
json_option = click.option(
    "--json",
    "json_path",
    metavar="FILE",
    type=click.Path(allow_dash=True, path_type=Path),
    help="Also write the results as JSON; - writes them, and nothing else, to standard output.",
)


@click.group(cls=Workflow, context_settings={"max_content_width": 100})
@click.version_option(__version__, prog_name="appraise", message="%(prog)s %(version)s")
def program() -> None:
    """Is a second district-heating condenser worth its money?

    Reads one file about a back-pressure steam CHP plant, solves the heat balance of every option through
    every hour of a year, and writes the investment case as a workbook.

    \b
    Example:
      appraise new marrowby
      appraise run marrowby/marrowby.toml
    """


@program.command()
@click.argument("folder", type=click.Path(path_type=Path))
def new(folder: Path) -> None:
    """Write a commented starter case, with its hours, into FOLDER.

    The folder is made if it is missing. Nothing that exists is overwritten.

    \b
    Example:
      appraise new marrowby
    """
    from appraise.files import write_whole
    from appraise.starting import next_command, starter_files

    contents = {folder / name: data for name, data in starter_files().items()}
    there = [str(path) for path in contents if os.path.lexists(path)]
    if there:
        raise FileProblem(f"already there: {', '.join(there)}; nothing was written")
    write_whole(contents)
    for path in contents:
        click.echo(f"wrote {path}")
    click.echo(f"next: {next_command(contents)}")


@program.command()
@case_argument
def check(case_path: Path) -> None:
    """Read and validate CASE, and say what is doubtful in it. Solves nothing.

    All faults of the case and of its hours are reported at once, each by its place.

    \b
    Example:
      appraise check marrowby/marrowby.toml
    """
    from appraise.case.load import load_case
    from appraise.output import check_report

    click.echo(check_report(load_case(case_path)))


@program.command()
@case_argument
@click.option("--option", "key", metavar="KEY", help="Only this option, with all its steam and water states.")
@click.option(
    "--at",
    "point",
    metavar="HEAT,SUPPLY,RETURN",
    callback=_point,
    help="Another operating point, in MW, °C, °C. Sizes stay those of the design point.",
)
@json_option
def balance(case_path: Path, key: str | None, point: Point | None, json_path: Path | None) -> None:
    """Heat balance of every option of CASE at the design point.

    \b
    Example:
      appraise balance marrowby/marrowby.toml
      appraise balance marrowby/marrowby.toml --option two-stage --at 25,85,48
    """
    from appraise import output
    from appraise.case.load import load_case

    loaded = load_case(case_path)
    _check_key(loaded, key)
    check_targets(loaded, *files(json_path))
    from appraise.study import balances

    solved = balances(loaded.case) if point is None else _balances_at(loaded.case, point)
    chosen = [one for one in solved if key in (None, one.key)]
    text = output.json_text(output.balance_json(chosen))
    if json_path != STANDARD_OUTPUT:
        click.echo(output.balance_table(chosen, _point_title(loaded, point), states=key is not None))
    deliver({}, json_path, text, quiet=False)


@program.command()
@case_argument
@click.option("--out", metavar="FILE.xlsx", type=click.Path(path_type=Path), help="[reports/CASE.xlsx]")
@json_option
@click.option("--quiet", is_flag=True, help="Print nothing but errors.")
@click.option(
    "--draws", metavar="N", type=click.IntRange(0, 1_000_000), help="Draws of the risk. [what CASE says]"
)
@click.option(
    "--verify",
    metavar="N",
    type=click.IntRange(2, 10_000),
    default=12,
    help="Draws solved in full, to measure the error of the method. [12]",
)
def run(
    case_path: Path,
    out: Path | None,
    json_path: Path | None,
    quiet: bool,
    draws: int | None,
    verify: int,
) -> None:
    """The whole study of CASE, as a workbook.

    Heat balances, the year by the hour, capital, cash flows in every price scenario, and what they are
    sensitive to. Files are written at the end, whole or not at all. CASE may also be a workbook that this
    command wrote: its inputs are read as they stand now, and the study is run again.

    \b
    Example:
      appraise run marrowby/marrowby.toml
      appraise run marrowby/marrowby.toml --out case.xlsx --json results.json
      appraise run case.xlsx
    """
    out = out or default_out(case_path)
    if out.suffix.lower() != ".xlsx":
        raise click.UsageError(f"--out: '{out}' does not end in .xlsx")
    from appraise import output, results
    from appraise.case.load import load_case

    loaded = load_case(case_path)
    check_targets(loaded, out, *files(json_path))
    if loaded.doubts and not quiet:
        click.echo(output.problem_list(loaded.doubts, "doubt"), err=True)
    from appraise.study import run_study
    from appraise.workbook.book import workbook_bytes

    with progress_bar(shown=not quiet) as progress:
        study = run_study(loaded, progress, draws, verify)
        contents = {out: workbook_bytes(study)}
    text = output.json_text(results.study_json(study)) if json_path else ""
    if json_path != STANDARD_OUTPUT and not quiet:
        click.echo(results.run_summary(study))
    deliver(contents, json_path, text, quiet)


@program.command()
@case_argument
@click.option("--option", "key", metavar="KEY", help="Which option. [the best one with several stages]")
@json_option
def optimum(case_path: Path, key: str | None, json_path: Path | None) -> None:
    """Design choice: split, terminal difference, stages, drain route, surface.

    NPV in the reference scenario with one of them changed at a time, and with terminal difference and split
    together.

    \b
    Example:
      appraise optimum marrowby/marrowby.toml
    """
    from appraise import output, results
    from appraise.case.load import load_case

    loaded = load_case(case_path)
    _check_key(loaded, key)
    check_targets(loaded, *files(json_path))
    from appraise.study import design_of

    choice = design_of(loaded, key)
    if choice is None:
        raise click.UsageError("optimum: needs an option with at least two stages")
    if json_path != STANDARD_OUTPUT:
        click.echo(results.optimum_table(choice, loaded.case.study.currency))
    deliver({}, json_path, output.json_text({"design_choice": choice}), quiet=False)


def _point_title(loaded: LoadedCase, point: Point | None) -> str:
    design = loaded.case.plant.design
    at = point or Point(design.heat_MW, design.supply_C, design.return_C)
    name = "design point" if point is None else "off design"
    return f"{loaded.case.study.title}, {name}: {at.heat_MW:g} MW, {at.supply_C:g}/{at.return_C:g} °C"


def _balances_at(case: Case, point: Point) -> tuple[Balance, ...]:
    """Balances at the point of `--at`. A point that cannot be is a wrong call, no fault of the case."""
    from appraise.cycle.limits import boiling_problems, steam_problems
    from appraise.study import point_balances

    design_MW = case.plant.design.heat_MW
    if point.heat_MW > MOST_HEAT * design_MW:
        allowed = f"at most {MOST_HEAT:g} times the design point's {design_MW:g} MW"
        raise click.UsageError(f"--at: heat is {point.heat_MW:g} MW; allowed is {allowed}")
    if not steam_problems(case, None):
        for problem in boiling_problems(case, "supply", point.supply_C):
            raise click.UsageError(f"--at: {problem}")
    try:
        return point_balances(case, *point)
    except SolveError as error:
        at = f"{point.heat_MW:g} MW, {point.supply_C:g}/{point.return_C:g} °C"
        raise SolveError(f"no heat balance at {at}: {error}") from error


def _check_key(loaded: LoadedCase, key: str | None) -> None:
    keys = [option.key for option in loaded.case.options]
    if key is not None and key not in keys:
        raise click.UsageError(f"--option: the case has no option '{key}'; it has {', '.join(keys)}")


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the program; exit status 0 done, 2 the case or the call is wrong, 1 anything else."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, TextIOWrapper):  # a terminal without "°" shows "?" instead of failing
            stream.reconfigure(errors="replace")
    try:
        status = program.main(arguments, prog_name="appraise", standalone_mode=False)
    except Exception as error:
        return _explain(error)
    return status if isinstance(status, int) else 0


def _explain(error: Exception) -> int:
    """Tell the user what went wrong, without a traceback, and return the exit status."""
    if os.environ.get("APPRAISE_DEBUG"):
        traceback.print_exception(error)
    if isinstance(error, click.ClickException):
        error.show()
        return error.exit_code
    if isinstance(error, CaseError):
        from appraise.output import problem_list

        click.echo(f"The case has {problem_list(error.problems, 'fault')}", err=True)
        return error.exit_status
    if isinstance(error, AppraiseError):
        click.echo(f"Error: {error}", err=True)
        return error.exit_status
    if isinstance(error, click.Abort):
        click.echo("interrupted; nothing written", err=True)
        return 1
    ask = "please report it with the case file; APPRAISE_DEBUG=1 shows where"
    click.echo(f"internal error: {type(error).__name__}: {' '.join(str(error).split())}; {ask}", err=True)
    return 1
