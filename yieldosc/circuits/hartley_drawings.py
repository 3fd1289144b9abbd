"""The Hartley circuits drawn in text; c, b, e are drain, gate, source of a field-effect stage."""

SCHEMATICS = {
    "emitter": """
      c ──┬── L1 ──┬── L2 ──┬── g ──CC── b
          │        │ (k)    │
          │   supply = gnd  │            e ──[RE]──[RE2 ∥ CE]── gnd
          └────────C────────┘
""",
    "shunt": """
      VCC ─[RC]─[LCH]─┬─ c ──CS── c2 ──┬── L1 ──┬── L2 ──┬── g ──CC── b
                                       │        │ (k)    │
                                       │       gnd       │     e ──[RE]──[RE2 ∥ CE]── gnd
                                       └────────C────────┘
""",
    "base": """
      c ──┬── L1 ── t ── L2 ── supply = gnd      b ──CB── gnd
          │         └──CT── e ──RE──[RE2]── gnd
          └──C── gnd
""",
    "collector": """
      c at the supply      g ──CC── b
      g ──┬── L1 ── t ── L2 ── gnd
          │         └──[RE ∥ CE]── e
          └──C── gnd
""",
}
