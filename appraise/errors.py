"""What can go wrong, as types.

    AppraiseError                 exit status 1
    ├── CaseError                 2, the case is wrong; carries every problem found
    ├── SolveError                1, the case is right but its equations have no solution
    └── FileProblem               2, a target cannot be written or a source cannot be read

Bad news about an investment is none of these: it is a result.
"""

from collections.abc import Iterable
from dataclasses import dataclass
from typing import ClassVar


@dataclass(frozen=True, slots=True)
class Problem:
    """One fault (or doubt) of an input: where it is, and what was given against what is allowed.

    where : dotted path ("plant.feed.bleed_bar") or file place ("town-year.csv row 17, column heat_MW")
    """

    where: str
    message: str

    def __str__(self) -> str:
        return f"{self.where}: {self.message}"


class AppraiseError(Exception):
    """Anything this package says no to; the text is meant for the user."""

    exit_status: ClassVar[int] = 1


class CaseError(AppraiseError):
    """The case is wrong. Its text is one line per problem."""

    exit_status: ClassVar[int] = 2

    def __init__(self, problems: Iterable[Problem]) -> None:
        self.problems: tuple[Problem, ...] = tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


class SolveError(AppraiseError):
    """The equations have no solution in the physical range."""


class FileProblem(AppraiseError):
    """A file cannot be written or read."""

    exit_status: ClassVar[int] = 2
