"""How far a run has come, with the time left, on stderr; nothing where nobody watches."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager

from rich.progress import BarColumn, Progress, TaskProgressColumn, TextColumn, TimeElapsedColumn, TimeRemainingColumn

from yieldosc.reports.terminal import make_console

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
    with Progress(*columns, console=console, transient=True) as progress:
        task = progress.add_task(label, total=None)

        def advance(done: int, total: int) -> None:
            progress.update(task, completed=done, total=total)

        yield advance


def _nothing(done: int, total: int) -> None:
    """Progress that nobody watches."""
