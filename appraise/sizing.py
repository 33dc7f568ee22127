"""What has to be bought: surfaces, machines and pumps, at the greatest of the design point and all hours."""

from __future__ import annotations

from dataclasses import dataclass, replace

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


@dataclass(frozen=True, slots=True)
class SetBy:
    """What asked for one size of one stage: an hour of a solved year, or the design point (both None).

    name : one of `case.money.SIZE_NAMES`. year : position among the solved years. hour : in the series.
    """

    stage: int
    name: str
    value: float
    year: int | None = None
    hour: int | None = None


def set_by(option: OptionDesign, plant: PlantData, years: tuple[OptionYear, ...]) -> tuple[SetBy, ...]:
    """Every size of an option that is not 0, stage by stage, and what set it."""
    found = (_stage_needs(option, plant, years, i) for i in range(option.train.number))
    return tuple(need for needs in found for need in needs.values() if need.value)


def _stage_size(option: OptionDesign, plant: PlantData, years: tuple[OptionYear, ...], i: int) -> StageSize:
    needs = _stage_needs(option, plant, years, i)
    sizes = {name: need.value for name, need in needs.items()}
    return StageSize(stage=i + 1, new=not option.train.stages[i].existing, **sizes)


def _stage_needs(
    option: OptionDesign, plant: PlantData, years: tuple[OptionYear, ...], i: int
) -> dict[str, SetBy]:
    """Every size of a stage by its name; of the existing one only what is added to its surface."""
    train, at = option.train, option.solution
    new, surface = not train.stages[i].existing, option.surface[i]
    flange = exhaust_state(at.shells.shell_bar[i], plant.exhaust_loss_share)
    through = at.shells.steam_kg_s[: i + 1].sum(axis=0)
    water = at.network_kg_s * (at.shells.water_kJ_kg[i + 1] - at.shells.water_kJ_kg[i]) / 1e3

    def fixed(name: str, value: float) -> SetBy:
        return SetBy(i + 1, name, value)

    def most(name: str, design_point: Array, hourly: str, scale: float = 1.0) -> SetBy:
        need = fixed(name, float(design_point[0]) * scale if new else 0.0)
        for number, year in enumerate(years if new else ()):
            peaks = getattr(year.greatest, hourly)
            value = float(peaks.value[i]) * scale
            if value > need.value:
                need = SetBy(i + 1, name, value, number, int(peaks.hour[i]))
        return need

    shaft = most("tail_shaft_MW", option.energy.section_MW[i], "section_MW")
    power = shaft.value * train.tail.mechanical_efficiency * train.tail.generator_efficiency
    volume = through * volume_ph(flange, at.shells.steam_kJ_kg[i])
    needs = (
        fixed("area_m2", surface.total_m2),
        fixed("condensing_area_m2", surface.condensing_m2),
        fixed("drain_area_m2", surface.drain_m2),
        most("heat_MW", water, "heat_MW"),
        most("steam_kg_s", at.shells.steam_kg_s[i], "steam_kg_s"),
        most("exhaust_m3_s", volume, "exhaust_m3_s"),
        shaft,
        replace(shaft, name="generator_MW", value=power),
        most("condensate_pump_kW", at.condensate_pump_MW[i], "condensate_pump_MW", 1e3),
        most("network_pump_kW", option.energy.network_pump_MW[i], "network_pump_MW", 1e3),
        fixed("vacuum_auxiliary_kW", train.stages[i].vacuum_auxiliary_MW * 1e3),
    )
    return {need.name: need for need in needs}
