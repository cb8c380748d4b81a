"""The calibration file of one foot: its schema, its checks, reading and writing."""

from footcal.calfile.calibration import Calibration
from footcal.calfile.schema import CalibrationFile

__all__ = ["Calibration", "CalibrationFile"]
