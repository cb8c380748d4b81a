"""Where the ready recipes and the demo data lie: inside the installed package, or in the checkout."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

import footcal
from footcal.errors import FileFormatError


def data_dir(kind: Literal["recipes", "calib_data"]) -> Path:
    """Return the folder of the ready recipes or of the demo data.

    Raises:
        FileFormatError: neither the installed package nor the checkout holds it.
    """
    package = Path(footcal.__file__).resolve().parent
    for folder in (package / "_data" / kind, package.parent / kind):
        if folder.is_dir():
            return folder
    raise FileFormatError(
        where=str(package),
        what=f"the folder {kind!r} that comes with footcal is missing",
        mend="Install footcal again, or run it from a complete checkout.",
    )
