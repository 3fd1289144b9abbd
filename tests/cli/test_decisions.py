"""`upgrade`, `limits` and `compare`: status, streams, JSON, directories, workbooks that run again."""

from __future__ import annotations

import json
import math
from pathlib import Path

import pytest
from openpyxl import load_workbook

import yieldosc
from tests.sheets.studies import write

UNITS = ("--units", "2048")
ESTIMATE = {"estimate", "low", "high"}
FACTORY = {"escape limit": "20000 ppm", "measurement sd": "1 Hz", "test temperature": "25 °C"}
TRIM = {"trim role": "R1", "trim low": "13 kΩ", "trim high": "19 kΩ"}


ROOM = {"temperature low": "25 °C", "temperature high": "25 °C"}  # one corner: these tests are about the interface


@pytest.fixture
def study(tmp_path):
    return write(tmp_path / "tone.xlsx", design=ROOM)


@pytest.fixture
def good_study(tmp_path):
    tight = {r: {"Tolerance": "±0.5 %"} for r in ("R1", "R2", "C1", "C2")}
    return write(tmp_path / "good.xlsx", design=ROOM | {"yield target": "90 %"}, roles=tight)


def numbers(value):
    """Every number of a JSON value."""
    if isinstance(value, dict):
        value = list(value.values())
    if isinstance(value, list):
        for v in value:
            yield from numbers(v)
    elif isinstance(value, float):
        yield value


def strict(text):
    """JSON without NaN or Infinity, which Python alone would accept."""

    def refuse(name):
        raise AssertionError(f"{name} in JSON")

    return json.loads(text, parse_constant=refuse)


@pytest.fixture
def factory_study(tmp_path):
    """Good boards, an escape limit and a trim."""
    tight = {r: {"Tolerance": "±1 %"} for r in ("R1", "R2", "C1", "C2")}
    return write(tmp_path / "line.xlsx", design=ROOM | FACTORY | TRIM, roles=tight)


def test_upgrade_json_holds_the_stable_core(run, study):
    ran = run("upgrade", study, *UNITS, "--json", "-")
    found = strict(ran.out)
    assert set(found) >= {"current", "options", "chosen"}
    assert set(found["current"]) == {"yield", "cost_per_good_unit"}
    assert found["current"]["cost_per_good_unit"] is None  # no prices
    for option in found["options"]:
        assert set(option) >= {"changes", "yield", "difference", "price_change", "cost_per_good_unit"}
        assert set(option["yield"]) >= ESTIMATE
        assert set(option["difference"]) >= ESTIMATE
        for change in option["changes"]:
            assert set(change) == {"part", "tolerance", "temperature_law"}
    chosen = found["options"][found["chosen"]]
    assert chosen["confirmed"]["low"] >= 0.99
    assert all(math.isfinite(x) for x in numbers(found))
    assert ran.status == 0


def test_limits_json_holds_the_stable_core(run, factory_study):
    ran = run("limits", factory_study, *UNITS, "--json", "-")
    found = strict(ran.out)
    assert set(found) >= {"test_temperature_c", "test_limit_hz", "escapes", "false_rejects", "measurement_sd_hz", "trim"}
    assert found["test_temperature_c"] == 25.0
    assert found["measurement_sd_hz"] == 1.0
    assert 970 <= found["test_limit_hz"]["low"] < found["test_limit_hz"]["high"] <= 1030
    assert set(found["escapes"]) >= ESTIMATE
    assert set(found["false_rejects"]) >= ESTIMATE
    assert found["trim"]["role"] == "R1"
    assert set(found["trim"]["reached"]) >= ESTIMATE


def test_limits_without_a_trim_say_null(run, study):
    assert strict(run("limits", study, *UNITS, "--json", "-").out)["trim"] is None


def test_compare_json(run, study, good_study):
    found = strict(run("compare", study, good_study, *UNITS, "--json", "-").out)
    assert {d["name"] for d in found["differences"]} >= {"C1 tolerance", "yield target"}
    assert found["rates"][0]["name"] == "yield"
    assert found["rates"][0]["difference"]["low"] > 0
    assert found["first"]["input_sha256"] == yieldosc.load(study).digest


def test_status_of_upgrade(run, tmp_path, good_study):
    """0: the target is reached, or none was given; 1: no purchase reaches it; 2: no study."""
    assert run("upgrade", good_study, *UNITS).status == 0
    off = write(tmp_path / "off.xlsx", design=ROOM | {"target frequency": "1.1 kHz"})
    ran = run("upgrade", off, *UNITS)
    assert ran.status == 1
    assert "NO PURCHASE REACHES THE TARGET" in ran.out
    untold = write(tmp_path / "untold.xlsx", design=ROOM | {"yield target": None})
    assert run("upgrade", untold, *UNITS).status == 0
    assert run("upgrade", tmp_path / "none.xlsx").status == 2


def test_status_of_limits(run, tmp_path, factory_study, study):
    """0: confirmed, or no level asked for; 1: no limits reach the level."""
    assert run("limits", factory_study, *UNITS).status == 0
    assert run("limits", study, *UNITS).status == 0
    strict_level = write(tmp_path / "strict.xlsx", design=ROOM | FACTORY | {"escape limit": "1 ppm"})
    ran = run("limits", strict_level, *UNITS)
    assert ran.status == 1
    assert "No test limits at this temperature keep shipped escapes to 1 ppm" in " ".join(ran.out.split())


