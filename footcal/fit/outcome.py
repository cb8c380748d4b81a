"""What a fit found, before and after it became a calibration file."""

from __future__ import annotations

from dataclasses import dataclass

from footcal.calfile import Calibration
from footcal.fit.choose import Candidate
from footcal.fit.inputs import FitInput
from footcal.fit.reference import Aligned
from footcal.fit.rows import Rows
from footcal.fit.set_aside import Aside
from footcal.fit.side_load import SideLoad
from footcal.records import FloatArray
from footcal.sensor.model import RuntimeUncertainty


@dataclass(frozen=True, slots=True)
class FitOutcome:
    """Everything that was found."""

    data: FitInput
    best: Candidate
    rows: Rows  # those fitted
    asides: tuple[Aside, ...]
    aligned: Aligned | None  # reference cell, where there was one
    uncertainty: RuntimeUncertainty
    covariance: FloatArray  # (32, 32) of the coefficients
    notes: tuple[str, ...]
    side: SideLoad | None  # None where the foot was never tilted
    lag_s: float  # of the stated lag, what the compensator undoes

    @property
    def dynamic(self) -> bool:
        """Whether quick data were fitted: at least four quick lifts, or a pump recording."""
        quick = sum(self.data.holds[hold].kind == "quick" for hold in set(self.rows.hold[~self.rows.pump].tolist()))
        return quick >= 4 or bool(self.rows.pump.any())


@dataclass(frozen=True, slots=True)
class FitResult:
    """A finished fit."""

    outcome: FitOutcome
    calibration: Calibration

    @property
    def data(self) -> FitInput:
        """What was read."""
        return self.outcome.data

    @property
    def best(self) -> Candidate:
        """The chosen fit with its left-out errors."""
        return self.outcome.best

    @property
    def rows(self) -> Rows:
        """The rows that were fitted."""
        return self.outcome.rows

    @property
    def asides(self) -> tuple[Aside, ...]:
        """The steps that were set aside."""
        return self.outcome.asides

    @property
    def notes(self) -> tuple[str, ...]:
        """What the sessions could not tell, and what was assumed."""
        return self.outcome.notes
