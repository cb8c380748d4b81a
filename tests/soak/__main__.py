"""`make soak`: the fault tests at length; a failure ends the run with its traceback."""

from __future__ import annotations

import signal
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
import pandas as pd
from rich.console import Console

from footcal.recipe.data import data_dir
from tests.drift.test_history import survive_kills

KILLS = 100
HOUR_ROWS = 600_000


def drift_writer_killed(folder: Path) -> str:
    """A history writer killed 100 times loses, doubles or halves no row."""
    survive_kills(folder, rounds=KILLS)
    return f"{KILLS} kills: no lost, doubled or half row"


def convert_killed(folder: Path) -> str:
    """`footcal convert` killed at random moments: the result is the old one or the new one, whole."""
    log = folder / "log.parquet"
    rng = np.random.default_rng(7)
    t_s = np.arange(HOUR_ROWS) * 0.001
    pd.DataFrame({"t_s": t_s, "raw": 9000 + 500 * np.sin(t_s), "temp_C": 22.0}).to_parquet(log)
    out = folder / "force.parquet"
    calibration = data_dir("calib_data") / "walk" / "LC-0417.cal.json"
    command = [sys.executable, "-c", "from footcal.cli.main import run; run()", "convert", str(calibration), str(log)]
    command += ["--out", str(out)]
    began = time.monotonic()
    subprocess.run(command, check=True, capture_output=True)
    lasts_s = time.monotonic() - began
    whole = len(pd.read_parquet(out))
    killed = 0
    for _ in range(40):
        process = subprocess.Popen(command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        time.sleep(rng.uniform(0.3, 1.0) * lasts_s)
        process.send_signal(signal.SIGKILL)
        killed += process.wait() == -signal.SIGKILL
        assert len(pd.read_parquet(out)) == whole
    return f"{killed} kills while converting: the result is always whole"


def main() -> None:
    """Run every soak in a folder of its own."""
    out = Console()
    for soak in (drift_writer_killed, convert_killed):
        with tempfile.TemporaryDirectory() as name:
            began = time.monotonic()
            out.print(f"{soak.__name__}: {soak(Path(name))} ({time.monotonic() - began:.0f} s)")


if __name__ == "__main__":
    main()
