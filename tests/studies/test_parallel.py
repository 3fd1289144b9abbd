"""Order, failure and the end of worker processes."""

from __future__ import annotations

import multiprocessing
import os
import signal
import threading
import time

import pytest

from yieldosc.errors import YieldoscError
from yieldosc.studies.parallel import WorkerError, Workers


def slow_first(piece):
    time.sleep(0.05 if piece == 0 else 0)
    return piece * piece, os.getpid()


def refuse(piece):
    raise YieldoscError("no such thing")


def divide(piece):
    return 1 / (piece - 2)


def die(piece):
    os._exit(3)


def run(work, pieces, count):
    with Workers(count) as workers, workers.in_order(work, pieces) as results:
        return list(results)


def test_results_come_in_order_from_several_processes():
    answers = run(slow_first, 6, 2)
    assert [a[0] for a in answers] == [0, 1, 4, 9, 16, 25]
    assert os.getpid() not in {a[1] for a in answers}
    assert len({a[1] for a in answers}) == 2


def test_one_worker_is_this_process():
    assert {a[1] for a in run(slow_first, 3, 1)} == {os.getpid()}


def test_no_process_outlives_an_abandoned_iteration():
    with Workers(2).in_order(slow_first, 50) as results:
        next(results)
        assert len(multiprocessing.active_children()) == 2
    assert multiprocessing.active_children() == []


def test_an_interrupt_ends_every_process():
    with pytest.raises(KeyboardInterrupt), Workers(2) as workers, workers.in_order(slow_first, 50) as results:
        for _ in results:
            signal.raise_signal(signal.SIGINT)
    assert multiprocessing.active_children() == []


def test_an_error_of_this_package_arrives_as_itself():
    with pytest.raises(YieldoscError, match=r"^no such thing$"):
        run(refuse, 4, 2)
    assert multiprocessing.active_children() == []


def test_another_error_arrives_with_its_traceback():
    with pytest.raises(WorkerError, match="ZeroDivisionError"):
        run(divide, 4, 2)


def test_a_dead_worker_is_named():
    with pytest.raises(WorkerError) as caught:
        run(die, 4, 2)
    assert str(caught.value) == (
        "a worker process ended without an answer (out of memory?); run again with --workers 1 to see why"
    )


@pytest.fixture
def another_thread():
    stop = threading.Event()
    thread = threading.Thread(target=stop.wait)
    thread.start()
    yield
    stop.set()
    thread.join()


@pytest.mark.usefixtures("another_thread")
def test_spawned_processes_are_kept_for_the_next_work_and_end_with_the_workers():
    # Work is picklable by value here: a spawned process cannot import a test file.
    with Workers(2) as workers:
        with workers.in_order((2).__mul__, 3) as results:
            assert list(results) == [0, 2, 4]
        first = {process.pid for process in multiprocessing.active_children()}
        with workers.in_order((3).__mul__, 4) as results:
            assert list(results) == [0, 3, 6, 9]
        assert {process.pid for process in multiprocessing.active_children()} == first
        with workers.in_order((5).__mul__, 9) as results:
            next(results)
        with workers.in_order((7).__mul__, 2) as results:
            assert list(results) == [0, 7]
    assert multiprocessing.active_children() == []


@pytest.mark.usefixtures("another_thread")
def test_work_that_cannot_be_sent_is_done_here():
    here = []

    def note(piece):
        here.append(piece)
        return -piece

    assert run(note, 3, 2) == [0, -1, -2]
    assert here == [0, 1, 2]
