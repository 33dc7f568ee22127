"""The recommendation and its reason: once in words from numbers, once as formulas that follow the inputs."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from appraise.workbook.scenario_words import thousands, thousands_formula

if TYPE_CHECKING:
    from appraise.study import Study


@dataclass(frozen=True, slots=True)
class Cells:
    """Rows of cells over all options on the Decision sheet, and the best option in the chosen scenario."""

    names: str
    npv: str
    capital: str
    payback: str
    worst: str
    best: str  # place of the best option, from 1
    baseline: int  # place of the baseline, from 1
    scenario: str  # title of the chosen scenario

    def of_best(self, row: str) -> str:
        """The best option's value of a row."""
        return f"INDEX({row},1,{self.best})"


@dataclass(frozen=True, slots=True)
class Best:
    """The best option of the chosen scenario in numbers."""

    name: str
    npv: float
    capital: float
    payback: float | None
    worst: float
    is_baseline: bool
    scenario: str


BASIS_FORMULA = (
    '="Present values at "&FIXED(in_finance_discount_rate*100,1)&" % a year, after "'
    '&FIXED(in_finance_tax_rate*100,1)&" % tax, "'
    '&IF(in_finance_basis="real","real, in money of "&in_study_price_year,"nominal")'
    '&". Positive: better than the plant as it is."'
)
"""Formula of `basis`."""


def basis(study: Study) -> str:
    """What the present values rest on, and what their sign means."""
    finance, year = study.case.finance, study.case.study.price_year
    money = f"real, in money of {year}" if finance.basis == "real" else "nominal"
    return (
        f"Present values at {finance.discount_rate * 100.0:,.1f} % a year, after "
        f"{finance.tax_rate * 100.0:,.1f} % tax, {money}. Positive: better than the plant as it is."
    )


def verdict(best: Best, currency: str) -> str:
    """What to do in the chosen scenario."""
    if best.is_baseline:
        return f"Leave the plant as it is: in scenario “{best.scenario}” no option earns its capital."
    return (
        f"Build “{best.name}”: in scenario “{best.scenario}” it is worth {thousands(best.npv, currency)} "
        f"more than the plant as it is."
    )


def verdict_formula(cells: Cells, currency: str) -> str:
    """Formula of `verdict`."""
    worth = thousands_formula(cells.of_best(cells.npv), currency)
    return (
        f"=IF({cells.best}={cells.baseline},"
        f'"Leave the plant as it is: in scenario “"&{cells.scenario}&"” no option earns its capital.",'
        f'"Build “"&{cells.of_best(cells.names)}&"”: in scenario “"&{cells.scenario}&"” it is worth "&{worth}'
        f'&" more than the plant as it is.")'
    )


def reason(best: Best, currency: str) -> str:
    """Why: capital, payback and what the worst scenario makes of it."""
    if best.is_baseline:
        return "Every option costs more than the extra power brings at these prices."
    back = (
        "does not pay it back in operation"
        if best.payback is None
        else f"pays it back in {best.payback:,.1f} years"
    )
    worst = "still gains" if best.worst >= 0 else "loses"
    return (
        f"It asks for {thousands(best.capital, currency)} of capital and {back}; "
        f"in its worst scenario it {worst} {thousands(abs(best.worst), currency)}."
    )


def reason_formula(cells: Cells, currency: str) -> str:
    """Formula of `reason`."""
    capital = thousands_formula(cells.of_best(cells.capital), currency)
    back, worst = cells.of_best(cells.payback), cells.of_best(cells.worst)
    return (
        f"=IF({cells.best}={cells.baseline},"
        f'"Every option costs more than the extra power brings at these prices.",'
        f'"It asks for "&{capital}&" of capital and "&'
        f'IF(ISNUMBER({back}),"pays it back in "&FIXED({back},1)&" years",'
        f'"does not pay it back in operation")'
        f'&"; in its worst scenario it "&IF({worst}>=0,"still gains ","loses ")'
        f'&{thousands_formula(f"ABS({worst})", currency)}&".")'
    )


def origin(study: Study) -> str:
    """Of which day the study is, which revision, and by whom."""
    about = study.case.study
    parts = (f"Study of {study.dated}", f"revision {about.revision}" if about.revision else "", about.author)
    return " · ".join(part for part in parts if part)


def question(baseline: str, options: int, years: int, first_year: int) -> str:
    """What the study was asked."""
    ways = "one way" if options == 1 else f"{options} ways"
    return (
        f"Is it worth the money to get more power from the same heat at this plant? Compared are {ways} of "
        f"rebuilding it with the plant as it is (“{baseline}”), over {years} years of operation from "
        f"{first_year}, each hour of a year solved, all heat delivered in every case."
    )


def leaning(study: Study) -> str:
    """The weakest assumption of the run: the widest bar of the best option that is built."""
    reference, options = study.reference, study.case.options
    built = [bars for bars in study.tornado if bars.bars]
    if not built:
        return ""
    best = max(built, key=lambda bars: bars.base_npv)
    name = next(option.name for option in options if option.key == best.option)
    bar, currency = best.bars[0], study.case.study.currency
    ends = [
        f"{thousands(npv, currency)} at {given}"
        for npv, given in ((bar.npv_low, bar.low), (bar.npv_high, bar.high))
        if npv is not None
    ]
    title = study.runs[reference].prices.title
    return (
        f"As run, in scenario “{title}”, the value of “{name}” leans most on “{bar.label}”: "
        f"{' and '.join(ends)}, against {thousands(best.base_npv, currency)} as stated."
    )
