"""How far a run has come, with the time left, on stderr; nothing where nobody watches."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager

from rich.progress import BarColumn, Progress, TaskProgressColumn, TextColumn, TimeElapsedColumn, TimeRemainingColumn

from yieldosc.reports.terminal import make_console

REDRAWN_EVERY_S = 0.1
Advance = Callable[[int, int], None]  # (done, total); the total may grow


@contextmanager
def progress_bar(*, quiet: bool, label: str = "simulating") -> Iterator[Advance]:
    """A callback for the studies. The bar vanishes at the end, an interrupted one too."""
    console = make_console(sys.stderr)
    if quiet or console.color_system is None:  # no terminal, or one that asked for no colour and no animation
        yield _nothing
        return
    columns = (
        TextColumn("{task.description}"), BarColumn(bar_width=40), TaskProgressColumn(), TextColumn("elapsed"),
        TimeElapsedColumn(), TextColumn("left"), TimeRemainingColumn(),
    )  # fmt: skip
    # drawn from the callback, not by a thread of its own: with a second thread workers could not be forked
    with Progress(*columns, console=console, transient=True, auto_refresh=False) as progress:
        task = progress.add_task(label, total=None)
        drawn = 0.0

        def advance(done: int, total: int) -> None:
            nonlocal drawn
            progress.update(task, completed=done, total=total)
            if time.monotonic() - drawn > REDRAWN_EVERY_S:
                drawn = time.monotonic()
                progress.refresh()

        yield advance


def _nothing(done: int, total: int) -> None:
    """Progress that nobody watches."""
