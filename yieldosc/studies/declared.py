"""Study → the declared population on its bench: what every run that answers a question starts from."""

from __future__ import annotations

from yieldosc.evaluators import make_evaluator
from yieldosc.population import Adjustment, Population
from yieldosc.solver.evaluator import Evaluator
from yieldosc.studies.nominal import bench_ratio, nominal_values, reference_corner
from yieldosc.studies.refusals import refuse_without_crossing
from yieldosc.studies.run import Setup
from yieldosc.studies.temperature_check import with_between
from yieldosc.study import Corner, Study


def declared_setup(study: Study, *, seed: int, evaluator: Evaluator | None = None) -> Setup:
    """The declared set of a study, scaled by the reference board where one was measured.

    evaluator: in place of the circuit's own solver.
    """
    return declared(study, seed=seed, evaluator=evaluator)[0]


def declared(
    study: Study, *, seed: int, evaluator: Evaluator | None = None, adjustment: Adjustment | None = None
) -> tuple[Setup, float | None]:
    """The same with what is done to each board, and the reference board's ratio (None where none was measured)."""
    refuse_without_crossing(study)
    population = Population.of(study)
    design = study.design
    solver = evaluator or make_evaluator(
        study.circuit,
        nominal_values(population, reference_corner(study)),
        limits_width_hz=design.frequency_high_hz - design.frequency_low_hz,
    )
    ratio = bench_ratio(study, population, solver)
    return with_between(Setup.of(study, solver, seed=seed, bench_ratio=ratio or 1.0, adjustment=adjustment)), ratio


def factory_corner(study: Study) -> Corner:
    """Where boards are tested: the stated temperature, else the study's own nearest to 25 °C; nominal supply, new."""
    stated = study.design.test_temperature_c
    if stated is None:
        return reference_corner(study)
    return Corner(stated, study.design.supply_v, 0.0)


