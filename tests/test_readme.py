"""What the README shows is what the program prints today, and its reference holds every command and option."""

import re
import subprocess
import sys

import pytest

from tests.readme import README, folder_with_examples, matches, run, shown


@pytest.mark.parametrize("block", shown(), ids=lambda b: b.command)
def test_tour_is_fresh(block, tmp_path):
    output = run(block.command, folder_with_examples(tmp_path))
    assert matches(block.body, output), f"python -m tests.readme rewrites the block; today's output:\n{output}"


def test_a_changed_block_would_be_noticed():
    assert matches("one\n…\nthree\n", "one\ntwo\nthree\n")
    assert not matches("one\n…\nfour\n", "one\ntwo\nthree\n")
    assert not matches("one\nthree\n", "one\ntwo\nthree\n")


def test_reference_is_the_help_of_every_command():
    text = README.read_text(encoding="utf-8")
    help_text = run("yieldosc --help", README.parent)
    commands = re.findall(r"^    (\w+) ", help_text, flags=re.M)
    assert commands == ["circuits", "unit", "draft", "check", "assess", "upgrade", "limits", "compare"]
    for command in commands:
        assert run(f"yieldosc {command} --help", README.parent).strip() in text, f"the reference of {command} is stale"


def test_the_two_commands_are_the_ones_that_ci_runs():
    text = README.read_text(encoding="utf-8")
    ci = (README.parent / ".ci" / "run").read_text(encoding="utf-8")
    commands = re.findall(r"^    (python3 -m venv .*)$", text, flags=re.M)
    assert len(commands) == 2
    assert commands[1] in ci


def test_module_and_script_are_the_same_program():
    done = subprocess.run([sys.executable, "-m", "yieldosc", "--version"], capture_output=True, text=True, check=True)
    assert re.fullmatch(r"yieldosc \d+\.\d+\.\d+\n", done.stdout)
