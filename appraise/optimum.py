"""Is the second condenser of the right size? NPV over terminal difference, split, stages, route and surface.

Every point is the option with one of its keys changed, sized, costed and run through the year again. Points
that cannot be built are blank. Half of the hours stand for them all, shifted so that the option as stated
comes out as in the study.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy.interpolate import CubicSpline

from appraise.case.hours import Hours
from appraise.case.load import Case
from appraise.case.plant import Option
from appraise.chain import case_npv, solve_physics
from appraise.demand import demand
from appraise.errors import AppraiseError
from appraise.response import part_of
from appraise.workers import each

DIFFERENCES_K = (1.0, 1.5, 2.0, 2.5, 3.0, 3.5, 4.0, 5.0, 6.0, 7.0, 8.0)
COLD_SHARES = (0.25, 0.3, 0.35, 0.4, 0.45, 0.5, 0.55, 0.6, 0.65, 0.7, 0.75)
STAGES = (1, 2, 3, 4, 5, 6)
ROUTES = ("cascade", "pumped")
AREA_FACTORS = (1.0, 1.25, 1.5, 1.75, 2.0)
JOINT_DIFFERENCES_K = (1.0, 2.0, 3.0, 4.0, 6.0)
JOINT_SHARES = (0.35, 0.45, 0.55, 0.65)
FLAT = 0.01  # of the best NPV
_HOUR_STEP = 2
_FEWEST_FOR_SPLINE = 4

Value = float | int | str


@dataclass(frozen=True, slots=True)
class Curve:
    """NPV over one key of an option, the others as stated.

    npv, reason : one for each value; npv None where the point cannot be built, with the reason.
    best : value with the greatest NPV, None where no point can be built. flat : how far the value may move
    within 1 % of the best NPV, by a cubic spline through the points; None for words and whole numbers, and
    where the best NPV is not above 0.
    """

    label: str
    key: str
    unit: str
    values: tuple[Value, ...]
    npv: tuple[float | None, ...]
    reason: tuple[str | None, ...]
    best: Value | None
    best_npv: float | None
    flat: tuple[float, float] | None


@dataclass(frozen=True, slots=True)
class DesignChoice:
    """One option's design choice in one scenario.

    joint : NPV over terminal difference and cold share together, [difference][share], and its best point.
    """

    option: str
    scenario: str
    stated_npv: float
    curves: tuple[Curve, ...]
    joint_difference_K: tuple[float, ...]
    joint_cold_share: tuple[float, ...]
    joint_npv: tuple[tuple[float | None, ...], ...]
    best_difference_K: float | None
    best_cold_share: float | None
    best_joint_npv: float | None


def design_choice(case: Case, hours: Hours, option: str, stated_npv: float) -> DesignChoice | None:
    """The curves of one option with at least two stages, in the reference scenario; None for others.

    stated_npv : of the option as stated, from the whole year.
    """
    chosen = next(one for one in case.options if one.key == option)
    if chosen.stages < 2:
        return None
    return _Choice(case, hours, chosen, stated_npv).made()


@dataclass(frozen=True, slots=True)
class _Point:
    npv: float | None
    reason: str | None


class _Choice:
    """Edits of one option beside the baseline alone."""

    def __init__(self, case: Case, hours: Hours, option: Option, stated_npv: float) -> None:
        self.case, self.option, self.stated = case, option, stated_npv
        self.hours = part_of(hours, demand(case, hours).heat_MW, _HOUR_STEP)
        self.known = solve_physics(self._case(option), self.hours)

    def _case(self, option: Option) -> Case:
        """The case with one option beside the baseline."""
        return self.case.model_copy(update={"options": (self.case.baseline, option)})

    def made(self) -> DesignChoice:
        """Solve every point and sum up."""
        split = self.option.stages
        edits: list[tuple[str, dict[str, Any]]] = [("stated", {})]
        edits += [("ttd", self._difference(value)) for value in DIFFERENCES_K]
        edits += [("share", {"shares": _shares(value, split)}) for value in COLD_SHARES]
        edits += [("stages", {"stages": value, "shares": None}) for value in STAGES]
        edits += [("route", {"drain_route": value}) for value in ROUTES]
        edits += [("area", {"existing_area_factor": value}) for value in AREA_FACTORS]
        edits += [
            ("joint", self._difference(t) | {"shares": _shares(x, split)})
            for t in JOINT_DIFFERENCES_K
            for x in JOINT_SHARES
        ]
        points = list(each(lambda edit: self._solved(edit[1]), edits))
        found: dict[str, list[_Point]] = {}
        for (name, _), point in zip(edits, points, strict=True):
            found.setdefault(name, []).append(point)
        start = found["stated"][0].npv
        shift = 0.0 if start is None else self.stated - start
        asked: tuple[tuple[str, str, str, str, tuple[Value, ...]], ...] = (
            ("ttd", "Terminal difference of the new condensers", "terminal_difference_K", "K", DIFFERENCES_K),
            ("share", "Cold stage's share of the rise", "shares", "", COLD_SHARES),
            ("stages", "Number of stages", "stages", "", STAGES),
            ("route", "Drain route", "drain_route", "", ROUTES),
            ("area", "Surface of the existing condenser", "existing_area_factor", "times", AREA_FACTORS),
        )
        curves = tuple(
            _curve(label, key, unit, values, found[name], shift) for name, label, key, unit, values in asked
        )
        return self._with_joint(curves, found["joint"], shift)

    def _with_joint(self, curves: tuple[Curve, ...], points: Sequence[_Point], shift: float) -> DesignChoice:
        values = [None if point.npv is None else point.npv + shift for point in points]
        width = len(JOINT_SHARES)
        rows = tuple(tuple(values[i : i + width]) for i in range(0, len(values), width))
        built = [(npv, i) for i, npv in enumerate(values) if npv is not None]
        npv, place = max(built) if built else (None, 0)
        return DesignChoice(
            option=self.option.key,
            scenario=self.case.study.reference_scenario,
            stated_npv=self.stated,
            curves=curves,
            joint_difference_K=JOINT_DIFFERENCES_K,
            joint_cold_share=JOINT_SHARES,
            joint_npv=rows,
            best_difference_K=JOINT_DIFFERENCES_K[place // width] if built else None,
            best_cold_share=JOINT_SHARES[place % width] if built else None,
            best_joint_npv=npv,
        )

    def _difference(self, value: float) -> dict[str, Any]:
        """The terminal difference of the new condensers, wherever the option has it from."""
        own = self.option.new_condenser
        plain = None if own is None else own.model_copy(update={"terminal_difference_K": None})
        return {"terminal_difference_K": value, "new_condenser": plain}

    def _solved(self, edit: Mapping[str, Any]) -> _Point:
        """NPV of the option with some keys changed."""
        option = self.option.model_copy(update=dict(edit))
        if option.stages < 2:
            return _Point(None, "one stage has no tail section: that is the baseline, or more surface on it")
        case = self._case(option)
        try:
            npv = case_npv(case, self.hours, case.study.reference_scenario, self.known)
        except AppraiseError as error:
            return _Point(None, str(error))
        return _Point(float(npv[1]), None)


def _shares(cold: float, stages: int) -> tuple[float, ...]:
    """The coldest stage's share as given, the others equal."""
    return (cold, *[(1.0 - cold) / (stages - 1)] * (stages - 1))


