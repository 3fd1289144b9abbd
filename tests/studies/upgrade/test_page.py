"""Every sentence of the purchase page, on results made by hand."""

from __future__ import annotations

from dataclasses import replace

import pytest

from yieldosc.reports.upgrade_words import upgrade_page
from yieldosc.reports.workbook_upgrade import upgrade_workbook
from yieldosc.studies.estimates import tango, yield_estimate
from yieldosc.studies.results import Provenance
from yieldosc.studies.upgrade.results import Change, Recentre, SearchAccount, UpgradeOption, UpgradeResult

UNITS = 10_000
PLACEHOLDER_STEP = "Put prices into the BOM or the Grades sheet: with them the set is chosen by the cost of a good unit."


def change(part="C1, C2", now="±5 %", then="±2 %", law=None, better=None):
    return Change(part=part, from_tolerance=now, tolerance=then, from_law=law, temperature_law=better or law)


def option(*changes, failures=50, gained=900, lost=0, price=1.0, money=None, cost=None, looser=False, fresh=None):
    return UpgradeOption(
        changes=changes, yield_=yield_estimate(failures, UNITS), difference=tango(gained, lost, UNITS),
        relative_price=price, price_change=money, cost_per_good_unit=cost, looser=looser,
        confirmed=None if fresh is None else yield_estimate(fresh, UNITS),
    )  # fmt: skip


def search(**changes):
    made = SearchAccount(
        purchases=("C1, C2", "R1"), left_out=(), possible=12, tried=5, dominated=3, exhausted=True, best=None
    )
    return replace(made, **changes)


@pytest.fixture
def result(make_study):
    def made(*, target=0.99, failures=950, **changes):
        study = make_study(yield_target=target)
        plain = UpgradeResult(
            study=study, target=target, current=yield_estimate(failures, UNITS), current_cost_per_good_unit=None,
            parts_price=None, money=False, singles=(), sets=(), chosen=None, recentre=(), search=search(), units=2000,
            confirm_units=UNITS, findings=(),
            provenance=Provenance(
                seed=1, input_sha256=study.digest, versions={"yieldosc": "0"}, started="", seconds=0.0, workers=1,
                audited=0, disagreeing=0, exact=0,
            ),
        )  # fmt: skip
        return replace(plain, **changes)

    return made


def steps(r):
    return next(s.sentences for s in upgrade_page(r).sections if s.key == "steps")


def searched(r):
    return next(s.sentences for s in upgrade_page(r).sections if s.key == "search")


def test_a_purchase(result):
    best = option(change(), fresh=48)
    r = result(singles=(best,), sets=(best,), chosen=best)
    page = upgrade_page(r)
    assert (page.words, page.tone) == ("BUY C1, C2 with ±2 % in place of ±5 %", "good")
    assert page.headline == (
        "With this the predicted yield reaches the yield target of 99 % with its lower bound, on fresh units too."
    )
    assert steps(r) == ("Buy C1, C2 with ±2 % in place of ±5 %.", PLACEHOLDER_STEP)
    assert [label for label, _, _ in page.facts] == [
        "Yield, declared parts", "Yield, chosen set", "Price change per board",
    ]  # fmt: skip


def test_a_purchase_of_two_with_laws(result):
    best = option(change(law="X7R", better="C0G"), change("R1", "±1 %", "±1 %", "±100 ppm/K", "±50 ppm/K"), fresh=48)
    alone = option(change(), failures=300)
    r = result(singles=(alone,), sets=(best,), chosen=best)
    assert steps(r)[0] == (
        "Buy C1, C2 with ±2 % in place of ±5 % and C0G in place of X7R and R1 with ±50 ppm/K in place of ±100 ppm/K. "
        "No single part reaches the target; these do together."
    )


def test_nothing_better(result):
    kept = option(gained=0, price=0.0, failures=20, fresh=22)
    looser = option(change(then="±10 %"), gained=0, price=-0.4, failures=20, looser=True)
    lossy = option(change("R1", "±1 %", "±5 %"), gained=0, lost=300, price=-0.4, failures=320, looser=True)
    r = result(failures=20, singles=(looser, lossy), sets=(kept,), chosen=kept)
    page = upgrade_page(r)
    assert page.words == "BUY NOTHING BETTER"
    assert page.headline == (
        "The declared parts reach the yield target of 99 % with its lower bound, on fresh units too."
    )
    assert steps(r) == (
        "Keep the declared grades: the target needs no better part.",
        "Looser grades to consider, one at a time: C1, C2 ±5 % → ±10 %. Each keeps the yield within 0.1 points of the "
        "declared one.",
        PLACEHOLDER_STEP,
    )


def test_no_purchase(result):
    useless = option(change("R1", "±1 %", "±0.1 %"), gained=1, failures=949)
    r = result(singles=(useless,))
    page = upgrade_page(r)
    assert (page.words, page.tone) == ("NO PURCHASE REACHES THE TARGET", "bad")
    assert page.headline == "No set of the grades offered reaches the yield target of 99 %."
    assert steps(r) == (
        "Change the limit, the circuit or its nominal values, or trim each board: no purchase reaches the target.",
        "Better grades of R1 buy nothing: none moves the yield by 0.1 points.",
        PLACEHOLDER_STEP,
    )


