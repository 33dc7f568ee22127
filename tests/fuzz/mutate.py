"""Bend inputs at random and call the program on each: `python tests/fuzz/mutate.py 2000`.

Prints JSON: how many were generated, accepted, refused (by reason) and failed, each failure with what was
bent; `--only NUMBER` makes one again in the folder that it prints. Exit status 1 where one failed.
"""

import argparse
import json
import os
import sys
import tempfile
from collections import Counter
from collections.abc import Callable, Iterable, Iterator
from functools import cache
from pathlib import Path
from typing import Any

os.environ.setdefault("APPRAISE_PROCESSES", "1")
sys.path[:0] = [str(Path(__file__).parents[1]), str(Path(__file__).parents[2])]

from books import small_book  # noqa: E402

from fuzz.mutations import attempt  # noqa: E402
from fuzz.seeds import quick_case  # noqa: E402
from fuzz.trial import Outcome, tried  # noqa: E402

SEED = 20260


@cache
def _book() -> bytes:
    with tempfile.TemporaryDirectory() as folder:
        return small_book(Path(folder), quick_case()).read_bytes()


def outcomes(
    numbers: Iterable[int], seed: int = SEED, book: Callable[[], bytes] = _book
) -> Iterator[Outcome]:
    """Make the attempts of these numbers, each in a folder of its own."""
    for number in numbers:
        with tempfile.TemporaryDirectory() as folder:
            yield tried(attempt(seed, number, book), Path(folder))


def summary(found: Iterable[Outcome], seed: int = SEED) -> dict[str, Any]:
    """Counts, and every failure with what makes it again."""
    found = list(found)
    refused = Counter(one.reason for one in found if one.kind == "refused")
    return {
        "seed": seed,
        "generated": len(found),
        "accepted": sum(one.kind == "accepted" for one in found),
        "refused": refused.total(),
        "refused_by_reason": dict(refused.most_common()),
        "failures": [
            {
                "number": one.attempt.number,
                "bent": one.attempt.told,
                "call": " ".join(one.attempt.arguments),
                "failure": one.reason,
            }
            for one in found
            if one.kind == "failed"
        ],
    }


def _once(number: int, seed: int) -> Outcome:
    folder = Path(tempfile.mkdtemp(prefix=f"fuzz-{number}-"))
    print(folder, file=sys.stderr)
    return tried(attempt(seed, number, _book), folder)


def command() -> int:
    """Read the call, make the attempts, print what came of them."""
    parser = argparse.ArgumentParser(
        description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter
    )
    parser.add_argument("number", type=int, nargs="?", default=200)
    parser.add_argument("--seed", type=int, default=SEED)
    parser.add_argument("--only", type=int, metavar="NUMBER")
    asked = parser.parse_args()
    found = outcomes(range(asked.number), asked.seed)
    if asked.only is not None:
        found = iter([_once(asked.only, asked.seed)])
    result = summary(found, asked.seed)
    print(json.dumps(result, indent=2, ensure_ascii=False))
    return 1 if result["failures"] else 0


if __name__ == "__main__":
    sys.exit(command())
