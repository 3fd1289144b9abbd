"""The cheapest purchase of a linear circuit of normal parts, against every set counted out in closed form."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest
from scipy.stats import norm

from yieldosc.reports.upgrade_words import upgrade_page
from yieldosc.studies.upgrade.upgrade import upgrade

TOLERANCES = {"R1": 0.04, "R2": 0.05, "C1": 0.08, "C2": 0.06}
WEIGHTS = {"R1": -0.5, "R2": -0.5, "C1": -0.5, "C2": -0.5}
WINDOW = 0.01
UNITS = 16_384


def closed_yield(tolerances, off=0.0):
    """σ² = Σ (aᵢ tᵢ/3)²."""
    sd = np.sqrt(sum((WEIGHTS[role] * t / 3) ** 2 for role, t in tolerances.items()))
    return norm.cdf((WINDOW - off) / sd) - norm.cdf((-WINDOW - off) / sd)


def every_set(offers, off=0.0):
    """(chosen tolerances, price, yield) of all sets; offers: role → [(tolerance, price change)]."""
    made = []
    for chosen in product(*([(TOLERANCES[role], 0.0), *offers[role]] for role in TOLERANCES)):
        tolerances = dict(zip(TOLERANCES, (t for t, _ in chosen), strict=True))
        made.append((tolerances, sum(p for _, p in chosen), closed_yield(tolerances, off)))
    return made


def between(yields, share):
    """A target in the widest gap near a share of the sorted yields, a lower bound's width below the next yield."""
    ordered = np.sort(yields)
    middle = int(share * len(ordered))
    i = max(range(middle - 12, middle + 12), key=lambda k: ordered[k] - ordered[k - 1])
    return float(0.35 * ordered[i - 1] + 0.65 * ordered[i]) - 0.004, float(ordered[i] - ordered[i - 1])


def priced(random, *, regular):
    """Two better grades of each part: dearer the better, or at any price (a better grade can be the cheaper one)."""
    offers = {}
    for role, declared in TOLERANCES.items():
        steps = np.round(np.sort(random.uniform(0.1, 3.0, 2)) if regular else random.uniform(0.1, 3.0, 2), 3)
        offers[role] = [(declared / 2, float(steps[0])), (declared / 5, float(steps[1]))]
    return offers


def bought(r):
    """role → tolerance of the chosen set."""
    found = dict(TOLERANCES)
    for change in r.chosen.changes:
        found[change.part] = float(change.tolerance.strip("±% ")) / 100
    return found


def rows(offers, grade):
    return [grade(role, t, price=1.0 + p) for role, those in offers.items() for t, p in those]


@pytest.mark.parametrize("seed", range(4))
@pytest.mark.parametrize("regular", [True, False])
def test_the_cheapest_set_is_found_whatever_the_prices(linear, grade, seed, regular):
    offers = priced(np.random.default_rng(seed), regular=regular)
    sets = every_set(offers)
    target, gap = between([y for _, _, y in sets], 0.75)
    assert gap > 0.004  # else counting on these units could not tell
    study, evaluator = linear(
        tolerances=TOLERANCES, weights=WEIGHTS, grades=rows(offers, grade), prices=dict.fromkeys(TOLERANCES, 1.0),
        yield_target=target,
    )  # fmt: skip
    r = upgrade(study, units=UNITS, workers=1, seed=seed + 1, evaluator=evaluator)
    reaching = [s for s in sets if s[2] >= target]
    cheapest = min((4 + price) / y for _, price, y in reaching)
    tolerances = bought(r)
    _, price, y = next(s for s in reaching if s[0] == pytest.approx(tolerances))
    assert r.money
    assert r.search.exhausted
    # the set itself, or one whose good unit costs the same within what counting yields on these units can tell
    assert (4 + price) / y <= cheapest * (1 + 3 * np.sqrt(0.25 / UNITS))
    assert r.chosen.price_change == pytest.approx(price, abs=1e-9)
    assert r.chosen.yield_.estimate == pytest.approx(y, abs=4 * np.sqrt(0.25 / UNITS))


