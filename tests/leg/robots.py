"""Robots for the tests: a four-legged one typed in, and random chains."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

import numpy as np

from footcal.leg.description import Robot
from footcal.leg.schema import RobotFile

FRICTION = {"coulomb_Nm": 0.4, "viscous_Nms_per_rad": 0.02, "load_share": 0.1}


def planar_leg(name: str = "one", **changes: Any) -> dict[str, Any]:
    """A two-link arm in the x-z plane, both links 0.2 m, hanging down at zero angles; masses at the links' ends."""
    joint = {
        "axis": [0.0, 1.0, 0.0],
        "com_m": [0.0, 0.0, -0.2],
        "kt_Nm_per_A": 0.1,
        "transmission": {"kind": "ratio", "ratio": 7.0},
        "friction": FRICTION,
    }
    leg: dict[str, Any] = {
        "name": name,
        "joint": [
            {**joint, "name": "hip", "xyz_m": [0.0, 0.0, 0.0], "mass_kg": 0.8},
            {**joint, "name": "knee", "xyz_m": [0.0, 0.0, -0.2], "mass_kg": 0.3},
        ],
        "foot": {"xyz_m": [0.0, 0.0, -0.2], "sensor_axis": [0.0, 0.0, 1.0], "distal_mass_kg": 0.1},
    }
    return {**leg, **changes}


def quadruped_leg(name: str, x: float, y: float) -> dict[str, Any]:
    """A leg with abduction, thigh and shank; right legs have their sideways lengths mirrored."""
    side = 1.0 if y > 0.0 else -1.0
    motor = {
        "kv_rpm_per_V": 100.0,
        "rotor_inertia_kg_m2": 1e-4,
        "current_lag_s": 0.005,
        "current_delay_s": 0.001,
        "transmission": {"kind": "ratio", "ratio": 7.2},
        "friction": FRICTION,
    }
    return {
        "name": name,
        "joint": [
            {
                "name": "abduction",
                "axis": [1.0, 0.0, 0.0],
                "xyz_m": [x, y, 0.0],
                "mass_kg": 0.7,
                "com_m": [0.0, 0.03 * side, 0.0],
                "inertia_kg_m2": [1e-3, 1.1e-3, 1.2e-3, 0.0, 0.0, 0.0],
                **motor,
            },
            {
                "name": "thigh",
                "axis": [0.0, 1.0, 0.0],
                "xyz_m": [0.0, 0.08 * side, 0.0],
                "mass_kg": 0.8,
                "com_m": [0.0, 0.01 * side, -0.08],
                "inertia_kg_m2": [4e-3, 4e-3, 1e-3, 0.0, 1e-4, 0.0],
                **motor,
            },
            {
                "name": "knee",
                "axis": [0.0, 1.0, 0.0],
                "xyz_m": [0.0, 0.0, -0.2],
                "mass_kg": 0.3,
                "com_m": [0.0, 0.0, -0.12],
                "inertia_kg_m2": [1.2e-3, 1.2e-3, 1e-4, 0.0, 0.0, 0.0],
                **motor,
            },
        ],
        "foot": {
            "xyz_m": [0.0, 0.0, -0.2],
            "radius_m": 0.02,
            "sensor_axis": [0.0, 0.0, 1.0],
            "distal_mass_kg": 0.12,
            "distal_com_m": [0.0, 0.0, -0.19],
        },
    }


def quadruped(**changes: Any) -> dict[str, Any]:
    """A four-legged robot of 18 kg with mirrored hips."""
    legs = {
        "front_left": (0.2, 0.06),
        "front_right": (0.2, -0.06),
        "rear_left": (-0.2, 0.06),
        "rear_right": (-0.2, -0.06),
    }
    content = {
        "robot_id": "test",
        "mass_kg": 18.0,
        "gravity_m_per_s2": 9.81,
        "leg": [quadruped_leg(name, x, y) for name, (x, y) in legs.items()],
    }
    return {**content, **changes}


def robot_of(content: dict[str, Any]) -> Robot:
    """Make a robot of a description's content, checked as a file is."""
    return Robot(RobotFile.model_validate(content), Path("robot.toml"))


def single(leg: dict[str, Any]) -> Robot:
    """Make a robot of 18 kg with one leg."""
    return robot_of({"robot_id": "test", "mass_kg": 18.0, "gravity_m_per_s2": 9.81, "leg": [leg]})


def random_leg(rng: np.random.Generator, joints: int) -> dict[str, Any]:
    """A chain with random axes, origins, masses and full inertia tensors."""

    def unit() -> list[float]:
        v = rng.normal(size=3)
        return [float(x) for x in v / np.linalg.norm(v)]

    def link(i: int) -> dict[str, Any]:
        spread = rng.normal(scale=0.05, size=(4, 3))
        weights = rng.uniform(0.1, 0.5, size=4)
        spread -= weights @ spread / weights.sum()
        tensor = sum(w * (r @ r * np.eye(3) - np.outer(r, r)) for w, r in zip(weights, spread, strict=True))
        return {
            "name": f"j{i}",
            "axis": unit(),
            "xyz_m": rng.uniform(-0.2, 0.2, 3).tolist(),
            "rpy_rad": rng.uniform(-1.5, 1.5, 3).tolist(),
            "mass_kg": float(weights.sum()),
            "com_m": rng.uniform(-0.1, 0.1, 3).tolist(),
            "inertia_kg_m2": [float(tensor[i]) for i in ((0, 0), (1, 1), (2, 2), (0, 1), (0, 2), (1, 2))],
        }

    foot = {"xyz_m": rng.uniform(-0.2, 0.2, 3).tolist(), "sensor_axis": unit(), "distal_mass_kg": 0.1}
    return {"name": "chain", "joint": [link(i) for i in range(joints)], "foot": foot}


def parsed(text: str) -> dict[str, Any]:
    """Return the content of TOML text."""
    return tomllib.loads(text)
