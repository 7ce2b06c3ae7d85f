"""What was found of a block of channels, and from it the condition of each."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from screener.stats.censoring import Censoring
from screener.stats.conditions import Conditions
from screener.stats.correlation import Fits
from screener.stats.families import Axis, Family
from screener.stats.families.family import FloatArray
from screener.stats.null.condition import Condition
from screener.stats.null.on_demand import nearest_scale
from screener.stats.null.rounding_loss import StepUnit, step_unit


@dataclass(frozen=True, slots=True)
class Found:
    """C channels, fitted with F families."""

    families: Sequence[Family]
    fits: Fits
    conditions: Conditions
    censoring: Censoring
    rule: str

    @property
    def step(self) -> FloatArray:
        """[C] rounding step in standard deviations; 0 where it does not matter."""
        return np.where(self.conditions.rounded, self.conditions.step_in_sd, 0.0)

    @property
    def tau(self) -> FloatArray:
        """[C] tau_4; 1 where no dependence was found."""
        return np.where(self.conditions.serial, self.conditions.tau_4, 1.0)

    def condition(self, channel: int, column: int) -> Condition:
        """The condition of a channel that is held against the family of that column."""
        return Condition(
            family=self.families[column].name,
            shapes=self._shapes(channel, column),
            rule=self.rule,
            n=int(self.conditions.n[channel]),
            low=int(self.censoring.low[channel]),
            high=int(self.censoring.high[channel]),
            step=self._step_in_unit(channel, column),
            tau=float(self.conditions.tau_4[channel]) if self.conditions.serial[channel] else 1.0,
        )

    def _step_in_unit(self, channel: int, column: int) -> float:
        if not self.conditions.rounded[channel]:
            return 0.0
        if step_unit(self.families[column]) is StepUnit.DEVIATION:
            return float(self.conditions.step_in_sd[channel])
        return float(self.conditions.step[channel] / self.fits.scale[channel, column])

    def _shapes(self, channel: int, column: int) -> tuple[float, ...]:
        family = self.families[column]
        if family.axis is Axis.LOG:
            return (nearest_scale(float(self.fits.scale[channel, column])),)
        if not family.shape_count:
            return ()
        steps = np.round(self.fits.steps[channel, column, : family.shape_count])
        return tuple(round(float(shape), 9) for shape in family.shapes.at(steps))