@pytest.mark.parametrize("failed", [0.0, 30.0, 300.0])
def test_a_dear_failure_buys_a_better_set(linear, grade, failed):
    """Cost of a good unit = (parts + change + (1 − y) · failed)/y, minimised over all sets that reach the target."""
    offers = priced(np.random.default_rng(11), regular=True)
    sets = every_set(offers)

    def cost(price, y):
        return (4.0 + price + (1 - y) * failed) / y

    study, evaluator = linear(
        tolerances=TOLERANCES, weights=WEIGHTS, grades=rows(offers, grade), prices=dict.fromkeys(TOLERANCES, 1.0),
        yield_target=0.9, failed_unit_cost=failed,
    )  # fmt: skip
    r = upgrade(study, units=UNITS, workers=1, evaluator=evaluator)
    best = min(cost(p, y) for _, p, y in sets if y >= 0.91)
    tolerances = bought(r)
    price, y = next((p, y) for t, p, y in sets if t == pytest.approx(tolerances))
    # 16,384 units count a yield to ±0.25 points (2 sd)
    assert cost(price, y) <= best + 0.005 * (4 + price + failed)
    assert r.chosen.cost_per_good_unit == pytest.approx(cost(price, y), abs=0.005 * (4 + price + failed))
    assert r.chosen.cost_per_good_unit == pytest.approx(cost(price, r.chosen.yield_.estimate), rel=1e-12)


def test_a_dear_failure_changes_the_choice(linear, grade):
    """Negative control of the last: free failures and dear ones do not buy the same set."""
    offers = priced(np.random.default_rng(11), regular=True)
    chosen = []
    for failed in (0.0, 300.0):
        study, evaluator = linear(
            tolerances=TOLERANCES, weights=WEIGHTS, grades=rows(offers, grade),
            prices=dict.fromkeys(TOLERANCES, 1.0), yield_target=0.9, failed_unit_cost=failed,
        )  # fmt: skip
        chosen.append(bought(upgrade(study, units=UNITS, workers=1, evaluator=evaluator)))
    assert chosen[0] != chosen[1]


def test_declared_parts_that_reach_the_target_are_kept(linear, grade):
    """Where better ones are dear; where they are cheap, a good unit may cost less with them, and that is said."""
    for dear, kept in ((40.0, True), (0.1, False)):
        study, evaluator = linear(
            tolerances=TOLERANCES, weights=WEIGHTS, grades=[grade("C1", 0.01, price=1 + dear)],
            prices=dict.fromkeys(TOLERANCES, 1.0), yield_target=closed_yield(TOLERANCES) - 0.02,
        )  # fmt: skip
        r = upgrade(study, units=UNITS, workers=1, evaluator=evaluator)
        assert (r.chosen.changes == ()) == kept
        step = upgrade_page(r).sections[0].sentences[0]
        assert step == (
            "Keep the declared grades: the target needs no better part."
            if kept
            else "Buy C1 with ±1 % in place of ±8 %. The declared parts reach the target too, but a good unit costs less "
            "with this."
        )


def test_cost_of_a_good_unit_by_hand(linear, grade):
    """Parts 1 + 1 + 1 + 1, one better grade at 3.5 instead of 1, failed units 10 each."""
    study, evaluator = linear(
        tolerances=TOLERANCES, weights=WEIGHTS, grades=[grade("C1", 0.02, price=3.5)],
        prices=dict.fromkeys(TOLERANCES, 1.0), yield_target=0.99, failed_unit_cost=10.0,
    )  # fmt: skip
    r = upgrade(study, units=4096, workers=1, evaluator=evaluator)
    y = r.current.estimate
    assert r.parts_price == 4.0
    assert r.current_cost_per_good_unit == pytest.approx((4.0 + (1 - y) * 10) / y, rel=1e-12)
    (option,) = r.singles
    y = option.yield_.estimate
    assert option.price_change == 2.5
    assert option.cost_per_good_unit == pytest.approx((6.5 + (1 - y) * 10) / y, rel=1e-12)
