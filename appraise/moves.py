"""What moves the gain: the extra power of every option with one condition a little worse or better.

Changes of the network act on the plant as sized; changes of the new equipment size it anew.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from appraise.case.hours import Hours
from appraise.case.load import Case, case_from
from appraise.case.paths import changed, value_in_force
from appraise.chain import Physics, solve_physics
from appraise.cycle.balance import option_at
from appraise.cycle.design import Design
from appraise.cycle.task import Conditions
from appraise.numerics import Array
from appraise.workers import each

Data = Mapping[str, Any]
Change = tuple[str, Data, Callable[[Conditions], Conditions]]


@dataclass(frozen=True, slots=True, eq=False)
class Move:
    """Change of the extra net power by option, in the case's order: at the design point and over the year."""

    label: str
    design_kW: Array
    year_MWh: Array


def gain_moves(case: Case, data: Data, hours: Hours, physics: Physics) -> tuple[Move, ...]:
    """Every move. `data` is the case as read, in which paths are changed."""
    start = _design_gain(physics.design, physics.design.conditions), _year_gain(physics)

    def move(change: Change) -> Move:
        label, edited, point = change[0], case_from(change[1]), change[2]
        moved = solve_physics(edited, hours, physics)
        made = physics.design if edited.year != case.year else moved.design
        at_design = _design_gain(made, point(made.conditions)) - start[0]
        return Move(label, at_design * 1e3, _year_gain(moved) - start[1])

    return tuple(each(move, list(_changes(case, data))))


def _changes(case: Case, data: Data) -> Iterator[Change]:
    """Label, edited data, and the design point under the change."""

    def added(path: str, by: float) -> Data:
        return changed(case, data, path, float(value_in_force(case, path)) + by)

    def everywhere(table: str, key: str, by: float) -> Data:
        edited = added(f"{table}.{key}", by)
        for option in case.options:
            own = getattr(option, table)
            if own is not None and getattr(own, key) is not None:
                path = f"options.{option.key}.{table}.{key}"
                edited = changed(case, edited, path, float(getattr(own, key)) + by)
        return edited

    def same(at: Conditions) -> Conditions:
        return at

    difference = everywhere("new_condenser", "terminal_difference_K", 1.0)
    for option in case.options:
        if option.terminal_difference_K is not None:
            path = f"options.{option.key}.terminal_difference_K"
            difference = changed(case, difference, path, option.terminal_difference_K + 1.0)
    yield "+1 K TTD of the new condensers", difference, same
    yield (
        "+1 K network return",
        added("year.return_offset_K", 1.0),
        lambda at: Conditions(at.heat_MW, at.return_C + 1.0, at.supply_C),
    )
    yield (
        "+1 K network supply",
        added("year.supply_offset_K", 1.0),
        lambda at: Conditions(at.heat_MW, at.return_C, at.supply_C + 1.0),
    )
    yield "−1 point of tail efficiency", everywhere("tail", "efficiency", -0.01), same
    yield (
        "−1 % heat",
        changed(case, data, "year.heat_multiplier", case.year.heat_multiplier * 0.99),
        lambda at: Conditions(at.heat_MW * 0.99, at.return_C, at.supply_C),
    )


def _design_gain(made: Design, at: Conditions) -> Array:
    """Extra net power of every option at one point, sizes as made, MW."""
    power = [float(option_at(made, option, at).energy.power_net_MW[0]) for option in made.options]
    base = float(option_at(made, made.baseline, at).energy.power_net_MW[0])
    return np.array(power) - base


def _year_gain(physics: Physics) -> Array:
    """Extra net power of every option in the first operating year, unbypassed, MWh."""
    years = physics.years
    base = years.solved[0][years.baseline]
    gains = [
        share * float((option.power_net_MW - base.power_net_MW).sum()) / option.years
        for option, share in zip(years.solved[0], years.shares, strict=True)
    ]
    return np.array(gains)
