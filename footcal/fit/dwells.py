"""Dwells unlike the others: said in the notes, since creep then stands elsewhere; set aside only if they do not fit."""

from __future__ import annotations

from typing import Final

import numpy as np

from footcal.fit.inputs import FitInput

UNLIKE: Final = 2.0  # times longer or shorter than the median
MOST_NAMED: Final = 5


def odd_dwells(data: FitInput) -> list[str]:
    """Return one note a kind of step, naming session steps whose dwell is far from the others' of that kind."""
    notes = []
    for kind in sorted({hold.kind for hold in data.holds} - {"quick"}):
        mine = [i for i, hold in enumerate(data.holds) if hold.kind == kind]
        dwell_s = np.array([data.holds[i].t_end_s - data.holds[i].t_load_s for i in mine])
        usual_s = float(np.median(dwell_s))
        odd = np.flatnonzero((dwell_s > UNLIKE * usual_s) | (dwell_s < usual_s / UNLIKE))
        if len(odd) == 0 or len(odd) > 0.25 * len(mine):  # many are a plan, not a slip
            continue
        named = [_named(data, mine[k], float(dwell_s[k])) for k in odd[:MOST_NAMED]]
        more = f" and {len(odd) - MOST_NAMED} more" if len(odd) > MOST_NAMED else ""
        notes.append(f"{kind} steps stood {usual_s:.1f} s as a rule, but {', '.join(named)}{more}")
    return notes


def _named(data: FitInput, index: int, dwell_s: float) -> str:
    hold = data.holds[index]
    session = f"{data.sessions[data.session_of[index]].name} " if len(data.sessions) > 1 else ""
    return f"{session}step {hold.step} at {hold.t_start_s:.1f} s stood {dwell_s:.1f} s"
