"""Production yield of oscillator circuits, from the BOM's tolerances to a workbook that can be signed."""
