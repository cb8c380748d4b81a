"""One foot's streaming compensator for Python: owns its state; single readings and columns take the same kernel."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numba import njit
from numpy.typing import NDArray

from footcal.errors import SettingError
from footcal.records import FloatArray, IntArray
from footcal.sensor.cachekey import source_key
from footcal.sensor.fields import fill_sensor_constants, fresh_sensor_state, sensor_constant_fields, sensor_state_fields
from footcal.sensor.kernel import sensor_step
from footcal.sensor.model import SensorModel

STATE_DTYPE = np.dtype(sensor_state_fields(1))
CONSTANTS_DTYPE = np.dtype(sensor_constant_fields(1))
INPUT_DTYPE = np.dtype([("t_ns", "i8"), ("raw", "f8", (1,)), ("temp_C", "f8", (1,))])


@dataclass(frozen=True, slots=True)
class ForceColumns:
    """Calibrated readings of one foot, one row a sample."""

    t_s: FloatArray  # (n,)
    force_N: FloatArray  # (n,) positive when the ground presses the foot
    u_N: FloatArray  # (n,) standard uncertainty
    flags: IntArray  # (n,) bits of records.Health
    features: FloatArray | None = None  # (n, 32) only when asked for


def _make_run(key: int) -> Any:
    @njit(cache=True, error_model="numpy")
    def run(
        t_ns: Any, raw: Any, temp_C: Any, inputs: Any, states: Any, constants: Any, force: Any, u: Any, flags: Any
    ) -> None:
        if key == 0:
            return
        inp = inputs[0]
        s = states[0]
        c = constants[0]
        for i in range(t_ns.shape[0]):
            inp.t_ns = t_ns[i]
            inp.raw[0] = raw[i]
            inp.temp_C[0] = temp_C[i]
            sensor_step(inp, s, c)
            force[i] = s.axial_N[0]
            u[i] = s.axial_u_N[0]
            flags[i] = s.axial_flags[0]

    return run


_run = _make_run(source_key("footcal.sensor"))


class Compensator:
    """Turns the readings of one foot into force with its uncertainty; remembers creep and loop between calls."""

    def __init__(self, model: SensorModel) -> None:
        self._state: NDArray[np.void] = np.zeros(1, dtype=STATE_DTYPE)
        self._constants: NDArray[np.void] = np.zeros(1, dtype=CONSTANTS_DTYPE)
        self._input: NDArray[np.void] = np.zeros(1, dtype=INPUT_DTYPE)
        self.model = model
        fill_sensor_constants(model, self._constants[0], 0)
        self.restart()

    def restart(self) -> None:
        """Forget everything: the next reading is taken as the first after power-up."""
        fresh_sensor_state(self._state[0], 0)

    def snapshot(self) -> bytes:
        """Return the whole state as bytes, for `restore`."""
        return self._state.tobytes()

    def restore(self, snapshot: bytes) -> None:
        """Take back a state given by `snapshot` of the same version.

        Raises:
            SettingError: the bytes have another length than this version's state.
        """
        if len(snapshot) != STATE_DTYPE.itemsize:
            raise SettingError(
                where="Compensator.restore",
                what=f"state has {len(snapshot)} bytes, this version keeps {STATE_DTYPE.itemsize}",
                mend="Restore a state that this version has saved, or call restart().",
            )
        self._state[:] = np.frombuffer(snapshot, dtype=STATE_DTYPE)

    @property
    def tare_raw(self) -> float:
        """Counts taken from every reading."""
        return float(self._state[0]["sen_tare_raw"][0])

    @tare_raw.setter
    def tare_raw(self, counts: float) -> None:
        self._state[0]["sen_tare_raw"][0] = counts

    def run(self, t_ns: IntArray, raw: FloatArray, temp_C: FloatArray) -> ForceColumns:
        """Return force, standard uncertainty and flags for columns of readings, going on from the present state.

        Args:
            t_ns: times, shape (n,), nanoseconds; a time not after the last one repeats the last result.
            raw: readings, shape (n,), counts; NaN repeats the last result.
            temp_C: shape (n,); NaN keeps the last temperature.
        """
        n = len(t_ns)
        force_N, u_N, flags = np.empty(n), np.empty(n), np.empty(n, dtype=np.int64)
        times = np.ascontiguousarray(t_ns, dtype=np.int64)
        _run(
            times,
            np.ascontiguousarray(raw, dtype=np.float64),
            np.ascontiguousarray(temp_C, dtype=np.float64),
            self._input,
            self._state,
            self._constants,
            force_N,
            u_N,
            flags,
        )
        return ForceColumns(t_s=np.asarray(times * 1e-9), force_N=force_N, u_N=u_N, flags=flags)

    def step(self, t_ns: int, raw: float, temp_C: float = float("nan")) -> tuple[float, float, int]:
        """Return force in newtons, its standard uncertainty, and flags for one reading (the same kernel as `run`)."""
        one = self.run(np.array([t_ns]), np.array([raw]), np.array([temp_C]))
        return float(one.force_N[0]), float(one.u_N[0]), int(one.flags[0])

    def slope_N_per_count(self) -> float:
        """Return the base curve's slope at the last reading, newtons per count."""
        return float(self._state[0]["sen_slope_N"][0])