def test_a_search_that_was_not_finished(result):
    r = result(search=search(exhausted=False, left_out=("R7",)))
    assert upgrade_page(r).headline == (
        "None of the 5 sets tried reaches the yield target of 99 %, nor does the best grade of every part together."
    )
    assert searched(r) == (
        "Of the grades of (C1, C2) and R1 3 were set aside, because another, no dearer one fails only where they do. Sets "
        "left: 12; tried, in the order of their price, on up to 10,000 units each: 5. Yield is not monotone in tolerance, "
        "so sets are enumerated.",
        "Not combined, because frequency and margin lean less on them: R7.",
        "Chosen on units 1 to 10,000, confirmed on the next 10,000. Single grades: counted on the first 2,000 units, or "
        "the declared yield plus the difference on them (Tango's score interval), whichever is known better.",
    )


def test_a_choice_that_may_not_be_the_cheapest(result):
    best = option(change(), fresh=48)
    r = result(sets=(best,), chosen=best, search=search(exhausted=False))
    assert searched(r)[1] == (
        "Not every cheaper set was tried: the choice reaches the target, but may not be the cheapest that does."
    )


def test_sets_that_fresh_units_do_not_confirm(result):
    r = result(sets=(option(change(), fresh=150),))
    assert upgrade_page(r).headline == (
        "Sets that reached the yield target of 99 % on the units that chose them did not hold it on fresh units."
    )


def test_no_target(result):
    r = result(target=None, search=None, singles=(option(change()),))
    page = upgrade_page(r)
    assert (page.words, page.tone) == ("NO TARGET", "open")
    assert page.headline == "No yield target is given: grades are compared, none is chosen."
    assert steps(r) == (
        "State a yield target in the Design sheet: without one no set can be chosen.", PLACEHOLDER_STEP,
    )  # fmt: skip
    assert searched(r) == ()


def test_money(result, make_study):
    best = option(change(), change("R1"), money=0.25, cost=2.5, fresh=10, failures=10)
    simple = option(change(), money=0.2, cost=2.505, fresh=20, failures=20)
    r = result(
        money=True, parts_price=1.5, current_cost_per_good_unit=4.0, sets=(best, simple), chosen=best,
        singles=(simple,), study=make_study(yield_target=0.99, build_quantity=1000.0, failed_unit_cost=20.0),
    )  # fmt: skip
    page = upgrade_page(r)
    facts = {label: (value, note) for label, value, note in page.facts}
    assert facts["Price change per board"] == ("+0.2500", "")
    assert facts["Cost per good unit"] == (
        "4.0000 → 2.5000",
        "(parts 1.5000 + share of failed units × 20) / yield; over 1,000 good units −1,500",
    )
    assert steps(r)[1] == (
        "With fewer changes, C1, C2 with ±2 % in place of ±5 %: a good unit costs 2.5050, 0.2 % more."
    )
    assert not any("placeholder" in s for section in page.sections for s in section.sentences)


def test_a_simpler_set_that_is_dearer_by_more_is_not_offered(result):
    best = option(change(), change("R1"), money=0.25, cost=2.5, fresh=10)
    r = result(money=True, parts_price=1.5, sets=(best, option(change(), cost=2.6, fresh=20)), chosen=best)
    assert not any(s.startswith("With fewer changes") for s in steps(r))


def test_no_cost_of_a_failed_unit(result):
    best = option(change(), money=0.25, cost=2.5, fresh=10)
    r = result(money=True, parts_price=1.5, current_cost_per_good_unit=4.0, sets=(best,), chosen=best)
    assert {label: note for label, _, note in upgrade_page(r).facts}["Cost per good unit"] == (
        "(parts 1.5000 + share of failed units × 0) / yield; no cost of a failed unit is given, so scrap costs its parts only"
    )


def test_another_nominal(result):
    nominal = Recentre(
        part="R1", from_value=15.8e3, to_value=16.2e3, unit="Ω", series=96, yield_=yield_estimate(50, UNITS),
        difference=tango(900, 0, UNITS),
    )  # fmt: skip
    r = result(recentre=(nominal, replace(nominal, to_value=16.5e3)))
    assert upgrade_page(r).words == "NO PURCHASE REACHES THE TARGET, ANOTHER NOMINAL VALUE DOES"
    # 900 gained of 10,000 and none lost: Wilson's interval of that share, 8.455 to 9.577 %
    assert steps(r)[0] == (
        "Re-centre R1: 15.8 kΩ → 16.2 kΩ (E96) moves the yield by +9.00 points (+8.45 to +9.58) and reaches the target; it "
        "costs nothing."
    )
    table = next(s for s in upgrade_page(r).sections if s.key == "recentre")
    assert len(table.rows) == 1  # the best value of each part


def test_the_workbook_shows_what_the_page_says(result):
    best = option(change(), fresh=48)
    book = upgrade_workbook(result(singles=(best,), sets=(best,), chosen=best))
    assert book.sheetnames[:3] == ["Purchase", "Sets", "Single grades"]
    assert {"BOM", "Design", "Roles", "Provenance"} <= set(book.sheetnames)
    texts = {str(c.value) for row in book["Purchase"].iter_rows() for c in row if c.value is not None}
    assert "BUY C1, C2 with ±2 % in place of ±5 %" in texts
    assert "→ Buy C1, C2 with ±2 % in place of ±5 %." in texts
    assert book["Single grades"]._charts
