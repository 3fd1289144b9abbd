"""Harmonic balance: ω and V_n with V_n = H(jnω) U_n, n = 0 … N, where u = f(v) and V_1 is real.

Newton on ln ω and the harmonics, all units at once. With x(t) = Re Σ X_n e^{jnt} and G_p the Fourier coefficients of
f'(x(t)):  dU_m = G_{m−k} dX_k + G_{m+k} dX_k*  (Kundert & Sangiovanni-Vincentelli 1986 for the method, from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.settle.limiter import Limiter
from yieldosc.settle.linear import newton_step
from yieldosc.settle.transfer import Response

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Mask = NDArray[np.bool_]
MOST_STEPS = 25
SETTLED_STEP = 1e-6  # step of shift and amplitudes below which a unit stands still: the next would be its square
MOST_SAMPLES = 65536
LARGEST_STEP = 0.3  # in ln ω, and in amplitude over X_1: a longer step is shortened


@dataclass(frozen=True, slots=True)
class Wave:
    """shift (n,) = ln(ω/ω_1) against the zero-phase frequency; X_n (n, k) at the limiter's input, n as in `orders`."""

    shift: Array
    x: ComplexArray
    orders: NDArray[np.int64]
    converged: Mask

    def take(self, rows: NDArray[np.intp]) -> Wave:
        """The same for some of the units."""
        return Wave(self.shift[rows], self.x[rows], self.orders, self.converged[rows])

    def widened(self, orders: NDArray[np.int64]) -> Wave:
        """The same wave with room for more harmonics, those new ones zero."""
        x = np.zeros((len(self.x), len(orders)), dtype=np.complex128)
        x[:, np.searchsorted(orders, self.orders)] = self.x
        return Wave(self.shift, x, orders, self.converged)


def orders_up_to(most: int, *, odd: bool, mean: bool) -> NDArray[np.int64]:
    """1, 3, 5 … for an odd limiter, else 1, 2, 3 … with 0 in front where the mean is free to move."""
    if odd:
        return np.arange(1, most + 1, 2)
    return np.arange(0 if mean else 1, most + 1)


def samples_for(most: int, limiter: Limiter, level: Array) -> NDArray[np.int64]:
    """Points per period (n,), powers of two, for harmonics up to `most` of waves of these amplitudes.

    The harder a limiter is driven, the steeper are its edges.
    """
    least = max(64, 4 * (most + 1)) if limiter.smooth else max(256, 8 * (most + 1))
    wanted = np.clip(limiter.samples_per_level * level, least, MOST_SAMPLES)
    return np.asarray(2 ** np.ceil(np.log2(wanted)), dtype=np.int64)


def spectrum(
    limiter: Limiter,
    x: ComplexArray,
    orders: NDArray[np.int64],
    skew: Array,
    points: NDArray[np.int64],
    wanted: NDArray[np.int64],
) -> ComplexArray:
    """U_n of the limiter's output for the wanted orders; peak values, the mean for order 0. points: (n,)."""
    out = np.empty((len(x), len(wanted)), dtype=np.complex128)
    for count in np.unique(points):
        rows = np.flatnonzero(points == count)
        samples = _samples(x[rows], orders, int(count))
        y, _ = limiter.respond(samples, skew[rows, None])
        if limiter.corners is not None:
            y = y + limiter.corners(samples, skew[rows, None])
        out[rows] = _harmonics(y, wanted)
    return out


