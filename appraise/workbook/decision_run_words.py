"""What the run knows beside the live figures: the weakest assumption, the chance of a loss, the design."""

from __future__ import annotations

from typing import TYPE_CHECKING

from appraise.optimum import FLAT
from appraise.workbook.design_words import Stated, caveat_of, value_words
from appraise.workbook.draws_words import per_cent
from appraise.workbook.scenario_words import thousands
from appraise.workbook.tornado_drivers import shown
from appraise.workbook.values import quoted_text

if TYPE_CHECKING:
    from appraise.optimum import DesignChoice
    from appraise.study import Study

CLEARLY = 0.05
"""Share of the net present value as stated that a better variant must add to be worth a line here."""


def run_words(study: Study) -> str:
    """All that the run knows of the option that was best in it."""
    parts = (leaning(study), loss_words(study), better_words(study))
    return " ".join(part for part in parts if part)


def run_formula(study: Study, best: str) -> str:
    """Formula of `run_words` while the best option, at place `best`, is still that of the run."""
    place = study.comparison.best[study.reference]
    name, title = study.case.options[place].name, study.runs[study.reference].prices.title
    sheets = "Tornado" if study.risk is None else "Tornado and Draws"
    other = f"As run, in scenario “{title}”, “{name}” was best. What moves this one stands on {sheets}."
    return f"=IF({best}={place + 1},{quoted_text(run_words(study))},{quoted_text(other)})"


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
        f"{thousands(npv, currency)} at {shown(given)}"
        for npv, given in ((bar.npv_low, bar.low), (bar.npv_high, bar.high))
        if npv is not None
    ]
    title = study.runs[reference].prices.title
    return (
        f"As run, in scenario “{title}”, the value of “{name}” leans most on “{bar.label}”: "
        f"{' and '.join(ends)}, against {thousands(best.base_npv, currency)} as stated."
    )


def loss_words(study: Study) -> str:
    """The chance of a loss of the run's best option, against that of the least risky one."""
    risk, place = study.risk, study.comparison.best[study.reference]
    if risk is None or study.case.options[place].baseline:
        return ""
    losses = {
        i: 1.0 - one.chance_npv_positive
        for i, (option, one) in enumerate(zip(study.case.options, risk.options, strict=True))
        if not option.baseline
    }
    least = min(losses, key=lambda i: losses[i])
    text = f"It loses in {per_cent(losses[place])} of the draws"
    if risk.scenario != study.case.study.reference_scenario:
        run = study.runs[list(study.case.scenarios).index(risk.scenario)]
        text += f" (scenario “{run.prices.title}”)"
    if losses[least] == losses[place]:
        return f"{text}, no option in fewer." if len(losses) > 1 else f"{text}."
    return (
        f"{text}, “{study.case.options[least].name}”, the least risky option, in {per_cent(losses[least])}."
    )


def better_words(study: Study) -> str:
    """That the design can be bettered clearly, "" where it cannot or was not looked for."""
    choice = study.design_choice
    if choice is None:
        return ""
    place = [option.key for option in study.case.options].index(choice.option)
    option = study.case.options[place]
    stated = Stated.of(study.case, option, choice.stated_npv)
    found = [
        (
            curve.best_npv,
            curve.key,
            f"{curve.label.lower()} {value_words(curve.key, curve.best)} instead of "
            f"{value_words(curve.key, stated.value(curve.key))}",
        )
        for curve in choice.curves
        if curve.best is not None and curve.best_npv is not None
    ]
    npv, key, words = max(found, default=(0.0, "", ""))
    if not clearly_better(choice, npv):
        return ""
    caveat = caveat_of(key, study.capital[place])
    gain = thousands(npv - choice.stated_npv, study.case.study.currency)
    added = f"{words} would add {gain}{caveat}"
    return f"The design of “{option.name}” is not at its best: see Design choice ({added})."


def clearly_better(choice: DesignChoice, npv: float) -> bool:
    """Whether a variant pays and is better by more than the flat top of a curve and a clear share."""
    gain = npv - choice.stated_npv
    return npv > 0.0 and gain > FLAT * npv and gain > CLEARLY * abs(choice.stated_npv)
