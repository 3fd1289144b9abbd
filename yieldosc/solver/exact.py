"""The exact path: every crossing of every unit from all roots, and which of them belong to the intended pair.

Used for units in doubt and for the audit sample. Arrays (m, c): m units, c crossings ordered by |g_c| rising.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.crossings import Crossings, Split, all_crossings
from yieldosc.solver.follow import follow
from yieldosc.solver.polynomials import ComplexArray, Poly
from yieldosc.solver.start import with_start

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Modes:
    """The intended pair and the rest, for m units. Gains and ω in the solver's scaled variables.

    omega, lower: the crossing that the margin is measured from; upper: where the pair leaves again (inf: nowhere);
    grows: the pair is in the right half plane; other_omega, other_gain (m, c): crossings of the other growing modes.
    A unit without a crossing in its band has found = False; nearest_x, nearest_gain then hold the nearest root.
    """

    crossings: Crossings
    members: Mask
    found: Mask
    omega: Array
    lower: Array
    upper: Array
    grows: Mask
    other_omega: Array
    other_gain: Array
    nearest_x: ComplexArray
    nearest_gain: ComplexArray
    growing_poles: NDArray[np.int64]  # by counting crossings below g
    start: Array  # (m,) gain that marks poles which grow without the gain element; nan where there are none


def modes(
    a: Poly, b: Poly, g: Array, design: Array, centre: Array, half: Array, *, fixed_gain: bool = False
) -> Modes:
    """Crossings, pair membership and growth of m units; design, centre: ω in scaled variables; half: in |ln ω|.

    fixed_gain: other active rows may make poles grow at g = 0; counting starts from those.
    """
    sign = np.sign(g)
    crossings, f_roots = all_crossings(a, b, sign)
    start = np.full(len(g), np.nan)
    if fixed_gain:
        crossings, start = with_start(a, crossings, g)
    intended, found = _intended(crossings, design, centre, half, start)
    members = _members(a, b, crossings, intended, found)
    omega, lower, upper = _window(crossings, members, g)
    with np.errstate(invalid="ignore"):
        grows = found & (np.abs(g) > np.abs(lower)) & (np.abs(g) < np.abs(upper))
        below = np.abs(crossings.gain) < np.abs(g)[:, None]
    other_omega, other_gain = _others(crossings, members, below)
    nearest_x, nearest_gain = _nearest(Split.of(a, b), f_roots, design)
    count = np.sum(np.where(below, crossings.direction * crossings.poles, 0), axis=1)
    return Modes(
        crossings, members, found, omega, lower, upper, grows, other_omega, other_gain, nearest_x, nearest_gain, count,
        start,
    )  # fmt: skip


def _intended(
    cr: Crossings, design: Array, centre: Array, half: Array, start: Array
) -> tuple[NDArray[np.intp], Mask]:
    """Column of the entering pair crossing nearest to the design frequency, inside the band."""
    with np.errstate(divide="ignore", invalid="ignore"):
        inside = np.abs(np.log(cr.omega / centre[:, None])) <= half[:, None]
        distance = np.abs(np.log(cr.omega / design[:, None]))
    usable = inside & (cr.direction == 1) & (cr.poles == 2) & (cr.gain != start[:, None])
    distance = np.where(usable, distance, np.inf)
    column = np.argmin(distance, axis=1)
    return column, usable.any(axis=1)


def _members(a: Poly, b: Poly, cr: Crossings, intended: NDArray[np.intp], found: Mask) -> Mask:
    """Crossings of the intended pair. Counting settles most units; the pair of the others is followed through g."""
    n, c = cr.gain.shape
    at = np.arange(c)[None, :]
    members = found[:, None] & (at == intended[:, None])
    pair_event = (cr.poles == 2) & np.isfinite(cr.gain)
    before = np.cumsum(cr.direction * cr.poles, axis=1) - cr.direction * cr.poles
    later = pair_event & (at > intended[:, None])
    # a real pole that leaves through 0 while one pair is in was half of that pair, and ends it
    half = (cr.poles == 1) & (cr.omega == 0) & np.isfinite(cr.gain) & (at > intended[:, None]) & (before == 2)
    leaves = (later | half) & (cr.direction == -1)
    first_leave = np.where(leaves.any(axis=1), np.argmax(leaves, axis=1), c)
    alone = before[np.arange(n), np.minimum(first_leave, c - 1)] == 2
    certain = found & (first_leave < c) & alone
    members |= certain[:, None] & (at == first_leave[:, None])
    again = later & (cr.direction == 1) & (at > first_leave[:, None])
    earlier = pair_event & (at < intended[:, None]) & (cr.direction == -1)
    doubt = found & (((first_leave < c) & ~alone) | again.any(axis=1) | earlier.any(axis=1))
    rows = np.flatnonzero(doubt)
    if rows.size:
        members[rows] = _followed(a, b, cr, intended, rows)
    return np.asarray(members, dtype=bool)


def _followed(a: Poly, b: Poly, cr: Crossings, intended: NDArray[np.intp], rows: NDArray[np.intp]) -> Mask:
    """Membership by continuation of the pair from its intended crossing, up and down through every other crossing."""
    pa, pb = [p[rows] for p in a], [p[rows] for p in b]
    omega, gain, poles = cr.omega[rows], cr.gain[rows], cr.poles[rows]
    col = intended[rows]
    here = np.arange(len(rows))
    members = np.zeros(omega.shape, dtype=bool)
    members[here, col] = True
    for order in (range(omega.shape[1]), range(omega.shape[1] - 1, -1, -1)):
        s = np.asarray(1j * omega[here, col], dtype=np.complex128)
        g = gain[here, col].copy()
        alive = np.ones(len(rows), dtype=bool)
        upward = order.step > 0
        for k in order:
            ahead = alive & np.isfinite(gain[:, k]) & ((k > col) if upward else (k < col))
            go = np.flatnonzero(ahead)
            if not go.size:
                continue
            new, arrived = follow([p[go] for p in pa], [p[go] for p in pb], s[go], g[go], gain[go, k])
            s[go], g[go] = np.where(arrived, new, s[go]), np.where(arrived, gain[go, k], g[go])
            alive[go] &= arrived
            with np.errstate(invalid="ignore"):
                hit = arrived & (poles[go, k] == 2) & (np.abs(new - 1j * omega[go, k]) <= 1e-6 * omega[go, k])
            members[go, k] |= hit
    return members


def _window(cr: Crossings, members: Mask, g: Array) -> tuple[Array, Array, Array]:
    """ω and gain of the pair's largest entering crossing below g (else its lowest), and its next leaving one."""
    n, c = cr.gain.shape
    rows = np.arange(n)
    enters = members & (cr.direction == 1)
    with np.errstate(invalid="ignore"):
        below = enters & (np.abs(cr.gain) < np.abs(g)[:, None])
    last_below = c - 1 - np.argmax(below[:, ::-1], axis=1)
    column = np.where(below.any(axis=1), last_below, np.argmax(enters, axis=1))
    leaves = members & (cr.direction == -1) & (np.arange(c)[None, :] > column[:, None])
    upper = np.where(leaves.any(axis=1), cr.gain[rows, np.argmax(leaves, axis=1)], np.inf)
    return cr.omega[rows, column], cr.gain[rows, column], upper


