"""The command line in this process: status, stdout, stderr, in a folder of its own."""

from dataclasses import dataclass

import pytest

from tests.sheets.studies import write
from yieldosc.cli import main


@dataclass(frozen=True)
class Ran:
    status: int
    out: str
    err: str


@pytest.fixture
def run(capsys, monkeypatch, tmp_path):
    """run(words…) → Ran, with tmp_path as the current folder and a fixed width."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("COLUMNS", "100")

    def ran(*words: str) -> Ran:
        status = main([str(w) for w in words])
        captured = capsys.readouterr()
        return Ran(status, captured.out, captured.err)

    return ran


@pytest.fixture
def study(tmp_path):
    return write(tmp_path / "tone.xlsx")


@pytest.fixture
def good_study(tmp_path):
    """A study that meets its target at a few thousand units."""
    tight = {r: {"Tolerance": "±0.5 %"} for r in ("R1", "R2", "C1", "C2")}
    return write(tmp_path / "good.xlsx", design={"yield target": "90 %"}, roles=tight)
