"""What the shift depends on beside the excess gain: the loop's slope at the zero-phase frequency and its response there
to the first harmonics. The harmonics' balance knows the network through H(jnω) only, so nothing else can matter.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from yieldosc.settle.prepared import Prepared

Array = NDArray[np.float64]
ODD_ORDERS = (3, 5)
ALL_ORDERS = (2, 3, 4)


def features(live: Prepared) -> Array:
    """(m, f): Re and Im of d ln H/d ln ω at ω_1, of H(jnω_1)/H(jω_1) for the first harmonics; mean and skew of unequal
    rails; of a current limiter the output's response too."""
    orders = np.array((1, *(ALL_ORDERS if live.even else ODD_ORDERS)))
    s = 1j * np.broadcast_to(orders, (len(live.rows), len(orders)))
    a, da, b, db = live.network.parts_at(np.asarray(s, dtype=np.complex128))
    h = b / a
    slope = (s * (db / b - da / a))[:, 0]
    ratio = h[:, 1:] / h[:, :1].real
    columns: list[Array] = [slope.real, slope.imag, *ratio.real.T, *ratio.imag.T]
    if live.even and not live.limiter.mean_fixed:
        mean = live.network.at(np.zeros((len(live.rows), 1), dtype=np.complex128))[:, 0].real
        columns += [mean / h[:, 0].real, live.skew]
    if not live.voltage:  # the output's own network shapes its distortion
        out = np.abs(live.network.output_at(np.asarray(s[:, :3], dtype=np.complex128)))
        columns += [*(out[:, 1:] / out[:, :1]).T]
    return np.stack(columns, axis=1)