def _others(cr: Crossings, members: Mask, below: Mask) -> tuple[Array, Array]:
    """(m, c) ω and g_c of modes other than the intended that are in the right half plane; nan where there is none.

    A leaving crossing ends the mode that entered nearest to it in frequency. Where half of the intended pair left
    through 0, its other half stays as a real pole: it latches.
    """
    n, c = cr.gain.shape
    open_omega = np.full((n, c), np.nan)
    open_gain = np.full((n, c), np.nan)
    rows = np.arange(n)
    for k in range(c):
        latched = below[:, k] & members[:, k] & (cr.poles[:, k] == 1)
        open_omega[latched, k], open_gain[latched, k] = 0.0, cr.gain[latched, k]
        live = below[:, k] & ~members[:, k]
        enters = live & (cr.direction[:, k] == 1)
        open_omega[enters, k] = cr.omega[enters, k]
        open_gain[enters, k] = cr.gain[enters, k]
        leaves = np.flatnonzero(live & (cr.direction[:, k] == -1))
        if leaves.size:
            with np.errstate(divide="ignore", invalid="ignore"):
                far = np.abs(np.log(open_omega[leaves] / cr.omega[leaves, k, None]))
            far = np.where(np.isnan(far), np.inf, far)
            ended = np.argmin(far, axis=1)
            known = np.isfinite(far[np.arange(len(leaves)), ended])
            open_omega[rows[leaves[known]], ended[known]] = np.nan
            open_gain[rows[leaves[known]], ended[known]] = np.nan
    return open_omega, open_gain


def _nearest(split: Split, f_roots: ComplexArray, design: Array) -> tuple[ComplexArray, ComplexArray]:
    """The root x of F (complex allowed) nearest to the design frequency in |ln x|, and its complex gain.

    Where F has no root at all, x is the design frequency's and the gain is nan: no gain exists.
    """
    at_design = (design**2).astype(np.complex128)
    if f_roots.shape[1] == 0:
        return at_design, np.full_like(at_design, np.nan)
    with np.errstate(divide="ignore", invalid="ignore"):
        distance = np.abs(np.log(f_roots / (design**2)[:, None]))
    distance = np.where(np.isnan(distance), np.inf, distance)
    column = np.argmin(distance, axis=1)
    x: ComplexArray = f_roots[np.arange(len(column)), column]
    known = np.isfinite(x)
    x = np.where(known, x, at_design)
    return x, np.where(known, split.gain(x), np.nan)
