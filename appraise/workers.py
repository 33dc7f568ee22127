"""Many independent solves on all processors, where the system can fork; else one after another.

A forked process starts with everything its parent has in memory, so that only the number of an item goes in
and only its result comes back. Results do not depend on how many processes there are.
"""

from __future__ import annotations

import multiprocessing
import os
import warnings
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from typing import Any, TypeVar

Item = TypeVar("Item")
Result = TypeVar("Result")

# What the forked processes work on; set just before they start.
_work: tuple[Callable[[Any], Any], Sequence[Any]] | None = None


def processes() -> int:
    """How many processes to use: one a processor, or what APPRAISE_PROCESSES in the environment says."""
    asked = os.environ.get("APPRAISE_PROCESSES", "")
    if asked.isdigit() and int(asked) > 0:
        return int(asked)
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else (os.cpu_count() or 1)


def each(function: Callable[[Item], Result], items: Sequence[Item]) -> Iterator[Result]:
    """function(item) for every item, in their order, as they come to be ready.

    What the function raises is raised here. Results must be picklable; `function` and `items` need not be.
    """
    number = min(processes(), len(items))
    if number < 2 or "fork" not in multiprocessing.get_all_start_methods():
        yield from map(function, items)
        return
    global _work
    outer, _work = _work, (function, items)
    try:
        with warnings.catch_warnings():
            # Newer Pythons warn of forking beside threads; the only ones here idle in linear algebra.
            warnings.simplefilter("ignore", DeprecationWarning)
            pool = ProcessPoolExecutor(number, multiprocessing.get_context("fork"))
            futures = [pool.submit(_one, index) for index in range(len(items))]
        try:
            for future in futures:
                yield future.result()
        finally:
            pool.shutdown(wait=True, cancel_futures=True)
    finally:
        _work = outer


def _one(index: int) -> Any:
    assert _work is not None
    function, items = _work
    return function(items[index])
