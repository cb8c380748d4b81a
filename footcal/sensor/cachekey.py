"""A number that changes whenever a compiled law changes, so that a cached kernel never outlives its source.

numba stamps its cache with the entry's own file only; an entry that closes over this number is compiled afresh when any
file of the named packages has changed.
"""

from __future__ import annotations

import hashlib
from importlib.util import find_spec
from pathlib import Path


def source_key(*packages: str) -> int:
    """Return 60 bits of the SHA-256 over all Python sources of the named packages, in sorted order.

    Args:
        packages: dotted names, such as "footcal.sensor"; only their own folder is read, not subpackages.
    """
    digest = hashlib.sha256()
    for package in packages:
        spec = find_spec(package)
        for folder in spec.submodule_search_locations if spec and spec.submodule_search_locations else []:
            for path in sorted(Path(folder).glob("*.py")):
                digest.update(path.name.encode() + b"\0" + path.read_bytes())
    return int(digest.hexdigest()[:15], 16)
