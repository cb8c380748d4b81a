"""What the fusion says of every leg, as columns: the record, and the names it has in files."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, fields
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from footcal.records import FloatArray, IntArray

# name in the file -> field of EstimateColumns and component; the order is that of DESIGN.md, section 4
LEG_COLUMNS: Final[Mapping[str, tuple[str, int | None]]] = {
    "p_contact": ("p_contact", None),
    "contact": ("contact", None),
    "contact_known": ("contact_known", None),
    "event": ("event", None),
    "t_event_s": ("t_event_s", None),
    "fx_N": ("force_B_N", 0),
    "fy_N": ("force_B_N", 1),
    "fz_N": ("force_B_N", 2),
    "cxx_N2": ("cov_B_N2", 0),
    "cxy_N2": ("cov_B_N2", 1),
    "cxz_N2": ("cov_B_N2", 2),
    "cyy_N2": ("cov_B_N2", 3),
    "cyz_N2": ("cov_B_N2", 4),
    "czz_N2": ("cov_B_N2", 5),
    "axial_N": ("axial_N", None),
    "axial_u_N": ("axial_u_N", None),
    "sensor_bias_N": ("sensor_bias_N", None),
    "foot_age_s": ("foot_age_s", None),
    "motor_age_s": ("motor_age_s", None),
    "health": ("health", None),
}
WHOLE_NUMBERS: Final = frozenset({"contact", "contact_known", "event", "health"})


@dataclass(frozen=True, slots=True, eq=False)
class EstimateColumns:
    """Estimates of all legs, one row a log row; body frame, ground on foot. NaN where there is nothing to say."""

    legs: tuple[str, ...]
    t_s: FloatArray  # (n,) exactly the log's
    p_contact: FloatArray  # (n, legs) probability of contact
    contact: IntArray  # (n, legs) 0 or 1, decided
    contact_known: IntArray  # (n, legs) 0 where neither foot nor drive can decide
    event: IntArray  # (n, legs) +1 touchdown, -1 lift-off, else 0
    t_event_s: FloatArray  # (n, legs) interpolated, NaN without event
    force_B_N: FloatArray  # (n, legs, 3)
    cov_B_N2: FloatArray  # (n, legs, 6) xx, xy, xz, yy, yz, zz
    axial_N: FloatArray  # (n, legs) calibrated reading
    axial_u_N: FloatArray  # (n, legs) its standard uncertainty
    sensor_bias_N: FloatArray  # (n, legs)
    foot_age_s: FloatArray  # (n, legs)
    motor_age_s: FloatArray  # (n, legs)
    health: IntArray  # (n, legs) bits of records.Health
    nis: FloatArray | None = None  # (n, legs) normalised innovation squared; not in files
    nis_dof: FloatArray | None = None  # (n, legs) readings that went into it

    def __len__(self) -> int:
        return len(self.t_s)

    def column(self, leg: str, name: str) -> FloatArray | IntArray:
        """Return one column of the file form, shape (n,), such as `column("front_left", "fz_N")`."""
        field, part = LEG_COLUMNS[name]
        values: NDArray[np.float64] | NDArray[np.int64] = getattr(self, field)[:, self.legs.index(leg)]
        return values if part is None else values[:, part]

    def table(self) -> dict[str, FloatArray | IntArray]:
        """Return all columns by the names they have in files: `t_s`, then `<leg>.<name>`."""
        columns: dict[str, FloatArray | IntArray] = {"t_s": self.t_s}
        for leg in self.legs:
            columns |= {f"{leg}.{name}": self.column(leg, name) for name in LEG_COLUMNS}
        return columns


def columns_from_rows(legs: tuple[str, ...], t_s: FloatArray, rows: NDArray[np.void]) -> EstimateColumns:
    """Return columns from output records of the compiled step.

    Args:
        legs: names in the order of lanes.
        t_s: the log's times, (n,).
        rows: output records, (n,).
    """

    def lanes_last(name: str) -> FloatArray:
        return np.ascontiguousarray(np.swapaxes(rows[name], 1, 2))

    plain = {
        field.name: np.ascontiguousarray(rows[field.name])
        for field in fields(EstimateColumns)
        if field.name not in {"legs", "t_s", "force_B_N", "cov_B_N2"}
    }
    return EstimateColumns(
        legs=legs, t_s=t_s, force_B_N=lanes_last("force_B_N"), cov_B_N2=lanes_last("cov_B_N2"), **plain
    )


def join_columns(parts: list[EstimateColumns]) -> EstimateColumns:
    """Return several blocks of one run as one."""
    arrays = {
        field.name: np.concatenate([getattr(part, field.name) for part in parts])
        for field in fields(EstimateColumns)
        if field.name != "legs" and getattr(parts[0], field.name) is not None
    }
    return EstimateColumns(legs=parts[0].legs, **arrays)


def columns_from_table(legs: tuple[str, ...], table: Mapping[str, FloatArray | IntArray]) -> EstimateColumns:
    """Return columns from the file form, the inverse of `EstimateColumns.table`.

    Args:
        legs: names in the order wanted.
        table: `t_s` and every `<leg>.<name>`, each (n,).
    """
    parts: dict[str, list[FloatArray | IntArray]] = {}
    for name, (field, _) in LEG_COLUMNS.items():
        values = np.stack([table[f"{leg}.{name}"] for leg in legs], axis=1)
        kept = values.astype(np.int64) if name in WHOLE_NUMBERS else values.astype(np.float64)
        parts.setdefault(field, []).append(kept)
    arrays: dict[str, Any] = {
        field: stacks[0] if len(stacks) == 1 else np.stack(stacks, axis=2) for field, stacks in parts.items()
    }
    return EstimateColumns(legs=legs, t_s=np.asarray(table["t_s"], dtype=np.float64), **arrays)