def _samples(x: ComplexArray, orders: NDArray[np.int64], points: int) -> Array:
    half = np.zeros((len(x), points // 2 + 1), dtype=np.complex128)
    half[:, orders] = np.where(orders == 0, x, x / 2)
    return np.fft.irfft(half, points, axis=1, norm="forward")


def _harmonics(y: Array, orders: NDArray[np.int64]) -> ComplexArray:
    u = np.fft.rfft(y, axis=1, norm="forward")[:, orders]
    return np.where(orders == 0, u, 2 * u)


def balance(limiter: Limiter, network: Response, start: Wave, skew: Array, points: int) -> Wave:
    """Newton from `start` with so many points per period; units that do not converge keep the last estimate and say so.

    Cost per step and unit: one real system of twice the number of harmonics, and three transforms.
    """
    n, orders = len(start.x), start.orders
    shift, x = start.shift.copy(), start.x.copy()
    converged = np.zeros(n, dtype=bool)
    active = np.arange(n)
    for _ in range(MOST_STEPS):
        length = _step(limiter, network, shift, x, orders, skew, points, active, corners=False)
        done = length <= SETTLED_STEP
        converged[active[done]] = True
        active = active[~done & np.isfinite(length)]
        if not active.size:
            break
    if limiter.corners is not None:
        # once, at the end: it is small, and its own derivative, left out, could keep Newton from settling
        _step(limiter, network, shift, x, orders, skew, points, np.flatnonzero(converged), corners=True)
    return Wave(shift, x, orders, converged)


def _step(
    limiter: Limiter,
    network: Response,
    shift: Array,
    x: ComplexArray,
    orders: NDArray[np.int64],
    skew: Array,
    points: int,
    active: NDArray[np.intp],
    *,
    corners: bool,
) -> Array:
    """One Newton step of the active units, into `shift` and `x`; its length (nan: no step could be made)."""
    part = network.take(active)
    residual, jacobian = _system(limiter, part, shift[active], x[active], orders, skew[active], points, corners)
    step = newton_step(jacobian, residual, orders)
    size = np.abs(x[active][:, orders == 1][:, 0])
    length = np.maximum(np.abs(step[:, 0]), np.max(np.abs(step[:, 1:]), axis=1) / size)
    usable = np.isfinite(length)
    step *= np.minimum(1.0, LARGEST_STEP / np.maximum(length, 1e-300))[:, None]
    rows = active[usable]
    shift[rows] -= step[usable, 0]
    x[rows] -= _unpacked(step[usable], orders)
    return np.asarray(length)


def _system(
    limiter: Limiter,
    network: Response,
    shift: Array,
    x: ComplexArray,
    orders: NDArray[np.int64],
    skew: Array,
    points: int,
    corners: bool,
) -> tuple[Array, Array]:
    """Residuals a_n X_n − b_n U_n as real numbers, and their derivatives by (ln ω, Re X_1, parts of the others)."""
    samples = _samples(x, orders, points)
    y, slope = limiter.respond(samples, skew[:, None])
    if corners and limiter.corners is not None:
        y = y + limiter.corners(samples, skew[:, None])
    u = _harmonics(y, orders)
    s = 1j * np.exp(shift)[:, None] * orders
    a, da, b, db = network.parts_at(s)
    level = np.abs(a) + np.abs(b)
    a, da, b, db = a / level, da / level, b / level, db / level
    by_real, by_imaginary = _derivatives(limiter, slope, u, orders)
    residual = a * x - b * u
    k = np.arange(len(orders))
    by_real = -b[:, :, None] * by_real
    by_imaginary = -b[:, :, None] * by_imaginary
    by_real[:, k, k] += a
    by_imaginary[:, k, k] += 1j * a
    by_omega = s * (da * x - db * u)
    return _packed(residual, by_omega, by_real, by_imaginary, orders)


def _derivatives(
    limiter: Limiter, slope: Array, u: ComplexArray, orders: NDArray[np.int64]
) -> tuple[ComplexArray, ComplexArray]:
    """dU_m/d Re X_k and dU_m/d Im X_k (n, m, k)."""
    g = np.fft.rfft(slope, axis=1, norm="forward")
    difference = orders[:, None] - orders[None, :]
    minus = g[:, np.abs(difference)]
    minus = np.where(difference < 0, minus.conj(), minus)
    plus = g[:, orders[:, None] + orders[None, :]]
    by_real, by_imaginary = minus + plus, 1j * (minus - plus)
    if limiter.mean_fixed:  # y is divided by its own mean, which moves with x
        by_real = by_real - u[:, :, None] * u.real[:, None, :] / 2
        by_imaginary = by_imaginary - u[:, :, None] * u.imag[:, None, :] / 2
    if orders[0] == 0:
        by_real[:, 0] /= 2
        by_imaginary[:, 0] /= 2
    return by_real, by_imaginary


def _packed(
    residual: ComplexArray,
    by_omega: ComplexArray,
    by_real: ComplexArray,
    by_imaginary: ComplexArray,
    orders: NDArray[np.int64],
) -> tuple[Array, Array]:
    """Real parts of every order, then imaginary parts of all but the mean; X_1 is real and so is the mean."""
    turning = orders > 0
    columns = np.concatenate([by_omega[:, :, None], by_real, by_imaginary[:, :, orders > 1]], axis=2)
    jacobian = np.concatenate([columns.real, columns.imag[:, turning]], axis=1)
    return np.concatenate([residual.real, residual.imag[:, turning]], axis=1), jacobian


def _unpacked(step: Array, orders: NDArray[np.int64]) -> ComplexArray:
    count = len(orders)
    change = step[:, 1 : 1 + count].astype(np.complex128)
    change[:, orders > 1] += 1j * step[:, 1 + count :]
    return change
