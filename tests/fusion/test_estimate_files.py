"""Estimates in files: round trips, null for NaN, names of DESIGN section 4, files whole or not at all."""

from __future__ import annotations

from dataclasses import fields
from pathlib import Path

import numpy as np
import orjson
import pandas as pd
import pyarrow.parquet as pq
import pytest

from footcal.errors import FileFormatError, SettingError
from footcal.fusion.estimate import EstimateColumns
from footcal.fusion.estimate_files import estimate_writer, json_lines, read_estimate, write_estimate
from footcal.records import FloatArray, IntArray

# typed from DESIGN.md, section 4
_ALL = (
    "p_contact contact contact_known event t_event_s fx_N fy_N fz_N cxx_N2 cxy_N2 cxz_N2 cyy_N2 cyz_N2 czz_N2 "
    "axial_N axial_u_N sensor_bias_N foot_age_s motor_age_s health"
)
NAMES = _ALL.split()


def some_estimate(rows: int = 7) -> EstimateColumns:
    """Return two legs of random numbers."""
    rng = np.random.default_rng(7)

    def real(*shape: int) -> FloatArray:
        return rng.standard_normal((rows, 2, *shape))

    def whole(top: int) -> IntArray:
        return rng.integers(0, top, (rows, 2))

    t_event = real()
    t_event[1:] = np.nan
    return EstimateColumns(
        legs=("left", "right"),
        t_s=np.arange(rows) * 0.001,
        p_contact=rng.random((rows, 2)),
        contact=whole(2),
        contact_known=whole(2),
        event=whole(3) - 1,
        t_event_s=t_event,
        force_B_N=real(3),
        cov_B_N2=real(6),
        axial_N=real(),
        axial_u_N=real(),
        sensor_bias_N=real(),
        foot_age_s=real(),
        motor_age_s=real(),
        health=whole(1 << 13),
    )


def assert_same(a: EstimateColumns, b: EstimateColumns) -> None:
    """Compare every field that files hold."""
    assert a.legs == b.legs
    for field in fields(EstimateColumns):
        if field.name not in {"legs", "nis", "nis_dof"}:
            assert np.array_equal(getattr(a, field.name), getattr(b, field.name), equal_nan=True), field.name


@pytest.mark.parametrize("suffix", ["parquet", "csv"])
def test_an_estimate_reads_back_bit_for_bit(tmp_path: Path, suffix: str) -> None:
    """Both file forms keep every number, whole numbers and missing ones included."""
    path = tmp_path / f"estimate.{suffix}"
    write_estimate(some_estimate(), path, {"robot_id": "demo"})
    assert_same(read_estimate(path), some_estimate())


def test_columns_have_the_names_of_the_design_and_no_others(tmp_path: Path) -> None:
    """t_s first, then each leg's twenty columns in the order of DESIGN.md."""
    path = tmp_path / "estimate.parquet"
    write_estimate(some_estimate(), path, {})
    assert list(pd.read_parquet(path).columns) == ["t_s"] + [f"{leg}.{n}" for leg in ("left", "right") for n in NAMES]


def test_metadata_names_where_the_estimate_comes_from(tmp_path: Path) -> None:
    """Digests stand in the schema metadata."""
    path = tmp_path / "estimate.parquet"
    write_estimate(some_estimate(), path, {"robot_sha256": "ab" * 32})
    assert pq.read_schema(path).metadata[b"robot_sha256"] == b"ab" * 32


def test_blocks_make_the_same_file_as_the_whole(tmp_path: Path) -> None:
    """Two blocks written one after another read back as one estimate."""
    path = tmp_path / "estimate.csv"
    with estimate_writer(path, {}) as writer:
        writer.write(some_estimate())
        writer.write(some_estimate())
    assert len(read_estimate(path)) == 14


def test_json_lines_hold_the_same_names_and_null_for_nan() -> None:
    """One flat object a row; a row without event has null as its time."""
    lines = [orjson.loads(line) for line in json_lines(some_estimate())]
    assert len(lines) == 7
    assert list(lines[0]) == list(some_estimate().table())
    assert lines[3]["left.t_event_s"] is None
    assert lines[3]["right.health"] == int(some_estimate().health[3, 1])


def test_a_failing_run_leaves_no_file(tmp_path: Path) -> None:
    """An error between blocks leaves neither file nor temporary neighbour."""

    def fail_half_way() -> None:
        with estimate_writer(tmp_path / "estimate.parquet", {}) as writer:
            writer.write(some_estimate())
            raise RuntimeError

    with pytest.raises(RuntimeError):
        fail_half_way()
    assert list(tmp_path.iterdir()) == []


def test_another_suffix_is_refused(tmp_path: Path) -> None:
    """A form that is not written here is refused before anything is done."""
    with pytest.raises(SettingError, match="parquet"), estimate_writer(tmp_path / "estimate.xlsx", {}):
        pass


def test_an_estimate_without_a_column_is_refused_by_name(tmp_path: Path) -> None:
    """A file that lacks one column of a wanted leg is refused, and the column is named."""
    path = tmp_path / "estimate.parquet"
    write_estimate(some_estimate(), path, {})
    pd.read_parquet(path).drop(columns="right.czz_N2").to_parquet(path)
    with pytest.raises(FileFormatError, match=r"right\.czz_N2"):
        read_estimate(path)
