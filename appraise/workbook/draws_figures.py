"""Figures behind the charts of the Draws sheet: points of the cumulative curves, bins of the histograms."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from appraise.draws import OptionRisk
from appraise.numerics import Array
from appraise.workbook.cells import LABEL, TOTAL, UNIT, Page, area

SHARES = tuple(round(0.01 * k, 2) for k in range(101))
WANTED_BINS = 32
TAIL = 0.25  # per cent of the draws at either end that go into the first and the last bin
TINY = 1e-6  # of the values, or of a unit of money: the narrowest bin there can be
_NICE = (1.0, 2.0, 2.5, 5.0, 10.0)


@dataclass(frozen=True, slots=True)
class Bins:
    """A histogram. edges : one more than counts, multiples of one step, so that zero is an edge if inside.

    The first and the last bin also hold what lies beyond them.
    """

    edges: tuple[float, ...]
    counts: tuple[int, ...]

    @property
    def step(self) -> float:
        """Width of a bin."""
        return self.edges[1] - self.edges[0]


def bins_of(values: Array) -> Bins:
    """Up to 32 bins or so of round width over values [draw]; losses and gains never share one."""
    low, high = (float(v) for v in np.percentile(values, [TAIL, 100.0 - TAIL]))
    # The open bins at the ends must not mix losses with gains: zero is an edge where there are both.
    if values.min() < 0.0 <= low:
        low = -TINY
    if high < 0.0 <= values.max():
        high = 0.0
    step = round_step(max((high - low) / WANTED_BINS, TINY * max(abs(low), abs(high)), TINY))
    first, last = int(np.floor(low / step)), int(np.floor(high / step)) + 1
    edges = np.arange(first, last + 1) * step
    place = np.clip(np.floor(values / step).astype(int) - first, 0, last - first - 1)
    counts = np.bincount(place, minlength=last - first)
    return Bins(tuple(float(e) for e in edges), tuple(int(c) for c in counts))


def round_step(step: float) -> float:
    """The next width of 1, 2, 2.5 or 5 times a power of ten."""
    power = 10.0 ** float(np.floor(np.log10(step)))
    return float(next(power * nice for nice in _NICE if power * nice >= step * (1.0 - 1e-9)))


class Figures:
    """Tables below the printed part: quantiles of every option, then its bins."""

    def __init__(
        self, page: Page, top: int, risks: Sequence[OptionRisk], names: Sequence[str], currency: str
    ) -> None:
        self.page, self.top, self.risks, self.names, self.currency = page, top, risks, names, currency
        self.first = top + 2
        self.bins = [bins_of(risk.npv) for risk in risks]
        self.bins_top = self.first + len(SHARES) + 1

    @property
    def shares(self) -> str:
        """Cells of the shares of draws."""
        return area(self.first, LABEL, self.first + len(SHARES) - 1, LABEL)

    def quantiles(self, number: int) -> str:
        """Cells of the net present values that these shares of the draws do not exceed."""
        col = TOTAL + number
        return area(self.first, col, self.first + len(SHARES) - 1, col)

    def bin_cells(self, number: int) -> tuple[str, str, str]:
        """Cells of the lower edges in thousands, of the numbers below zero, and of the others."""
        first = self._bins_first(number)
        last = first + len(self.bins[number].counts) - 1
        edges, below, above = (area(first, col, last, col) for col in (UNIT, TOTAL, TOTAL + 1))
        return edges, below, above

    def _bins_first(self, number: int) -> int:
        return self.bins_top + 2 + sum(len(bins.counts) + 3 for bins in self.bins[:number])

    def write(self) -> None:
        """All tables."""
        page = self.page
        page.put(self.top, LABEL, "Figures of the charts, not printed", "section")
        page.headings(self.top + 1, ["Share of draws below", "", *self.names])
        page.height(self.top + 1, 42)
        for offset, share in enumerate(SHARES):
            page.put(self.first + offset, LABEL, share, "percent0 as run")
        for number, risk in enumerate(self.risks):
            for offset, value in enumerate(np.quantile(risk.npv, SHARES)):
                page.put(self.first + offset, TOTAL + number, float(value), "thousand as run")
            self._write_bins(number)

    def _write_bins(self, number: int) -> None:
        page, bins, row = self.page, self.bins[number], self._bins_first(number)
        page.put(row - 2, LABEL, f"{self.names[number]}: draws by net present value", "label_total")
        page.headings(
            row - 1, [f"Bin, thousand {self.currency}", "lower edge", "below zero", "zero and above"]
        )
        for offset, count in enumerate(bins.counts):
            low, high = bins.edges[offset] / 1000.0, bins.edges[offset + 1] / 1000.0
            words = f"{low:,.10g} to {high:,.10g}"
            if offset == 0:
                words = f"below {high:,.10g}"
            elif offset == len(bins.counts) - 1:
                words = f"{low:,.10g} and more"
            negative = bins.edges[offset + 1] <= 0.0
            page.put(row + offset, LABEL, words.replace("-", "−"), "text_right as run")
            page.put(row + offset, UNIT, low, "general as run")
            page.put(row + offset, TOTAL, count if negative else None, "integer as run")
            page.put(row + offset, TOTAL + 1, None if negative else count, "integer as run")
