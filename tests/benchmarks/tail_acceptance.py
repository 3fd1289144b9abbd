"""Acceptance of small rates, run by hand: python tests/benchmarks/tail_acceptance.py [seeds] [part of a case's name].

Prints, per case, how many seeds are within 20 %, how many intervals cover, the pooled coverage and the slowest seed.
"""

from __future__ import annotations

import importlib.util
import sys
import time
from pathlib import Path

import numpy as np

from yieldosc.studies.tail import small_rate

spec = importlib.util.spec_from_file_location(
    "cases", Path(__file__).parents[1] / "studies" / "tail" / "test_small_rates.py"
)
cases = importlib.util.module_from_spec(spec)
spec.loader.exec_module(cases)


def rows():
    """Every case: the normal tests' and those of the rare-event literature, name → (g, dimension, exact)."""
    found = dict(cases.CASES)
    for sides in range(2, 11):
        found[f"box corner of {sides}"] = (cases.box_corner(sides), sides, 1e-9)
        found[f"box corner of {sides}, 36 idle"] = (cases.box_corner(sides), sides + 36, 1e-9)
    # RP22, RP31, RP33, RP63, RP75, RP111: exact values by quadrature, the printed ones are up to 5 % off.
    found["RP22"] = (
        lambda z: 2.5 - (z[:, 0] + z[:, 1]) / np.sqrt(2) + 0.1 * (z[:, 0] - z[:, 1]) ** 2, 2, 4.207305511e-3,
    )  # fmt: skip
    found["RP31"] = (lambda z: 2 - z[:, 1] + 256 * z[:, 0] ** 4, 2, 3.226681210e-3)
    found["RP33"] = (lambda z: np.minimum(3 * np.sqrt(3) - z.sum(axis=1), 3 - z[:, 2]), 3, 2.575598e-3)
    found["RP63"] = (lambda z: 0.1 * (z[:, 1:] ** 2).sum(axis=1) - z[:, 0] - 4.5, 100, 3.769436e-4)
    found["RP75"] = (lambda z: 3 - z[:, 0] * z[:, 1], 2, 9.819298722e-3)
    found["RP111"] = (lambda z: 12.5 - np.abs(z[:, 0] * z[:, 1]), 2, 8.035086e-7)
    return found


def main() -> None:
    seeds = int(sys.argv[1]) if len(sys.argv) > 1 else 100
    part = sys.argv[2] if len(sys.argv) > 2 else ""
    covered_of_all = runs = 0
    for name, (g, dimension, exact) in rows().items():
        if part not in name:
            continue
        near = covered = flagged = 0
        slowest = 0.0
        for seed in range(seeds):
            began = time.perf_counter()
            found = small_rate(g, dimension, seed=seed, name=name)
            slowest = max(slowest, time.perf_counter() - began)
            near += abs(found.probability / exact - 1) < 0.2
            covered += found.low <= exact <= found.high
            flagged += bool(found.flags)
        covered_of_all, runs = covered_of_all + covered, runs + seeds
        print(f"{name:24} {near:3}/{seeds} near {covered:3} covered {flagged:3} flagged {slowest:5.1f} s", flush=True)
    print(f"pooled coverage {covered_of_all / max(runs, 1):.3f} of {runs}")


if __name__ == "__main__":
    main()
