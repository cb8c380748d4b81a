"""One foot's calibration: read from its file with every check, written whole, turned into the kernel's model."""

from __future__ import annotations

import json
import os
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import Any, Self

import numpy as np
from pydantic import ValidationError

from footcal.calfile.schema import VERSION, CalibrationFile
from footcal.errors import FileFormatError
from footcal.files.atomic import replacing
from footcal.files.digest import sha256_json
from footcal.records import NS_PER_S, FloatArray
from footcal.sensor.compensator import Compensator, ForceColumns
from footcal.sensor.model import RuntimeUncertainty, SensorModel

MEND_DIGEST = "The file was changed by hand or damaged: fetch the original, or fit again."


@dataclass(frozen=True)
class Calibration:
    """The calibration of one foot.

    Attributes:
        file: the validated content.
        path: where it was read from; None for one not yet saved.
    """

    file: CalibrationFile
    path: Path | None = None

    @classmethod
    def load(cls, path: str | os.PathLike[str]) -> Self:
        """Read a calibration file and check form, version, ranges and digest.

        Raises:
            FileFormatError: the file is missing, not JSON, of an unknown version, holds a value out of range (named by
                its path inside the file), or its digest does not fit its content.
        """
        where = str(path)
        document = _read_json(Path(path))
        _check_version(where, document)
        try:
            file = CalibrationFile.model_validate(document)
        except ValidationError as error:
            first = error.errors()[0]
            raise FileFormatError(
                where=f"{where}, {value_path(first['loc'])}",
                what=str(first["msg"]),
                mend="Fetch the original file, or fit again.",
            ) from error
        if sha256_json(document, leave_out=("sha256",)) != file.sha256:
            raise FileFormatError(where=f"{where}, $.sha256", what="digest does not fit the content", mend=MEND_DIGEST)
        return cls(file=file, path=Path(path))

    @classmethod
    def from_content(cls, content: dict[str, Any]) -> Self:
        """Return a calibration from plain content without `sha256`, which is computed here."""
        unsigned = CalibrationFile.model_validate({**content, "sha256": "0" * 64})
        document = unsigned.model_dump(mode="json")
        document["sha256"] = sha256_json(document, leave_out=("sha256",))
        return cls(file=CalibrationFile.model_validate(document))

    def save(self, path: str | os.PathLike[str]) -> None:
        """Write the file whole or not at all; the content reads back bit for bit.

        Raises:
            SettingError: the folder can't be written.
        """
        text = json.dumps(self.file.model_dump(mode="json"), indent=1, ensure_ascii=False, allow_nan=False)
        with replacing(path) as temporary:
            temporary.write_text(text + "\n", encoding="utf-8")

    @property
    def foot_id(self) -> str:
        """Serial number of the physical foot."""
        return self.file.foot_id

    @property
    def digest(self) -> str:
        """SHA-256 of the content."""
        return self.file.sha256

    @property
    def capacity_N(self) -> float:
        """Full scale, newtons."""
        return self.file.sensor.capacity_N

    @property
    def kind(self) -> str:
        """Sensor kind: cell, resistive, magnetic or capacitive."""
        return self.file.sensor.kind

    @cached_property
    def sensor_model(self) -> SensorModel:
        """The numbers that the streaming compensator runs on."""
        return _sensor_model(self.file)

    def compensator(self) -> Compensator:
        """Return a new streaming compensator in its power-up state."""
        return Compensator(self.sensor_model)

    def force(self, t_s: FloatArray, raw: FloatArray, temp_C: FloatArray | None = None) -> ForceColumns:
        """Turn raw readings into newtons, from the power-up state.

        Args:
            t_s: times, shape (n,), seconds, rising.
            raw: readings, shape (n,), counts.
            temp_C: temperatures, shape (n,); None or NaN where there is no thermometer.

        Returns:
            Force, standard uncertainty and flags for each sample; `t_s` as given.
        """
        times = np.asarray(t_s, dtype=np.float64)
        temperature = np.full(times.shape, np.nan) if temp_C is None else np.asarray(temp_C, dtype=np.float64)
        columns = self.compensator().run(np.rint(times * NS_PER_S).astype(np.int64), raw, temperature)
        return ForceColumns(t_s=times, force_N=columns.force_N, u_N=columns.u_N, flags=columns.flags)

    def u_static_N(self, force_N: FloatArray) -> FloatArray:
        """Return the standard uncertainty of a settled reading at each force, newtons, from the file's curve U / k."""
        curve = self.file.uncertainty.curve
        forces = [point.force_N for point in curve]
        return np.interp(force_N, forces, [point.U_N / self.file.uncertainty.k for point in curve])


