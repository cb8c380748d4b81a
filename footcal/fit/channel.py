"""One foot's raw signal over all sessions that are fitted together: joined in time, lone spikes taken out."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from footcal.files.session import Session
from footcal.records import NS_PER_S, BoolArray, FloatArray, IntArray
from footcal.sensor.creep import lagged

SESSION_GAP_S = 120.0  # put between joined sessions, so that creep and loop start afresh
THERMOMETER_LAG_S = 30.0  # the sensing element follows its thermometer this slowly (common practice, no source)


@dataclass(frozen=True, slots=True)
class Channel:
    """Clean samples of one foot on one time axis."""

    t_ns: IntArray  # (n,) rising
    raw: FloatArray  # (n,) counts
    temp_C: FloatArray  # (n,) of the sensing element; NaN where there is no thermometer
    ref_N: FloatArray  # (n,) reference cell sampled alongside; NaN where there is none
    session: IntArray  # (n,) index of the session
    offset_s: FloatArray  # (sessions,) channel time = session time + offset
    spikes_s: tuple[tuple[int, float], ...]  # (session, session time) of each sample taken out

    @property
    def t_s(self) -> FloatArray:
        """Channel time, shape (n,), seconds."""
        return np.asarray(self.t_ns * 1e-9)

    @property
    def has_temperature(self) -> bool:
        """Whether every sample has a temperature."""
        return bool(np.isfinite(self.temp_C).all())


def lone_spikes(raw: FloatArray) -> BoolArray:
    """Mark single samples far from both neighbours while these agree (a flipped bit, a bad frame), shape (n,).

    A sample is marked when it differs from both neighbours, to the same side, by more than twelve times the robust
    noise, by more than a count, and by more than five times what the three samples on either side move from one to the
    next; so the overshoot of a weight set down is none.
    """
    marked = np.zeros(len(raw), dtype=bool)
    if len(raw) < 9:
        return marked
    moves = np.diff(raw)
    left, right = moves[3:-4], -moves[4:-3]  # of samples 4 to n - 5 against their neighbours
    smaller = np.minimum(np.abs(left), np.abs(right))
    noise = 1.4826 * float(np.median(np.abs(moves))) / np.sqrt(2.0)
    sizes = np.abs(moves)
    before = np.max([sizes[k : k + len(left)] for k in range(3)], axis=0)
    after = np.max([sizes[k : k + len(left)] for k in range(5, 8)], axis=0)
    across = np.abs(raw[5:-3] - raw[3:-5])
    around = np.maximum(np.maximum(before, after), across)
    marked[4:-4] = (left * right > 0.0) & (smaller > max(12.0 * noise, 1.5)) & (smaller > 5.0 * around)
    return marked


def _smoothed_temperature(t_ns: IntArray, temp_C: FloatArray) -> FloatArray:
    """Fill gaps between thermometer readings and let the sensing element follow them; all NaN stays NaN."""
    known = np.isfinite(temp_C)
    if not known.any():
        return temp_C
    filled = np.interp(t_ns, t_ns[known], temp_C[known])
    return lagged(t_ns, filled, THERMOMETER_LAG_S)


def join(sessions: list[Session]) -> Channel:
    """Return the samples of all sessions on one time axis, spikes and empty readings left out."""
    t_ns, raw, temp, ref, index, offsets, spikes = [], [], [], [], [], [], []
    start_s = 0.0
    for number, session in enumerate(sessions):
        good = np.isfinite(session.raw)
        t_s, values = session.t_s[good], session.raw[good]
        bad = lone_spikes(values)
        spikes += [(number, float(t)) for t in t_s[bad]]
        offset_s = start_s - float(t_s[0])
        times = np.rint((t_s[~bad] + offset_s) * NS_PER_S).astype(np.int64)
        t_ns.append(times)
        raw.append(values[~bad])
        temp.append(_smoothed_temperature(times, session.temp_C[good][~bad]))
        ref.append(np.full(len(times), np.nan) if session.ref_N is None else session.ref_N[good][~bad])
        index.append(np.full(len(times), number))
        offsets.append(offset_s)
        start_s = float(times[-1]) * 1e-9 + SESSION_GAP_S
    joined = np.concatenate(temp)
    if not np.isfinite(joined).all():  # one session without thermometer: no temperature terms at all
        joined = np.full(joined.shape, np.nan)
    return Channel(
        t_ns=np.concatenate(t_ns),
        raw=np.concatenate(raw),
        temp_C=joined,
        ref_N=np.concatenate(ref),
        session=np.concatenate(index),
        offset_s=np.array(offsets),
        spikes_s=tuple(spikes),
    )
