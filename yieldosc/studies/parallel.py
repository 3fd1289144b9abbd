"""Numbered pieces of work on several processes, results handed back in the order of the numbers.

Fork where no other thread runs (nothing needs to be pickled and nothing imported again), spawn otherwise, this
process alone where the work cannot be sent. Digits cannot depend on it: a piece knows only its own number.
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
from multiprocessing.connection import wait
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


def in_order(work: Work[Result], pieces: int, workers: int) -> Iterator[Result]:
    """work(0) … work(pieces − 1), yielded in order. Processes end with the iterator, however it ends."""
    method = _method(work) if min(workers, pieces) > 1 else None
    if method is None:
        for piece in range(pieces):
            yield work(piece)
        return
    context: Any = multiprocessing.get_context(method)
    pool = _Pool(context, work, min(workers, pieces), forked=method == "fork")
    try:
        yield from pool.results(pieces)
    finally:
        pool.stop()


def _method(work: Work[Result]) -> str | None:
    if sys.platform.startswith("linux") and threading.active_count() == 1:
        return "fork"
    try:
        pickle.dumps(work)
    except (pickle.PicklingError, AttributeError, TypeError):
        return None
    return "spawn"


class _Pool:
    """Workers on pipes: each is sent one piece number at a time, the next when its result has arrived."""

    def __init__(self, context: Any, work: Work[Result], workers: int, *, forked: bool) -> None:
        self._processes = []
        self._pipes: list[Any] = []
        for _ in range(workers):
            ours, theirs = context.Pipe()
            inherited = (*self._pipes, ours) if forked else ()
            process = context.Process(target=_serve, args=(work, theirs, inherited), daemon=True)
            process.start()
            theirs.close()
            self._processes.append(process)
            self._pipes.append(ours)

    def results(self, pieces: int) -> Iterator[Any]:
        ready: dict[int, Any] = {}
        started = 0
        for pipe in self._pipes:
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


def _serve(work: Work[Any], pipe: Any, inherited: tuple[Any, ...]) -> None:
    """A worker's life: a number in, a result out; it ends when the parent closes the pipe or dies."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)  # Ctrl-C is the parent's to answer: it stops the workers
    for other in inherited:
        other.close()  # else a worker holds its own far end open, and the end of the parent goes unnoticed
    while True:
        try:
            number = pipe.recv()
        except (EOFError, OSError):
            return
        answer: tuple[int, Any, YieldoscError | str]
        try:
            answer = (number, work(number), "")
        except YieldoscError as error:
            answer = (number, None, error)
        except Exception:
            answer = (number, None, traceback.format_exc())
        try:
            pipe.send(answer)
        except OSError:
            return
