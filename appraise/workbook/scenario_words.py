"""What the matrix of net present values says, as a sentence: from numbers and as a formula."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from appraise.numerics import Array


def grouped(value: float, decimals: int = 0) -> str:
    """A number with groups of three and a true minus."""
    return f"{value:,.{decimals}f}".replace("-", "−")


def grouped_formula(cell: str, decimals: int = 0) -> str:
    """Expression of the same words."""
    return f'SUBSTITUTE(FIXED({cell},{decimals}),"-","−")'


def thousands(value: float, currency: str) -> str:
    """Money in thousands."""
    return f"{grouped(value / 1000.0)} thousand {currency}"


def thousands_formula(cell: str, currency: str) -> str:
    """Expression of the same words."""
    return f'{grouped_formula(f"{cell}/1000")}&" thousand {currency}"'


def best_words(best: Sequence[int], options: Sequence[str], baseline: int) -> str:
    """Which option is best, and in how many scenarios; the option best in most is named.

    best : index of the best option by scenario. Of options best equally often the first in the case is named.
    """
    counts = [sum(1 for one in best if one == i) for i in range(len(options))]
    leader = int(np.argmax(counts))
    if counts[leader] == len(best):
        if leader == baseline:
            return f"No option beats the plant as it stands (“{options[leader]}”) in any scenario."
        return f"“{options[leader]}” is best in every scenario."
    return (
        f"No option is best in every scenario; “{options[leader]}” is best in {counts[leader]} of "
        f"{len(best)}, the plant as it stands in {counts[baseline]}."
    )


def regret_words(largest: Array, worst: Array, options: Sequence[str], currency: str) -> str:
    """The option with the least of the largest regrets, and what it is worth at worst."""
    calmest = int(np.argmin(largest))
    return (
        f"“{options[calmest]}” leaves least to regret: at most "
        f"{thousands(float(largest[calmest]), currency)} behind the best of a scenario, and "
        f"{thousands(float(worst[calmest]), currency)} in its worst one."
    )


def best_formula(counts: str, names: str, scenarios: str, baseline: int) -> str:
    """Formula of `best_words`.

    counts, names : rows of cells by option; scenarios : the matrix's titles; baseline : its position.
    """
    leader = f'"“"&INDEX({names},1,MATCH(MAX({counts}),{counts},0))&"”"'
    alone = f"MAX({counts})=ROWS({scenarios})"
    return (
        f"=IF({alone},IF(INDEX({counts},1,{baseline + 1})=ROWS({scenarios}),"
        f'"No option beats the plant as it stands ("&{leader}&") in any scenario.",'
        f'{leader}&" is best in every scenario."),'
        f'"No option is best in every scenario; "&{leader}&" is best in "&MAX({counts})'
        f'&" of "&ROWS({scenarios})&", the plant as it stands in "&INDEX({counts},1,{baseline + 1})&".")'
    )


def regret_formula(largest: str, worst: str, names: str, currency: str) -> str:
    """Formula of `regret_words`; rows of cells by option."""
    place = f"MATCH(MIN({largest}),{largest},0)"
    behind = thousands_formula(f"MIN({largest})", currency)
    at_worst = thousands_formula(f"INDEX({worst},1,{place})", currency)
    return (
        f'="“"&INDEX({names},1,{place})&"” leaves least to regret: at most "&{behind}'
        f'&" behind the best of a scenario, and "&{at_worst}&" in its worst one."'
    )