def test_status_of_compare(run, study, good_study, tmp_path):
    assert run("compare", study, good_study, *UNITS).status == 0
    assert run("compare", study, tmp_path / "none.xlsx", *UNITS).status == 2


@pytest.mark.parametrize("command", ["upgrade", "limits"])
def test_the_result_of_another_input_is_not_replaced(run, study, good_study, command):
    assert run(command, study, *UNITS, "-o", "there").status in (0, 1)
    before = sorted(p.name for p in Path("there").iterdir())
    ran = run(command, good_study, *UNITS, "-o", "there")
    assert ran.status == 2
    assert "there" in ran.err
    assert sorted(p.name for p in Path("there").iterdir()) == before
    assert run(command, good_study, *UNITS, "-o", "there", "--force").status in (0, 1)


def test_a_refused_study_says_so_in_json(run, tmp_path):
    bad = write(tmp_path / "bad.xlsx", design={"frequency limit low": None})
    for words in (("upgrade", bad), ("limits", bad), ("compare", bad, bad)):
        ran = run(*words, "--json", "-")
        assert ran.status == 2
        found = strict(ran.out)
        assert set(found) == {"findings"}
        assert found["findings"][0]["level"] == "error"


def test_results_on_stdout_progress_nowhere_when_piped(run, study):
    for command in ("upgrade", "limits"):
        ran = run(command, study, *UNITS)
        assert "What to do next" in ran.out
        assert "\x1b" not in ran.out + ran.err
        assert ran.err == ""


@pytest.mark.parametrize("command", ["upgrade", "limits"])
def test_the_workbook_is_the_study_again(run, factory_study, command):
    assert run(command, factory_study, *UNITS, "-o", "there").status in (0, 1)
    (book,) = Path("there").glob("*.xlsx")
    assert book.name == f"line-{command}.xlsx"
    again = yieldosc.load(book)
    assert again.digest == yieldosc.load(factory_study).digest


def test_the_workbook_of_compare_is_the_second_study(run, study, good_study):
    run("compare", study, good_study, *UNITS, "-o", "there")
    (book,) = Path("there").glob("*.xlsx")
    assert book.name == "tone-to-good.xlsx"
    assert yieldosc.load(book).digest == yieldosc.load(good_study).digest


def test_prices_and_grades_come_back_from_the_workbook(run, tmp_path):
    """A study with Grades and Alternates, through the workbook of upgrade and back."""
    extra = {
        "Grades": [
            ["Kind or Part", "Tolerance", "Temperature law", "Price", "Price factor"],
            ["capacitor", "±5 %", None, 0.02, None], ["capacitor", "±1 %", None, 0.11, None],
            ["resistor", "±1 %", None, 0.005, None],
        ],
        "Alternates": [["Part", "Alternate", "Tolerance"], ["C1", "other maker", "±10 %"]],
    }  # fmt: skip
    first = write(tmp_path / "priced.xlsx", design=ROOM, extra=extra)
    ran = run("upgrade", first, *UNITS, "-o", "there", "--json", "-")
    (book,) = Path("there").glob("*.xlsx")
    assert yieldosc.load(book).digest == yieldosc.load(first).digest
    found = strict(ran.out)
    assert found["prices"] == "money"
    option = next(o for o in found["options"] if [c["tolerance"] for c in o["changes"]] == ["±1 %"])
    assert option["price_change"] == pytest.approx(2 * 0.09)  # two capacitors are bought as one


@pytest.mark.parametrize("command", ["upgrade", "limits"])
def test_no_cell_of_a_workbook_is_a_formula(run, tmp_path, command):
    """A note that begins with = is text in the input and stays text."""
    study = write(tmp_path / "sly.xlsx", design=ROOM, roles={"R1": {"Note": "'=1+1"}}, rows=[("build quantity", "1000")])
    run(command, study, *UNITS, "-o", "there")
    (book,) = Path("there").glob("*.xlsx")
    cells = [cell for sheet in load_workbook(book) for row in sheet.iter_rows() for cell in row]
    assert len(cells) > 100
    assert [c.coordinate for c in cells if c.data_type == "f"] == []


def test_python_answers_what_the_command_answers(run, study, tmp_path):
    loaded = yieldosc.load(study)
    found = strict(run("upgrade", study, *UNITS, "--json", "-").out)
    mine = yieldosc.upgrade(loaded, units=2048)
    mine.write_workbook(tmp_path / "mine.xlsx")
    told = mine.to_dict()
    for key in ("current", "options", "chosen", "recentre", "search"):
        assert json.loads(json.dumps(told[key])) == found[key]
    with pytest.raises(yieldosc.InputError) as caught:
        mine.write_workbook(tmp_path / "mine.xlsx")
    assert str(caught.value) == (
        f"{tmp_path / 'mine.xlsx'} exists and is not overwritten; choose another name, or overwrite=True"
    )
    limits = yieldosc.limits(loaded, units=2048)
    assert limits.to_dict()["test_limit_hz"] == {"low": 970.0, "high": 1030.0}
    assert yieldosc.compare(loaded, loaded, units=1024).to_dict()["differences"] == []
