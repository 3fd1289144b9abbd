"""Study + seed → values of a block of units at a corner.

    streams   (seed, purpose, name, unit number) → u in (0, 1)
    draws     parts and reels → the u of every cause of every role
    block     values at a corner, adjustments, the call of the solver
"""

from yieldosc.population.block import Adjustment, Bench, Block, Population
from yieldosc.population.draws import Draws, Streams, Variable, combine, study_variables
from yieldosc.population.streams import small_seed, uniforms, uniforms_at

__all__ = [
    "Adjustment", "Bench", "Block", "Draws", "Population", "Streams", "Variable",
    "combine", "small_seed", "study_variables", "uniforms", "uniforms_at",
]  # fmt: skip
