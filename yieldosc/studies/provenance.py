"""What a result must carry so that it can be made again."""

from __future__ import annotations

import sys
import time
from datetime import datetime
from importlib import metadata

from yieldosc.studies.results import Provenance
from yieldosc.study import Study


def versions() -> dict[str, str]:
    """Versions of everything that can change a digit."""
    found = {"python": sys.version.split()[0]}
    for package in ("yieldosc", "numpy", "scipy", "SALib"):
        try:
            found[package] = metadata.version(package)
        except metadata.PackageNotFoundError:
            found[package] = "not installed"
    return found


def provenance(
    study: Study, seed: int, started: datetime, clock: float, workers: int, *, audited: int = 0, disagreeing: int = 0,
    exact: int = 0,
) -> Provenance:  # fmt: skip
    """clock: of time.perf_counter at the start."""
    return Provenance(
        seed=seed,
        input_sha256=study.digest,
        versions=versions(),
        started=started.isoformat(timespec="seconds"),
        seconds=round(time.perf_counter() - clock, 3),
        workers=workers,
        audited=audited,
        disagreeing=disagreeing,
        exact=exact,
    )
