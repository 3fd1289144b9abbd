"""Commands, exit status, streams and JSON as the interface fixes them."""

import json
import os
import signal
import subprocess
import sys
import time

import pytest

from tests.sheets.studies import write
from yieldosc.circuits import registry

BARE = "Reference,Value,Tolerance\nR1,4k7,1%\nC1,10n,5%\n"


def json_of(ran):
    return json.loads(ran.out)


def test_exit_status_meets_and_does_not_meet(run, study, good_study):
    assert run("assess", good_study, "--units", "4096").status == 0
    assert run("assess", study, "--units", "4096").status == 1


def test_results_on_stdout_and_nothing_else_when_piped(run, study):
    ran = run("assess", study, "--units", "4096")
    assert "DOES NOT MEET" in ran.out
    assert "\x1b" not in ran.out + ran.err
    assert ran.err == ""


def test_json_alone_on_stdout(run, study):
    ran = run("assess", study, "--units", "4096", "--json", "-")
    assert json_of(ran)["verdict"] == "does not meet"


ESTIMATE = {"estimate", "low", "high"}


def test_assess_json_holds_the_stable_core(run, study):
    found = json_of(run("assess", study, "--units", "4096", "--json", "-"))
    assert {"verdict", "conditions", "yield", "outcomes", "corners", "ranking", "rivals", "bands", "findings", "provenance"} <= set(found)
    assert set(found["yield"]) >= ESTIMATE | {"confidence", "units", "failures"}
    assert list(found["outcomes"])[:10] == [
        "good", "no_bias", "undefined", "not_assessable", "no_start", "wrong_mode", "low_margin", "slow_start",
        "out_of_limits", "distorted",
    ]  # fmt: skip
    assert sum(found["outcomes"].values()) == found["yield"]["units"] == 4096
    assert len(found["corners"]) == 10
    for corner in found["corners"]:
        assert {"temperature_c", "supply_v", "age_years", "frequency_hz", "settled_hz", "startup", "yield"} <= set(corner)
        assert {"mean", "sd", "min", "max", "q001", "q50", "q999"} <= set(corner["frequency_hz"])
        assert {"failures", "rate", "tail", "margin_min", "margin_q001"} <= set(corner["startup"])
        assert set(corner["startup"]["rate"]) >= ESTIMATE
    for output in ("frequency", "margin"):
        for line in found["ranking"][output]:
            assert set(line) >= {"part", "first_order", "total"}
            assert set(line["total"]) >= ESTIMATE
    assert all(set(rival) >= {"name", "yield"} for rival in found["rivals"])
    for band in found["bands"]:
        assert set(band) >= {"output", "temperature_c", "extreme", "rss", "monte_carlo"}
        assert set(band["rss"]) == {"low", "high"}
    assert all(set(f) == {"level", "code", "sheet", "row", "column", "text"} for f in found["findings"])
    assert {"seed", "input_sha256", "versions", "started", "seconds"} <= set(found["provenance"])
    assert len(found["provenance"]["input_sha256"]) == 64


def test_unit_json(run):
    words = ["wien_bridge", "R1=10k", "C1=10n", "R2=10k", "C2=10n", "RF=20k5", "RG=10k", "GBW=3MHz"]
    found = json_of(run("unit", *words, "--json", "-"))
    assert {
        "circuit", "temperature_c", "frequency_hz", "settled_hz", "startup_margin", "growth_per_s", "outcome",
        "other_modes_hz",
    } <= set(found)  # fmt: skip
    assert (found["circuit"], found["temperature_c"], found["outcome"]) == ("wien_bridge", 25.0, "starts")
    # crossing of this unit by a separate integration study, printed to 0.01 Hz
    assert found["frequency_hz"] == pytest.approx(1587.76, abs=0.005)
    assert found["settled_hz"] is None
    assert found["other_modes_hz"] == []


def test_check_json(run, tmp_path):
    (tmp_path / "bom.csv").write_text(BARE)
    ran = run("check", "bom.csv", "--json", "-")
    assert ran.status == 0
    found = json_of(ran)
    assert set(found) == {"parts", "findings"}
    assert found["parts"][0] == {
        "designator": "R1", "kind": "resistor", "value": 4700.0, "si_unit": "Ω", "tolerance": {"low": -0.01, "high": 0.01},
        "temperature_law": None, "load_f": None, "esr_ohm": None, "fitted": True, "row": 2, "sheet": "bom.csv",
        "source_text": "R1 | 4k7 | 1%", "decoded": [],
    }  # fmt: skip


