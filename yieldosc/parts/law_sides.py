"""A temperature law squeezed into one half of its spread: what a lot looks like whose coefficients all lean one way."""

from __future__ import annotations

from dataclasses import replace

from yieldosc.parts.ceramic import Class2Law
from yieldosc.parts.linear import Linear
from yieldosc.parts.parameter import Law
from yieldosc.parts.quartz import AtLaw, ForkLaw


def one_sided(law: Law, side: int) -> Law:
    """The lower (−1) or upper (+1) half of every coefficient; a law without spread as it is.

    A class-2 ceramic's lower half is both ends in the negative half of the box; its upper half is not tried.
    """
    if isinstance(law, Linear) and law.limit:
        return replace(law, typical=law.typical + side * law.limit / 2, limit=law.limit / 2)
    if isinstance(law, AtLaw):
        return replace(law, angles=_half(law.angles, side))
    if isinstance(law, ForkLaw):
        return replace(law, beta=_half(law.beta, side), turnover_c=_half(law.turnover_c, side))
    if isinstance(law, Class2Law) and side < 0:
        return replace(law, negative_half=True)
    return law


def _half(bounds: tuple[float, float], side: int) -> tuple[float, float]:
    low, high = bounds
    middle = (low + high) / 2
    return (low, middle) if side < 0 else (middle, high)
