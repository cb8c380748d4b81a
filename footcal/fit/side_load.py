"""Side load: how much of a force across the sensor it reads as axial, from holds on wedges; weighted least squares.

reading - axial = cx Fx + cy Fy, with h = axis + cross_axis and reading = h . F. What the wedges, the day and the model
add is estimated beside it, each held by its own standard uncertainty: one error of slope a wedge (bench included), one
a posture (setting the foot down), and one of the axial reading a load level. Turned by quarter turns, a wedge's error
is even in the tilt and the cross-sensitivity odd, so the two part. Generalised least squares: textbook (Aitken 1935).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from footcal.fit.features import mean_features
from footcal.fit.inputs import FitInput
from footcal.fit.least_squares import solve
from footcal.fit.passes import Fitted
from footcal.fit.robust import robust_sd
from footcal.fit.set_aside import Aside
from footcal.records import BoolArray, FloatArray, Hold
from footcal.sensor.model import RuntimeUncertainty

# Standard uncertainty of an untested foot's cross-sensitivity (common practice, no source).
UNTESTED: Final = {"cell": 0.01, "resistive": 0.03, "magnetic": 0.03, "capacitive": 0.03}
WEDGE_u_deg: Final = 0.5  # slope of a wedge on its bench (common practice, no source)
SEAT_u_deg: Final = 0.1  # each setting down of the foot on it (common practice, no source)
LEAST_TILT: Final = 0.1  # side load over load: below this an axis was not tested
OFF_BY_SD: Final = 5.0
SMALLEST_SHARE: Final = 2e-4  # of full scale: below this nothing is set aside, however small the scatter
MOST_ASIDE_OF: Final = 4  # at most one in so many
LEAST_LOADED: Final = 4  # tilted holds with a load
LEVEL_SHARE: Final = 0.02  # of full scale: loads nearer than this are one level
ROUNDS: Final = 4  # of weights and of the wedges' true slope


@dataclass(frozen=True, slots=True)
class SideLoad:
    """What the tilted holds tell."""

    cross: tuple[float, float]  # along sensor x and y, no dimension
    u: tuple[float, float]  # standard uncertainties
    tested: bool  # both axes
    left_pct: float  # RMS of what is left of the reading, % of the axial load
    holds: int  # loaded tilted holds used
    asides: tuple[Aside, ...]

    @property
    def notes(self) -> tuple[str, ...]:
        """What was done, in words."""
        if not self.tested:
            return (
                "tilted holds lean to one axis only or are too few: the other keeps the stated default for side load",
            )
        return (f"side load: {self.holds} tilted holds fitted, {self.left_pct:.2g} % of the axial load left over",)


@dataclass(frozen=True, slots=True)
class Tilted:
    """Tilted holds as arrays, one entry a hold."""

    index: tuple[int, ...]  # into the holds
    off_N: FloatArray  # reading less axial load
    axial_N: FloatArray
    side_N: FloatArray  # (n, 2)

    @property
    def load_N(self) -> FloatArray:
        """The whole load, along the vertical."""
        return np.asarray(np.sqrt(self.axial_N**2 + np.sum(self.side_N**2, axis=1)))

    @property
    def across_N(self) -> FloatArray:
        """Size of the side load."""
        return np.asarray(np.hypot(self.side_N[:, 0], self.side_N[:, 1]))

    def kept(self, keep: BoolArray) -> Tilted:
        """Return some of the holds."""
        index = tuple(i for i, yes in zip(self.index, keep, strict=True) if yes)
        return Tilted(index, self.off_N[keep], self.axial_N[keep], self.side_N[keep])


def side_load(data: FitInput, fitted: Fitted, uncertainty: RuntimeUncertainty) -> SideLoad | None:
    """Return the cross-sensitivity that the tilted holds show; None where there are none.

    Args:
        data: with the tilted holds' rows.
        fitted: the main fit, which did not see them.
        uncertainty: of a reading, for weights and for what all holds of one load have in common.
    """
    if data.tilted is None:
        return None
    tilted = _tilted_readings(data, fitted)
    full_N = data.capacity_N
    prior_N = np.hypot(uncertainty.fixed * full_N, uncertainty.relative * tilted.axial_N)
    found = _estimate(tilted, prior_N, full_N)
    asides: list[Aside] = []
    for _ in range(len(tilted.index) // MOST_ASIDE_OF):  # the worst alone: it pulls its neighbours along
        off_sd = np.abs(found.residual) / np.maximum(found.sd, SMALLEST_SHARE * full_N / OFF_BY_SD)
        worst = int(np.argmax(off_sd))
        if off_sd[worst] <= OFF_BY_SD:
            break
        asides.append(_aside(tilted, worst, float(found.residual[worst])))
        keep = np.arange(len(off_sd)) != worst
        tilted, prior_N = tilted.kept(keep), prior_N[keep]
        found = _estimate(tilted, prior_N, full_N)
    loaded = tilted.axial_N > LEVEL_SHARE * full_N
    if loaded.sum() < LEAST_LOADED:
        found = _Found(np.zeros(2), np.zeros(2), np.zeros(2, dtype=bool), found.residual, found.sd)
    left = found.residual[loaded] / tilted.axial_N[loaded]
    default = UNTESTED[data.kind]
    return SideLoad(
        cross=(float(found.cross[0]), float(found.cross[1])),
        u=tuple(float(found.u[k]) if found.seen[k] else default for k in range(2)),  # type: ignore[arg-type]
        tested=bool(found.seen.all()),
        left_pct=100.0 * float(np.sqrt(np.mean(left**2))) if loaded.any() else 0.0,
        holds=int(loaded.sum()),
        asides=tuple(asides),
    )


def _tilted_readings(data: FitInput, fitted: Fitted) -> Tilted:
    """Read the tilted holds with the main fit; the loop and creep states have followed the whole session."""
    rows = data.tilted
    assert rows is not None  # noqa: S101  (the caller asked)
    features = mean_features(
        data.channel.t_ns, fitted.apparent, data.reading.theta, fitted.creep_undone, rows.start, rows.stop
    )
    read_N = features @ fitted.coefficients * data.capacity_N
    index = tuple(int(i) for i in np.unique(rows.hold))
    holds: Sequence[Hold] = [data.holds[i] for i in index]
    axial_N = np.array([hold.load_N for hold in holds])
    means_N = np.array([read_N[rows.hold == i].mean() for i in index])
    return Tilted(index, means_N - axial_N, axial_N, np.array([(hold.side_x_N, hold.side_y_N) for hold in holds]))


@dataclass(frozen=True, slots=True)
class _Found:
    cross: FloatArray  # (2,)
    u: FloatArray  # (2,)
    seen: BoolArray  # (2,) axes that were tilted
    residual: FloatArray  # (n,) N
    sd: FloatArray  # (n,) N


def _estimate(tilted: Tilted, prior_N: FloatArray, full_N: float) -> _Found:
    """Solve for cross-sensitivity and nuisances; the scatter of single holds is re-estimated from the residuals."""
    seen = np.max(np.abs(tilted.side_N), axis=0) > LEAST_TILT * float(np.max(np.abs(tilted.load_N)))
    cross, scale = np.zeros(2), 1.0
    common, common_sd = _common_columns(tilted, prior_N, full_N)
    for _ in range(ROUNDS):
        slopes, slope_sd = _slope_columns(tilted, cross)
        columns = np.column_stack([tilted.side_N[:, seen], common, slopes])
        prior = np.concatenate([1.0 / common_sd, 1.0 / slope_sd])
        held = np.zeros((len(prior), columns.shape[1]))
        held[:, int(seen.sum()) :] = np.diag(prior)
        sd = scale * prior_N
        answer = solve(
            np.vstack([columns / sd[:, None], held]), np.concatenate([tilted.off_N / sd, np.zeros(len(prior))])
        ).coefficients
        inverse = np.linalg.inv(columns.T @ (columns / sd[:, None] ** 2) + held.T @ held)
        residual = tilted.off_N - columns @ answer
        spent = float(np.sum(np.einsum("ij,jk,ik->i", columns, inverse, columns) / sd**2))
        free = max(len(residual) - spent, 1.0)
        scale *= max(robust_sd(residual / sd) * float(np.sqrt(len(residual) / free)), 0.05)
        cross[seen] = answer[: int(seen.sum())]
    u = np.zeros(2)
    u[seen] = np.sqrt(np.diag(inverse)[: int(seen.sum())])
    return _Found(cross, u, seen, residual, scale * prior_N)


def _common_columns(tilted: Tilted, prior_N: FloatArray, full_N: float) -> tuple[FloatArray, FloatArray]:
    """Columns of what the day and the model make holds read too much in common, and their standard uncertainties.

    Zero, span, and one a load level that holds enough share for a wrong mass not to be a level of its own.
    """
    share = tilted.axial_N / full_N
    level = np.rint(tilted.load_N / (LEVEL_SHARE * full_N))
    found, count = np.unique(level, return_counts=True)
    shared = found[count >= LEAST_LOADED]
    columns = np.column_stack([np.ones(len(share)), share, level[:, None] == shared[None, :]])
    of_levels = [float(prior_N[level == one].max()) for one in shared]
    return columns, np.array([prior_N.min(), prior_N.max() / max(float(share.max()), 0.1), *of_levels])


def _slope_columns(tilted: Tilted, cross: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Change of the reading per radian of slope: one column a wedge, one a posture; and their standard uncertainties.

    A steeper foot feels less axially, -W sin(tilt), and more across, W cos(tilt) times its cross-sensitivity.
    """
    across_N = tilted.across_N
    unit = tilted.side_N / np.maximum(across_N, 1e-12)[:, None]
    change = np.where(across_N > 0.0, -across_N + (unit @ cross) * tilted.axial_N, 0.0)
    slope_deg = np.degrees(np.arctan2(across_N, np.abs(tilted.axial_N)))
    wedge = np.where(across_N > 0.0, np.rint(slope_deg), 0.0)
    posture = [(float(w), round(float(x), 1), round(float(y), 1)) for w, (x, y) in zip(wedge, unit, strict=True)]
    names = sorted(set(posture) - {p for p in posture if p[0] == 0.0})
    wedges = sorted({name[0] for name in names})
    columns = [np.where(wedge == w, change, 0.0) for w in wedges]
    columns += [np.where([p == name for p in posture], change, 0.0) for name in names]
    sd = np.radians([WEDGE_u_deg] * len(wedges) + [SEAT_u_deg] * len(names))
    if not columns:
        return np.zeros((len(across_N), 0)), np.zeros(0)
    return np.column_stack(columns), sd


def _aside(tilted: Tilted, row: int, residual_N: float) -> Aside:
    reads = "more" if residual_N > 0.0 else "less"
    return Aside(
        tilted.index[row],
        f"on the wedge it reads {abs(residual_N):.3g} N {reads} than its like: bump, wrong tilt or mass",
        None,
    )
