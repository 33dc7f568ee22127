"""Helper rows of an option's block: signs of its net flow, and when its running sums are back at zero."""

from __future__ import annotations

from itertools import pairwise

import numpy as np

from appraise.measures import ROUNDING, without_rounding
from appraise.numerics import Array
from appraise.workbook.calendar_rows import ROWS
from appraise.workbook.cash_flow_block import Block
from appraise.workbook.cells import LABEL, column, year_column


def write_marks(block: Block) -> None:
    """The option's name, signs and their changes, then both paybacks."""
    block.page.put(block.marks, LABEL, block.name, "text bold")
    _signs(block)
    flow = block.flow
    for row, running, source, flows, label in (
        (block.simple, block.cumulative, block.net, flow.net, "Paid back, years of operation"),
        (
            block.discount_payback,
            block.cumulative_discounted,
            block.discounted,
            flow.discounted,
            "Paid back, discounted, years of operation",
        ),
    ):
        _payback(block, row, running, source, flows, label)


def _before(block: Block, c: str) -> str:
    """The column to the left; for t = 0 that of the totals, which these rows leave empty."""
    at = block.years.index(c)
    return block.years[at - 1] if at else column(year_column(0) - 1)


def _signs(block: Block) -> None:
    net, small = block.time.row(block.net, absolute=True), without_rounding(block.flow.net)
    signs = np.zeros(block.time.number, dtype=int)
    for t, value in enumerate(small):
        signs[t] = np.sign(value) if value else (signs[t - 1] if t else 0)
    changes = [0, *(int(before * now < 0) for before, now in pairwise(signs))]
    sign = block.sign
    block.row(
        sign,
        "Sign of the net flow, kept through zeros",
        "–",
        lambda c: (
            f"=IF(ABS({c}{block.net})<=rounding_share*MAX(MAX({net}),-MIN({net})),"
            f"N({_before(block, c)}{sign}),SIGN({c}{block.net}))"
        ),
        signs.tolist(),
        style="integer",
        label_style="label_indent",
    )
    block.row(
        block.changes,
        "Change of sign",
        "–",
        lambda c: f"=IF(N({_before(block, c)}{sign})*{c}{sign}<0,1,0)",
        changes,
        style="integer",
        label_style="label_indent",
    )


def _payback(block: Block, row: int, running: int, source: int, flows: Array, label: str) -> None:
    """A mark where the running sum comes back to zero: the years of operation until then."""
    least = block.rounding(source)

    def mark(c: str) -> str:
        before, after = f"N({_before(block, c)}{running})", f"{c}{running}"
        return (
            f"=IF(AND({c}${ROWS.operating}=1,{before}<-{least},{after}>=-{least}),"
            f'{c}${ROWS.t_index}-spend_years-{before}/{c}{source},"")'
        )

    marks = crossings(flows, block.time.spend)
    block.row(row, label, "a", mark, marks, style="number2", label_style="label_indent")


def crossings(flows: Array, spend_years: int) -> list[object]:
    """By t, years of operation until the running sum of flows [t] is back at zero in that year, else ""."""
    flows = without_rounding(flows)
    total = np.cumsum(flows)
    total = np.where(np.abs(total) > ROUNDING * np.abs(flows).sum(), total, 0.0)
    return [
        float(t - spend_years - total[t - 1] / flows[t])
        if t >= spend_years and total[t - 1] < 0.0 <= total[t]
        else ""
        for t in range(flows.size)
    ]
