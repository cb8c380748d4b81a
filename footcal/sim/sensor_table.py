"""The six simulated sensors: what a maker's sheet would say of them. Figures are invented, in the range of real parts.

Loop, creep, span against temperature and day-to-day span are referred to the force (what a perfect curve would still
be wrong by, at full load); nonlinearity, noise and zero are referred to the output.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

Kind = Literal["A", "B", "C", "P", "Q", "R"]
Transducer = Literal["cell", "resistive", "magnetic", "capacitive"]


@dataclass(frozen=True, slots=True)
class SensorSheet:
    """Nominal figures of one kind; % of full scale unless said otherwise."""

    transducer: Transducer
    capacity_N: float
    adc_bits: int
    rate_Hz: float
    loop_pct: float  # largest difference of unloading and loading, steps of 10 s dwell
    nonlinearity_pct: float  # largest departure from the terminal line
    creep_pct: float  # from 1 s to 60 s after full load
    span_pct_per_K: float
    zero_pct_per_K: float
    placement_pct: float  # of the load, standard deviation, each time it is set down
    day_zero_pct: float  # standard deviation from day to day
    day_span_pct: float
    noise_pct: float  # rms at 1 kHz
    hum_share: float = 0.0  # of the noise variance
    dead_band_pct: float = 0.0


SHEETS: Final[dict[Kind, SensorSheet]] = {
    "A": SensorSheet("cell", 500.0, 24, 80.0, 0.03, 0.02, 0.007, 0.002, 0.002, 0.003, 0.01, 0.003, 0.005),
    "B": SensorSheet("cell", 300.0, 24, 80.0, 0.3, 0.2, 0.04, -0.03, 0.04, 0.015, 0.08, 0.02, 0.03, hum_share=0.4),
    "C": SensorSheet("cell", 400.0, 24, 80.0, 0.9, 0.2, 1.0, 0.02, -0.014, 0.03, 0.05, 0.015, 0.011),
    "P": SensorSheet("resistive", 250.0, 12, 100.0, 9.0, 39.0, 4.0, 0.05, 0.04, 0.5, 0.3, 0.2, 0.1, dead_band_pct=1.0),
    "Q": SensorSheet("magnetic", 400.0, 16, 100.0, 6.0, 3.0, 3.0, 0.07, -0.07, 0.25, 0.2, 0.12, 0.06),
    "R": SensorSheet("capacitive", 600.0, 16, 100.0, 3.0, 8.0, 1.2, 0.4, 0.36, 0.2, 0.2, 0.12, 0.06),
}

TYPICAL: Final[dict[Transducer, Kind]] = {"cell": "B", "resistive": "P", "magnetic": "Q", "capacitive": "R"}
