"""Interleaved timing: the medians of two pieces of code measured in turn, in thread CPU time."""

from __future__ import annotations

import time
from collections.abc import Callable

import numpy as np

Work = Callable[[], object]


def medians_s(works: list[Work], repeats: int = 9) -> list[float]:
    """Return the median thread CPU time of each work, measured in turn so that the machine's moods hit all alike."""
    times: list[list[float]] = [[] for _ in works]
    for work in works:
        work()  # warm: compile, caches
    for _ in range(repeats):
        for number, work in enumerate(works):
            before = time.thread_time()
            work()
            times[number].append(time.thread_time() - before)
    return [float(np.median(one)) for one in times]
