"""The calibration file, version 1: every field it may hold, its unit and its allowed range.

One file serves one physical foot, named by `foot_id`. A runtime reads `input`, `model`, `uncertainty.runtime` and
`validity`; an auditor reads all of it.
"""

from __future__ import annotations

from typing import Annotated, Final, Literal

from pydantic import BaseModel, ConfigDict, Field

from footcal.sensor.creep import N_CREEP
from footcal.sensor.curve import N_POWERS
from footcal.sensor.hysteresis import N_PLAY
from footcal.sensor.model import N_FEATURES, N_UNCERTAINTY_ROWS
from footcal.sensor.temperature import N_TEMPERATURE

FORMAT: Final = "footcal calibration"
VERSION: Final = "1.0"

FootId = Annotated[str, Field(pattern=r"^[A-Za-z0-9][A-Za-z0-9._-]{0,63}$")]
Sha256 = Annotated[str, Field(pattern=r"^[0-9a-f]{64}$")]
Positive = Annotated[float, Field(gt=0.0)]
NotNegative = Annotated[float, Field(ge=0.0)]
Share = Annotated[float, Field(ge=0.0, le=1.0)]
SensorKind = Literal["cell", "resistive", "magnetic", "capacitive"]
Wiring = Literal["counts", "pad_to_supply", "pad_to_ground"]


class Part(BaseModel):
    """A part of the file: unknown keys are refused, numbers are finite, nothing changes after reading."""

    model_config = ConfigDict(extra="forbid", frozen=True, allow_inf_nan=False, strict=False)


class Sensor(Part):
    """What sits in the foot."""

    kind: SensorKind
    capacity_N: Positive = Field(description="full scale; all shares of full scale refer to it")
    safe_limit_N: Positive | None = Field(default=None, description="never load the foot above this")
    maker: str = ""
    part: str = ""


class SessionUsed(Part):
    """One bench session that went into the fit."""

    name: str
    sha256: Sha256
    start_utc: str | None = None
    recipe: str | None = None
    recipe_sha256: Sha256 | None = None
    operator: str | None = None
    weights: str | None = None
    samples: int = Field(ge=1)
    holds: int = Field(ge=0)
    corrected: list[str] = Field(default=[], description="masses put right before the fit, in words")


class Provenance(Part):
    """Where the numbers come from."""

    made_utc: str
    tool_version: str
    sessions: list[SessionUsed]
    ancestor_sha256: Sha256 | None = Field(default=None, description="the file this one was re-zeroed from")


class Input(Part):
    """From raw reading to the argument of the curve."""

    wiring: Wiring
    raw_min: float = Field(description="counts; at or below, the sensor is saturated")
    raw_max: float = Field(description="counts; at or above, the sensor is saturated; a divider's full range")
    u_zero: float
    u_span: float
    power: Positive
    power_offset: Positive
    temp_ref_C: float
    thermometer_lag_s: NotNegative
    lag_s: NotNegative = Field(description="first-order delay of sensor and amplifier, undone in the compensator")


class Settle(Part):
    """When the state at power-up no longer matters: both must be passed."""

    time_s: NotNegative
    swing_share: NotNegative = Field(description="of full scale, highest less lowest load since power-up")


class CrossAxis(Part):
    """Reading per side load over reading per axial load, along sensor x and y."""

    x: float = 0.0
    y: float = 0.0
    u_x: NotNegative
    u_y: NotNegative
    tested: bool = Field(description="false: a stated default, the foot was never tilted")


class Model(Part):
    """The inverse sensor model; F / capacity = coefficients . features (see footcal.sensor)."""

    curve: list[float] = Field(min_length=N_POWERS, max_length=N_POWERS)
    curve_temperature: list[float] = Field(min_length=N_TEMPERATURE, max_length=N_TEMPERATURE)
    creep_tau_s: list[Positive] = Field(min_length=N_CREEP, max_length=N_CREEP)
    creep_undone: list[float] = Field(min_length=N_CREEP, max_length=N_CREEP)
    play_half_width: list[NotNegative] = Field(min_length=N_PLAY, max_length=N_PLAY)
    features: list[str] = Field(min_length=N_FEATURES, max_length=N_FEATURES)
    coefficients: list[float] = Field(min_length=N_FEATURES, max_length=N_FEATURES)
    covariance: list[list[float]] = Field(
        min_length=N_FEATURES, max_length=N_FEATURES, description="of the coefficients; lower triangle, row by row"
    )
    cross_axis: CrossAxis
    settle: Settle


class Unload(Part):
    """How much an unloaded foot still reads, and for how long."""

    share_of_peak: Share
    decay_s: Positive


class Zero(Part):
    """The state the zero refers to."""

    stated_for: Literal["massless foot", "hanging foot"]
    mount: Literal["foot_up", "foot_down", "side", "angle"] | None = None
    mount_angle_rad: float | None = Field(
        default=None, description="sensor axis (sole to leg) from straight up, where mount is angle"
    )
    mass_below_sensor_kg: NotNegative = 0.0


class Validity(Part):
    """Where the calibration holds."""

    force_min_N: float
    force_max_N: Positive
    temp_min_C: float
    temp_max_C: float
    temperature_tested: bool
    dynamic: bool = Field(description="true only if quick data were fitted")


class Figures(Part):
    """Errors of data left out of the fit, RMS in per cent of full scale; null where there were none."""

    cycles: NotNegative | None
    loads: NotNegative | None
    pump: NotNegative | None


class SetAside(Part):
    """A step that was not fitted, and why."""

    session: str
    step: int
    reason: str
    entered_kg: float | None = None
    fits_kg: float | None = None


class Runtime(Part):
    """Constants of the uncertainty that the runtime evaluates for each sample."""

    rows: list[list[float]] = Field(min_length=N_UNCERTAINTY_ROWS, max_length=N_UNCERTAINTY_ROWS)
    fixed: NotNegative
    relative: NotNegative
    moving: NotNegative
    noise: NotNegative
    noise_interval_s: NotNegative
    temp_C: NotNegative
    temp_absent_C: NotNegative
    beyond: NotNegative


class BudgetLine(Part):
    """One source of uncertainty at the top of the range, as a standard uncertainty."""

    source: str
    u_N: NotNegative
    kind: Literal["A", "B"] = Field(description="GUM type of evaluation")
    basis: str


class CurvePoint(Part):
    """Expanded uncertainty (k = 2) of a settled reading at one force."""

    force_N: float
    U_N: NotNegative


class Uncertainty(Part):
    """The budget, and the runtime's formula."""

    runtime: Runtime
    budget: list[BudgetLine]
    curve: list[CurvePoint] = Field(min_length=2)
    k: Positive = 2.0


class HistoryEntry(Part):
    """Zero and span as found at one date."""

    date_utc: str
    zero_N: float
    span_pct: float
    session_sha256: Sha256 | None = None
    note: str = ""


class CalibrationFile(Part):
    """The whole file."""

    format: Literal["footcal calibration"] = FORMAT
    version: str = VERSION
    foot_id: FootId
    sensor: Sensor
    provenance: Provenance
    input: Input
    model: Model
    unload: Unload
    zero: Zero
    validity: Validity
    figures: Figures
    set_aside: list[SetAside]
    clock_offset_s: float | None = None
    uncertainty: Uncertainty
    history: list[HistoryEntry]
    notes: list[str] = Field(description="what the session could not tell, in words")
    caution: str = "No output of this calibration is a safety function."
    sha256: Sha256
