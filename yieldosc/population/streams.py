"""Counter-based random streams: a digit depends on (seed, purpose, variable name, unit number) and on nothing else.

Philox4x64 (Salmon, Moraes, Dror, Shaw, "Parallel random numbers: as easy as 1, 2, 3", SC'11) keyed by SHA-256 of the
names, its counter set from the unit number. So rivals, upgrades and other processes share draws whatever the part
list, the block size or the number of workers.
"""

from __future__ import annotations

import hashlib

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
PER_COUNT = 4  # 64-bit words that one Philox4x64 counter value yields
SMALLEST = 2.0**-54  # stands for a drawn 0, so that u stays in the open interval (0, 1)


def uniforms(seed: int, purpose: str, name: str, start: int, count: int) -> Array:
    """u (count,) in (0, 1) of positions start … start + count − 1 of the stream (seed, purpose, name)."""
    first, skipped = divmod(start, PER_COUNT)
    generator = np.random.Generator(np.random.Philox(key=_key(seed, purpose, name), counter=first))
    u = generator.random(count + skipped)[skipped:]
    return np.maximum(u, SMALLEST, out=u)


def uniforms_at(seed: int, purpose: str, name: str, positions: NDArray[np.int64]) -> Array:
    """u (m,) at any positions (m,), in the order given; cost grows with the number of counts of 4,096 touched."""
    found = np.empty(len(positions))
    quantum = positions // 4096
    for q in np.unique(quantum):
        rows = quantum == q
        found[rows] = uniforms(seed, purpose, name, int(q) * 4096, 4096)[positions[rows] - q * 4096]
    return found


def small_seed(seed: int, purpose: str) -> int:
    """A non-zero 63-bit seed for a library that ignores seed 0 (SALib does)."""
    return (int(_key(seed, purpose, "")[0]) >> 1) | 1


def _key(seed: int, purpose: str, name: str) -> NDArray[np.uint64]:
    # The lengths are part of the message: ("a", "bc") and ("ab", "c") must not share a stream.
    message = f"{seed}\n{len(purpose)}\n{purpose}\n{name}".encode()
    return np.frombuffer(hashlib.sha256(message).digest()[:16], dtype="<u8").astype(np.uint64)
