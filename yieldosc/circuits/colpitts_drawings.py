"""The Colpitts circuits drawn in text; c, b, e are drain, gate, source of a field-effect stage."""

SCHEMATICS = {
    "emitter": """
      VCC ─[RC]─[LCH]─┬─ c ── L∥[CP] ──[C3]── m ──[CC]── b
                      │                       │
                      C1                      C2          e ──RE──[RE2 ∥ CE]── gnd
                      │                       │
                     gnd                     gnd
""",
    "base": """
      c ──┬── L∥[CP] ──[C3]── gnd      b ──CB── gnd
          C1
          ├── e ──RE──[RE2]── gnd
          C2
          │
         gnd
""",
    "collector": """
      c at the supply      m ── L∥[CP] ──[C3]── gnd      m ──[CC]── b
      b ──C1──┬── e ──RE── gnd
              C2
              │
             gnd
""",
    "opamp": """
              ┌───── RF ─────┐
      g ──RIN─┴ m ─▷− op-amp ┴─ q ──RO──┬─ o
      │            + at gnd             │
      ├───────────[C3]── L∥[CP] ────────┤
      C2                                C1
      │                                 │
     gnd                               gnd
""",
}
