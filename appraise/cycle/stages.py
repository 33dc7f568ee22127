"""An option of the case as rows of numbers, cold to hot. From here on nothing asks for an option's name.

Stage 1 is the cold end: it meets the return water. The last stage is the existing condenser.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from appraise.case.fields import Curve
from appraise.case.load import Case
from appraise.case.plant import Option


@dataclass(frozen=True, slots=True)
class Stage:
    """One district-heating condenser and the turbine section that exhausts into it."""

    share: float  # of the temperature rise at the design point
    existing: bool
    terminal_difference_K: float | None  # at the design point; None: rated with the existing surface
    area_factor: float  # on the existing surface
    flow_exponent: float
    drain_approach_K: float | None  # None: saturated drain
    network_pressure_drop_bar: float  # at design flow; 0 for the existing condenser
    vacuum_auxiliary_MW: float
    u_condensing_W_m2K: float
    u_drain_W_m2K: float


@dataclass(frozen=True, slots=True)
class TailSection:
    """The blading between two district-heating condensers, the same rules for every section.

    generator_limit_MW : of a generator of its own; None where the tail drives the plant's.
    """

    efficiency: float  # dry, isentropic
    baumann_factor: float
    mechanical_efficiency: float
    generator_efficiency: float
    generator_limit_MW: float | None
    part_load: Curve  # multiplier on the efficiency over flow/design flow
    inlet_loss_share: float
    min_flow_share: float

    @property
    def varies(self) -> bool:
        """Whether the efficiency depends on the flow."""
        return len(set(self.part_load.value)) > 1


@dataclass(frozen=True, slots=True)
class Train:
    """All stages of one option, `stages[0]` the coldest, with the tail section that feeds the colder ones."""

    key: str
    stages: tuple[Stage, ...]
    tail: TailSection
    pumped: bool  # each drain to the condensate line with its own pump, instead of cascading
    held: bool  # valves before the tail sections hold the temperatures between the stages

    @property
    def number(self) -> int:
        """How many stages."""
        return len(self.stages)


def train_of(case: Case, option: Option) -> Train:
    """Expand one option of the case."""
    new = case.new_condenser_of(option)
    tail = case.tail_of(option)
    shares = case.shares_of(option)
    approach = new.drain_approach_K if option.drain == "subcooled" else None
    hottest = Stage(
        share=shares[-1],
        existing=True,
        terminal_difference_K=None,
        area_factor=option.existing_area_factor,
        flow_exponent=case.plant.condenser.flow_exponent,
        drain_approach_K=approach if option.stages > 1 else None,
        network_pressure_drop_bar=0.0,
        vacuum_auxiliary_MW=0.0,
        u_condensing_W_m2K=new.u_condensing_W_m2K,
        u_drain_W_m2K=new.u_drain_W_m2K,
    )
    colder = [
        Stage(
            share=share,
            existing=False,
            terminal_difference_K=new.terminal_difference_K,
            area_factor=1.0,
            flow_exponent=new.flow_exponent,
            drain_approach_K=None if index == 0 else approach,
            network_pressure_drop_bar=new.pressure_drop_bar,
            vacuum_auxiliary_MW=new.vacuum_auxiliary_kW / 1e3,
            u_condensing_W_m2K=new.u_condensing_W_m2K,
            u_drain_W_m2K=new.u_drain_W_m2K,
        )
        for index, share in enumerate(shares[:-1])
    ]
    assert tail.mechanical_efficiency is not None
    assert tail.generator_efficiency is not None
    section = TailSection(
        efficiency=tail.efficiency,
        baumann_factor=tail.baumann_factor,
        mechanical_efficiency=tail.mechanical_efficiency,
        generator_efficiency=tail.generator_efficiency,
        generator_limit_MW=tail.generator_limit_MW,
        part_load=tail.part_load,
        inlet_loss_share=tail.inlet_loss_share,
        min_flow_share=tail.min_flow_share,
    )
    held = option.temperature_control == "held" and option.stages > 1
    return Train(option.key, (*colder, hottest), section, option.drain_route == "pumped", held)


def ideal_train(case: Case, option: Option, stages: int = 16) -> Train:
    """Many equal stages with the option's drain, route and terminal difference in every one of them.

    The yardstick of the *share of the ideal gain*: what ever finer steps could still add.
    """
    new = case.new_condenser_of(option)
    train = train_of(case, option)
    approach = new.drain_approach_K if option.drain == "subcooled" else None
    pattern = replace(
        train.stages[-1],
        share=1.0 / stages,
        existing=False,
        terminal_difference_K=new.terminal_difference_K,
        area_factor=1.0,
    )
    rows = tuple(
        replace(pattern, drain_approach_K=None if index == 0 else approach) for index in range(stages)
    )
    # Sixteen inlet losses would be a yardstick of valves, not of steps.
    return replace(
        train,
        key=f"{option.key} ideal",
        stages=rows,
        tail=replace(train.tail, inlet_loss_share=0.0),
    )
