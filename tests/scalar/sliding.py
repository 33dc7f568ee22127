"""Temperatures between stages: those at which every tail section passes what the colder shells need."""

from collections.abc import Callable
from itertools import pairwise

from scipy.optimize import root as powell_hybrid

from . import steam
from .expansion import MainLine
from .plain import Option, Plant
from .shells import Fixed, NoSolution, Rating, Train, train

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
) -> Train:
    """The train in an hour; raises NoSolution where it cannot run."""

    def at(fractions, held: bool = False) -> Train:
        temperatures = between(in_C, out_C, fractions)
        return train(plant, option, ratings, line, flow_kg_s, temperatures, fixed, held)

    found = None
    if option.stages == 1:
        found = at(())
    elif option.held:
        found = _held(at, option, fixed)
    if found is None:
        found = at(_slide(lambda f: mismatch(at(f), fixed), cumulative(option)))
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


def _slide(miss: Callable[[tuple[float, ...]], list[float]], start: tuple[float, ...]) -> tuple[float, ...]:
    if len(start) == 1:
        return (_bracketed(lambda f: miss((f,))[0]),)
    best = powell_hybrid(lambda f: miss(tuple(f)), start, method="hybr", options={"xtol": 1e-14})
    fractions = tuple(float(f) for f in best.x)
    ends = (LEAST, *fractions, MOST)
    if max(map(abs, best.fun)) > 1e-11 or any(a > b for a, b in pairwise(ends)):
        raise NoSolution("no temperatures at which every section passes its flow")
    return fractions


def _bracketed(miss: Callable[[float], float]) -> float:
    if miss(LEAST) * miss(MOST) > 0.0:
        raise NoSolution("no temperature within 1 ... 99 % of the rise")
    return steam.root(miss, LEAST, MOST)
