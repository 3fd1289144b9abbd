"""A new circuit is one file: the registry finds it without being told."""

import sys

from yieldosc import circuits
from yieldosc.circuits import registry

FILE = '''
"""A bridge under another name."""
from dataclasses import replace
from yieldosc.circuits import wien_bridge
FAMILY = replace(wien_bridge.FAMILY, name="other_bridge", title="Other bridge")
'''


def test_a_file_with_a_family_is_a_circuit(tmp_path, monkeypatch):
    (tmp_path / "other_bridge.py").write_text(FILE)
    monkeypatch.setattr(circuits, "__path__", [*circuits.__path__, str(tmp_path)])
    found = registry._found()
    assert list(found) == [*registry.READING_ORDER, "other_bridge"]
    assert found["other_bridge"].title == "Other bridge"
    monkeypatch.delitem(sys.modules, "yieldosc.circuits.other_bridge")


def test_files_without_a_family_are_no_circuits():
    assert list(registry.FAMILIES) == list(registry.READING_ORDER)
