"""What `session.toml` says of a bench session, and how options fill what it leaves open."""

from __future__ import annotations

import datetime as dt
import difflib
import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, fields, replace
from pathlib import Path
from types import MappingProxyType
from typing import Any, Final

from footcal.errors import FileFormatError, SettingError
from footcal.files.columns import ColumnRule
from footcal.files.toml_text import toml_text

SENSOR_KINDS: Final = ("cell", "resistive", "magnetic", "capacitive")
MOUNTS: Final = ("foot_up", "foot_down", "side", "angle")


@dataclass(frozen=True, slots=True)
class SessionMeta:
    """Identity and conditions of one bench session; None where nobody said."""

    foot_id: str | None = None  # serial number of the physical foot
    kind: str | None = None  # cell, resistive, magnetic, capacitive
    capacity_N: float | None = None  # full scale of the sensor
    safe_limit_N: float | None = None  # beyond it the sensor may be damaged
    raw_max: float | None = None  # top of the converter, counts
    lag_s: float | None = None  # first-order delay of sensor and amplifier, from their data sheets
    mount: str | None = None  # foot_up, foot_down, side, angle
    mount_angle_rad: float | None = None  # sensor axis (sole to leg) from straight up, where mount is "angle"
    mass_below_sensor_kg: float | None = None
    gravity_m_per_s2: float | None = None  # local
    gravity_u_m_per_s2: float | None = None  # its standard uncertainty
    recipe: str | None = None
    recipe_sha256: str | None = None
    weights: tuple[Mapping[str, Any], ...] = ()  # weights used: name, nominal_kg, class, …
    operator: str | None = None
    start_utc: dt.datetime | None = None  # aware, UTC
    footcal_version: str | None = None
    closed: bool | None = None  # False: the session was broken off
    extra: Mapping[str, Any] = field(default_factory=lambda: MappingProxyType({}))  # keys of others, kept as they are


@dataclass(frozen=True, slots=True)
class SessionDefaults:
    """What options or a recipe say where `session.toml` is silent or missing."""

    foot_id: str | None = None
    kind: str | None = None
    capacity_N: float | None = None
    safe_limit_N: float | None = None
    raw_max: float | None = None
    mount: str | None = None
    mount_angle_rad: float | None = None
    mass_below_sensor_kg: float | None = None
    gravity_m_per_s2: float | None = None
    gravity_u_m_per_s2: float | None = None
    columns: Mapping[str, ColumnRule] = field(default_factory=lambda: MappingProxyType({}))


def _words(value: Any) -> str:
    if not isinstance(value, str) or not value.strip():
        msg = "words in quotes"
        raise ValueError(msg)
    return value.strip()


def _one_of(allowed: tuple[str, ...]) -> Callable[[Any], str]:
    def check(value: Any) -> str:
        if value not in allowed:
            raise ValueError("one of " + ", ".join(allowed))
        return str(value)

    return check


def _number(low: float, *, above: bool) -> Callable[[Any], float]:
    def check(value: Any) -> float:
        good = isinstance(value, int | float) and not isinstance(value, bool) and math.isfinite(value)
        if not good or value < low or (above and value == low):
            raise ValueError(
                f"a number {'above' if above else 'of at least'} {low:g}" if low > -math.inf else "a number"
            )
        return float(value)

    return check


def _instant(value: Any) -> dt.datetime:
    try:
        moment = value if isinstance(value, dt.datetime) else dt.datetime.fromisoformat(value)
    except (TypeError, ValueError):
        msg = "a time such as 2031-04-02T09:30:00Z"
        raise ValueError(msg) from None
    return moment.replace(tzinfo=dt.UTC) if moment.tzinfo is None else moment.astimezone(dt.UTC)


def _flag(value: Any) -> bool:
    if not isinstance(value, bool):
        msg = "true or false"
        raise ValueError(msg)  # noqa: TRY004  (one kind of refusal for all checks)
    return value


