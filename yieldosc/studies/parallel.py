"""Numbered pieces of work on several processes, results handed back in the order of the numbers.

Fork where no other thread runs (nothing is pickled, nothing imported again); elsewhere spawned processes that are kept
for the next work; this process alone where the work cannot be sent. Digits cannot depend on it: a piece of work knows
only its own number.
"""

from __future__ import annotations

import multiprocessing
import os
import pickle
import signal
import sys
import threading
import traceback
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from multiprocessing.connection import wait
from types import TracebackType
from typing import Any, TypeVar

from yieldosc.errors import YieldoscError

Result = TypeVar("Result")
Work = Callable[[int], Result]


class WorkerError(YieldoscError):
    """A worker process failed; the text holds its traceback, or says that it died."""


def default_workers() -> int:
    """Processors that this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


class Workers:
    """So many processes; a context manager, at whose end none of them is left."""

    def __init__(self, count: int = 1) -> None:
        self.count = count
        self._kept: _Pool | None = None

    def __enter__(self) -> Workers:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._drop()

    @contextmanager
    def in_order(self, work: Work[Result], pieces: int) -> Iterator[Iterator[Result]]:
        """work(0) … work(pieces − 1) as an iterator in that order. Leaving it early ends the processes at once."""
        method = _method(work) if min(self.count, pieces) > 1 else "none"
        if method == "none":
            yield map(work, range(pieces))
            return
        pool = self._pool(method, work, pieces)
        complete = False
        try:
            yield pool.results(pieces)
            complete = pool.idle
        finally:
            if method == "fork":
                pool.stop()
            elif not complete:
                self._drop()

    def _pool(self, method: str, work: Work[Any], pieces: int) -> _Pool:
        if method == "fork":
            return _Pool("fork", min(self.count, pieces), work)
        if self._kept is None:
            self._kept = _Pool("spawn", self.count, None)
        self._kept.give(work)
        return self._kept

    def _drop(self) -> None:
        if self._kept is not None:
            self._kept.stop()
            self._kept = None


def _method(work: Work[Any]) -> str:
    if sys.platform.startswith("linux") and threading.active_count() == 1:
        return "fork"
    try:
        pickle.dumps(work)
    except (pickle.PicklingError, AttributeError, TypeError):
        return "none"
    return "spawn"


class _Pool:
    """Processes on pipes: each is sent one piece number at a time, the next when its result has arrived."""

    def __init__(self, method: str, count: int, work: Work[Any] | None) -> None:
        context: Any = multiprocessing.get_context(method)
        self._processes: list[Any] = []
        self._pipes: list[Any] = []
        self.idle = True
        for _ in range(count):
            ours, theirs = context.Pipe()
            inherited = (*self._pipes, ours) if method == "fork" else ()
            process = context.Process(target=_serve, args=(work, theirs, inherited), daemon=True)
            process.start()
            theirs.close()
            self._processes.append(process)
            self._pipes.append(ours)

    def give(self, work: Work[Any]) -> None:
        """Send other work to every process."""
        for pipe in self._pipes:
            pipe.send(work)

    def results(self, pieces: int) -> Iterator[Any]:
        self.idle = False
        ready: dict[int, Any] = {}
        started = 0
        for pipe in self._pipes[:pieces]:
            pipe.send(started)
            started += 1
        answering: Any
        for piece in range(pieces):
            while piece not in ready:
                for answering in wait(self._pipes):
                    number, result = _received(answering)
                    ready[number] = result
                    if started < pieces:
                        answering.send(started)
                        started += 1
            if piece == pieces - 1:
                self.idle = True
            yield ready.pop(piece)

    def stop(self) -> None:
        for process in self._processes:
            process.terminate()
        for process, pipe in zip(self._processes, self._pipes, strict=True):
            process.join()
            pipe.close()


def _received(pipe: Any) -> tuple[int, Any]:
    try:
        number, result, failure = pipe.recv()
    except (EOFError, ConnectionError):
        raise WorkerError(
            "a worker process ended without an answer (out of memory?); run again with --workers 1 to see why"
        ) from None
    if isinstance(failure, YieldoscError):
        raise failure
    if failure:
        raise WorkerError(f"a worker process failed:\n{failure}")
    return number, result


def _serve(work: Work[Any] | None, pipe: Any, inherited: tuple[Any, ...]) -> None:
    """A worker's life: work or a number in, a result out; it ends when the parent closes the pipe or dies."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)  # Ctrl-C is the parent's to answer: it stops the workers
    for other in inherited:
        other.close()  # else a worker holds its own far end open, and the end of the parent goes unnoticed
    while True:
        try:
            message = pipe.recv()
        except (EOFError, OSError):
            return
        if callable(message):
            work = message
            continue
        try:
            pipe.send(_answer(work, message))
        except OSError:
            return


def _answer(work: Work[Any] | None, number: int) -> tuple[int, Any, YieldoscError | str]:
    try:
        return number, None if work is None else work(number), ""
    except YieldoscError as error:
        return number, None, error
    except Exception:
        return number, None, traceback.format_exc()
