"""Sums of products → one generated function of arrays, with common factors pulled out.

Generated code names values by position only (v[3]); no text of a user ever enters it.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Monomial = tuple[int, tuple[str, ...]]
Coefficients = Callable[[Sequence[Array]], tuple[list[Array], list[Array]]]


def _factored(terms: list[tuple[int, tuple[int, ...]]]) -> str:
    """Nested form of a sum of products: the most frequent factor goes outside, again and again.

    All factors are positive part values, so no order of evaluation loses digits; this one saves multiplications.
    """
    counts = Counter(i for _, factors in terms for i in set(factors))
    if not counts or (len(terms) > 1 and counts.most_common(1)[0][1] == 1):
        return " + ".join(_product(value, factors) for value, factors in terms)
    if len(terms) == 1:
        return _product(*terms[0])
    best = max(counts, key=lambda i: (counts[i], -i))
    inside = [(v, _without(factors, best)) for v, factors in terms if best in factors]
    outside = [(v, factors) for v, factors in terms if best not in factors]
    text = f"v[{best}]*({_factored(inside)})"
    return f"{text} + {_factored(outside)}" if outside else text


def _without(factors: tuple[int, ...], item: int) -> tuple[int, ...]:
    at = factors.index(item)
    return factors[:at] + factors[at + 1 :]


def _product(value: int, factors: tuple[int, ...]) -> str:
    names = "*".join(f"v[{i}]" for i in factors)
    if not names:
        return f"({float(value)!r})"
    return names if value == 1 else f"({float(value)!r})*{names}"


def compile_terms(
    terms_a: tuple[tuple[Monomial, ...], ...], terms_b: tuple[tuple[Monomial, ...], ...], symbols: tuple[str, ...]
) -> Coefficients:
    """A function of the symbol values, in the order of `symbols`, giving the coefficients of A and of B."""
    position = {name: i for i, name in enumerate(symbols)}

    def source(rows: tuple[tuple[Monomial, ...], ...]) -> str:
        parts = [_factored([(v, tuple(position[n] for n in names)) for v, names in row]) or "0.0" for row in rows]
        return "[" + ", ".join(parts) + "]"

    code = f"lambda v: ({source(terms_a)}, {source(terms_b)})"
    made: Coefficients = eval(compile(code, "<network>", "eval"), {"__builtins__": {}})
    return made
