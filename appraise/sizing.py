"""What has to be bought: surfaces, machines and pumps, at the greatest of the design point and all hours."""

from __future__ import annotations

from dataclasses import dataclass

from appraise.cycle.design import OptionDesign
from appraise.cycle.plant import PlantData
from appraise.cycle.turbine import exhaust_state
from appraise.numerics import Array
from appraise.steam_fits import volume_ph
from appraise.year import OptionYear


@dataclass(frozen=True, slots=True)
class StageSize:
    """What one condenser stage needs to be bought; the existing one counts with what is added to it.

    `stage` counts from the cold end. `tail_shaft_MW` is the section whose exhaust feeds this stage.
    """

    stage: int
    new: bool
    area_m2: float
    condensing_area_m2: float
    drain_area_m2: float
    heat_MW: float
    steam_kg_s: float
    exhaust_m3_s: float
    tail_shaft_MW: float
    generator_MW: float
    condensate_pump_kW: float
    network_pump_kW: float
    vacuum_auxiliary_kW: float


@dataclass(frozen=True, slots=True)
class OptionSize:
    """The same for a whole option: its stages, and their sums (`total("area_m2")`)."""

    option: str
    stages: tuple[StageSize, ...]  # cold to hot

    def of_stage(self, stage: StageSize, name: str) -> float:
        """One size of one stage by its name, one of `case.money.SIZE_NAMES`."""
        return float(getattr(stage, name))

    def total(self, name: str) -> float:
        """One size by its name, one of `case.money.SIZE_NAMES`, all stages together."""
        return sum(self.of_stage(stage, name) for stage in self.stages)


def option_size(option: OptionDesign, plant: PlantData, years: tuple[OptionYear, ...]) -> OptionSize:
    """Sizes of one option, unbypassed: surfaces from the design point, the rest at the greatest need."""
    return OptionSize(
        option.train.key, tuple(_stage_size(option, plant, years, i) for i in range(option.train.number))
    )


def _stage_size(option: OptionDesign, plant: PlantData, years: tuple[OptionYear, ...], i: int) -> StageSize:
    train, at = option.train, option.solution
    new, surface = not train.stages[i].existing, option.surface[i]
    flange = exhaust_state(at.shells.shell_bar[i], plant.exhaust_loss_share)
    through = at.shells.steam_kg_s[: i + 1].sum(axis=0)
    water = at.network_kg_s * (at.shells.water_kJ_kg[i + 1] - at.shells.water_kJ_kg[i]) / 1e3

    def most(design_point: Array, name: str) -> float:
        hourly = (float(getattr(year.greatest, name).value[i]) for year in years)
        return max(float(design_point[0]), *hourly) if new else 0.0

    shaft = most(option.energy.section_MW[i], "section_MW")
    return StageSize(
        stage=i + 1,
        new=new,
        area_m2=surface.total_m2,
        condensing_area_m2=surface.condensing_m2,
        drain_area_m2=surface.drain_m2,
        heat_MW=most(water, "heat_MW"),
        steam_kg_s=most(at.shells.steam_kg_s[i], "steam_kg_s"),
        exhaust_m3_s=most(through * volume_ph(flange, at.shells.steam_kJ_kg[i]), "exhaust_m3_s"),
        tail_shaft_MW=shaft,
        generator_MW=shaft * train.tail.mechanical_efficiency * train.tail.generator_efficiency,
        condensate_pump_kW=most(at.condensate_pump_MW[i], "condensate_pump_MW") * 1e3,
        network_pump_kW=most(option.energy.network_pump_MW[i], "network_pump_MW") * 1e3,
        vacuum_auxiliary_kW=train.stages[i].vacuum_auxiliary_MW * 1e3,
    )
