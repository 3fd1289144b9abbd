"""Progress is seen where somebody watches, and nowhere else."""

from __future__ import annotations

import io
import sys

import pytest

from yieldosc.reports.progress import progress_bar


class Terminal(io.StringIO):
    def isatty(self):
        return True


@pytest.mark.parametrize(("stream", "quiet"), [(io.StringIO(), False), (Terminal(), True)])
def test_nothing_is_written_when_piped_or_quiet(stream, quiet, monkeypatch):
    monkeypatch.setenv("TERM", "xterm-256color")
    monkeypatch.setattr(sys, "stderr", stream)
    with progress_bar(quiet=quiet) as advance:
        advance(1, 10)
    assert stream.getvalue() == ""


def test_no_animation_with_no_color(monkeypatch):
    monkeypatch.setenv("TERM", "xterm-256color")
    monkeypatch.setenv("NO_COLOR", "1")
    monkeypatch.setattr(sys, "stderr", Terminal())
    with progress_bar(quiet=False) as advance:
        advance(1, 10)
    assert sys.stderr.getvalue() == ""


def test_a_watched_run_shows_its_share_and_leaves_no_bar(monkeypatch):
    monkeypatch.setenv("TERM", "xterm-256color")
    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.setattr(sys, "stderr", Terminal())
    with progress_bar(quiet=False) as advance:
        advance(5, 10)
        advance(10, 20)  # the total may grow
    text = sys.stderr.getvalue()
    assert "50%" in text
    assert text.endswith("\x1b[2K") or "\x1b[1A" in text.split("50%")[-1]  # the line is cleared again
