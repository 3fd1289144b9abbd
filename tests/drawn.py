"""The circuits as the specification draws them, written out again by hand: role values of one unit → elements.

Nothing is taken from the package: node names, stage formulas, bias and temperature laws are derived here once more.
"""

from __future__ import annotations

import math
from collections.abc import Mapping

from tests.independent import Element

Values = Mapping[str, float]
K_OVER_Q = 1.380649e-23 / 1.602176634e-19  # V/K, SI 2019
BJT_DEFAULTS = {"VBE": 0.65, "VA": 100.0, "fT": 300e6, "Cob": 2e-12}
INVERTER_DEFAULTS = {"Rout": 20e3, "Cin": 5e-12, "Cout": 5e-12, "Cfb": 0.5e-12}


def bjt_point(v: Values, temperature_c: float, bias: str, rfeed: float, rdc: float) -> tuple[float, float]:
    """(collector current, collector–emitter voltage) at one temperature."""
    v = {**BJT_DEFAULTS, **v}
    beta = v["hFE"] * (1 + 0.005 * (temperature_c - 25))
    vbe = v["VBE"] - 0.002 * (temperature_c - 25)
    if bias == "collector":
        # VCC − (Ic + Ib) Rfeed − Ib RB1 − VBE − Ie Rdc = 0
        ib = (v["VCC"] - vbe) / (v["RB1"] + (beta + 1) * (rfeed + rdc))
        ic = beta * ib
        return ic, v["VCC"] - (ic + ib) * rfeed - (ic + ib) * rdc
    if "RB2" in v:
        source, series = v["VCC"] * v["RB2"] / (v["RB1"] + v["RB2"]), 1 / (1 / v["RB1"] + 1 / v["RB2"])
    else:
        source, series = v["VCC"], v["RB1"]
    ib = (source - vbe) / (series + (beta + 1) * rdc)
    ic = beta * ib
    return ic, v["VCC"] - ic * rfeed - (ic + ib) * rdc


def bjt(v: Values, temperature_c: float, bias: str, rfeed: float, rdc: float, b: str, c: str, e: str) -> list[Element]:
    """Small-signal elements of a bipolar stage with its bias resistor."""
    v = {**BJT_DEFAULTS, **v}
    ic, _ = bjt_point(v, temperature_c, bias, rfeed, rdc)
    gm = ic / (K_OVER_Q * (temperature_c + 273.15))
    beta = v["hFE"] * (1 + 0.005 * (temperature_c - 25))
    rows = [
        Element("gm", (c, e, b, e), (gm,), gain=True),
        Element("R", (b, e), (beta / gm,)),
        Element("R", (c, e), (v["VA"] / ic,)),
        Element("C", (b, e), (max(gm / (2 * math.pi * v["fT"]) - v["Cob"], 0.0),)),
        Element("C", (b, c), (v["Cob"],)),
    ]
    if bias == "collector":
        rows.append(Element("R", (b, c), (v["RB1"],)))
    else:
        rows.append(Element("R", (b, "gnd"), (1 / (1 / v["RB1"] + (1 / v["RB2"] if "RB2" in v else 0.0)),)))
    return [row for row in rows if row.nodes[0] != row.nodes[1]]


def emitter(v: Values) -> tuple[str, list[Element]]:
    """Node of e, and RE e–e2, RE2 ∥ CE e2–gnd (RE2 absent: CE beside RE; RE absent: e is gnd)."""
    if "RE" not in v:
        return "gnd", []
    foot = "e2" if "RE2" in v else "gnd"
    rows = [Element("R", ("e", foot), (v["RE"],))]
    if "RE2" in v:
        rows.append(Element("R", ("e2", "gnd"), (v["RE2"],)))
    if "CE" in v:
        rows.append(Element("C", ("e2" if "RE2" in v else "e", "gnd"), (v["CE"],)))
    return "e", rows


def feed(v: Values) -> list[Element]:
    """RC and the choke in series from c, here with a node of their own between them."""
    rows = []
    if "LCH" in v and "RC" in v:
        rows += [
            Element("R", ("c", "feed"), (v["RC"],)),
            Element("L", ("feed", "gnd"), (v["LCH"], v.get("LCH_dcr", 0.0))),
        ]
    elif "LCH" in v:
        rows.append(Element("L", ("c", "gnd"), (v["LCH"], v.get("LCH_dcr", 0.0))))
    elif "RC" in v:
        rows.append(Element("R", ("c", "gnd"), (v["RC"],)))
    if "RL" in v:
        rows.append(Element("R", ("c", "gnd"), (v["RL"],)))
    if "CST" in v:
        rows.append(Element("C", ("c", "gnd"), (v["CST"],)))
    return rows


