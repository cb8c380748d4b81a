"""The fusion of one robot: owns the compiled step's arrays, hands out frozen records or columns."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any, Self

import numpy as np
from numpy.typing import NDArray

from footcal import __version__ as _tool_version
from footcal.calfile.calibration import Calibration
from footcal.errors import FileFormatError, SettingError
from footcal.files.robot_log import RobotLog
from footcal.fusion.entry import batch, tick
from footcal.fusion.estimate import EstimateColumns, columns_from_rows
from footcal.fusion.fields import one_record, out_dtype, tick_dtype
from footcal.fusion.layout import constant_dtype, state_dtype
from footcal.fusion.model import fill_filter_constants, settings_from_table
from footcal.leg import DriveFile, Robot, fill_leg_constants, fresh_leg_state, load_drives
from footcal.records import Health, LegEstimate, Tick
from footcal.sensor.fields import fill_sensor_constants, fresh_sensor_state


class Fusion:
    """Contact and ground reaction force of every leg, tick by tick or for whole logs, by the same compiled step.

    Args:
        robot: its description; the `[fusion]` table in it replaces starting values.
        calibrations: of each leg's foot, in the robot's order of legs; None where a foot has none.
        drives: identified drives of each leg in that order; None where a leg has none.

    Raises:
        SettingError: a number of calibrations or drives that is not that of the legs, or a bad `[fusion]` value.
    """

    def __init__(
        self,
        robot: Robot,
        calibrations: Sequence[Calibration | None],
        drives: Sequence[DriveFile | None] | None = None,
    ) -> None:
        legs, joints = len(robot.legs), robot.padded_joints
        drives = [None] * legs if drives is None else drives
        for name, given in (("calibrations", calibrations), ("drives", drives)):
            if len(given) != legs:
                raise SettingError(
                    where=f"Fusion, {name}",
                    what=f"{len(given)} given for {legs} legs",
                    mend="Give one for each leg, in the order of the robot description; None where there is none.",
                )
        self.robot, self.calibrations, self.drives = robot, tuple(calibrations), tuple(drives)
        self._inp = one_record(tick_dtype(legs, joints))
        self._S = one_record(state_dtype(legs, joints))
        self._C = one_record(constant_dtype(legs, joints))
        self._out = one_record(out_dtype(legs))
        self._gravity = np.array([0.0, 0.0, -robot.file.gravity_m_per_s2])
        self._fill()
        self.restart()

    @classmethod
    def load(cls, path: str | Path) -> Self:
        """Return the fusion of a robot description and the calibration and drive files it names.

        Raises:
            FileFormatError: one of the files is missing or refused, or a calibration is of another foot.
        """
        robot = Robot.load(path)
        return cls(robot, load_calibrations(robot), load_drives(robot))

    def _fill(self) -> None:
        c: Any = self._C[0]
        fill_leg_constants(self.robot, self.drives, c)
        settings = settings_from_table(self.robot.file.fusion, self.robot.path.name)
        fill_filter_constants(settings, self.robot.weight_N, self.robot.joint_counts, c)
        for lane, (leg, calibration) in enumerate(zip(self.robot.legs, self.calibrations, strict=True)):
            fill_sensor_constants(None if calibration is None else calibration.sensor_model, c, lane)
            rate_Hz = leg.foot.sample_rate_Hz
            c["fil_period_s"][lane] = 1.0 / rate_Hz if rate_Hz else 0.0
            if calibration is not None and calibration.file.zero.stated_for == "hanging foot":
                c["fil_hang_zero_N"][lane] = leg.foot.distal_mass_kg * self.robot.file.gravity_m_per_s2

    def restart(self) -> None:
        """Forget everything: the next tick is the first after power-up."""
        s: Any = self._S[0]
        self._S.view(np.uint8)[:] = 0
        for lane in range(len(self.robot.legs)):
            fresh_sensor_state(s, lane)
        fresh_leg_state(s)
        s["fil_raw"][:] = np.nan
        s["fil_read_1_N"][:] = np.nan
        s["fil_read_2_N"][:] = np.nan
        s["fil_t_event_s"][:] = np.nan

    def snapshot(self) -> bytes:
        """Return the whole state, for `restore`."""
        return self._S.tobytes()

    def restore(self, state: bytes) -> None:
        """Take back a state that `snapshot` of the same version and robot has given.

        Raises:
            SettingError: the bytes have another length than this robot's state.
        """
        if len(state) != self._S.nbytes:
            raise SettingError(
                where="Fusion.restore",
                what=f"the state has {len(state)} bytes, this robot's has {self._S.nbytes}",
                mend="Restore a state saved by the same version for the same robot, or call restart().",
            )
        self._S.view(np.uint8)[:] = np.frombuffer(state, dtype=np.uint8)

    @property
    def dropped(self) -> int:
        """How many ticks came no later than the one before and were answered with the last estimate."""
        return int(self._S[0]["fil_dropped"][0])

    def digests(self) -> dict[str, str]:
        """Return what the estimates come from: SHA-256 of robot, calibrations and drives, and the tool's version."""
        found = {"robot_id": self.robot.robot_id, "robot_sha256": self.robot.digest, "tool_version": _tool_version}
        for leg, calibration, drive in zip(self.robot.leg_names, self.calibrations, self.drives, strict=True):
            if calibration is not None:
                found |= {f"{leg}.foot_id": calibration.foot_id, f"{leg}.calibration_sha256": calibration.digest}
            if drive is not None:
                found[f"{leg}.drive_sha256"] = drive.digest
        return found

    def step(self, tick_in: Tick) -> tuple[LegEstimate, ...]:
        """Take in one tick; return the estimate of every leg, in the robot's order.

        Args:
            tick_in: what the robot told; one that is not later than the last is dropped and answered with the last
                estimate, marked stale.
        """
        inp = self._inp[0]
        joints = tick_in.q_rad.shape[1]
        inp["t_ns"], inp["raw"], inp["temp_C"] = tick_in.t_ns, tick_in.raw, tick_in.temp_C
        for name in ("q_rad", "dq_rad_per_s", "current_A", "motor_temp_C"):
            inp[name][:joints] = getattr(tick_in, name).T
            inp[name][joints:] = np.nan
        inp["quat_WB"] = tick_in.quat_WB
        inp["gyro_rad_per_s"], inp["accel_m_per_s2"] = tick_in.gyro_B_rad_per_s, tick_in.accel_B_m_per_s2
        tick(self._inp, self._gravity, self._S, self._C, self._out)
        return self._records()

    def _records(self) -> tuple[LegEstimate, ...]:
        o = {name: self._out[name][0].tolist() for name in self._out.dtype.names or ()}
        fx, fy, fz = o["force_B_N"]
        cov = list(zip(*o["cov_B_N2"], strict=True))
        return tuple(
            LegEstimate(
                leg=leg,
                t_ns=o["t_ns"],
                p_contact=o["p_contact"][l],
                contact=bool(o["contact"][l]),
                contact_known=bool(o["contact_known"][l]),
                event=o["event"][l],
                t_event_s=o["t_event_s"][l],
                force_B_N=(fx[l], fy[l], fz[l]),
                cov_B_N2=cov[l],
                axial_N=o["axial_N"][l],
                axial_u_N=o["axial_u_N"][l],
                sensor_bias_N=o["sensor_bias_N"][l],
                foot_age_s=o["foot_age_s"][l],
                motor_age_s=o["motor_age_s"][l],
                health=Health(o["health"][l]),
            )
            for l, leg in enumerate(self.robot.leg_names)
        )

    def run(self, log: RobotLog) -> EstimateColumns:
        """Return estimates for every row of a log, or of one block of it, going on from the present state.

        Raises:
            SettingError: the log's legs are not those of the robot, in its order.
        """
        if log.legs != self.robot.leg_names:
            raise SettingError(
                where="Fusion.run, log",
                what=f"legs are {', '.join(log.legs)}, the robot's are {', '.join(self.robot.leg_names)}",
                mend="Read the log with the robot's leg names.",
            )
        rows = self.input_rows(log)
        out = np.zeros(len(log), dtype=self._out.dtype)
        batch(rows, self._gravity, self._S, self._C, out)
        return columns_from_rows(log.legs, log.t_s, out)

    def input_rows(self, log: RobotLog) -> NDArray[np.void]:
        """Return the log as input records of the step, one a row."""
        rows = np.zeros(len(log), dtype=self._inp.dtype)
        rows["t_ns"], rows["raw"], rows["temp_C"] = log.t_ns, log.raw, log.temp_C
        joints = log.q_rad.shape[2]
        for name in ("q_rad", "dq_rad_per_s", "current_A", "motor_temp_C"):
            rows[name][:, joints:] = np.nan
            rows[name][:, :joints] = np.swapaxes(getattr(log, name), 1, 2)
        rows["quat_WB"] = log.quat_WB
        rows["gyro_rad_per_s"], rows["accel_m_per_s2"] = log.gyro_B_rad_per_s, log.accel_B_m_per_s2
        return rows


def load_calibrations(robot: Robot) -> tuple[Calibration | None, ...]:
    """Return the calibration of each leg's foot, None where the description names none.

    Raises:
        FileFormatError: a file is missing or refused, or its foot_id is not the one its name promises.
    """
    return tuple(_calibration_of(robot, leg) for leg in robot.leg_names)


def _calibration_of(robot: Robot, leg: str) -> Calibration | None:
    path = robot.calibration_path(leg)
    if path is None:
        return None
    calibration = Calibration.load(path)
    promised = path.name.removesuffix(".cal.json")
    if path.name.endswith(".cal.json") and promised != calibration.foot_id:
        raise FileFormatError(
            where=str(path),
            what=f"leg {leg!r} wants foot {promised}, the file is of foot {calibration.foot_id}",
            mend=f"Put the calibration of foot {promised} there, or name the mounted foot in {robot.path.name}.",
        )
    return calibration
