"""The study of the demo case, solved once for all tests that show it."""

from datetime import date
from functools import cache
from pathlib import Path

from appraise.case.load import LoadedCase, load_case
from appraise.study import Study, run_study

DEMO = Path(__file__).parents[1] / "inputs" / "marrowby.toml"
TODAY = date(2026, 12, 1)


@cache
def marrowby() -> LoadedCase:
    """The demo case with its hours."""
    return load_case(DEMO)


@cache
def marrowby_study() -> Study:
    """Everything the demo case asks for, as of one day; takes a minute."""
    return run_study(marrowby(), today=TODAY)
