"""Tests run in several processes (pytest-xdist): each keeps to one processor, and so do the commands that it starts."""

import os


def pytest_configure(config):
    worker = os.environ.get("PYTEST_XDIST_WORKER")
    if worker is None or not hasattr(os, "sched_setaffinity"):
        return
    processors = sorted(os.sched_getaffinity(0))
    os.sched_setaffinity(0, {processors[int(worker.removeprefix("gw")) % len(processors)]})
