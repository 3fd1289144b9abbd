"""Direct integration of an op-amp circuit that clips, from equations written by hand.

The op-amp is an integrator whose output stands still at a rail while its input pushes it further. Between those
moments the equations are linear: x' = M x, and with the output's row of M set to zero at a rail.
"""

from __future__ import annotations

import numpy as np
from scipy.integrate import solve_ivp


def wien(r1, c1, r2, c2, rf, rg, gbw):
    """States: C1, C2, output. The current i = (v_q − v_1 − v_2)/R1 flows through C1 into C2 ∥ R2."""
    n, w = 1 + rf / rg, 2 * np.pi * gbw
    i = np.array([-1.0, -1.0, 1.0]) / r1
    return np.array([i / c1, (i - np.array([0, 1 / r2, 0])) / c2, [0, w, -w / n]])


def inverting(node, width, rin, rf, gbw):
    """Row of the output: v_q' = −2π GBW v_m, v_m between the amplifier's input node and the output."""
    row = -2 * np.pi * gbw * rf / (rin + rf) * np.asarray(node, dtype=float)
    row[width - 1] -= 2 * np.pi * gbw * rin / (rin + rf)
    return row


def lead(r, c, rin, rf, gbw):
    """States: C1, C2, C3, output. Three series capacitors; resistors r at the first two nodes, RIN + RF at the third."""
    q = np.array([0.0, 0.0, 0.0, 1.0])
    a = q - np.array([1.0, 0, 0, 0])
    b = a - np.array([0, 1.0, 0, 0])
    g = b - np.array([0, 0, 1.0, 0])
    i3 = (g - q) / (rin + rf)
    i2 = b / r + i3
    i1 = a / r + i2
    return np.array([i1 / c, i2 / c, i3 / c, inverting(g, 4, rin, rf, gbw)])


def lag(r, c, rin, rf, gbw):
    """States: the three capacitors to ground, output."""
    a, b, g, q = np.eye(4)
    i1, i2, i3, out = (q - a) / r, (a - b) / r, (b - g) / r, (g - q) / (rin + rf)
    return np.array([(i1 - i2) / c, (i2 - i3) / c, (i3 - out) / c, inverting(g, 4, rin, rf, gbw)])


def colpitts(ro, c1, inductance, c2, rin, rf, gbw):
    """States: v_o, coil current from o to g, v_g, output."""
    o, coil, g, q = np.eye(4)
    return np.array(
        [
            ((q - o) / ro - coil) / c1,
            (o - g) / inductance,
            (coil - (g - q) / (rin + rf)) / c2,
            inverting(g, 4, rin, rf, gbw),
        ]
    )


def _run(matrix, guess_hz, high, low, periods):
    """Times at which the lower rail was reached, and the pieces (start, end, dense solution) of the run."""
    clamped = matrix.copy()
    clamped[-1] = 0.0

    def reaches_high(t, x):
        return x[-1] - high

    def reaches_low(t, x):
        return x[-1] + low

    def turns_back(t, x):
        return float(matrix[-1] @ x)

    reaches_high.terminal = reaches_low.terminal = turns_back.terminal = True
    reaches_high.direction, reaches_low.direction = 1, -1
    x = np.full(len(matrix), -high)
    x[-1] = 0.9 * high
    t, at_rail, rising, bottoms, pieces = 0.0, False, 1.0, [], []
    while t < periods / guess_hz:
        turns_back.direction = -rising
        flow = clamped if at_rail else matrix
        run = solve_ivp(
            lambda _, v, flow=flow: flow @ v,
            (t, t + 100 / guess_hz),
            x,
            method="LSODA",
            jac=lambda _, v, flow=flow: flow,
            events=(turns_back,) if at_rail else (reaches_high, reaches_low),
            dense_output=True,
            rtol=1e-8,
            atol=1e-10,
        )
        assert run.status == 1, "no switching within a hundred periods"
        pieces.append((t, float(run.t[-1]), run.sol))
        t, x = float(run.t[-1]), run.y[:, -1].copy()
        at_rail = not at_rail
        if at_rail:
            rising = 1.0 if x[-1] > 0 else -1.0
            x[-1] = high if rising > 0 else -low
            if rising < 0:
                bottoms.append(t)
    assert abs((bottoms[-1] - bottoms[-2]) / (bottoms[-2] - bottoms[-3]) - 1) < 1e-5, "not settled yet"
    return bottoms, pieces


def settled(matrix, guess_hz, *, high=1.0, low=1.0, periods=60):
    """Frequency [Hz] after so many periods; the output is the last state, its rails +high and −low, the lower reached in any case."""
    bottoms, _ = _run(matrix, guess_hz, high, low, periods)
    return 1 / (bottoms[-1] - bottoms[-2])


def fundamentals(matrix, guess_hz, *, high, low, watch, periods=60):
    """Peak fundamental of the watched states over the last period, by the trapezoid rule."""
    bottoms, pieces = _run(matrix, guess_hz, high, low, periods)
    begin, period = bottoms[-2], bottoms[-1] - bottoms[-2]
    times = begin + period * (np.arange(4000) + 0.5) / 4000
    states = np.zeros((len(times), len(matrix)))
    for start, end, flow in pieces:
        inside = (times >= start) & (times < end)
        if inside.any():
            states[inside] = flow(times[inside]).T
    turn = np.exp(-2j * np.pi * (times - begin) / period)
    return tuple(float(abs(2 * np.mean(states[:, k] * turn))) for k in watch)
