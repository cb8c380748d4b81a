"""The robot description: `robot.toml` read, checked, and handed out as one frozen record."""

from __future__ import annotations

import hashlib
import json
import tomllib
from dataclasses import dataclass
from pathlib import Path

from pydantic import ValidationError

from footcal.errors import FileFormatError, SettingError
from footcal.leg.problems import as_file_error, near_match
from footcal.leg.schema import Column, Leg, RobotFile


@dataclass(frozen=True, slots=True)
class Robot:
    """A robot as its description tells it: masses, inertial unit, legs with joints, drives and feet."""

    file: RobotFile
    path: Path  # of the description; other paths in it are relative to its folder

    @classmethod
    def load(cls, path: str | Path) -> Robot:
        """Read and check a robot description.

        Args:
            path: the TOML file.

        Returns:
            The robot.

        Raises:
            FileFormatError: the file is missing, no TOML, or holds a value that is refused; says its path in the file.
        """
        path = Path(path)
        try:
            content = tomllib.loads(path.read_text(encoding="utf-8"))
        except FileNotFoundError:
            raise FileFormatError(str(path), "no such file", "Give the path of a robot description.") from None
        except (OSError, UnicodeDecodeError) as error:
            raise FileFormatError(str(path), f"cannot be read: {error}", "Give a TOML text file in UTF-8.") from None
        except tomllib.TOMLDecodeError as error:
            raise FileFormatError(str(path), f"is no TOML: {error}", "Mend the line named.") from None
        try:
            return cls(RobotFile.model_validate(content), path)
        except ValidationError as error:
            raise as_file_error(path.name, error) from None

    @property
    def robot_id(self) -> str:
        """The robot's own name."""
        return self.file.robot_id

    @property
    def legs(self) -> tuple[Leg, ...]:
        """The legs in the order of the description, which is the order of lanes."""
        return self.file.legs

    @property
    def leg_names(self) -> tuple[str, ...]:
        """The legs' names in that order."""
        return tuple(leg.name for leg in self.legs)

    @property
    def joint_counts(self) -> tuple[int, ...]:
        """How many joints each leg has."""
        return tuple(len(leg.joints) for leg in self.legs)

    @property
    def padded_joints(self) -> int:
        """Joints every leg is padded to in the compiled step: 3 or 6."""
        return 3 if max(self.joint_counts) <= 3 else 6

    @property
    def weight_N(self) -> float:
        """Weight of the whole robot, newtons."""
        return self.file.mass_kg * self.file.gravity_m_per_s2

    @property
    def digest(self) -> str:
        """SHA-256 of the description's content (canonical JSON), so that an estimate can say what it was made with."""
        content = self.file.model_dump(mode="json", by_alias=True)
        text = json.dumps(content, sort_keys=True, separators=(",", ":"), ensure_ascii=False)
        return hashlib.sha256(text.encode()).hexdigest()

    def lane(self, leg: str) -> int:
        """Return the index of a leg.

        Raises:
            SettingError: there is no leg of that name.
        """
        if leg not in self.leg_names:
            raise SettingError(f"robot {self.robot_id}", f"no leg {leg!r}", near_match(leg, self.leg_names))
        return self.leg_names.index(leg)

    def leg(self, name: str) -> Leg:
        """Return a leg by its name.

        Raises:
            SettingError: there is no leg of that name.
        """
        return self.legs[self.lane(name)]

    def calibration_path(self, leg: str) -> Path | None:
        """Return where the calibration file of a leg's foot lies, or None where none is named."""
        return self._beside(self.leg(leg).calibration)

    def drive_path(self, leg: str) -> Path | None:
        """Return where a leg's drive file lies, or None where none is named."""
        return self._beside(self.leg(leg).drive)

    def _beside(self, name: str | None) -> Path | None:
        return None if name is None else self.path.parent / name

    def columns(self) -> dict[str, Column]:
        """Return the rule of each renamed or scaled log column, keyed by its full name such as `front_left.raw`.

        A key with `{leg}` stands for every leg; a key that names the leg itself wins over it.
        """
        rules: dict[str, Column] = {}
        for key, rule in sorted(self.file.columns.items(), key=lambda item: "{leg}" not in item[0]):
            for leg in self.leg_names if "{leg}" in key else ("",):
                rules[key.replace("{leg}", leg)] = rule.model_copy(update={"name": rule.name.replace("{leg}", leg)})
        return rules