def wien_bridge(v: Values, options: Mapping[str, str], temperature_c: float) -> list[Element]:
    """Series arm o–n–p, shunt arm at p, divider RF (q–m) over RG + RS_start, amplifier p, m → q, RO q–o."""
    q = "q" if "RO" in v else "o"
    rows = [
        Element("R", ("o", "n"), (v["R1"],)),
        Element("C", ("n", "p"), (v["C1"],)),
        Element("R", ("p", "gnd"), (v["R2"],)),
        Element("C", ("p", "gnd"), (v["C2"],)),
        Element("R", (q, "m"), (v["RF"],), gain=True),
        Element("R", ("m", "s") if "RS_start" in v else ("m", "gnd"), (v["RG"],)),
        Element("opamp", (q, "p", "m"), (1 / (2 * math.pi * v["GBW"]) if "GBW" in v else 0.0,)),
    ]
    if "RS_start" in v:
        rows.append(Element("R", ("s", "gnd"), (v["RS_start"],)))
    if "CIN" in v:
        rows.append(Element("C", ("p", "gnd"), (v["CIN"],)))
    if "RO" in v:
        rows.append(Element("R", ("q", "o"), (v["RO"],)))
    return rows


def _coil(v: Values, top: str, bottom: str) -> list[Element]:
    if "C3" not in v:
        return [Element("L", (top, bottom), (v["L"], v.get("L_dcr", 0.0)))]
    return [Element("C", (top, "y"), (v["C3"],)), Element("L", ("y", bottom), (v["L"], v.get("L_dcr", 0.0)))]


def colpitts(v: Values, options: Mapping[str, str], temperature_c: float) -> list[Element]:
    """The three grounds of the Colpitts and Clapp; C3 is drawn on the coil's other side (series order is free)."""
    ground, bias = options.get("ground", "emitter"), options.get("bias", "divider")
    e, emitter_rows = emitter(v)
    rdc = v.get("RE", 0.0) + v.get("RE2", 0.0)
    rfeed = v.get("RC", 0.0) + v.get("LCH_dcr", 0.0)
    b = "b" if ground == "base" or "CC" in v else "m"
    if ground == "emitter":
        rows = [
            *_coil(v, "c", "m"),
            Element("C", ("c", "gnd"), (v["C1"],)),
            Element("C", ("m", "gnd"), (v["C2"],)),
            *feed(v),
        ]
        c = "c"
    elif ground == "base":
        if "C3" not in v:
            rfeed = v.get("L_dcr", 0.0)
        rows = [
            *_coil(v, "c", "gnd"),
            Element("C", ("c", e), (v["C1"],)),
            Element("C", (e, "gnd"), (v["C2"],)),
            *feed(v),
        ]
        rows.append(Element("C", ("b", "gnd"), (v["CB"],)))
        c = "c"
    else:
        rfeed = 0.0
        rows = [*_coil(v, "m", "gnd"), Element("C", (b, e), (v["C1"],)), Element("C", (e, "gnd"), (v["C2"],))]
        if "RL" in v:
            rows.append(Element("R", (e, "gnd"), (v["RL"],)))
        c = "gnd"
    if "CC" in v:
        rows.append(Element("C", ("m", "b"), (v["CC"],)))
    return [*rows, *emitter_rows, *bjt(v, temperature_c, bias, rfeed, rdc, b, c, e)]


def crystal(v: Values, plus: str, minus: str) -> list[Element]:
    """Motional arm from FL at CL (or FS), and C0."""
    fs = v["FS"] if "FS" in v else v["FL"] / math.sqrt(1 + v["Cm"] / (v["C0"] + v["CL"]))
    motional = 1 / ((2 * math.pi * fs) ** 2 * v["Cm"])
    return [
        Element("arm", (plus, minus), (motional, v["Cm"], v["ESR"])),
        Element("C", (plus, minus), (v["C0"],)),
    ]


def pierce(v: Values, options: Mapping[str, str], temperature_c: float) -> list[Element]:
    """Crystal g–x, load capacitors, RS_series d–x, RF g–d, inverter from g to d."""
    v = {**INVERTER_DEFAULTS, **v}
    x = "x" if "RS_series" in v else "d"
    gm = v["gm"] * ((temperature_c + 273.15) / 298.15) ** -1.5
    rows = [
        *crystal(v, "g", x),
        Element("C", ("g", "gnd"), (v["C1"],)),
        Element("C", (x, "gnd"), (v["C2"],)),
        Element("R", ("g", "d"), (v["RF"],)),
        Element("gm", ("d", "gnd", "g", "gnd"), (gm,), gain=True),
        Element("R", ("g", "gnd"), (1e12,)),
        Element("R", ("d", "gnd"), (v["Rout"],)),
        Element("C", ("g", "gnd"), (v["Cin"],)),
        Element("C", ("d", "gnd"), (v["Cout"],)),
        Element("C", ("g", "d"), (v["Cfb"],)),
    ]
    for name, nodes in (("CS1", ("g", "gnd")), ("CS2", (x, "gnd")), ("CX", ("g", x))):
        if name in v:
            rows.append(Element("C", nodes, (v[name],)))
    if "RS_series" in v:
        rows.append(Element("R", ("d", x), (v["RS_series"],)))
    return rows


DRAWN = {"wien_bridge": wien_bridge, "colpitts": colpitts, "pierce": pierce}
