"""The temperatures between the stages where every tail section passes just the steam the colder stages need.

They are carried as fractions: how much of what is left of the rise each stage takes, from the cold end. Any
fractions in (0, 1) keep the temperatures in order, whatever the iteration tries.
"""

from __future__ import annotations

import numpy as np

from appraise.cycle.shells import Shells
from appraise.numerics import Array

_BOUNDS = (0.004, 0.996)


def improved_fractions(section_constant: tuple[float, ...], network_kg_s: Array, shells: Shells) -> Array:
    """Move the temperatures between stages to where every section passes what the colder stages need.

    One Newton step on F_k = passed_k - needed_k. Its Jacobian is nearly upper bidiagonal: warmer water behind
    stage k needs more steam and raises the back pressure of section k and the inlet pressure of the next.
    """
    needed = np.cumsum(shells.steam_kg_s, axis=0)[:-1]
    passed = np.asarray(section_constant)[:, None] * shells.passing
    ratio = np.minimum(shells.flange_bar[:-1] / shells.flange_bar[1:], 1.0) ** 2
    opening = np.maximum(1.0 - ratio, 1e-3)
    whole = shells.water_C[-1] - shells.water_C[0]
    slope = shells.log_slope[:-1] * whole
    heating = network_kg_s * 4.2 * whole / (shells.steam_kJ_kg - shells.drain_kJ_kg)[:-1]
    own = heating + passed * ratio / opening * slope
    move = np.empty_like(passed)
    hotter = np.zeros(whole.shape)
    for k in range(passed.shape[0] - 1, -1, -1):
        move[k] = (passed[k] - needed[k] + hotter) / own[k]
        hotter = passed[k - 1] / opening[k - 1] * slope[k] * move[k] if k else hotter
    reached = (shells.water_C[1:-1] - shells.water_C[0]) / whole
    return fractions_of(reached + move)


def fractions_of(reached: Array) -> Array:
    """Shares reached after each stage, as fractions of what the hotter stages still have to add."""
    fractions = np.empty_like(reached)
    before = np.zeros(reached.shape[1:])
    for k, share in enumerate(reached):
        fractions[k] = np.clip((share - before) / (1.0 - before), *_BOUNDS)
        before = before + fractions[k] * (1.0 - before)
    return fractions


def shares_reached(fractions: Array) -> Array:
    """The inverse of `fractions_of`; keeps the temperatures in order whatever the iteration tries."""
    return np.asarray(1.0 - np.cumprod(1.0 - np.clip(fractions, *_BOUNDS), axis=0))
