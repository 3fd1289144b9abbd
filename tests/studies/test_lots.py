"""Yields of lots: what chance alone would spread, and what reels add to it."""

from __future__ import annotations

import numpy as np
import pytest

from yieldosc.studies.lots import lot_yields, lots
from yieldosc.studies.run import Setup


def test_without_reels_lots_differ_by_chance_alone(make_study, ideal_wien):
    yields = lot_yields(Setup.of(make_study(gain=4.0), ideal_wien(), seed=1))
    found = lots(yields, 256, 0.8)
    # 1,024 lots leave a 5 % point open by about a third of the binomial standard deviation of 2.3 points
    assert found.by_chance == pytest.approx((found.q05, found.q95), abs=0.01)
    assert np.std(yields) == pytest.approx(np.sqrt(yields.mean() * (1 - yields.mean()) / 256), rel=0.1)


def test_reels_widen_them_far_beyond_chance(make_study, ideal_wien):
    # reel share 0.5: 24 % to 93 % around a mean of 72.8 %; chance alone is ± 4.6 points
    found = lots(lot_yields(Setup.of(make_study(gain=4.0, share=0.5), ideal_wien(), seed=1)), 256, 0.8)
    low, high = found.by_chance
    assert high - low == pytest.approx(2 * 1.645 * np.sqrt(0.728 * 0.272 / 256), abs=0.012)
    assert found.q95 - found.q05 > 5 * (high - low)
