"""How long the examples take, and a million units of the Wien example; run by hand on an idle machine.

    python tests/benchmarks/bench_assess.py [--workers 2]

Prints wall seconds, processor seconds and the largest memory of any process of each run; figures with their machine go
into DEVELOPERS.md.
"""

from __future__ import annotations

import argparse
import os
import platform
import resource
import subprocess
import sys
import tempfile
import time
from pathlib import Path

ROOT = Path(__file__).parents[2]
RUNS = (
    ("tide_tone_1khz.xlsx", ()),
    ("beacon_3m85_colpitts.xlsx", ()),
    ("logger_clock_8mhz.xlsx", ()),
    ("tide_clock_32k768.xlsx", ()),
    ("tide_tone_1khz.xlsx", ("--units", "1000000")),
)


def measure(name: str, options: tuple[str, ...], workers: str) -> tuple[float, float, float]:
    """Wall [s], processor [s] and peak memory [MB] of one `assess` from the shell."""
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    started = time.perf_counter()
    with tempfile.TemporaryDirectory() as folder:
        command = [
            sys.executable, "-m", "yieldosc", "assess", str(ROOT / "bom_examples" / name), *options,
            "--workers", workers, "-o", str(Path(folder) / "result"), "--quiet",
        ]  # fmt: skip
        done = subprocess.run(command, capture_output=True, check=False, cwd=folder)
    if done.returncode not in (0, 1):
        raise SystemExit(done.stderr.decode())
    wall = time.perf_counter() - started
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    processor = after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime
    return wall, processor, after.ru_maxrss / 1024


def main() -> None:
    parser = argparse.ArgumentParser()
    parser.add_argument("--workers", default=str(os.cpu_count()))
    workers = parser.parse_args().workers
    print(f"{platform.machine()}, {os.cpu_count()} processors, Python {platform.python_version()}, {workers} workers")
    for name, options in RUNS:
        wall, processor, peak = measure(name, options, workers)
        label = " ".join((name, *options))
        print(f"{label:45s} {wall:6.1f} s wall {processor:6.1f} s processor {peak:6.0f} MB largest process so far")


if __name__ == "__main__":
    main()
