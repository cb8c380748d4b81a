"""The torque constant of a motor from its speed constant."""

from __future__ import annotations

import math

from footcal.errors import SettingError


def torque_constant_Nm_per_A(kv_rpm_per_V: float) -> float:
    """Return the torque constant that belongs to a speed constant.

    Law: Kt = 60 / (2 pi Kv), an identity of units (power in = power out, no loss). It holds for line-to-line peak
    quantities of six-step drive; where "ampere" means the rms phase current or a d-q current, a factor such as
    sqrt(3)/2 or sqrt(3/2) comes in, so this is a starting value that the identification settles.

    Args:
        kv_rpm_per_V: no-load speed over voltage, above 0.

    Returns:
        Newton metres per ampere, motor side.

    Raises:
        SettingError: kv_rpm_per_V is not above 0.
    """
    if not kv_rpm_per_V > 0.0:  # so written that NaN is refused too
        raise SettingError(
            where="torque_constant_Nm_per_A, kv_rpm_per_V",
            what=f"speed constant is {kv_rpm_per_V:g} rpm/V, must be above 0",
            mend="Take it from the motor's data sheet.",
        )
    return 60.0 / (2.0 * math.pi * kv_rpm_per_V)
