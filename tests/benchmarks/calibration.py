"""What calibrating on one steady test does to the gain, as JSON:  python tests/benchmarks/calibration.py

The true plant is the demo with a fouled condenser, 6 K at the design point. Its power and exhaust pressure at
one operating point are the test. A case that states 3 K is then calibrated on it, with and without the
exhaust pressure, and the gain of every option over the year is compared with that of the true plant.
"""

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import json
import sys
from pathlib import Path
from typing import Any

import numpy as np

ROOT = Path(__file__).parents[2]
sys.path.insert(0, str(ROOT))

from appraise.case.load import Case, LoadedCase, case_from, load_case  # noqa: E402
from appraise.case.paths import changed, edited  # noqa: E402
from appraise.cycle.balance import option_at  # noqa: E402
from appraise.cycle.design import design  # noqa: E402
from appraise.cycle.task import Conditions  # noqa: E402
from appraise.year import solve_years  # noqa: E402

TRUE_DIFFERENCE_K = 6.0
TEST = {"heat_MW": 36.0, "supply_C": 92.0, "return_C": 46.0}


def gains(case: Case, loaded: LoadedCase) -> dict[str, float]:
    """Extra net power of every option in the year, MWh, availability included."""
    years = solve_years(case, loaded.hours, design(case))
    base = years.solved[0][years.baseline].power_net_MW
    return {
        option.key: share * float((option.power_net_MW - base).sum())
        for option, share in zip(years.solved[0], years.shares, strict=True)
    }


def told(case: Case, loaded: LoadedCase, truth: dict[str, float]) -> dict[str, Any]:
    """What was found, and how far the gain is from the true one."""
    found = design(case).calibration
    gained = gains(case, loaded)
    return {
        "efficiency": None if found is None else found.efficiency,
        "terminal_difference_K": None if found is None else found.difference_K,
        "gain_MWh": gained,
        "over_true": {key: value / truth[key] for key, value in gained.items() if truth[key]},
    }


def main() -> None:
    """Make the test, calibrate, compare."""
    loaded = load_case(ROOT / "inputs" / "marrowby.toml")
    true = case_from(
        changed(loaded.case, loaded.data, "plant.condenser.terminal_difference_K", TRUE_DIFFERENCE_K)
    )
    made = design(true)
    at = Conditions(*(np.array([TEST[name]]) for name in ("heat_MW", "return_C", "supply_C")))
    plant = option_at(made, made.baseline, at)
    test = TEST | {"power_MW": float(plant.energy.power_gross_MW[0])}
    exhaust = {"exhaust_bar": float(plant.shells.flange_bar[-1, 0])}
    truth = gains(true, loaded)
    power_alone = case_from(edited(loaded.data, "plant.measured", test))
    both = case_from(edited(loaded.data, "plant.measured", test | exhaust))
    print(
        json.dumps(
            {
                "true": {
                    "efficiency": true.plant.turbine.efficiency,
                    "terminal_difference_K": TRUE_DIFFERENCE_K,
                },
                "true_gain_MWh": truth,
                "test": test | exhaust,
                "uncalibrated": told(loaded.case, loaded, truth),
                "calibrated_on_power": told(power_alone, loaded, truth),
                "calibrated_on_power_and_exhaust": told(both, loaded, truth),
            },
            indent=2,
        )
    )


if __name__ == "__main__":
    main()
