"""Chebyshev fits, interpolated curves and the accelerated fixed point that every solve of the plant uses.

Nothing here knows about steam or money. Arrays in, arrays out, and nothing fails in silence.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

_PIECES = 1024  # of a fit


def chebyshev_basis(x: Array, number: int) -> Array:
    """First `number` Chebyshev polynomials at x [point] in [-1, 1]; returns [number, point]."""
    basis = np.empty((number, x.size))
    basis[0] = 1.0
    if number > 1:
        basis[1] = x
    twice = 2.0 * x
    for k in range(2, number):
        np.multiply(twice, basis[k - 1], out=basis[k])
        basis[k] -= basis[k - 2]
    return basis


def chebyshev_nodes(low: float, high: float, number: int) -> Array:
    """Chebyshev nodes of the first kind on [low, high]; returns [number]."""
    angle = np.pi * (np.arange(number) + 0.5) / number
    return np.asarray(0.5 * (low + high) - 0.5 * (high - low) * np.cos(angle))


def _coefficients(values: Array) -> Array:
    """Chebyshev coefficients along the last axis from values at the nodes (discrete orthogonality)."""
    number = values.shape[-1]
    unit = chebyshev_basis(-np.cos(np.pi * (np.arange(number) + 0.5) / number), number)
    coefficients = 2.0 / number * values @ unit.T
    coefficients[..., 0] *= 0.5
    return np.asarray(coefficients)


@dataclass(frozen=True, slots=True, eq=False)
class Fit:
    """Several smooth functions of one variable, fitted together on [low, high].

    A Chebyshev fit, cut into short cubics that agree with it to rounding and cost a third of the series.
    `cubics` is [power, function, piece]. Calling with any shape gives [function, *shape].
    """

    low: float
    high: float
    cubics: Array

    @classmethod
    def of(cls, function: Callable[[Array], Array], low: float, high: float, order: int) -> Fit:
        """Fit `function`, which maps [node] to [function, node]."""
        values = np.atleast_2d(function(chebyshev_nodes(low, high, order)))
        return cls.from_series(_coefficients(values), low, high)

    @classmethod
    def from_series(cls, coefficients: Array, low: float, high: float) -> Fit:
        """From Chebyshev coefficients [function, order]; one more piece than needed holds the upper end."""
        within = chebyshev_nodes(0.0, 1.0, 4)
        unit = 2.0 * (np.arange(_PIECES + 1)[:, None] + within) / _PIECES - 1.0
        values = coefficients @ chebyshev_basis(unit.ravel(), coefficients.shape[1])
        powers = np.linalg.inv(np.vander(within, increasing=True))
        cubics = powers @ values.reshape(len(coefficients), _PIECES + 1, 4, 1)
        return cls(low, high, np.ascontiguousarray(np.moveaxis(cubics[..., 0], 2, 0)))

    def covers(self, x: Array) -> bool:
        """Whether every element of x lies in the fitted range."""
        return x.size == 0 or bool(x.min() >= self.low and x.max() <= self.high)

    def __call__(self, x: Array) -> Array:
        part = (x.ravel() - self.low) * (_PIECES / (self.high - self.low))
        piece = part.astype(np.intp)
        part -= piece
        values = self.cubics[3].take(piece, axis=1)
        for power in (2, 1, 0):
            values *= part
            values += self.cubics[power].take(piece, axis=1)
        return np.asarray(values.reshape(self.cubics.shape[1], *x.shape))


@dataclass(frozen=True, slots=True, eq=False)
class Fit2:
    """A smooth function of two variables on a rectangle.

    `series` gives, along the variable with more terms (x where `along_x`), the Chebyshev coefficients in
    the other.
    """

    x: tuple[float, float]
    y: tuple[float, float]
    series: Fit
    along_x: bool

    @classmethod
    def of(
        cls,
        function: Callable[[Array, Array], Array],
        x: tuple[float, float],
        y: tuple[float, float],
        order: tuple[int, int],
    ) -> Fit2:
        """Fit `function`, which maps two flat arrays to one of the same size."""
        nodes_x, nodes_y = chebyshev_nodes(*x, order[0]), chebyshev_nodes(*y, order[1])
        grid_x, grid_y = (g.ravel() for g in np.meshgrid(nodes_x, nodes_y, indexing="ij"))
        terms = _coefficients(_coefficients(function(grid_x, grid_y).reshape(order)).T).T
        along_x = order[0] >= order[1]
        return cls(x, y, Fit.from_series(terms.T, *x) if along_x else Fit.from_series(terms, *y), along_x)

    def covers(self, x: Array, y: Array) -> NDArray[np.bool_]:
        """Element by element, whether the point lies in the fitted rectangle."""
        return np.asarray((x >= self.x[0]) & (x <= self.x[1]) & (y >= self.y[0]) & (y <= self.y[1]))

    def __call__(self, x: Array, y: Array) -> Array:
        long, short, (low, high) = (x, y, self.y) if self.along_x else (y, x, self.x)
        rows = self.series(long.ravel())
        rows *= chebyshev_basis((2.0 * short.ravel() - (low + high)) / (high - low), len(rows))
        return np.asarray(rows.sum(axis=0).reshape(x.shape))


@dataclass(frozen=True, slots=True, eq=False)
class FixedPoint:
    """Where an iteration came to rest: `x` [unknown, point] and whether each point did.

    `inverse` [unknown, unknown, point] is the inverse of -J as estimated on the way, J being the Jacobian of
    step(x) - x.
    """

    x: Array
    inverse: Array
    converged: NDArray[np.bool_]


def fixed_point(
    step: Callable[[Array, NDArray[np.intp]], Array],
    start: Array,
    *,
    inverse: Array | None = None,
    tolerance: float = 1e-11,
    iterations: int = 60,
) -> FixedPoint:
    """Solve x = step(x) for many points at once by Broyden's method (Broyden, Math. Comp. 19 (1965) 577).

    start : [unknown, point]. step : (x [unknown, active], indices of the active points) -> the improved x.
    inverse : as of an earlier, similar iteration; without it a plain substitution is the first step. Each
    later step corrects the inverse Jacobian by a rank-one update, point by point, so that unknowns which feed
    on each other do not slow one another down. Points at rest to `tolerance` (absolute, on every unknown)
    leave the work.
    """
    number, points = start.shape
    x = start.copy()
    converged = np.zeros(points, dtype=bool)
    active = np.arange(points)
    if inverse is None:
        inverse = np.broadcast_to(np.eye(number)[:, :, None], (number, number, points))
    at_end = inverse.copy()
    residual = step(x, active) - x
    for _ in range(iterations):
        rest = np.abs(residual).max(axis=0) <= tolerance
        if rest.any():
            at_rest = active[rest]
            x[:, at_rest] += residual[:, rest]
            at_end[:, :, at_rest] = inverse[:, :, rest]
            converged[at_rest] = True
            keep = ~rest
            active, residual, inverse = active[keep], residual[:, keep], inverse[:, :, keep]
        if active.size == 0:
            break
        move = np.einsum("ijp,jp->ip", inverse, residual)
        x[:, active] += move
        updated = step(x[:, active], active) - x[:, active]
        inverse = _broyden_update(inverse, move, updated - residual)
        residual = updated
    return FixedPoint(x, at_end, converged)


def joined(parts: Sequence[FixedPoint]) -> FixedPoint:
    """One iteration of all points from those of their blocks."""
    return FixedPoint(
        np.concatenate([part.x for part in parts], axis=-1),
        np.concatenate([part.inverse for part in parts], axis=-1),
        np.concatenate([part.converged for part in parts]),
    )


def _broyden_update(inverse: Array, move: Array, change: Array) -> Array:
    """Sherman–Morrison form of Broyden's update of the inverse of -J, point by point."""
    # r(x) is the residual and move = B r with B = -J^-1, so the secant condition is B (-change) = move.
    image = np.einsum("ijp,jp->ip", inverse, -change)
    row = np.einsum("ip,ijp->jp", move, inverse)
    denominator = np.einsum("jp,jp->p", row, -change)
    safe = np.abs(denominator) > 1e-30
    scale = np.where(safe, 1.0 / np.where(safe, denominator, 1.0), 0.0)
    return np.asarray(inverse + (move - image)[:, None, :] * row[None, :, :] * scale)
