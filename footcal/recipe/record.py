"""A recipe: which loads, how often, how long, at which temperatures, and what counts as good enough."""

from __future__ import annotations

from itertools import pairwise
from typing import Annotated, Final, Literal

from pydantic import BaseModel, ConfigDict, Field, field_validator, model_validator

SensorKind = Literal["cell", "resistive", "magnetic", "capacitive"]
Share = Annotated[float, Field(gt=0.0, le=1.0)]  # of capacity
NotNegative = Annotated[float, Field(ge=0.0)]
Positive = Annotated[float, Field(gt=0.0)]
Slope = Annotated[float, Field(gt=0.0, le=45.0)]  # degrees
Celsius = Annotated[float, Field(ge=-40.0, le=85.0)]
Words = Annotated[str, Field(min_length=1)]

FORMAT: Final = 1
TURNING: Final = "minor loops must turn: each target on the other side of its neighbours (up, down, up …)"


class Part(BaseModel):
    """A table of a recipe: frozen, no unknown keys, finite numbers only."""

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False, strict=True)


class Presses(Part):
    """Loads put on before anything counts, so that an elastomer or a new cell has seen them."""

    count: Annotated[int, Field(ge=0, le=200)] = 3
    target: Share = 1.0  # of the highest load of the session
    dwell_s: Positive = 3.0
    agree_pct: NotNegative = (
        0.0  # above 0: go on until `agree_count` successive peaks agree within this % of full scale
    )
    agree_count: Annotated[int, Field(ge=2, le=20)] = 5


class Loading(Part):
    """The up/down cycles."""

    targets: Annotated[tuple[Share, ...], Field(min_length=1)]  # rising shares of capacity
    cycles: Annotated[int, Field(ge=1, le=50)] = 1  # at room temperature
    dwell_s: Positive = 6.0
    down: bool = True  # also on the way down
    zero_returns: Literal["every_load", "every_cycle", "start_and_end"] = "every_cycle"

    @field_validator("targets")
    @classmethod
    def _rise(cls, targets: tuple[float, ...]) -> tuple[float, ...]:
        for low, high in pairwise(targets):
            if not low < high:
                msg = f"loads must rise, {high:g} follows {low:g}"
                raise ValueError(msg)
        return targets


class MinorLoop(Part):
    """One cycle that turns back and forth inside the range."""

    targets: tuple[Share, ...] = ()  # turning loads, shares of capacity
    dwell_s: Positive = 6.0

    @field_validator("targets")
    @classmethod
    def _turn(cls, targets: tuple[float, ...]) -> tuple[float, ...]:
        steps = [high - low for low, high in pairwise((0.0, *targets))]
        if any(one * next_one >= 0.0 for one, next_one in pairwise(steps)):
            raise ValueError(TURNING)
        return targets


class QuickLifts(Part):
    """Known loads whisked on and off: what makes a calibration fit for walking without a reference cell."""

    count: Annotated[int, Field(ge=0, le=200)] = 0
    targets: tuple[Share, ...] = ()  # taken in turn
    stand_s: Positive = 1.0

    @model_validator(mode="after")
    def _have_loads(self) -> QuickLifts:
        if self.count and not self.targets:
            msg = "quick lifts need at least one target"
            raise ValueError(msg)
        return self


class Pump(Part):
    """Pumping by hand on a reference cell, and the knocks that join the two clocks."""

    lasts_s: NotNegative = 0.0
    knocks: Annotated[int, Field(ge=0, le=50)] = 6
    peak: Share = 0.9


class Tilted(Part):
    """Loads on a foot that stands on wedges, by which its side load is told from its axial load."""

    wedges_deg: tuple[Slope, ...] = ()  # rising slopes
    axes: tuple[Literal["x", "y"], ...] = ("x", "y")  # of the sensor; both ways about each
    targets: tuple[Share, ...] = ()  # rising shares of capacity, along the vertical
    dwell_s: Positive = 6.0

    @model_validator(mode="after")
    def _whole(self) -> Tilted:
        if bool(self.wedges_deg) != bool(self.targets):
            msg = "wedges and targets belong together"
            raise ValueError(msg)
        if list(self.wedges_deg) != sorted(set(self.wedges_deg)) or list(self.targets) != sorted(set(self.targets)):
            msg = "wedges and targets must rise"
            raise ValueError(msg)
        if len(set(self.axes)) != len(self.axes) or not self.axes:
            msg = "name each axis once"
            raise ValueError(msg)
        return self

    @property
    def postures(self) -> tuple[tuple[float, float], ...]:
        """Tilts about sensor x and y, degrees, in the order in which the foot is turned on each wedge."""
        about = {"x": (1.0, 0.0), "y": (0.0, 1.0)}
        turns = [(sign * about[axis][0], sign * about[axis][1]) for sign in (1.0, -1.0) for axis in self.axes]
        return tuple((slope * x, slope * y) for slope in self.wedges_deg for x, y in turns)


