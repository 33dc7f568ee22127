"""Thousands of random plants at the edges, as JSON:  python tests/sweeps/edges.py [NUMBER [FIRST]]

Each plant has a baseline and one option of 1 to 6 stages. Both are sized at the design point and solved in
one other hour, and then laws are asked of them that hold for every plant. A warning of any library is an
error, and so is a solve that ends without an answer where the program has no words of its own for it.
Refusals are counted by their reason; a law that fails is listed with the plant's number, which makes the
plant again: `edge_plant(SEED, number)`. All processors take part; what is found does not depend on it.
"""

from __future__ import annotations

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import json
import re
import signal
import sys
import warnings
from collections import Counter
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from time import perf_counter
from typing import Any

import numpy as np

ROOT = Path(__file__).parents[2]
sys.path[:0] = [str(ROOT), str(Path(__file__).parents[1])]

from sweeps.edge_plants import LIFT_K, LOAD, MOST_STAGES, EdgePlant, edge_plant  # noqa: E402

from appraise.case.load import Case  # noqa: E402
from appraise.cycle.balance import option_at  # noqa: E402
from appraise.cycle.design import Design, OptionDesign, design, size_option  # noqa: E402
from appraise.cycle.limits import steam_problems  # noqa: E402
from appraise.cycle.stages import Train, ideal_train, train_of  # noqa: E402
from appraise.cycle.task import Conditions, Solution  # noqa: E402
from appraise.errors import AppraiseError, CaseError  # noqa: E402
from appraise.workers import each  # noqa: E402

SEED = 1706
PLANTS = 20_000
BANDS = 10
FEWEST = 500  # accepted in every band of lift and load and with every number of stages, of so many plants
_CHUNK = 50  # plants that a process takes at a time
_PLAIN_REFUSAL = "no steady operation found at"  # the only SolveError that is an answer
CLOSURE_LIMIT = 1e-9
# Powers are compared on the scale of the heat, for at these edges the power itself may be next to nothing.
_IDENTITY_LIMIT = 1e-10  # both sides are small differences of large figures
_SAME = 1e-12
_NEARLY = 0.02  # of a power of ten
_TRACE_KG_S = 1e-6
_STAGES_EVERY, _SHRINK_EVERY = 3, 10  # plants, because these laws take four and six more design points


