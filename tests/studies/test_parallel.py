"""Order, failure and the end of worker processes."""

from __future__ import annotations

import multiprocessing
import os
import threading
import time

import pytest

from yieldosc.errors import YieldoscError
from yieldosc.studies.parallel import WorkerError, in_order


def slow_first(piece):
    time.sleep(0.05 if piece == 0 else 0)
    return piece * piece, os.getpid()


def refuse(piece):
    raise YieldoscError("no such thing")


def divide(piece):
    return 1 / (piece - 2)


def die(piece):
    os._exit(3)


def test_results_come_in_order_from_several_processes():
    answers = list(in_order(slow_first, 6, 2))
    assert [a[0] for a in answers] == [0, 1, 4, 9, 16, 25]
    assert os.getpid() not in {a[1] for a in answers}
    assert len({a[1] for a in answers}) == 2


def test_one_worker_is_this_process():
    assert {a[1] for a in in_order(slow_first, 3, 1)} == {os.getpid()}


def test_no_process_outlives_an_abandoned_iteration():
    results = in_order(slow_first, 50, 2)
    next(results)
    assert len(multiprocessing.active_children()) == 2
    results.close()
    assert multiprocessing.active_children() == []


def test_an_error_of_this_package_arrives_as_itself():
    with pytest.raises(YieldoscError, match=r"^no such thing$"):
        list(in_order(refuse, 4, 2))
    assert multiprocessing.active_children() == []


def test_another_error_arrives_with_its_traceback():
    with pytest.raises(WorkerError, match="ZeroDivisionError"):
        list(in_order(divide, 4, 2))


def test_a_dead_worker_is_named():
    with pytest.raises(WorkerError) as caught:
        list(in_order(die, 4, 2))
    assert str(caught.value) == (
        "a worker process ended without an answer (out of memory?); run again with --workers 1 to see why"
    )


def test_another_thread_makes_it_spawn_and_changes_nothing():
    stop = threading.Event()
    thread = threading.Thread(target=stop.wait)
    thread.start()
    try:
        answers = list(in_order(len_of_name, 3, 2))
    finally:
        stop.set()
        thread.join()
    assert answers == [0, 2, 4]


len_of_name = (2).__mul__  # picklable by value: a spawned process cannot import a test file
