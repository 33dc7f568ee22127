"""The invented wood-chip plant of Marrowby, as a plain mapping."""

from typing import Any

OPTIONS = ("single", "enlarged", "two", "two-subcooled", "two-pumped")

#: heat MW, supply and return C: winter peak to summer
OFF_DESIGN = (
    (40.0, 98.0, 46.0),
    (45.0, 110.0, 44.0),
    (25.0, 88.0, 47.0),
    (20.0, 80.0, 44.0),
    (15.0, 76.0, 50.0),
    (12.0, 77.0, 51.0),
    (10.0, 78.0, 47.0),
)


def marrowby() -> dict[str, Any]:
    """A fresh mapping each time, so that a test may change it."""
    return {
        "plant": {
            "auxiliary_MW": 0.6,
            "live_steam": {"pressure_bar": 62.0, "temperature_C": 485.0, "max_kg_s": 20.0, "min_kg_s": 6.0},
            "boiler": {"efficiency": 0.89, "pressure_bar": 75.0, "blowdown_share": 0.01, "makeup_C": 15.0},
            "turbine": {
                "efficiency": 0.84,
                "part_load": {
                    "load": [0.3, 0.4, 0.5, 0.6, 0.8, 1.0],
                    "value": [0.912, 0.938, 0.959, 0.976, 0.997, 1.0],
                },
                "mechanical_efficiency": 0.985,
                "generator_efficiency": 0.975,
                "exhaust_loss_share": 0.02,
            },
            "feed": {
                "deaerator_bar": 2.5,
                "bleed_bar": 5.0,
                "deaerator_control": "fixed",
                "pump_efficiency": 0.75,
            },
            "condenser": {"terminal_difference_K": 3.0},
            "design": {"heat_MW": 40.0, "supply_C": 98.0, "return_C": 46.0},
            "peak_boiler": {"efficiency": 0.92},
        },
        "tail": {"efficiency": 0.80},
        "new_condenser": {
            "terminal_difference_K": 3.0,
            "drain_approach_K": 7.0,
            "pressure_drop_bar": 0.4,
            "vacuum_auxiliary_kW": 15.0,
        },
        "options": [
            {"key": "single", "name": "Single stage", "stages": 1, "baseline": True},
            {"key": "enlarged", "name": "More surface", "stages": 1, "existing_area_factor": 1.5},
            {"key": "two", "name": "Two stage", "stages": 2},
            {"key": "two-subcooled", "name": "Two stage, subcooled", "stages": 2, "drain": "subcooled"},
            {"key": "two-pumped", "name": "Two stage, pumped", "stages": 2, "drain_route": "pumped"},
        ],
        "network": {"pressure_bar": 10.0},
    }


def edited(changes: dict | None = None, options: dict | None = None) -> dict:
    """Marrowby with dotted plant paths changed and keys added to every option but the baseline."""
    data = marrowby()
    for path, value in (changes or {}).items():
        *tables, key = path.split(".")
        table = data
        for name in tables:
            table = table.setdefault(name, {})
        table[key] = value
    for option in data["options"]:
        if not option.get("baseline"):
            option.update(options or {})
    return data


def unlimited(changes: dict | None = None, options: dict | None = None) -> dict:
    wide = {"plant.live_steam.max_kg_s": 60.0, "plant.live_steam.min_kg_s": 0.1}
    return edited(wide | (changes or {}), options)


def three_stages() -> dict:
    data = unlimited()
    data["options"].append(
        {"key": "three", "name": "Three stage", "stages": 3, "drain": "subcooled", "shares": [0.3, 0.3, 0.4]}
    )
    return data