def test_status_2_has_findings_in_json_and_writes_nothing(run, tmp_path):
    path = write(tmp_path / "bad.xlsx", design={"yield target": "120 %"}, roles={"R1": {"Tolerance": 5}})
    ran = run("assess", path, "--json", "-")
    assert ran.status == 2
    assert [f["code"] for f in json_of(ran)["findings"] if f["level"] == "error"] == ["not-a-share", "bare-number"]
    assert 'R1 tolerance is the bare number 5; write "5 %" or give the cell a percent format' in " ".join(ran.err.split())
    assert sorted(p.name for p in tmp_path.iterdir()) == ["bad.xlsx"]


@pytest.mark.parametrize(
    ("words", "text"),
    [
        ([], "a command is needed; see yieldosc --help"),
        (["wobble"], "argument COMMAND: invalid choice: 'wobble' (choose from 'circuits', 'unit', 'draft', 'check', 'assess', 'upgrade', 'limits', 'compare'); see yieldosc --help"),
        (["assess"], "the following arguments are required: STUDY; see yieldosc assess --help"),
        (["assess", "x.xlsx", "--wobble"], "unrecognized arguments: --wobble; see yieldosc --help"),
        (["assess", "tone.xlsx", "--units", "0"], "--units 0: write a whole number from 1 to 10000000000"),
        (["assess", "tone.xlsx", "--units", "many"], "--units many: write a whole number from 1 to 10000000000"),
        (["assess", "tone.xlsx", "--seed", "-1"], "--seed -1: write a whole number from 0 to 9223372036854775807"),
        (["assess", "tone.xlsx", "--workers", "0"], "--workers 0: write a whole number from 1 to 256"),
        (["unit", "wien_bridge", "R1"], "R1: write it as ROLE=VALUE, for example R1=4k7"),
        (["unit", "wien_bridge", "--temperature", "warm", "R1=1k"], '--temperature warm: "warm" is not a quantity in °C; write for example "-40 °C"'),
        (["unit", "tone.xlsx", "R1=1k"], "a study brings its own values and options; leave out ROLE=VALUE and --option"),
        (["unit", "pierce", "--option", "stage"], "--option stage: write it as KEY=VALUE"),
        (["unit", "pierce", "--option", "wobble=yes"], None),
        (["draft", "tone.xlsx", "--circuit", "pierce", "-o", "study.txt"], "-o study.txt: a draft is an Excel workbook; give a name that ends in .xlsx"),
        (["draft", "tone.xlsx", "--circuit", "pierce", "-o", "tone.xlsx"], "tone.xlsx exists and is not overwritten; choose another name, or add --force"),
        (["draft", "tone.xlsx", "--circuit", "pierce", "-o", "tone.xlsx", "--force"], "tone.xlsx is the BOM itself and is never altered; choose another name"),
    ],
)  # fmt: skip
def test_commands_that_cannot_be_used(run, study, words, text):
    ran = run(*words)
    assert ran.status == 2
    assert ran.out == ""
    message = " ".join(ran.err.split())
    assert message.startswith("error:")
    if text is not None:
        assert message == f"error: {text}"


def test_several_bad_words_are_named_at_once(run):
    ran = run("unit", "wien_bridge", "R1=fast", "RX=1k", "C1=10k", "R2=1k", "R2=2k")
    roles = ", ".join(role.name for role in registry.family("wien_bridge").roles({}))
    assert [text.strip() for text in " ".join(ran.err.split()).split("error: ")[1:]] == [
        'R1=fast: "fast" is not a quantity in Ω; write for example "4.7 kΩ"',
        f"wien_bridge has no role 'RX'; its roles are {roles}",
        "R2 is given twice; keep one value",
    ]
    assert (ran.status, ran.out) == (2, "")


def test_a_file_that_is_not_there(run):
    ran = run("assess", "nowhere.xlsx")
    assert ran.status == 2
    assert "Traceback" not in ran.err


@pytest.mark.parametrize("command", ["circuits", "unit", "draft", "check", "assess"])
def test_help_has_one_example(run, command):
    ran = run(command, "--help")
    assert ran.status == 0
    assert " ".join(ran.out.split()).count("example: yieldosc " + command) == 1


def test_version(run):
    ran = run("--version")
    assert (ran.status, ran.out) == (0, "yieldosc 0.1.0\n")


# -- where results go ---------------------------------------------------------------------------------------------


def test_results_go_to_the_studys_own_folder_and_are_replaced_by_the_same_input(run, study, tmp_path):
    digest = json_of(run("assess", study, "--units", "4096", "--json", "-"))["provenance"]["input_sha256"]
    folder = tmp_path / "output" / f"tone-{digest[:8]}"
    assert sorted(p.name for p in folder.iterdir()) == ["result.json", "tone-result.xlsx"]
    assert run("assess", study, "--units", "8192").status == 1
    assert json.loads((folder / "result.json").read_text())["yield"]["units"] == 8192


