"""100,000 units of a clipping Wien bridge at nine temperatures on two processes; run by hand on an idle machine.

    python tests/benchmarks/bench_settle.py [--units 100000] [--full]

Prints seconds, the residual of the fitted shift and what the limiter does to the median frequency. --full balances
every unit instead, at one temperature.
"""

from __future__ import annotations

import argparse
import time
from multiprocessing import Pool

import numpy as np

from yieldosc.circuits import registry
from yieldosc.settle.evaluator import SettlingEvaluator
from yieldosc.solver import make_evaluator

NOMINAL = {"R1": 1e4, "C1": 1e-8, "R2": 1e4, "C2": 1e-8, "RF": 22e3, "RG": 1e4, "GBW": 3e6, "VSAT": 12.0}
TOLERANCE = {"R": 0.01, "C": 0.05, "G": 0.3, "V": 0.05}
TEMPERATURES_C = np.linspace(-40.0, 85.0, 9)
BLOCK = 8192


def piece(job: tuple[int, int, bool]) -> tuple[float, float, int]:
    """(largest residual, median shift, units solved in full) of one block of units at every temperature."""
    number, count, full = job
    circuit = registry.build("wien_bridge", {"limiter": "clip"}, NOMINAL)
    evaluator = _evaluators.setdefault(
        full, SettlingEvaluator(circuit, NOMINAL, make_evaluator(circuit, NOMINAL), fitted=not full)
    )
    rng = np.random.default_rng([1, number])
    units = {k: v * (1 + TOLERANCE[k[0]] * rng.uniform(-1, 1, count)) for k, v in NOMINAL.items()}
    residual, shifts, in_full = 0.0, [], 0
    for temperature in TEMPERATURES_C[: 1 if full else None]:
        warm = {k: v * (1 + (30e-6 if k[0] == "C" else 1e-4 * (k[0] == "R")) * (temperature - 25)) for k, v in units.items()}
        solution = evaluator.solve(warm, float(temperature))
        residual = max(residual, solution.settling.residual)
        in_full += solution.settling.full
        shifts.append(np.median(solution.settled_hz / solution.frequency_hz - 1))
    return residual, float(np.median(shifts)), in_full


_evaluators: dict[bool, SettlingEvaluator] = {}


def main() -> None:
    options = argparse.ArgumentParser(description=__doc__)
    options.add_argument("--units", type=int, default=100_000)
    options.add_argument("--full", action="store_true")
    chosen = options.parse_args()
    sizes = [min(BLOCK, chosen.units - first) for first in range(0, chosen.units, BLOCK)]
    started = time.perf_counter()
    with Pool(2) as pool:
        found = pool.map(piece, [(k, size, chosen.full) for k, size in enumerate(sizes)], chunksize=1)
    seconds = time.perf_counter() - started
    corners = 1 if chosen.full else len(TEMPERATURES_C)
    print(f"{chosen.units} units × {corners} temperatures: {seconds:.1f} s")
    print(f"largest residual of the fit {max(f[0] for f in found):.1e}, median shift {np.median([f[1] for f in found]):.2e}")
    print(f"unit-corners solved in full: {sum(f[2] for f in found)}")


if __name__ == "__main__":
    main()
