"""Contact against truth: right or wrong, how late, how often falsely, and whether the probability is honest."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.stats import chi2

from footcal.records import BoolArray, FloatArray, IntArray

NEAR_CHANGE_s = 0.005  # samples this near a true change count in one figure and not in the other
EARLY_s, LATE_s = 0.030, 0.150  # an estimated edge this much before or after a true one still belongs to it
TRUTH_N = 1.0  # truth without contact column: normal force above this (common practice, no source) ...
GAP_s, TOUCH_s = 0.012, 0.008  # ... gaps shorter than this closed, then touches shorter than that dropped


@dataclass(frozen=True, slots=True)
class Rate:
    """A count of rare events per minute with its exact two-sided 95 % limits (Poisson; Garwood 1936)."""

    count: int
    per_minute: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class Delays:
    """Estimated less true times of one kind of edge."""

    edges: int  # true edges
    matched: int
    median_ms: float  # of the decided output
    p95_ms: float
    event_median_ms: float  # of the interpolated event times


@dataclass(frozen=True, slots=True)
class Tenth:
    """One tenth of the probability scale."""

    samples: int
    mean_p: float
    observed: float  # share of samples truly in contact


@dataclass(frozen=True, slots=True)
class ContactScore:
    """All contact figures over all legs."""

    right_pct: float  # all samples
    right_outside_pct: float  # more than 5 ms from a true change
    right_known_pct: float  # where contact_known is 1
    known_pct: float
    false_contacts: Rate
    missed_contacts: Rate
    touchdown: Delays
    liftoff: Delays
    extra_edges_per_stance: float
    stances: int
    brier: float
    brier_hard: float
    reliability: tuple[Tenth, ...]


def poisson_rate(count: int, minutes: float) -> Rate:
    """Return a rate per minute with exact 95 % limits from the chi-squared quantiles."""
    low = 0.0 if count == 0 else float(chi2.ppf(0.025, 2 * count)) / 2.0
    return Rate(count, count / minutes, low / minutes, float(chi2.ppf(0.975, 2 * count + 2)) / 2.0 / minutes)


def intervals(contact: BoolArray) -> IntArray:
    """Return first sample and one past the last of every run of True, shape (k, 2)."""
    edges = np.diff(np.concatenate(([0], contact.astype(np.int8), [0])))
    return np.stack([np.flatnonzero(edges == 1), np.flatnonzero(edges == -1)], axis=1)


def contact_from_force(t_s: FloatArray, force_N: FloatArray) -> BoolArray:
    """Return contact from a true normal force, (n,): above 1 N, short gaps closed, then short touches dropped."""
    contact = force_N > TRUTH_N
    dt_s = float(np.median(np.diff(t_s))) if len(t_s) > 1 else 0.0
    for value, limit_s in ((False, GAP_s), (True, TOUCH_s)):
        for first, past in intervals(contact == value):
            inside = first > 0 and past < len(contact)
            if inside and (past - first) * dt_s < limit_s:
                contact[first:past] = not value
    return contact


def _edges(t_s: FloatArray, contact: BoolArray, *, rising: bool) -> FloatArray:
    change = np.diff(contact.astype(np.int8))
    return np.asarray(t_s[1:][change == (1 if rising else -1)])


def _match(true_s: FloatArray, found_s: FloatArray) -> FloatArray:
    """Return the time of the found edge that belongs to each true edge (the first one in reach), NaN where none."""
    out = np.full(len(true_s), np.nan)
    used = -1
    for k, t in enumerate(true_s):
        first = max(int(np.searchsorted(found_s, t - EARLY_s)), used + 1)
        if first < len(found_s) and found_s[first] <= t + LATE_s:
            out[k], used = found_s[first], first
    return out


def _delays(
    t_s: FloatArray, true: BoolArray, found: BoolArray, event: IntArray, t_event_s: FloatArray, *, rising: bool
) -> tuple[Delays, int]:
    """Return delays over legs, and how many found edges belong to no true one."""
    late: list[FloatArray] = []
    late_event: list[FloatArray] = []
    spare = 0
    for l in range(true.shape[1]):
        true_s = _edges(t_s, true[:, l], rising=rising)
        found_s = _edges(t_s, found[:, l], rising=rising)
        matched = _match(true_s, found_s)
        spare += len(found_s) - int(np.isfinite(matched).sum())
        late.append(matched - true_s)
        told_s = t_event_s[event[:, l] == (1 if rising else -1), l]
        late_event.append(_match(true_s, told_s) - true_s)
    ms, event_ms = 1e3 * np.concatenate(late), 1e3 * np.concatenate(late_event)
    good, good_event = ms[np.isfinite(ms)], event_ms[np.isfinite(event_ms)]
    return Delays(
        edges=len(ms),
        matched=len(good),
        median_ms=_or_nan(np.median, good),
        p95_ms=_or_nan(lambda values: np.quantile(values, 0.95), good),
        event_median_ms=_or_nan(np.median, good_event),
    ), spare


def _or_nan(law: object, values: FloatArray) -> float:
    return float(law(values)) if len(values) and callable(law) else float("nan")


def _near_change(t_s: FloatArray, true: BoolArray) -> BoolArray:
    """Return where a sample lies within 5 ms of a change of its own leg's truth."""
    near = np.zeros_like(true)
    for l in range(true.shape[1]):
        for edge_s in t_s[1:][np.diff(true[:, l].astype(np.int8)) != 0]:
            first, past = np.searchsorted(t_s, [edge_s - NEAR_CHANGE_s - 1e-9, edge_s + NEAR_CHANGE_s + 1e-9])
            near[first:past, l] = True
    return near


