"""A user's own table that no gain brings to oscillation is refused before anything runs, with its reason."""

import pytest

import yieldosc
from tests.sheets.studies import write
from tests.sheets.test_own_circuit_study import BRIDGE, OWN
from yieldosc.cli import main
from yieldosc.errors import InputError

WHY = (
    "At the nominal values no gain of RF brings the circuit to oscillation near the design frequency of 50000 Hz; check "
    "the branch table (the sense of the gain element's nodes first) and the frequency"
)


@pytest.fixture
def dead(tmp_path):
    """The bridge with a target that it is far from."""
    design = {**OWN["design"], "target frequency": "50 kHz", "frequency limit low": "-3 %", "frequency limit high": "3 %"}
    return write(tmp_path / "dead.xlsx", design=design, extra={"Circuit": BRIDGE})


@pytest.mark.parametrize("run", [yieldosc.assess, yieldosc.upgrade, yieldosc.limits])
def test_every_run_refuses_it(dead, run):
    with pytest.raises(InputError) as caught:
        run(yieldosc.load(dead), units=64)
    assert [(f.code, str(f.place), f.text) for f in caught.value.findings] == [("no-crossing", "Circuit", WHY)]


@pytest.mark.parametrize("command", [["check"], ["unit"], ["assess", "--quiet"], ["limits", "--quiet"]])
def test_every_command_refuses_it(dead, command, capsys):
    assert main([command[0], str(dead), *command[1:]]) == 2
    assert "At the nominal values no gain of RF" in " ".join(capsys.readouterr().err.split())


def test_the_right_way_round_runs(tmp_path):
    path = write(tmp_path / "own.xlsx", **OWN)
    assert main(["unit", str(path)]) == 0
