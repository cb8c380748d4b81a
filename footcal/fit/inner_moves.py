"""Moves inside a settled window: a knock, a pull on the cable, a load still swinging; seen sample by sample.

A good window is a level with creep that is smooth in log time: nearly straight, a little bent. What is left after such
a curve, in short means, is compared with what is usual for windows of that kind.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final, Literal

import numpy as np

from footcal.fit.channel import Channel
from footcal.fit.robust import HUBER_K, robust_sd
from footcal.records import FloatArray, Hold, IntArray

SHORT_s: Final = 0.08  # means over this long
ENOUGH_TO_BEND: Final = 16
FEWEST: Final = 5  # short means that a window must have to be judged
BY_SCATTER: Final = 8.0
SMALLEST: Final = {"settled": 1e-3, "quick": 5e-3}  # of full scale: less is no fault
CREEP_ROUNDS: Final = 6

Shape = Literal["bump", "tug", "ringing"]


@dataclass(frozen=True, slots=True)
class Move:
    """The largest move inside one window."""

    size: float  # share of full scale, signed
    t_s: float  # session time at which it begins
    lasts_s: float
    shape: Shape


@dataclass(frozen=True, slots=True)
class _Window:
    t_s: FloatArray  # (m,) session time of the short means
    left: FloatArray  # (m,) what smooth creep does not explain
    noise: float  # of one short mean, from sample to sample, which slower moves hardly disturb


def moved_holds(channel: Channel, apparent: FloatArray, holds: Sequence[Hold], session_of: IntArray) -> dict[int, Move]:
    """Return the holds whose reading moved inside the window, with what it did.

    Args:
        channel: joined samples.
        apparent: apparent force over full scale at each sample, shape (n,).
        holds: in the times of their own session.
        session_of: session index of each hold.
    """
    windows: dict[int, _Window] = {}
    for index, hold in enumerate(holds):
        window = _window(channel, apparent, hold, float(channel.offset_s[session_of[index]]))
        if window is not None:
            windows[index] = window
    moved = {}
    for kind in ("settled", "quick"):
        mine = {i: w for i, w in windows.items() if (holds[i].kind == "quick") == (kind == "quick")}
        if not mine:
            continue
        usual = float(np.median([robust_sd(window.left) for window in mine.values()]))
        for index, window in mine.items():
            limit = max(BY_SCATTER * max(usual, window.noise), SMALLEST[kind])
            if np.max(np.abs(window.left)) > limit:
                moved[index] = _described(window, limit)
    return moved


def _window(channel: Channel, apparent: FloatArray, hold: Hold, offset_s: float) -> _Window | None:
    """Return short means of one window less smooth creep; None where there are too few."""
    t_s = channel.t_s
    first, last = np.searchsorted(t_s, [hold.t_start_s + offset_s, hold.t_end_s + offset_s])
    count = int((hold.t_end_s - hold.t_start_s) / SHORT_s)
    edges = np.unique(np.linspace(first, last, count + 1).astype(np.int64)) if count >= FEWEST else np.zeros(0, int)
    if len(edges) <= FEWEST:
        return None
    lengths = np.diff(edges)
    means = np.add.reduceat(apparent[: edges[-1]], edges[:-1]) / lengths
    times = np.add.reduceat(t_s[: edges[-1]], edges[:-1]) / lengths - offset_s
    left = means - _creep(np.log(np.maximum(times - hold.t_load_s, 0.05)), means)
    jitter = robust_sd(np.diff(apparent[first:last])) / float(np.sqrt(2.0 * np.median(lengths)))
    return _Window(times, left, jitter)


def _creep(x: FloatArray, y: FloatArray) -> FloatArray:
    """Return the robust curve of second degree through the points, straight where they are few, shape (m,)."""
    centred = (x - x.mean()) / max(float(np.ptp(x)), 1e-9)
    design = centred[:, None] ** np.arange(3 if len(x) >= ENOUGH_TO_BEND else 2)
    weight = np.ones(len(x))
    for _ in range(CREEP_ROUNDS):
        normal = (design * weight[:, None]).T @ design
        fit = design @ np.linalg.solve(normal, design.T @ (weight * y))
        sizes = np.abs(y - fit)
        weight = 1.0 / np.maximum(sizes, max(float(np.median(sizes)) / HUBER_K, 1e-9))
    return np.asarray(fit)


def _described(window: _Window, limit: float) -> Move:
    """Tell a knock that passes from a pull that stays and from a load that swings."""
    sizes = np.abs(window.left)
    peak = int(np.argmax(sizes))
    size = float(window.left[peak])
    beyond = np.flatnonzero(sizes > max(0.25 * abs(size), 0.5 * limit))
    signs = np.sign(window.left[beyond])
    step = float(np.median(np.diff(window.t_s)))
    begins, ends = float(window.t_s[beyond[0]]), float(window.t_s[beyond[-1]])
    lasts_s = ends - begins + step
    if np.count_nonzero(np.diff(signs)) >= 3:
        return Move(size, begins, lasts_s, "ringing")
    jumps = window.left[2:] - window.left[:-2]
    jump = int(np.argmax(np.abs(jumps)))
    before, after = window.left[: jump + 1], window.left[jump + 2 :]
    stays = abs(float(np.median(after)) - float(np.median(before))) > 0.4 * abs(size)
    if stays or lasts_s > 0.5 * float(window.t_s[-1] - window.t_s[0]):
        return Move(float(np.median(after) - np.median(before)), float(window.t_s[jump + 1]), lasts_s, "tug")
    return Move(size, begins, lasts_s, "bump")
