"""One part of a BOM as it was understood: one line per designator, with the text that it came from."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from yieldosc.errors import Place
from yieldosc.parts.parameter import Given, Kind


@dataclass(frozen=True, slots=True, kw_only=True)
class BomLine:
    """SI units. Tolerance: fractions (low ≤ 0 ≤ high), absolute ones already divided by the value."""

    designator: str
    kind: Kind
    value: float | None  # ohms, farads, henries, hertz
    si_unit: str | None  # "Ω", "F", "H", "Hz"
    tolerance: tuple[float, float] | None
    temperature_law: str | None  # in the notation of the Roles sheet: "C0G", "±100 ppm/K", "AT ±30 ppm -40..85 °C"
    load_f: float | None = None
    esr_ohm: float | None = None
    fitted: bool = True
    part_number: str | None = None
    scope: str | None = None  # board or section that the row stands in
    place: Place = field(default_factory=Place)
    source_text: str = ""  # the row's cells, joined
    decoded: tuple[str, ...] = ()  # which of the fields were read from the part number only
    given: Mapping[str, Given] = field(default_factory=dict)  # "value", "tolerance", "temperature_law", …
    row_cells: Mapping[str, str] = field(default_factory=dict)  # heading → text

    def to_dict(self) -> dict[str, object]:
        """The line as the `check` JSON contract writes it."""
        return {
            "designator": self.designator,
            "kind": self.kind,
            "value": self.value,
            "si_unit": self.si_unit,
            "tolerance": None if self.tolerance is None else {"low": self.tolerance[0], "high": self.tolerance[1]},
            "temperature_law": self.temperature_law,
            "load_f": self.load_f,
            "esr_ohm": self.esr_ohm,
            "fitted": self.fitted,
            "row": self.place.row,
            "sheet": self.place.sheet,
            "source_text": self.source_text,
            "decoded": list(self.decoded),
        }
