"""A small good study of a crystal oscillator as a workbook, with any cell changed."""

from tests.sheets.studies import write

BOM = [
    ["Designator", "Value", "Tolerance", "Description"],
    ["Y1", "8 MHz", "±20 ppm", "crystal 12 pF"],
    ["C1, C2", "15 pF", "±5 %", "ceramic C0G"],
    ["R1", "1M", "±5 %", "thick film, 200 ppm/K"],
]
DESIGN = {
    "circuit": "pierce", "target frequency": "8 MHz", "frequency limit low": "-100 ppm",
    "frequency limit high": "100 ppm",
}  # fmt: skip
ROLES = {
    "FL": {"Part": "Y1", "Temperature law": "AT ±30 ppm -40..85 °C", "Source": "guaranteed"},
    "CL": {"Part": "Y1"},
    "Cm": {"Part": "Y1", "Typ": "5.5 fF", "Tolerance": "±20 %", "Source": "typical"},
    "C0": {"Part": "Y1", "Typ": "1.8 pF", "Tolerance": "±20 %", "Source": "typical"},
    "ESR": {"Part": "Y1", "Min": "20 Ω", "Typ": "40 Ω", "Max": "80 Ω", "Source": "guaranteed"},
    "C1": {"Part": "C1", "Source": "guaranteed"},
    "C2": {"Part": "C2", "Source": "guaranteed"},
    "RF": {"Part": "R1", "Source": "guaranteed"},
    "gm": {"Min": "4 mS", "Typ": "6 mS", "Max": "10 mS", "Source": "characterised"},
    "Rout": {"Typ": "20 kΩ", "Tolerance": "±20 %", "Source": "typical"},
    "Cin": {"Typ": "5 pF", "Tolerance": "±20 %", "Source": "typical"},
    "Cout": {"Typ": "5 pF", "Tolerance": "±20 %", "Source": "typical"},
    "Cfb": {"Typ": "0.5 pF", "Tolerance": "±20 %", "Source": "typical"},
}


def write_clock(path, *, design=None, bom=None, **change):
    """A workbook at `path`; what `studies.write` takes, on this study."""
    return write(path, design={**DESIGN, **(design or {})}, bom=bom or BOM, base=ROLES, **change)
