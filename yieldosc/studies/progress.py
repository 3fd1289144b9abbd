"""How far a run has come, in unit evaluations: what is expected, and what is done of it."""

from __future__ import annotations

from collections.abc import Callable

Callback = Callable[[int, int], None]  # (done, total); the total grows where another look is needed


class Meter:
    """Adds up both; tells the callback, where there is one."""

    def __init__(self, callback: Callback | None = None) -> None:
        self._callback = callback
        self._expected = 0
        self._done = 0

    def expect(self, units: int) -> None:
        """More work has come into sight (or, where negative, is not needed after all)."""
        self._expected += units

    def done(self, units: int) -> None:
        """Work is finished."""
        self._done += units
        if self._callback is not None:
            self._callback(self._done, max(self._expected, self._done))
