"""From holds and pump recordings to rows: short stretches of samples, each with the force that was on the foot."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from footcal.errors import SessionError
from footcal.fit.channel import Channel
from footcal.records import NS_PER_S, BoolArray, FloatArray, Hold, IntArray

BINS_PER_HOLD = 6  # evenly spaced in log time, because creep inside a dwell is information
QUICK_WEIGHT = 0.75
PUMP_WEIGHT_PER_S = 8.0
PUMP_ROW_S = 0.01
PUMP_BLOCK_S = 5.0
LEVEL_SHARE = 0.01  # loads nearer than this share of full scale are one level


@dataclass(frozen=True, slots=True)
class Rows:
    """What is fitted. All arrays have shape (rows,); rows are in order of time."""

    start: IntArray  # first sample
    stop: IntArray  # one past the last
    target: FloatArray  # force over full scale
    weight: FloatArray
    hold: IntArray  # index into the holds; PUMP or SWING (robust.py) for moving data
    cycle: IntArray  # group of cycles, -1 where none
    level: IntArray  # group of load levels, -1 where it is not left out (zero, the top load, pump)
    block: IntArray  # group of pump blocks, -1 for holds
    quick: IntArray  # 1 for loads whisked on or off

    @property
    def pump(self) -> BoolArray:
        """Which rows are pump samples."""
        return self.hold < 0

    def without_holds(self, holds: set[int]) -> Rows:
        """Return the rows less those of the holds named."""
        return self.kept(~np.isin(self.hold, sorted(holds)) | self.pump)

    def kept(self, keep: BoolArray) -> Rows:
        """Return the rows marked, `keep` of shape (rows,)."""
        return Rows(*(getattr(self, name)[keep] for name in self.__slots__))


def hold_rows(channel: Channel, holds: list[Hold], session_of: IntArray, capacity_N: float) -> Rows:
    """Return the rows of all holds, six a hold where there are samples enough.

    Args:
        channel: joined samples.
        holds: in the times of their own session.
        session_of: session index of each hold, shape (holds,).
        capacity_N: full scale.

    Raises:
        SessionError: no hold has a sample in its window.
    """
    t_s = channel.t_s
    found: list[tuple[int, int, int]] = []
    for index, hold in enumerate(holds):
        offset_s = channel.offset_s[session_of[index]]
        edges_s = _log_edges(hold) + offset_s
        edges = np.searchsorted(t_s, edges_s)
        edges[-1] = np.searchsorted(t_s, hold.t_end_s + offset_s, side="right")
        found += [(index, int(a), int(b)) for a, b in pairwise(edges) if b > a]
    if not found:
        raise SessionError("steps.csv", "no step has a reading in its window", "Check the times of steps and readings.")
    found.sort(key=lambda item: item[1])
    hold_index, start, stop = (np.array(column, dtype=np.int64) for column in zip(*found, strict=True))
    target = np.array([holds[i].load_N for i in hold_index]) / capacity_N
    weight = np.array([QUICK_WEIGHT if holds[i].kind == "quick" else 1.0 for i in hold_index])
    return Rows(
        start=start,
        stop=stop,
        target=target,
        weight=weight,
        hold=hold_index,
        cycle=_cycle_groups(channel, holds, session_of)[hold_index],
        level=_level_groups(holds, capacity_N)[hold_index],
        block=np.full(len(start), -1),
        quick=np.array([int(holds[i].kind == "quick") for i in hold_index]),
    )


def _log_edges(hold: Hold) -> FloatArray:
    """Edges of the bins of one hold, evenly spaced in log time since the load stopped moving."""
    first_s = max(hold.t_start_s - hold.t_load_s, 0.15)
    last_s = max(hold.t_end_s - hold.t_load_s, first_s * 1.001)
    edges = hold.t_load_s + np.geomspace(first_s, last_s, BINS_PER_HOLD + 1)
    edges[0] = hold.t_start_s
    return np.maximum.accumulate(np.clip(edges, hold.t_start_s, hold.t_end_s))


def _cycle_groups(channel: Channel, holds: list[Hold], session_of: IntArray) -> IntArray:
    """One group a cycle of one session and temperature set; a set with a single cycle is folded by steps instead."""
    gaps = np.flatnonzero(np.diff(channel.t_ns) > 60 * NS_PER_S)
    starts_s = channel.t_s[gaps + 1]
    times_s = np.array([hold.t_start_s for hold in holds]) + channel.offset_s[session_of]
    sets = np.searchsorted(starts_s, times_s, side="right")
    keys = [(int(sets[i]), hold.cycle if hold.kind != "quick" else -1) for i, hold in enumerate(holds)]
    cycles_in_set = {number: len({key[1] for key in keys if key[0] == number}) for number in set(sets.tolist())}
    folded = [key if cycles_in_set[key[0]] > 1 else (key[0], 1000 + i % 5) for i, key in enumerate(keys)]
    numbers = {key: number for number, key in enumerate(dict.fromkeys(folded))}
    return np.array([numbers[key] for key in folded])


def _level_groups(holds: list[Hold], capacity_N: float) -> IntArray:
    """One group a load level; zero and the highest load stay in every fit, since leaving them out extrapolates."""
    levels = np.array([round(hold.load_N / (LEVEL_SHARE * capacity_N)) for hold in holds])
    zero = np.array([hold.direction == "zero" for hold in holds])
    loaded = np.unique(levels[~zero])
    groups = np.searchsorted(loaded, levels)
    return np.where(zero | (levels == loaded[-1]), -1, groups)


def join_rows(parts: list[Rows]) -> Rows:
    """Return several sets of rows as one, in order of time; rows of one may not overlap those of another."""
    order = np.argsort(np.concatenate([part.start for part in parts]), kind="stable")
    return Rows(*(np.concatenate([getattr(part, name) for part in parts])[order] for name in Rows.__slots__))


def pump_rows(channel: Channel, windows_s: list[tuple[float, float]], ref_N: FloatArray, capacity_N: float) -> Rows:
    """Return rows of some 10 ms over stretches where a reference cell gives the force.

    Args:
        channel: joined samples.
        windows_s: stretches in channel time, seconds.
        ref_N: reference force at each sample, shape (n,), aligned; NaN where unknown.
        capacity_N: full scale.
    """
    t_s = channel.t_s
    starts: list[IntArray] = []
    stops: list[IntArray] = []
    blocks: list[IntArray] = []
    for first_s, last_s in windows_s:
        edges = np.unique(np.searchsorted(t_s, np.arange(first_s, last_s + PUMP_ROW_S, PUMP_ROW_S)))
        starts.append(edges[:-1])
        stops.append(edges[1:])
        base = int(blocks[-1][-1]) + 1 if blocks else 0
        blocks.append(base + ((t_s[edges[:-1]] - first_s) // PUMP_BLOCK_S).astype(np.int64))
    start, stop, block = np.concatenate(starts), np.concatenate(stops), np.concatenate(blocks)
    sums = np.concatenate([[0.0], np.cumsum(np.nan_to_num(ref_N))])
    known = np.concatenate([[0], np.cumsum(np.isfinite(ref_N))])
    count = known[stop] - known[start]
    keep = count == stop - start
    start, stop, block = start[keep], stop[keep], block[keep]
    if len(start) == 0:
        none = np.zeros(0, dtype=np.int64)
        return Rows(none, none, np.zeros(0), np.zeros(0), none, none, none, none, none)
    span_s = float(np.sum(t_s[stop - 1] - t_s[start])) + PUMP_ROW_S * len(start)
    weight = np.full(len(start), PUMP_WEIGHT_PER_S * min(span_s, PUMP_ROW_S * len(start)) / len(start))
    minus = np.full(len(start), -1)
    target = (sums[stop] - sums[start]) / (stop - start) / capacity_N
    return Rows(start, stop, target, weight, minus, minus, minus, block, np.zeros(len(start), dtype=np.int64))
