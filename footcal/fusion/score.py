"""An estimate against truth: contact, force, honesty of both, and a plain threshold beside it."""

from __future__ import annotations

import math
from dataclasses import asdict, dataclass
from typing import Any

import numpy as np

from footcal.errors import SettingError
from footcal.files.robot_log import RobotLog
from footcal.files.truth import Truth
from footcal.fusion.align import clock_offset_s, truth_at
from footcal.fusion.estimate import EstimateColumns
from footcal.fusion.score_contact import ContactScore, contact_from_force, score_contact
from footcal.fusion.score_force import ForceScore, score_force
from footcal.leg import Robot
from footcal.records import BoolArray, FloatArray

THRESHOLD_N = 15.0  # of the plain baseline
OWN_DELAY_s = 0.002  # a smaller offset may be the estimate's own delay and is kept


@dataclass(frozen=True, slots=True)
class Score:
    """How good an estimate is."""

    rows: int
    minutes: float
    weight_N: float
    clock_offset_s: float  # of truth against estimate
    aligned: bool  # whether it was removed
    contact: ContactScore
    force: ForceScore | None  # None where the truth holds no forces
    threshold: ContactScore | None  # axial reading above 15 N, nothing else; None without readings

    def as_dict(self) -> dict[str, Any]:
        """Return plain content for JSON; what has no value is None."""
        return dict(_plain(asdict(self)))


def _plain(value: Any) -> Any:
    if isinstance(value, dict):
        return {name: _plain(part) for name, part in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(part) for part in value]
    return None if isinstance(value, float) and not math.isfinite(value) else value


def score(
    estimate: EstimateColumns, truth: Truth, robot: Robot, *, align: bool = True, log: RobotLog | None = None
) -> Score:
    """Compare an estimate with truth.

    Args:
        estimate: of all legs.
        truth: of the same legs; forces in the world frame need the log's attitude.
        robot: for its weight.
        align: estimate the clock offset between the two and take it out (where above 2 ms).
        log: the log the estimate was made from; with its attitude "vertical" is the world's, without it the body's z.

    Raises:
        SettingError: the legs differ, the two share no time, or world forces come without an attitude.
    """
    if truth.legs != estimate.legs:
        raise SettingError("score, truth", f"legs are {truth.legs}, the estimate's {estimate.legs}", "Read both alike.")
    up_B = _rotations(estimate, truth, log)
    fz = estimate.force_B_N[:, :, 2]
    offset_s = clock_offset_s(estimate.t_s, fz, truth.t_s, truth.force_N[:, :, 2])
    aligned = align and abs(offset_s) > OWN_DELAY_s
    true_N, true_contact = truth_at(truth, estimate.t_s, offset_s if aligned else 0.0)
    told = _told(estimate, true_N, true_contact)
    true = _true_contact(estimate.t_s, true_N, true_contact)
    return Score(
        rows=int(told.sum()),
        minutes=float(estimate.t_s[told][-1] - estimate.t_s[told][0]) / 60.0,
        weight_N=robot.weight_N,
        clock_offset_s=offset_s,
        aligned=aligned,
        contact=_contact(estimate, true, told),
        force=_force(estimate, truth.frame, true_N, true, told, robot.weight_N, up_B),
        threshold=_threshold(estimate, true, told),
    )


def _rotations(estimate: EstimateColumns, truth: Truth, log: RobotLog | None) -> FloatArray | None:
    """Return body-to-world rotations (n, 3, 3) where the log has them."""
    if log is not None and len(log) == len(estimate) and np.isfinite(log.quat_WB).any():
        return rotations(log.quat_WB)
    if truth.frame == "world":
        raise SettingError(
            where="score, truth",
            what="its forces are in the world frame, and no log with an attitude is at hand",
            mend="Give the log the estimate was made from (--log), or truth in the body frame.",
        )
    return None


