"""Temperatures between stages: those at which every tail section passes what the colder shells need."""

import math
from collections.abc import Callable
from itertools import pairwise

from scipy.optimize import root as powell_hybrid

from . import steam
from .expansion import MainLine
from .plain import Option, Plant
from .shells import Fixed, Memory, NoSolution, Rating, Train, train

LEAST, MOST = 0.01, 0.99


def between(in_C: float, out_C: float, fractions) -> tuple[float, ...]:
    """Water temperatures from inlet to outlet at cumulative fractions of the rise."""
    return (in_C, *(in_C + f * (out_C - in_C) for f in fractions), out_C)


def cumulative(option: Option) -> tuple[float, ...]:
    return tuple(sum(option.shares[: k + 1]) for k in range(option.stages - 1))


def mismatch(found: Train, fixed: Fixed) -> list[float]:
    """Per section (what it can pass squared - what is needed squared) over the design flow squared."""
    return [
        (phi**2 * section.open_swallowing - flow * abs(flow)) / design**2
        for phi, design, section, flow in zip(
            fixed.phi, fixed.flow_kg_s, found.sections, found.flows, strict=True
        )
    ]


def settle(
    plant: Plant,
    option: Option,
    ratings: tuple[Rating, ...],
    line: MainLine,
    flow_kg_s: float,
    in_C: float,
    out_C: float,
    fixed: Fixed,
    memory: Memory,
) -> Train:
    """The train in an hour; raises NoSolution where it cannot run."""

    def at(fractions, held: bool = False) -> Train:
        temperatures = between(in_C, out_C, fractions)
        return train(plant, option, ratings, line, flow_kg_s, temperatures, fixed, held, memory)

    found = None
    if option.stages == 1:
        found = at(())
    elif option.held:
        found = _held(at, option, fixed)
    if found is None:
        memory.fractions = _slide(lambda f: mismatch(at(f), fixed), cumulative(option), memory.fractions)
        found = at(memory.fractions)
    _refuse(found, option, fixed)
    return found


def _held(at, option: Option, fixed: Fixed) -> Train | None:
    """The design shares kept by throttling, or None where a section could not pass its share."""
    found = at(cumulative(option), held=True)
    return found if min(mismatch(found, fixed)) >= 0.0 else None


def _refuse(found: Train, option: Option, fixed: Fixed) -> None:
    if not found.buildable():
        raise NoSolution("a shell without steam, or not below the next hotter one")
    shares = [f / d for f, d in zip(found.flows, fixed.flow_kg_s, strict=True)]
    if shares and min(shares) < option.min_flow_share:
        raise NoSolution("tail below its minimum flow")


def _slide(
    miss: Callable[[tuple[float, ...]], list[float]],
    start: tuple[float, ...],
    before: tuple[float, ...] | None = None,
) -> tuple[float, ...]:
    """Fractions of the rise; ``before`` are those of a like solve, tried first."""
    if len(start) == 1:
        return (_bracketed(lambda f: miss((f,))[0], before[0] if before else None),)
    number = len(start)

    def missed(logs) -> list[float]:
        try:
            return miss(_fractions(logs))
        except (NoSolution, ValueError):  # a trial step into temperatures that no shell could have
            return [1e3] * number

    best = powell_hybrid(
        missed, _logs(before or start), method="hybr", options={"xtol": 1e-12, "factor": 0.3}
    )
    fractions = _fractions(best.x)
    if max(map(abs, best.fun)) > 1e-11 or not LEAST <= fractions[0] <= fractions[-1] <= MOST:
        if before:
            return _slide(miss, start)
        raise NoSolution("no temperatures at which every section passes its flow")
    return fractions


def _logs(fractions) -> list[float]:
    """Rises of all stages but the hottest over that of the hottest, as logarithms: any of them keep order.

    One is added, as Powell's first step is measured by the length of the start.
    """
    ends = (0.0, *fractions, 1.0)
    rises = [hot - cold for cold, hot in pairwise(ends)]
    return [1.0 + math.log(rise / rises[-1]) for rise in rises[:-1]]


def _fractions(logs) -> tuple[float, ...]:
    rises = [*(math.exp(min(30.0, x - 1.0)) for x in logs), 1.0]
    return tuple(sum(rises[: k + 1]) / sum(rises) for k in range(len(logs)))


def _bracketed(miss: Callable[[float], float], before: float | None) -> float:
    if before is not None:
        low, high = max(LEAST, before - 0.004), min(MOST, before + 0.004)
        if miss(low) * miss(high) < 0.0:
            return steam.root(miss, low, high)
    if miss(LEAST) * miss(MOST) > 0.0:
        raise NoSolution("no temperature within 1 ... 99 % of the rise")
    return steam.root(miss, LEAST, MOST)
