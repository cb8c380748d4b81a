"""The drive file `<leg>.drive.json`: what was identified of a leg's drives, with its uncertainty and a digest."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path
from typing import Annotated, Any, Literal

from pydantic import Field, ValidationError, model_validator

from footcal.errors import FileFormatError
from footcal.leg.description import Robot
from footcal.leg.problems import Table, as_file_error, refuse
from footcal.leg.schema import Name, NotNegative, Number, Positive

FORMAT = "footcal-drive"
VERSION = 1


class DriveUncertainty(Table):
    """Standard uncertainties of a joint's figures, in the same units; None where the data did not tell."""

    kt_Nm_per_A: NotNegative | None = None
    coulomb_Nm: NotNegative | None = None
    breakaway_Nm: NotNegative | None = None
    stribeck_rad_per_s: NotNegative | None = None
    viscous_Nms_per_rad: NotNegative | None = None
    load_share: NotNegative | None = None
    current_offset_A: NotNegative | None = None
    delay_s: NotNegative | None = None
    lag_s: NotNegative | None = None


class DriveJoint(Table):
    """What was identified of one joint's drive; friction on the joint side."""

    name: Name
    kt_Nm_per_A: Positive  # motor side, before the reduction
    coulomb_Nm: NotNegative
    breakaway_Nm: NotNegative
    stribeck_rad_per_s: Positive
    viscous_Nms_per_rad: NotNegative
    load_share: NotNegative
    current_offset_A: Number
    current_noise_A: NotNegative = 0.2  # standard deviation of one current reading
    delay_s: NotNegative
    lag_s: NotNegative
    u: DriveUncertainty
    observable_share: Annotated[
        float, Field(ge=0.0, le=1.0, strict=True)
    ]  # of a load change at rest that the current shows
    not_identified: tuple[str, ...] = ()  # keys above that are starting values because the data did not separate them
    covariance_keys: tuple[str, ...] = ()  # rows and columns of the covariance
    covariance: tuple[tuple[Number, ...], ...] = ()

    @model_validator(mode="after")
    def _sound(self) -> DriveJoint:
        if self.breakaway_Nm < self.coulomb_Nm:
            found = f"breakaway_Nm {self.breakaway_Nm:g} lies below coulomb_Nm {self.coulomb_Nm:g}"
            refuse("breakaway", found, "A joint cannot break away below what it needs to keep moving.")
        n = len(self.covariance_keys)
        if [len(row) for row in self.covariance] != [n] * n:
            refuse(
                "covariance", f"covariance is not {n} x {n}", "Give one row and one column for each of covariance_keys."
            )
        return self


class DriveFile(Table):
    """The drives of one leg, as `footcal drive` writes them."""

    format: Literal["footcal-drive"] = "footcal-drive"
    version: int = VERSION
    robot_id: str
    leg: Name
    made_utc: str
    tool_version: str
    temp_C: Number | None = None  # motor temperature the torque constants hold for; None where none was logged
    data_sha256: tuple[str, ...] = ()  # of the logs it was identified from
    joints: Annotated[tuple[DriveJoint, ...], Field(min_length=1)]

    @property
    def digest(self) -> str:
        """SHA-256 of the canonical JSON of the content."""
        return content_digest(self.model_dump(mode="json"))

    @classmethod
    def load(cls, path: str | Path) -> DriveFile:
        """Read and check a drive file.

        Args:
            path: the JSON file.

        Returns:
            The drives of a leg.

        Raises:
            FileFormatError: missing, no JSON, of another major version, its digest broken, or a value out of range.
        """
        path = Path(path)
        content = _read_json(path)
        if content.get("format") != FORMAT or content.get("version") != VERSION:
            found = (
                f"format {content.get('format')!r}, version {content.get('version')!r}; read are {FORMAT!r}, {VERSION}"
            )
            raise FileFormatError(
                f"{path.name}, version", found, "Use the footcal that wrote it, or identify the leg again."
            )
        stated = content.pop("sha256", None)
        if stated != content_digest(content):
            raise FileFormatError(
                f"{path.name}, sha256",
                "the digest does not fit the content: the file was changed or cut",
                "Take the file as `footcal drive` wrote it, or identify the leg again.",
            )
        try:
            return cls.model_validate_json(json.dumps(content))
        except ValidationError as error:
            raise as_file_error(path.name, error) from None

    def save(self, path: str | Path) -> None:
        """Write the file with its digest, whole or not at all.

        Args:
            path: where it shall lie.
        """
        from footcal.files.atomic import replacing

        content = self.model_dump(mode="json")
        content["sha256"] = content_digest(content)
        with replacing(Path(path)) as neighbour:
            neighbour.write_text(json.dumps(content, indent=1, ensure_ascii=False) + "\n", encoding="utf-8")


def content_digest(content: dict[str, Any]) -> str:
    """Return the SHA-256 of JSON content in canonical form: sorted keys, no blanks."""
    text = json.dumps(content, sort_keys=True, separators=(",", ":"), ensure_ascii=False)
    return hashlib.sha256(text.encode()).hexdigest()


def _read_json(path: Path) -> dict[str, Any]:
    try:
        content = json.loads(path.read_text(encoding="utf-8"))
    except FileNotFoundError:
        raise FileFormatError(str(path), "no such file", "Give the path of a drive file.") from None
    except (OSError, ValueError) as error:
        raise FileFormatError(
            str(path), f"is no JSON: {error}", "The file was cut or is another: write it again."
        ) from None
    if not isinstance(content, dict):
        raise FileFormatError(str(path), "is no drive file", "Give a file that `footcal drive` wrote.")
    return content


def load_drives(robot: Robot) -> tuple[DriveFile | None, ...]:
    """Return the drive file of each leg in the order of lanes, None where the description names none.

    Raises:
        FileFormatError: a file named is missing or refused, or it belongs to another leg or to other joints.
    """
    return tuple(_drive_of(robot, leg) for leg in robot.leg_names)


def _drive_of(robot: Robot, leg: str) -> DriveFile | None:
    path = robot.drive_path(leg)
    if path is None:
        return None
    drive = DriveFile.load(path)
    joints = tuple(joint.name for joint in robot.leg(leg).joints)
    found = tuple(joint.name for joint in drive.joints)
    if (drive.leg, found) != (leg, joints):
        raise FileFormatError(
            path.name,
            f"holds leg {drive.leg!r} with joints {', '.join(found)}; leg {leg!r} has {', '.join(joints)}",
            "Name the drive file of this leg, with the joints in the same order.",
        )
    return drive