def rotations(quat_WB: FloatArray) -> FloatArray:
    """Return R_WB, (n, 3, 3), from quaternions w, x, y, z (n, 4); a row of NaN takes the last one before it."""
    good: BoolArray = np.asarray(np.isfinite(quat_WB).all(axis=1))
    last = np.maximum.accumulate(np.where(good, np.arange(len(good)), -1))
    q = quat_WB[np.where(last < 0, int(np.argmax(good)), last)]
    w, x, y, z = (q / np.linalg.norm(q, axis=1, keepdims=True)).T
    rows = [
        [1 - 2 * (y * y + z * z), 2 * (x * y - w * z), 2 * (x * z + w * y)],
        [2 * (x * y + w * z), 1 - 2 * (x * x + z * z), 2 * (y * z - w * x)],
        [2 * (x * z - w * y), 2 * (y * z + w * x), 1 - 2 * (x * x + y * y)],
    ]
    return np.moveaxis(np.array(rows), 2, 0)


def _told(estimate: EstimateColumns, true_N: FloatArray, true_contact: FloatArray) -> BoolArray:
    told = np.asarray((np.isfinite(true_N[..., 2]) | np.isfinite(true_contact)).all(axis=1))
    if told.sum() < 2:
        raise SettingError(
            where="score, truth",
            what=f"it shares no time with the estimate, which runs from {estimate.t_s[0]:g} to {estimate.t_s[-1]:g} s",
            mend="Give the truth of the same run, with the same start of time.",
        )
    return told


def _true_contact(t_s: FloatArray, true_N: FloatArray, true_contact: FloatArray) -> BoolArray:
    columns = []
    for l in range(true_N.shape[1]):
        if np.isfinite(true_contact[:, l]).any():
            columns.append(true_contact[:, l] > 0.5)
        else:
            columns.append(contact_from_force(t_s, np.nan_to_num(true_N[:, l, 2])))
    return np.stack(columns, axis=1)


def _contact(estimate: EstimateColumns, true: BoolArray, told: BoolArray) -> ContactScore:
    return score_contact(
        estimate.t_s[told],
        true[told],
        estimate.contact[told] == 1,
        estimate.contact_known[told] == 1,
        estimate.p_contact[told],
        (estimate.event[told], estimate.t_event_s[told]),
    )


def _threshold(estimate: EstimateColumns, true: BoolArray, told: BoolArray) -> ContactScore | None:
    axial_N = estimate.axial_N[told]
    if not np.isfinite(axial_N).any():
        return None
    found = np.nan_to_num(axial_N) > THRESHOLD_N
    event = np.zeros(found.shape, dtype=np.int64)
    event[1:] = np.diff(found.astype(np.int64), axis=0)
    t_event = np.where(event != 0, estimate.t_s[told][:, None], np.nan)
    return score_contact(
        estimate.t_s[told], true[told], found, np.isfinite(axial_N), found.astype(np.float64), (event, t_event)
    )


def _force(
    estimate: EstimateColumns,
    frame: str,
    true_N: FloatArray,
    true: BoolArray,
    told: BoolArray,
    weight_N: float,
    R_WB: FloatArray | None,
) -> ForceScore | None:
    """Errors in world axes where the attitude is known, else in body axes."""
    if not np.isfinite(true_N[..., 2]).any():
        return None
    force, cov = estimate.force_B_N, estimate.cov_B_N2
    if R_WB is not None:
        force = np.einsum("nij,nlj->nli", R_WB, force)
        cov = _turned(R_WB, cov)
        true_N = np.einsum("nij,nlj->nli", R_WB, true_N) if frame == "body" else true_N
    innovations = None
    if estimate.nis is not None and estimate.nis_dof is not None:
        innovations = (estimate.nis[told], estimate.nis_dof[told])
    return score_force((force - true_N)[told], cov[told], true[told], weight_N, innovations)


def _turned(R: FloatArray, cov: FloatArray) -> FloatArray:
    full = cov[..., [0, 1, 2, 1, 3, 4, 2, 4, 5]].reshape(*cov.shape[:2], 3, 3)
    turned = np.einsum("nij,nljk,nmk->nlim", R, full, R)
    return np.stack([turned[..., i, j] for i in range(3) for j in range(i, 3)], axis=-1)