def _lonely(found: BoolArray, true: BoolArray, t_s: FloatArray) -> int:
    """Count runs of `found` that touch no run of `true` widened by the matching reach."""
    lonely = 0
    for l in range(found.shape[1]):
        spans = intervals(true[:, l])
        starts, ends = t_s[spans[:, 0]] - EARLY_s, t_s[spans[:, 1] - 1] + EARLY_s
        for first, past in intervals(found[:, l]):
            overlap = (starts <= t_s[past - 1]) & (ends >= t_s[first])
            lonely += int(not overlap.any())
    return lonely


def _reliability(p: FloatArray, true: BoolArray) -> tuple[Tenth, ...]:
    inside = (p > 0.05) & (p < 0.95)
    tenths = []
    for k in range(10):
        here = inside & (p >= k / 10) & (p < (k + 1) / 10)
        count = int(here.sum())
        tenths.append(
            Tenth(count, float(p[here].mean()) if count else np.nan, float(true[here].mean()) if count else np.nan)
        )
    return tuple(tenths)


def score_contact(
    t_s: FloatArray,
    true: BoolArray,
    found: BoolArray,
    known: BoolArray,
    p: FloatArray,
    events: tuple[IntArray, FloatArray],
) -> ContactScore:
    """Return all contact figures.

    Args:
        t_s: times, (n,), seconds.
        true: true contact, (n, legs).
        found: decided contact, (n, legs).
        known: where the decision claims to be one, (n, legs).
        p: probability of contact, (n, legs).
        events: event (n, legs) +1, -1 or 0, and its interpolated time (n, legs).
    """
    right, near = found == true, _near_change(t_s, true)
    minutes = max(float(t_s[-1] - t_s[0]), 1e-9) / 60.0
    stances = sum(len(intervals(true[:, l])) for l in range(true.shape[1]))
    touchdown, spare_on = _delays(t_s, true, found, *events, rising=True)
    liftoff, spare_off = _delays(t_s, true, found, *events, rising=False)
    return ContactScore(
        right_pct=100.0 * float(right.mean()),
        right_outside_pct=100.0 * float(right[~near].mean()),
        right_known_pct=100.0 * float(right[known].mean()) if known.any() else np.nan,
        known_pct=100.0 * float(known.mean()),
        false_contacts=poisson_rate(_lonely(found, true, t_s), minutes),
        missed_contacts=poisson_rate(_lonely(true, found, t_s), minutes),
        touchdown=touchdown,
        liftoff=liftoff,
        extra_edges_per_stance=(spare_on + spare_off) / max(stances, 1),
        stances=stances,
        brier=float(np.mean((p - true) ** 2)),
        brier_hard=float(np.mean(found != true)),
        reliability=_reliability(p, true),
    )