def test_another_inputs_result_is_not_replaced_unless_forced(run, study, good_study, tmp_path):
    assert run("assess", study, "--units", "4096", "-o", "here").status == 1
    before = (tmp_path / "here" / "result.json").read_bytes()
    old = json.loads(before)["provenance"]["input_sha256"][:8]
    ran = run("assess", good_study, "--units", "4096", "-o", "here")
    assert ran.status == 2
    new = " ".join(ran.err.split())
    assert new.startswith(f"error: here holds the result of another input ({old}, this one is ")
    assert new.endswith("); choose another place with -o/--output, or add --force to replace it")
    assert (tmp_path / "here" / "result.json").read_bytes() == before
    assert run("assess", good_study, "--units", "4096", "-o", "here", "--force").status == 0


def test_somebodys_files_are_left_alone(run, study, tmp_path):
    (tmp_path / "mine").mkdir()
    (tmp_path / "mine" / "notes.txt").write_text("mine")
    ran = run("assess", study, "--units", "4096", "-o", "mine")
    assert ran.status == 2
    assert " ".join(ran.err.split()) == (
        "error: mine is not empty and holds no result of this program; choose another place with -o/--output, or add "
        "--force to write beside what is there"
    )
    assert [p.name for p in (tmp_path / "mine").iterdir()] == ["notes.txt"]


def test_json_file_is_not_overwritten_unasked(run, study, tmp_path):
    (tmp_path / "old.json").write_text("{}")
    ran = run("check", study, "--json", "old.json")
    assert ran.status == 2
    assert (tmp_path / "old.json").read_text() == "{}"
    assert run("check", study, "--json", "old.json", "--force").status == 0
    assert set(json.loads((tmp_path / "old.json").read_text())) == {"parts", "findings"}


# -- reproducible ----------------------------------------------------------------------------------------------------


def document(run, study, *words):
    found = json_of(run("assess", study, "--units", "16384", "--json", "-", *words))
    for key in ("started", "seconds"):
        del found["provenance"][key]
    return found


def test_workers_change_nothing_and_seeds_do(run, study):
    one = document(run, study, "--workers", "1")
    assert document(run, study, "--workers", "2") == one
    zero = document(run, study, "--seed", "0")
    assert zero["provenance"]["seed"] == 0
    assert zero["yield"] != one["yield"]


def test_the_result_workbook_is_a_study_with_the_same_answer(run, study, tmp_path):
    first = document(run, study)
    folder = tmp_path / "output" / f"tone-{first['provenance']['input_sha256'][:8]}"
    again = document(run, folder / "tone-result.xlsx")
    assert again["provenance"]["input_sha256"] == first["provenance"]["input_sha256"]
    for key in ("verdict", "yield", "outcomes", "corners", "ranking", "rivals", "bands"):
        assert again[key] == first[key]


# -- as a process ----------------------------------------------------------------------------------------------------


def test_control_c_is_clean(study, tmp_path):
    """No half-written file, status 130, no process left behind."""
    process = subprocess.Popen(
        [sys.executable, "-m", "yieldosc", "assess", str(study), "--units", "50000000", "--workers", "2"],
        cwd=tmp_path, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, start_new_session=True,
    )  # fmt: skip
    time.sleep(6)
    assert process.poll() is None, process.stderr.read()
    os.killpg(process.pid, signal.SIGINT)  # as a terminal does: to the whole foreground group
    _, err = process.communicate(timeout=30)
    assert process.returncode == 130
    assert err.strip().splitlines()[-1] == "stopped; nothing was written"
    assert "Traceback" not in err
    assert [p.name for p in tmp_path.iterdir()] == ["tone.xlsx"]
    with pytest.raises(ProcessLookupError):
        os.killpg(process.pid, 0)


def test_a_reader_that_leaves_early_is_no_error():
    command = f"{sys.executable} -m yieldosc circuits pierce | head -1"
    done = subprocess.run(["bash", "-c", f"set -o pipefail; {command}"], capture_output=True, text=True, check=False)
    assert done.stderr == ""


def test_no_colour_on_request(tmp_path):
    done = subprocess.run(
        [sys.executable, "-m", "yieldosc", "circuits"], capture_output=True, text=True, cwd=tmp_path, check=True,
        env={**os.environ, "NO_COLOR": "1", "FORCE_COLOR": "1"},
    )  # fmt: skip
    assert "wien_bridge" in done.stdout
    assert "\x1b" not in done.stdout
