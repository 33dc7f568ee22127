"""How fast the year is solved, as one JSON document:  python tests/benchmarks/year.py

Inputs are perturbed between repeats, so that nothing can be remembered; seconds are medians of five, of this
process after its imports. Property evaluations are counted point by point: every value that a fit of the
steam tables gives. The floor is the time that the same fits need for one pass over the same points.
"""

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import cProfile
import json
import pstats
import resource
import sys
import tomllib
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from statistics import median
from time import perf_counter
from typing import Any

import numpy as np

ROOT = Path(__file__).parents[2]
sys.path[:0] = [str(ROOT), str(ROOT / "tests")]

from scalar import design as scalar_design  # noqa: E402
from scalar import points as scalar_points  # noqa: E402

from appraise import numerics  # noqa: E402
from appraise.case.hours import Hours  # noqa: E402
from appraise.case.load import Case, case_from, load_case  # noqa: E402
from appraise.case.paths import changed  # noqa: E402
from appraise.chain import case_npv, solve_physics  # noqa: E402
from appraise.cycle.design import Design, design  # noqa: E402
from appraise.steam_fits import saturation, volume_ph  # noqa: E402
from appraise.year import Years, solve_years  # noqa: E402

REPEATS = 5
SCALAR_HOURS = 40


def seconds(work: Callable[[int], object]) -> float:
    """Median of the repeats; each gets its number, to perturb its input with."""
    found = []
    for repeat in range(REPEATS):
        start = perf_counter()
        work(repeat)
        found.append(perf_counter() - start)
    return median(found)


def shifted(hours: Hours, repeat: int) -> Hours:
    """The hours with a little more heat."""
    assert hours.heat_MW is not None
    return replace(hours, heat_MW=hours.heat_MW * (1.0 + 1e-6 * (repeat + 1)))


def ten_years(hours: Hours) -> Hours:
    """The hours ten times over, each year a little different."""
    size = hours.time.size
    factor = np.repeat(1.0 + 1e-4 * np.arange(10), size)
    columns = {
        name: np.tile(getattr(hours, name), 10)
        for name in ("heat_MW", "outdoor_C", "supply_C", "return_C", "power_price")
    }
    columns["heat_MW"] = columns["heat_MW"] * factor
    time = hours.time[0] + np.arange(10 * size).astype("timedelta64[h]")
    return replace(hours, time=time, number_of_years=10, **columns)


class Counter:
    """Counts the values that the fits give while it is in force."""

    def __enter__(self) -> "Counter":
        self.points = self.calls = 0
        self.originals = numerics.Fit.__call__, numerics.Fit2.__call__
        counter = self

        def counted(original: Callable[..., Any]) -> Callable[..., Any]:
            def call(fit: Any, x: Any, *more: Any) -> Any:
                counter.points += np.asarray(x).size
                counter.calls += 1
                return original(fit, x, *more)

            return call

        numerics.Fit.__call__, numerics.Fit2.__call__ = map(counted, self.originals)
        return self

    def __exit__(self, *_: object) -> None:
        numerics.Fit.__call__, numerics.Fit2.__call__ = self.originals


def floor_seconds(made: Design, years: Years) -> float:
    """One pass of the saturation and volume fits over every stage of every solved hour of every option."""
    points = [
        (np.full(int(option.on.sum()), 1.0), len(design_option.train.stages))
        for option, design_option in zip(years.solved[0], made.options, strict=True)
    ]
    sizes = sum(rows.size * stages for rows, stages in points)
    pressure = np.linspace(0.2, 3.0, sizes)

    def one_pass(repeat: int) -> None:
        state = saturation(pressure * (1.0 + 1e-6 * repeat))
        volume_ph(state, state.hg - 100.0)

    return seconds(one_pass)


def scalar_seconds_per_hour(data: dict[str, Any], hours: Hours) -> float:
    """The independent scalar solver, on hours spread over the year in which the plant runs."""
    assert hours.heat_MW is not None
    assert hours.supply_C is not None
    assert hours.return_C is not None
    running = np.flatnonzero(hours.heat_MW > 14.0)
    chosen = running[:: max(1, running.size // SCALAR_HOURS)][:SCALAR_HOURS]
    made = scalar_design(data)
    start = perf_counter()
    for hour in chosen:
        scalar_points(
            made, *(float(column[hour]) for column in (hours.heat_MW, hours.supply_C, hours.return_C))
        )
    return (perf_counter() - start) / len(chosen)


def profile(case: Case, hours: Hours, made: Design) -> list[dict[str, Any]]:
    """Where the time goes: the ten functions with most time of their own."""
    profiler = cProfile.Profile()
    profiler.runcall(solve_years, case, hours, made)
    stats: Any = pstats.Stats(profiler).stats  # type: ignore[attr-defined]
    rows = sorted(stats.items(), key=lambda item: -item[1][2])[:10]
    return [
        {"function": f"{Path(k[0]).name}:{k[2]}", "calls": v[0], "own_s": round(v[2], 4)} for k, v in rows
    ]


def main() -> None:
    """Measure everything and print it."""
    path = ROOT / "inputs" / "marrowby.toml"
    loaded = load_case(path)
    case, hours = loaded.case, loaded.hours
    made = design(case)
    solve_years(case, hours, made)
    with Counter() as counter:
        years = solve_years(case, hours, made)
    one = seconds(lambda repeat: solve_years(case, shifted(hours, repeat), made))
    on = int(years.solved[0][0].on.sum())
    scalar = scalar_seconds_per_hour(tomllib.loads(path.read_text(encoding="utf-8")), hours)
    physics = solve_physics(case, hours)
    npv = case_npv(case, hours, case.study.reference_scenario, physics)

    def price(repeat: int) -> object:
        edited = case_from(changed(case, loaded.data, "scenario.power", f"{repeat + 1}%"))
        assert solve_physics(edited, hours, physics) is physics
        return case_npv(edited, hours, case.study.reference_scenario, physics)

    def technical(repeat: int) -> object:
        edited = case_from(changed(case, loaded.data, "tail.efficiency", 0.79 - 1e-4 * repeat))
        return case_npv(edited, hours, case.study.reference_scenario, physics)

    floor = floor_seconds(made, years)
    rows = profile(case, hours, made)
    before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    long = ten_years(hours)
    ten = seconds(lambda repeat: solve_years(case, shifted(long, repeat), made))
    print(
        json.dumps(
            {
                "options": len(case.options),
                "hours": int(hours.time.size),
                "hours_on": on,
                "year_s": one,
                "ten_years_s": ten,
                "ten_years_over_one": ten / one,
                "ten_years_peak_MB": resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024,
                "peak_before_ten_years_MB": before / 1024,
                "scalar_s_per_hour": scalar,
                "array_s_per_hour_on": one / on,
                "scalar_over_array": scalar / (one / on),
                "changed_price_s": seconds(price),
                "changed_technical_s": seconds(technical),
                "property_calls": counter.calls,
                "property_points": counter.points,
                "floor_one_pass_s": floor,
                "year_over_floor": one / floor,
                "npv": dict(zip([o.key for o in case.options], npv.tolist(), strict=True)),
                "profile": rows,
            },
            indent=2,
        )
    )


if __name__ == "__main__":
    main()
