"""Choice of terms by data left out: a term stays only if it lowers the left-out error by more than 3 %."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from footcal.errors import FitRefusedError
from footcal.fit.channel import Channel
from footcal.fit.leave_out import LeftOut, leave_out
from footcal.fit.passes import Fitted, Reading, fit_terms
from footcal.fit.rows import Rows
from footcal.fit.shape import check_shape
from footcal.fit.terms import Terms

GAIN: Final = 0.03
DIVIDER_POWERS: Final = (1.0, 0.7, 0.5, 0.35)
DIVIDER_POWERS_SLOW_ONLY: Final = (0.5, 0.35)  # without quick reference data the others mislead
DEGREES: Final = {"cell": (1, 2, 3), "resistive": (3, 4, 5), "magnetic": (3, 4, 5), "capacitive": (3, 4, 5)}

RICHER: Final[tuple[dict[str, bool], ...]] = ({"plays_by_load": True}, {"creep_by_temperature": True})
SIMPLER: Final[tuple[dict[str, bool], ...]] = (
    {"curved_temperature": False},
    {"plays": False, "plays_by_load": False},
    {"creep": False, "creep_by_temperature": False},
)


@dataclass(frozen=True, slots=True)
class Candidate:
    """One choice of terms with its left-out errors."""

    fitted: Fitted
    left_out: LeftOut

    def error_against(self, reference: Candidate) -> float:
        """Return the left-out errors over those of another candidate: root mean square over the leave-outs."""
        ratios = [
            (mine / max(theirs, 1e-9)) ** 2
            for mine, theirs in zip(self.left_out.all_percent(), reference.left_out.all_percent(), strict=True)
            if mine is not None and theirs is not None
        ]
        return float(np.sqrt(np.mean(ratios))) if ratios else 1.0


def choose_terms(
    channel: Channel,
    reading: Reading,
    rows: Rows,
    *,
    kind: str,
    levels: int,
    temperatures: int,
    on_try: Callable[[Terms], None] = lambda _: None,
) -> Candidate:
    """Return the candidate whose terms all earn their place.

    Args:
        channel: joined samples.
        reading: ratio and temperature at each sample.
        rows: what is fitted.
        kind: cell, resistive, magnetic, capacitive.
        levels: number of different loads, zero included; the degree stays two below.
        temperatures: number of different temperatures; two give straight terms, three allow curvature.
        on_try: called before each candidate (progress).

    Raises:
        FitRefusedError: no candidate can be fitted, or none rises with the reading everywhere.
    """
    refusals: list[FitRefusedError] = []

    def evaluate(terms: Terms) -> Candidate | None:
        on_try(terms)
        try:
            fitted = fit_terms(channel, reading, rows, terms)
            check_shape(fitted, "fit")
        except FitRefusedError as error:
            refusals.append(error)
            return None
        return Candidate(fitted, leave_out(fitted, rows))

    best: Candidate | None = None
    for terms in _starting_terms(kind, levels, temperatures, has_pump=_moves_under_load(rows)):
        trial = evaluate(terms)
        best = trial if best is None else _better(best, trial)
    if best is None:
        raise refusals[-1]
    for more in RICHER:
        richer = replace(best.fitted.terms, **more)
        if richer.active().sum() > best.fitted.terms.active().sum():
            best = _better(best, evaluate(richer))
    for less in SIMPLER:
        poorer = replace(best.fitted.terms, **less)
        trial = None if poorer == best.fitted.terms else evaluate(poorer)
        if trial is not None and trial.error_against(best) < 1.0 / (1.0 - GAIN):
            best = trial
    return best


def _moves_under_load(rows: Rows) -> bool:
    """Whether quick reference data tell of loads as well, not only of swings."""
    return bool(rows.pump.any()) and bool(rows.target[rows.pump].max() > 0.3 * rows.target.max())


def _better(best: Candidate, trial: Candidate | None) -> Candidate:
    """The richer trial must win by more than 3 %."""
    if trial is None:
        return best
    return trial if trial.error_against(best) < 1.0 - GAIN else best


def _starting_terms(kind: str, levels: int, temperatures: int, *, has_pump: bool) -> Iterator[Terms]:
    degrees = [degree for degree in DEGREES[kind] if degree <= max(levels - 2, 1)] or [max(levels - 2, 1)]
    powers: tuple[float, ...] = (1.0,)
    if kind == "resistive":
        powers = DIVIDER_POWERS if has_pump else DIVIDER_POWERS_SLOW_ONLY
    for gamma in powers:
        for degree in degrees:
            yield Terms(degree, gamma, temperature=temperatures > 1, curved_temperature=temperatures > 2)
