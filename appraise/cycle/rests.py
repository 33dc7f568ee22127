"""Where similar points came to rest before, so that an iteration need not start from nothing.

A solve of the same hours with a changed plant starts near its goal; the result is the same to the tolerance.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from appraise.cycle.task import Mask, Regime, Rest, Task
from appraise.numerics import Array


@dataclass(frozen=True, slots=True, eq=False)
class Beginning:
    """State and inverse Jacobian to begin with, and at which points they are those of an earlier rest."""

    state: Array
    inverse: Array
    near: Mask


def begin(task: Task, start: Array) -> Beginning:
    """The plain `start` [unknown, point], and what is better known of points that came to rest before."""
    unknowns, points = start.shape
    state, near = start.copy(), np.zeros(points, dtype=bool)
    inverse = np.broadcast_to(np.eye(unknowns)[:, :, None], (unknowns, unknowns, points)).copy()
    for rest in _suitable(task, unknowns):
        if task.number is None or rest.number.size == 0:
            continue
        place = np.minimum(np.searchsorted(rest.number, task.number), rest.number.size - 1)
        mine = np.flatnonzero((rest.number[place] == task.number) & ~near)
        state[:, mine] = rest.state[:, place[mine]]
        inverse[:, :, mine] = rest.inverse[:, :, place[mine]]
        near[mine] = True
    return Beginning(state, inverse, near)


def _suitable(task: Task, unknowns: int) -> list[Rest]:
    """Rests with the same unknowns, first those of the same regime, then those on the other steam."""
    regime = _regime(task, unknowns)
    other = regime._replace(on_live_steam=not regime.on_live_steam)
    return [rest for wanted in (regime, other) for rest in task.earlier if rest.regime == wanted]


def _regime(task: Task, unknowns: int) -> Regime:
    return Regime(task.held, task.limited, bool(task.on_live_steam.any()), unknowns)


def rest_of(task: Task, state: Array, inverse: Array, at_rest: Mask) -> Rest:
    """What a later solve may start from."""
    index = np.flatnonzero(at_rest)
    number = np.zeros(0, dtype=np.intp) if task.number is None else task.number[index]
    return Rest(_regime(task, len(state)), number, state[:, index], inverse[:, :, index])