def value_path(location: tuple[int | str, ...]) -> str:
    """Return the path of a value inside a JSON document, such as $.model.curve[2]."""
    return "$" + "".join(f"[{part}]" if isinstance(part, int) else f".{part}" for part in location)


def _read_json(path: Path) -> dict[str, Any]:
    try:
        document = json.loads(path.read_text(encoding="utf-8"))
    except OSError as error:
        raise FileFormatError(str(path), f"can't be read ({error.strerror})", "Check the path.") from error
    except (UnicodeDecodeError, json.JSONDecodeError) as error:
        line = getattr(error, "lineno", 1)
        raise FileFormatError(
            f"{path}, line {line}", "this is not whole JSON", "The file is cut or of another kind: fetch the original."
        ) from error
    if not isinstance(document, dict):
        raise FileFormatError(str(path), "this is no calibration file", "Name a file written by `footcal fit`.")
    return document


def _check_version(where: str, document: dict[str, Any]) -> None:
    if document.get("format") != "footcal calibration":
        raise FileFormatError(where, "this is no calibration file", "Name a file written by `footcal fit`.")
    version = str(document.get("version", "none"))
    if version.split(".", maxsplit=1)[0] != VERSION.split(".")[0]:
        raise FileFormatError(
            where=f"{where}, $.version",
            what=f"version {version} is not known here, this is version {VERSION}",
            mend="Install the footcal that wrote it, or fit again.",
        )


def _sensor_model(file: CalibrationFile) -> SensorModel:
    runtime = file.uncertainty.runtime
    cross = file.model.cross_axis
    return SensorModel(
        capacity_N=file.sensor.capacity_N,
        wiring=file.input.wiring,
        raw_max=file.input.raw_max,
        raw_min=file.input.raw_min,
        u_zero=file.input.u_zero,
        u_span=file.input.u_span,
        gamma=file.input.power,
        temp_ref_C=file.input.temp_ref_C,
        thermometer_lag_s=file.input.thermometer_lag_s,
        curve=np.array(file.model.curve),
        curve_temperature=np.array(file.model.curve_temperature),
        creep_undone=np.array(file.model.creep_undone),
        coefficients=np.array(file.model.coefficients),
        lag_s=file.input.lag_s,
        force_min_N=file.validity.force_min_N,
        force_max_N=file.validity.force_max_N,
        temp_min_C=file.validity.temp_min_C,
        temp_max_C=file.validity.temp_max_C,
        dynamic=file.validity.dynamic,
        settle_s=file.model.settle.time_s,
        settle_swing=file.model.settle.swing_share,
        cross_axis=(cross.x, cross.y),
        cross_axis_u=(cross.u_x, cross.u_y),
        unload_share=file.unload.share_of_peak,
        unload_s=file.unload.decay_s,
        uncertainty=RuntimeUncertainty(
            rows=np.array(runtime.rows),
            fixed=runtime.fixed,
            relative=runtime.relative,
            moving=runtime.moving,
            noise=runtime.noise,
            noise_interval_s=runtime.noise_interval_s,
            temp_C=runtime.temp_C,
            temp_absent_C=runtime.temp_absent_C,
            beyond=runtime.beyond,
        ),
    )