def _weights(value: Any) -> tuple[Mapping[str, Any], ...]:
    if not isinstance(value, list | tuple) or not all(isinstance(part, str | Mapping) for part in value):
        msg = 'a list of names, or of tables such as { name = "W5", nominal_kg = 5, class = "M1" }'
        raise ValueError(msg)
    return tuple(MappingProxyType({"name": part} if isinstance(part, str) else dict(part)) for part in value)


_POSITIVE, _AT_LEAST_0 = _number(0.0, above=True), _number(0.0, above=False)
_CHECKS: Final[Mapping[str, Callable[[Any], Any]]] = {
    "foot_id": _words,
    "kind": _one_of(SENSOR_KINDS),
    "capacity_N": _POSITIVE,
    "safe_limit_N": _POSITIVE,
    "raw_max": _POSITIVE,
    "lag_s": _AT_LEAST_0,
    "mount": _one_of(MOUNTS),
    "mount_angle_rad": _number(-math.inf, above=False),
    "mass_below_sensor_kg": _AT_LEAST_0,
    "gravity_m_per_s2": _POSITIVE,
    "gravity_u_m_per_s2": _AT_LEAST_0,
    "recipe": _words,
    "recipe_sha256": _words,
    "weights": _weights,
    "operator": _words,
    "start_utc": _instant,
    "footcal_version": _words,
    "closed": _flag,
}


def meta_from_mapping(table: Mapping[str, Any], where: str) -> SessionMeta:
    """Return the checked record of a `session.toml` table; an empty string counts as not said.

    Raises:
        FileFormatError: a value is of the wrong kind or out of range, or a key looks like a slip of a known one.
    """
    known, extra = {}, {}
    for key, value in table.items():
        if key not in _CHECKS:
            _refuse_slip(key, table, where)
            extra[key] = value
        elif value is not None and value != "":
            known[key] = _checked(key, value, where)
    return SessionMeta(**known, extra=MappingProxyType(extra))


def meta_text(meta: SessionMeta) -> str:
    """Return the record as the text of a `session.toml`; what is None is left out."""
    values = {name: getattr(meta, name) for name in _CHECKS}
    stated = {name: value for name, value in values.items() if value is not None and value != ()}
    return toml_text({**stated, **meta.extra})


def filled(meta: SessionMeta, defaults: SessionDefaults, where: Path | str) -> SessionMeta:
    """Return `meta` with what it leaves open taken from the options.

    Raises:
        SettingError: an option is out of range, or contradicts what the session says of foot or sensor.
    """
    changes: dict[str, Any] = {}
    for option in fields(defaults):
        value = getattr(defaults, option.name) if option.name in _CHECKS else None
        if value is None:
            continue
        try:
            value = _CHECKS[option.name](value)
        except ValueError as error:
            raise SettingError(
                where=f"option {option.name}", what=f"{value!r} is not {error}", mend="Correct the option."
            ) from None
        said = getattr(meta, option.name)
        if said is None:
            changes[option.name] = value
        elif option.name in {"foot_id", "kind", "capacity_N", "raw_max"} and said != value:
            raise SettingError(
                where=f"{where}, {option.name}",
                what=f"the session says {said!r}, the option says {value!r}",
                mend="Leave the option out, or choose the session of that foot.",
            )
    return replace(meta, **changes)


def _checked(key: str, value: Any, where: str) -> Any:
    try:
        return _CHECKS[key](value)
    except ValueError as error:
        raise FileFormatError(
            where=f"{where}, {key}", what=f"{value!r} is not {error}", mend="Correct the value."
        ) from None


def _refuse_slip(key: str, table: Mapping[str, Any], where: str) -> None:
    absent = [name for name in _CHECKS if name not in table]
    meant = difflib.get_close_matches(key.lower(), absent, n=1, cutoff=0.85)
    folded = {name.lower(): name for name in absent}
    name = folded.get(key.lower()) or (meant[0] if meant else None)
    if name:
        raise FileFormatError(
            where=f"{where}, {key}", what=f"there is no key {key!r}", mend=f"Write {name!r}, if that is meant."
        )