@dataclass(frozen=True, slots=True)
class Law:
    """One law asked of one plant. `shortfall` is how far it was missed, 0 or less where it holds."""

    name: str
    shortfall: float


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of one plant. `reason` is why it was refused, None where it was solved at both points.

    faulty : the program neither solved nor refused it, but broke down or warned.
    """

    plant: EdgePlant
    reason: str | None
    faulty: bool = False
    closure: float = 0.0
    laws: tuple[Law, ...] = ()


def outcome(plant: EdgePlant) -> Outcome:
    """Size and solve one plant and ask the laws of it."""
    with warnings.catch_warnings(), np.errstate(invalid="raise", over="raise", divide="raise"):
        warnings.simplefilter("error")
        try:
            return _accepted(plant)
        except CaseError as error:
            reason = "; ".join(re.sub(r"[\d.]+", "#", p.message) for p in error.problems)
        except AppraiseError as error:
            reason = f"{type(error).__name__}: {re.sub(r'[0-9.]+', '#', str(error))}"
            return Outcome(plant, reason, faulty=_PLAIN_REFUSAL not in str(error))
        except (ArithmeticError, ValueError, AssertionError, LookupError, Warning) as error:
            return Outcome(plant, f"fault of the program: {type(error).__name__}: {error}", faulty=True)
    return Outcome(plant, reason)


def _accepted(plant: EdgePlant) -> Outcome:
    case = plant.case()
    problems = steam_problems(case, None)
    if problems:
        raise CaseError(problems)
    made = _baseline_design(case)
    option = _sized(made, train_of(case, case.options[1]))
    at = Conditions(*(np.array([v]) for v in (plant.heat_MW, plant.hour_return_C, plant.hour_supply_C)))
    hour = [option_at(made, one, at) for one in (made.baseline, option)]
    if not hour[0].valid[0]:
        return Outcome(plant, "the hour has no operation of the baseline, and the plant would stand still")
    if not hour[1].valid[0]:
        return Outcome(plant, "the hour has no steady operation of the option and would run as the baseline")
    points = [(made.baseline.solution, option.solution), (hour[0], hour[1])]
    closure = max(float(one.energy.closure[0]) for point in points for one in point)
    laws = [Law("price of extra power", _identity_missed(made, *point)) for point in points]
    if plant.number % _STAGES_EVERY == 0:
        laws += _stage_laws(case, made, option)
    if plant.number % _SHRINK_EVERY == 0:
        laws += _vanishing(plant)
    return Outcome(plant, None, closure=closure, laws=tuple(laws))


def _baseline_design(case: Case) -> Design:
    """The design point with the baseline alone, so that an option that is refused refuses only itself."""
    return design(case.model_copy(update={"options": case.options[:1]}))


def _sized(made: Design, train: Train) -> OptionDesign:
    return size_option(made.plant, train, made.reference, made.conditions, made.existing_conductance_kW_K)


@dataclass(frozen=True, slots=True)
class _Step:
    """From one train to another at the design point: extra gross power, and what heats each deaerator."""

    gain_MW: float
    heated_by: tuple[str, str]


def _step(made: Design, trains: Iterable[Train]) -> _Step | None:
    """None where one of the two cannot be built."""
    try:
        before, after = (_sized(made, train).solution for train in trains)
    except CaseError:
        return None
    gain = float(after.energy.power_gross_MW[0] - before.energy.power_gross_MW[0])
    return _Step(gain, (_heated_by(before), _heated_by(after)))


def _heated_by(at: Solution) -> str:
    if at.on_live_steam[0]:
        return "live steam"
    return "bleed" if at.feed.bleed_kg_s[0] > _TRACE_KG_S else "nothing"


def _identity_missed(made: Design, base: Solution, option: Solution) -> float:
    """Extra gross power at equal heat is mechanical × generator efficiency of the extra heat for it.

    dP_gross = eta_mech eta_gen {d[F eta_b] + dW_pump - b dm1 (hf(p_b) - h_mu)}; no flue-gas condenser here.
    """
    plant = made.plant

    def spent(at: Solution) -> float:
        steam = at.feed.live_steam_kg_s
        boiler = plant.boiler_efficiency.at(steam / made.reference.live_steam_kg_s) * at.energy.fuel_MW
        blown = plant.blowdown_share * steam * (plant.boiler_hf - at.feed.makeup_kJ_kg) / 1e3
        return float((boiler + at.energy.pump_MW - blown)[0])

    price = plant.mechanical_efficiency * plant.generator_efficiency
    power = float(option.energy.power_gross_MW[0] - base.energy.power_gross_MW[0])
    missed = abs(power - price * (spent(option) - spent(base))) / float(base.conditions.heat_MW[0])
    return missed - _IDENTITY_LIMIT


def _stage_laws(case: Case, made: Design, option: OptionDesign) -> Iterator[Law]:
    """More equal stages never make less power, without a loss at every inlet; nor does subcooling.

    The first with the deaerator on its bleed. With colder drains less steam condenses for the same heat, and
    more goes to the deaerator, making power on its way to the bleed. Throttled live steam makes none (plant
    301557: 158 bar with 10 K of superheat, tail 54 %, Baumann 1.1), and a deaerator whose water is hot enough
    takes none (plant 11568: one stage, drained at 93 °C into a deaerator for 77 °C). Very wet steam in a poor
    tail need not make up for that.
    """
    row, heat_MW = case.options[1], float(made.conditions.heat_MW[0])
    if option.train.tail.inlet_loss_share == 0.0:
        step = _step(made, (ideal_train(case, row, n) for n in (row.stages, row.stages + 1)))
        if step is not None and step.heated_by == ("bleed", "bleed"):
            yield Law("more equal stages", -step.gain_MW / heat_MW - _SAME)
    if row.stages > 1 and row.drain_route == "cascade":
        both = (row.model_copy(update={"drain": drain}) for drain in ("saturated", "subcooled"))
        step = _step(made, (train_of(case, one) for one in both))
        # From bleed to live steam costs more than subcooling gives.
        if step is not None and len({by == "live steam" for by in step.heated_by}) == 1:
            yield Law("subcooling", -step.gain_MW / heat_MW - _SAME)


def _vanishing(plant: EdgePlant) -> Iterator[Law]:
    """The gain of equal stages falls to a tenth where the lift and all differences do, once they are small.

    Where what heats a deaerator changes on the way, the gain has another slope from there on (plant 7550):
    then it must only be smaller. Not with a loss at the tail's inlets: a share of the pressure stays when the
    pressures come together.
    """
    if plant.stages == 1 or plant.data["tail"]["inlet_loss_share"] > 0.0:
        return
    steps = []
    for scale in (0.01, 0.001):
        case = plant.shrunk(scale).case()
        trains = (ideal_train(case, case.options[1], n) for n in (1, plant.stages))
        steps.append(_step(_baseline_design(case), trains))
    large, small = steps
    if large is None or small is None:
        return
    if large.heated_by != small.heated_by:
        yield Law("gain is smaller with less lift", abs(small.gain_MW) - abs(large.gain_MW))
        return
    ratio = large.gain_MW / small.gain_MW
    missed = abs(np.log10(ratio) - 1.0) - _NEARLY if ratio > 0.0 else 1.0
    yield Law("gain vanishes with the lift", missed)


# --- what is told -----------------------------------------------------------------------------------------


def band(value: float, limits: tuple[float, float]) -> int:
    """In which of the equal bands between two limits a value lies."""
    return min(BANDS - 1, int(BANDS * (value - limits[0]) / (limits[1] - limits[0])))


def _bands(
    outcomes: Sequence[Outcome], value: Callable[[EdgePlant], float], limits: tuple[float, float]
) -> list[dict[str, Any]]:
    """How many were drawn and accepted in each of the equal bands between two limits."""
    drawn = Counter(band(value(one.plant), limits) for one in outcomes)
    accepted = Counter(band(value(one.plant), limits) for one in outcomes if one.reason is None)
    edges = np.linspace(*limits, BANDS + 1)
    return [
        {"from": round(edges[k], 4), "to": round(edges[k + 1], 4), "drawn": drawn[k], "accepted": accepted[k]}
        for k in range(BANDS)
    ]


def _stage_rows(outcomes: Sequence[Outcome]) -> list[dict[str, int]]:
    drawn = Counter(one.plant.stages for one in outcomes)
    accepted = Counter(one.plant.stages for one in outcomes if one.reason is None)
    return [{"stages": k, "drawn": drawn[k], "accepted": accepted[k]} for k in range(1, MOST_STAGES + 1)]


def told(outcomes: Iterable[Outcome]) -> dict[str, Any]:
    """Counts, the worst closure and every failure of a law."""
    found = list(outcomes)
    accepted = [one for one in found if one.reason is None]
    worst = max(accepted, key=lambda one: one.closure, default=None)
    asked: Counter[str] = Counter(law.name for one in accepted for law in one.laws)
    failures = [
        {"law": law.name, "plant": one.plant.number, "shortfall": law.shortfall}
        for one in accepted
        for law in one.laws
        if law.shortfall > 0.0
    ]
    return {
        "seed": SEED,
        "first": found[0].plant.number if found else None,
        "plants": len(found),
        "accepted": len(accepted),
        "refused": dict(Counter(one.reason for one in found if one.reason is not None).most_common()),
        "first_refused": {
            reason: next(one.plant.number for one in found if one.reason == reason)
            for reason in dict.fromkeys(one.reason for one in found if one.reason is not None)
        },
        "by_lift_K": _bands(found, lambda plant: plant.lift_K, LIFT_K),
        "by_load": _bands(found, lambda plant: plant.load, LOAD),
        "by_stages": _stage_rows(found),
        "faults": [one.plant.number for one in found if one.faulty],
        "worst_closure": None if worst is None else worst.closure,
        "worst_closure_plant": None if worst is None else worst.plant.number,
        "laws_asked": dict(asked),
        "laws_failed": dict(Counter(one["law"] for one in failures)),
        "failures": sorted(failures, key=lambda one: -float(str(one["shortfall"])))[:50],
    }


def outcomes_of(number: int, seed: int = SEED, first: int = 0) -> Iterator[Outcome]:
    """So many plants of a seed, in their order."""
    end = first + number
    chunks = [range(start, min(start + _CHUNK, end)) for start in range(first, end, _CHUNK)]

    def solved(chunk: range) -> list[Outcome]:
        return [outcome(edge_plant(seed, index)) for index in chunk]

    return (one for outcomes in each(solved, chunks) for one in outcomes)


def enough(result: dict[str, Any]) -> bool:
    """Whether every band has its share of accepted plants: `FEWEST` of `PLANTS`, in proportion of fewer."""
    fewest = min(FEWEST, FEWEST * result["plants"] / PLANTS)
    rows = [*result["by_lift_K"], *result["by_load"], *result["by_stages"]]
    return all(row["accepted"] >= fewest for row in rows)


def _until_interrupted(outcomes: Iterator[Outcome], number: int) -> Iterator[Outcome]:
    start = perf_counter()
    try:
        for index, one in enumerate(outcomes, 1):
            if index % 500 == 0 or index == number:
                print(f"{index} of {number} plants, {perf_counter() - start:.0f} s", file=sys.stderr)
            yield one
    except KeyboardInterrupt:
        print("interrupted", file=sys.stderr)


def main() -> int:
    """Run; status 1 where a law fails, closure is missed or a band has too few plants."""
    number, first = [*map(int, sys.argv[1:3]), *(PLANTS, 0)[len(sys.argv) - 1 :]]
    signal.signal(signal.SIGINT, signal.default_int_handler)  # a shell's background command ignores it
    start = perf_counter()
    result = told(_until_interrupted(outcomes_of(number, first=first), number))
    result["enough_in_every_band"] = enough(result)
    result["seconds"] = perf_counter() - start
    print(json.dumps(result, indent=2))
    good = (
        not result["failures"]
        and not result["faults"]
        and result["accepted"]
        and result["worst_closure"] < CLOSURE_LIMIT
    )
    return 0 if good and result["enough_in_every_band"] else 1


if __name__ == "__main__":
    sys.exit(main())