def _curve(
    label: str, key: str, unit: str, values: tuple[Value, ...], points: Sequence[_Point], shift: float
) -> Curve:
    npv = tuple(None if point.npv is None else point.npv + shift for point in points)
    built = [(worth, i) for i, worth in enumerate(npv) if worth is not None]
    best_npv, place = max(built) if built else (None, None)
    return Curve(
        label=label,
        key=key,
        unit=unit,
        values=values,
        npv=npv,
        reason=tuple(point.reason for point in points),
        best=None if place is None else values[place],
        best_npv=best_npv,
        flat=_flat([(float(values[i]), worth) for worth, i in built if isinstance(values[i], float)]),
    )


def _flat(points: Sequence[tuple[float, float]]) -> tuple[float, float] | None:
    """Range around the best point in which a spline stays within 1 % of its greatest value."""
    if len(points) < _FEWEST_FOR_SPLINE or max(npv for _, npv in points) <= 0.0:
        return None
    x, y = np.array(points).T
    fine = np.linspace(x[0], x[-1], 1001)
    npv = CubicSpline(x, y)(fine)
    best, low = int(np.argmax(npv)), (1.0 - FLAT) * float(npv.max())
    below = np.flatnonzero(npv < low)
    left = below[below < best].max(initial=-1) + 1
    right = below[below > best].min(initial=fine.size) - 1
    return float(fine[left]), float(fine[right])