class Stand(Part):
    """One load that stands long, and the zero after it: creep over minutes."""

    target: Share = 0.9  # of capacity
    lasts_s: NotNegative = 0.0
    zero_s: NotNegative = 0.0  # recording goes on this long after the load is off


class Overload(Part):
    """Loads above capacity, never above the sensor's stated safe limit: does the foot survive them?"""

    count: Annotated[int, Field(ge=0, le=10)] = 0
    target: Share = 1.0  # of the safe limit
    dwell_s: Positive = 10.0


class Temperatures(Part):
    """Bench temperatures; the first is the room, each further one gets a cycle of its own after a soak."""

    sets_C: Annotated[tuple[Celsius, ...], Field(min_length=1)] = (22.0,)
    cycles_each: Annotated[int, Field(ge=1, le=20)] = 1
    soak_min: NotNegative = 40.0


class Settle(Part):
    """When a load counts as standing still."""

    wait_s: NotNegative = 0.9  # after it stopped moving
    window_s: Positive = 1.0
    max_slope_pct_per_s: Positive = 0.1  # % of full scale per second within the window, beyond what creep does
    give_up_s: Positive = 20.0


class Acceptance(Part):
    """Limits for a pass, % of full scale; a limit that is left out is not judged."""

    max_error_pct: Positive | None = None  # left-out error, RMS
    max_zero_return_pct: Positive | None = None
    max_repeatability_pct: Positive | None = None
    max_u_pct: Positive | None = None  # expanded uncertainty, k = 2, at full scale
    max_span_change_pct: Positive | None = None  # weekly check against the calibration
    max_zero_change_pct: Positive | None = None


class ColumnScale(Part):
    """How a column of the user's file becomes ours: scale · value + offset."""

    name: Words
    scale: float = 1.0
    offset: float = 0.0

    @field_validator("scale")
    @classmethod
    def _not_zero(cls, scale: float) -> float:
        if scale == 0.0:
            msg = "a scale of 0 would wipe the column out"
            raise ValueError(msg)
        return scale


class Recipe(Part):
    """One checked recipe. Shares are of the sensor's capacity; which of them the weights can make is for `plan`."""

    format: Literal[1]
    name: Annotated[str, Field(pattern=r"^[a-z][a-z0-9_]*$")]
    purpose: Words  # one sentence
    sensor_kinds: Annotated[tuple[SensorKind, ...], Field(min_length=1)]
    cautions: Annotated[tuple[Words, ...], Field(min_length=1)]
    on_request: bool = False  # hard on the foot or on people: in no list, found by its name only
    presses: Presses = Presses()
    loading: Loading
    minor_loop: MinorLoop = MinorLoop()
    quick_lifts: QuickLifts = QuickLifts()
    pump: Pump = Pump()
    tilted: Tilted = Tilted()
    stand: Stand = Stand()
    overload: Overload = Overload()
    temperatures: Temperatures = Temperatures()
    settle: Settle = Settle()
    acceptance: Acceptance = Acceptance()
    columns: dict[Words, Words | ColumnScale] = Field(default_factory=dict)

    @model_validator(mode="after")
    def _overload_is_asked_for(self) -> Recipe:
        if self.overload.count and not self.on_request:
            msg = "a recipe that loads beyond capacity must say on_request = true"
            raise ValueError(msg)
        return self

    @property
    def dynamic(self) -> bool:
        """True where the session holds quick data, so that its calibration may be called dynamic."""
        return self.quick_lifts.count > 0 or self.pump.lasts_s > 0.0

    @property
    def handling_s(self) -> float:
        """Time at the bench without soaks, s: dwells, and 3 s to reach for each load (common practice, no source)."""
        reach_s = 3.0
        loads = len(self.loading.targets)
        steps = loads + (loads - 1 if self.loading.down else 0)
        zeros = {"every_load": loads, "every_cycle": 1, "start_and_end": 0}[self.loading.zero_returns]
        cycles = self.loading.cycles + self.temperatures.cycles_each * (len(self.temperatures.sets_C) - 1)
        held = cycles * (steps + zeros) * (self.loading.dwell_s + reach_s) + 2.0 * (self.loading.dwell_s + reach_s)
        pressed = 2.0 * self.presses.count * (self.presses.dwell_s + reach_s)
        turned = len(self.minor_loop.targets) * (self.minor_loop.dwell_s + reach_s)
        lifted = self.quick_lifts.count * (2.0 * self.quick_lifts.stand_s + reach_s)
        on_wedges = len(self.tilted.postures) * (len(self.tilted.targets) + 1) * (self.tilted.dwell_s + reach_s)
        over = 2.0 * self.overload.count * (self.overload.dwell_s + reach_s)
        long = self.pump.lasts_s + self.stand.lasts_s + self.stand.zero_s
        return held + pressed + turned + lifted + on_wedges + over + long
