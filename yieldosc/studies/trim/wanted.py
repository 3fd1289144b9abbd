"""The setting of one role at which each unit reads a wanted frequency: bracketed on a few settings, then closed in."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]
MOST_STEPS = 14
HALVINGS = 8  # towards settings where a unit stops oscillating
CLOSE = 1e-10  # relative distance from the wanted frequency at which a unit is done: far below any instrument


@dataclass(frozen=True)
class Wanted:
    """n units: the setting (in the role's SI unit, nan where nothing can be read), and what kept it from the goal."""

    setting: Array
    below: Mask  # the low stop comes first
    above: Mask
    ceased: Mask  # the unit stops oscillating before it comes to the goal
    unsolved: Mask  # no frequency at any setting, so there is nothing to read

    @property
    def reached(self) -> Mask:
        return ~(self.below | self.above | self.ceased | self.unsolved)


@dataclass
class _Bracket:
    """Two settings (logarithms) and the relative errors there; nan where a unit does not oscillate (n,)."""

    a: Array
    b: Array
    fa: Array
    fb: Array


def wanted_settings(frequency_hz: Callable[[Array], Array], goal_hz: Array, settings: Array) -> Wanted:
    """frequency_hz(settings (n,)) → (n,), nan where a unit has none; goal_hz (n,). settings (k,): tried first, rising.

    Illinois steps in the logarithm of the setting between the first two settings that bracket the goal (M. Dowell,
    P. Jarratt, BIT 11 (1971) 168). Cost: k + at most 22 calls.
    """
    n = len(goal_hz)
    grid = np.log(settings)

    def error(x: Array) -> Array:
        return frequency_hz(np.exp(x)) / goal_hz - 1

    found = np.stack([error(np.full(n, x)) for x in grid])
    unsolved = np.asarray(np.isnan(found).all(axis=0))
    best = np.argmin(np.where(np.isnan(found), np.inf, np.abs(found)), axis=0)
    bracket, inside, edge = _brackets(grid, found, best)
    if edge.any():
        inside = inside | _towards_the_edge(error, bracket, edge)
    x = np.where(inside, _closed_in(error, bracket, inside), np.where(edge, bracket.a, grid[best]))
    outside = ~inside & ~unsolved
    setting = np.where(unsolved, np.nan, np.exp(x))
    at_low, at_high = outside & ~edge & (best == 0), outside & ~edge & (best == len(grid) - 1)
    return Wanted(setting, at_low, at_high, outside & ~at_low & ~at_high, unsolved)


def _brackets(grid: Array, found: Array, best: NDArray[np.int64]) -> tuple[_Bracket, Mask, Mask]:
    """First pair on both sides of the goal (inside), else the nearest setting and a silent neighbour (edge)."""
    rows, last = np.arange(found.shape[1]), len(grid) - 1
    with np.errstate(invalid="ignore"):
        crossed = found[:-1] * found[1:] <= 0
    inside = np.asarray(crossed.any(axis=0))
    silent_below = (best > 0) & np.isnan(found[np.maximum(best - 1, 0), rows])
    silent_above = (best < last) & np.isnan(found[np.minimum(best + 1, last), rows])
    edge = ~inside & (silent_below | silent_above) & ~np.isnan(found[best, rows])
    first = np.where(inside, crossed.argmax(axis=0), best)
    step = np.where(inside | silent_above, 1, -1)
    second = np.clip(first + step, 0, last)
    return _Bracket(grid[first], grid[second], found[first, rows], found[second, rows]), inside, edge


def _towards_the_edge(error: Callable[[Array], Array], bracket: _Bracket, edge: Mask) -> Mask:
    """Halve towards the silent end; units (n,) whose goal turns up on the way, their bracket set around it."""
    met = np.zeros(len(edge), dtype=bool)
    for _ in range(HALVINGS):
        live = edge & ~met
        if not live.any():
            break
        middle = (bracket.a + bracket.b) / 2
        f = error(middle)
        with np.errstate(invalid="ignore"):
            crossing = live & (f * bracket.fa <= 0)
        silent = live & np.isnan(f)
        nearer = live & ~silent & ~crossing
        moved = silent | crossing
        bracket.b, bracket.fb = np.where(moved, middle, bracket.b), np.where(moved, f, bracket.fb)
        bracket.a, bracket.fa = np.where(nearer, middle, bracket.a), np.where(nearer, f, bracket.fa)
        met |= crossing
    return met


def _closed_in(error: Callable[[Array], Array], bracket: _Bracket, inside: Mask) -> Array:
    """Illinois on all units at once; a finished unit no longer moves."""
    a, b, fa, fb = bracket.a, bracket.b, bracket.fa, bracket.fb
    x = np.where(np.abs(fa) <= np.abs(fb), a, b)
    live = inside & (fa != 0) & (fb != 0)
    for _ in range(MOST_STEPS):
        if not live.any():
            break
        with np.errstate(divide="ignore", invalid="ignore"):
            step = b - fb * (b - a) / (fb - fa)
        x = np.where(live, np.where(np.isfinite(step), step, (a + b) / 2), x)
        fx = error(x)
        crossed = fx * fb < 0
        a, fa = np.where(live & crossed, b, a), np.where(live, np.where(crossed, fb, fa / 2), fa)
        b, fb = np.where(live, x, b), np.where(live, fx, fb)
        live &= np.isfinite(fx) & (np.abs(fx) > CLOSE)
    return x
