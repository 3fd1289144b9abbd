"""Where an oscillator settles: harmonic balance of its limiter and the linear network of its own branch table.

    transfer    branch table → H(jω) from the limiter's output to its input
    limiter     clip, tanh, exp
    crossing    zero phase of that loop, and the gain to spare there
    balance     Newton on ω and harmonics; refine doubles the harmonics until the frequency stands
    settled     `solve`: every unit in full
    shift       `FittedShift`; fast uses it, checks it and falls back
    evaluator   `SettlingEvaluator`: the same behind the solver's seam
"""
