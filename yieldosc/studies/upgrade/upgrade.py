"""Which part to buy better: every next grade, the cheapest set that reaches the target, and other nominal values.

Chosen on one sample of units, the choice and its two runners-up confirmed on fresh ones.
"""

from __future__ import annotations

import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import UTC, datetime

import numpy as np
from numpy.typing import NDArray

from yieldosc.errors import Finding
from yieldosc.solver.evaluator import Evaluator
from yieldosc.studies.declared import declared_setup
from yieldosc.studies.estimates import yield_estimate
from yieldosc.studies.nominal import reference_corner, slopes
from yieldosc.studies.parallel import Workers, default_workers
from yieldosc.studies.progress import Callback, Meter
from yieldosc.studies.provenance import provenance
from yieldosc.studies.results import Estimate
from yieldosc.studies.rivals import good_units, paired_difference
from yieldosc.studies.run import QUANTUM, Setup
from yieldosc.studies.upgrade.company import Company, companies
from yieldosc.studies.upgrade.moved import best_known
from yieldosc.studies.upgrade.prices import Prices
from yieldosc.studies.upgrade.purchases import Choice, Purchase, purchases
from yieldosc.studies.upgrade.recentre import SCREEN, candidates, recentred
from yieldosc.studies.upgrade.results import SearchAccount, UpgradeOption, UpgradeResult
from yieldosc.studies.upgrade.search import MOST_UNITS, Found, Reaching, cheapest
from yieldosc.studies.upgrade.trial import Trial, all_flags
from yieldosc.study import Study

Flags = NDArray[np.bool_]
UNITS = 2 * QUANTUM  # for the single grades, which are compared on the same draws
MOST_SINGLE_UNITS = 50 * UNITS
PROOF_UNITS = 16 * QUANTUM  # on which a set must prove itself, and as many fresh ones
MOST_PURCHASES = 6  # that are combined: those on which frequency and margin lean most
USUAL_CORNERS = 10


def upgrade(
    study: Study,
    *,
    units: int | None = None,
    seed: int = 1,
    workers: int | None = None,
    progress: Callback | None = None,
    evaluator: Evaluator | None = None,
) -> UpgradeResult:
    """Yield and price of each next grade, the cheapest set that reaches the target, other nominal values.

    units: on which a set must prove itself, and as many fresh ones to confirm it (default 65,536, fewer where a study
    has many corners). Same seed, same answer, whatever the number of workers.
    """
    started, clock = datetime.now(UTC), time.perf_counter()
    setup = declared_setup(study, seed=seed, evaluator=evaluator)
    proof = units or _units_for(setup)
    offered = purchases(study)
    single = min(_single_units(offered), proof)
    leaning = slopes(setup.population, setup.bench, reference_corner(study))
    nominals = candidates(study, setup, leaning)
    meter = Meter(progress)
    grades = sum(len(p.choices) for p in offered)
    meter.expect(single * (1 + grades) + single * grades // 2 + SCREEN * len(nominals) + 4 * proof)
    run = _Run(study, setup, Prices.of(study, offered), offered, leaning, single, proof, meter)
    with Workers(workers or default_workers()) as crew:
        current = run.declared(crew)
        run.singles(crew)
        moved = recentred(
            setup, nominals, run.good, current, confidence=study.design.confidence, workers=crew, meter=meter
        )
        found = run.searched(crew) if study.design.yield_target is not None else None
        sets = run.confirmed(found.reaching) if found is not None else ()
    chosen = next((s for s in sets if _stands(s, study.design.yield_target)), None)
    prices = run.prices
    return UpgradeResult(
        study=study,
        target=study.design.yield_target,
        current=current,
        current_cost_per_good_unit=prices.per_good_unit(0.0 if prices.money else None, current.estimate),
        parts_price=prices.parts,
        money=prices.money,
        singles=run.options,
        sets=sets,
        chosen=chosen,
        recentre=moved,
        search=None if found is None else run.account(found),
        units=single,
        confirm_units=proof,
        findings=(*study.findings, *_findings(study, offered, prices)),
        provenance=provenance(study, seed, started, clock, crew.count),
    )


def _single_units(offered: Sequence[Purchase]) -> int:
    """Units of each single grade: fewer where there are many grades."""
    grades = sum(len(p.choices) for p in offered)
    return UNITS if grades * UNITS <= MOST_SINGLE_UNITS else UNITS // 2


def _units_for(setup: Setup) -> int:
    share = min(1.0, USUAL_CORNERS / len(setup.corners))
    return max(2, round(PROOF_UNITS * share / QUANTUM)) * QUANTUM


def _stands(option: UpgradeOption, target: float | None) -> bool:
    return option.confirmed is not None and target is not None and option.confirmed.low >= target


@dataclass
class _Run:
    """One upgrade on its way."""

    study: Study
    setup: Setup
    prices: Prices
    offered: Sequence[Purchase]
    leaning: Mapping[str, tuple[float, float]]
    single: int
    proof: int
    meter: Meter

    def __post_init__(self) -> None:
        self.confidence = self.study.design.confidence
        self.good: Flags = np.zeros(0, dtype=bool)
        self._declared_good: Flags = np.zeros(0, dtype=bool)
        self.options: tuple[UpgradeOption, ...] = ()
        self._flags: dict[str, list[tuple[Choice, Flags]]] = {}
        self._kept: list[tuple[Purchase, list[Choice]]] = []

    def _trial(self, units: int, start: int = 0) -> Trial:
        declared = self._declared_good if len(self._declared_good) else None
        return Trial(self.setup, units, self.study.design.yield_target, self.confidence, start, declared)

    def singles(self, crew: Workers) -> None:
        """Every other grade of every purchase, one at a time, on the same draws."""
        pairs = [(p, c) for p in self.offered for c in p.choices]
        self.good = self._declared_good[: self.single]
        found = all_flags(self._trial(self.single), [(c,) for _, c in pairs], workers=crew, meter=self.meter)
        for (purchase, choice), good in zip(pairs, found, strict=True):
            self._flags.setdefault(purchase.name, []).append((choice, good))
        self.options = tuple(
            self._option((choice,), best_known(self.current, difference, self._yield(good)), difference)
            for (_, choice), good in zip(pairs, found, strict=True)
            for difference in [paired_difference(good, self.good, self.confidence)]
        )

    def _yield(self, good: Flags) -> Estimate:
        return yield_estimate(len(good) - int(np.count_nonzero(good)), len(good), self.confidence)

    def declared(self, crew: Workers) -> Estimate:
        """The declared set on the units on which sets prove themselves."""
        pieces = good_units(self.setup, [self.setup.population.parameters], self.proof, workers=crew, meter=self.meter)
        self._declared_good = pieces[0]
        self.current = self._yield(self._declared_good)
        return self.current

    def searched(self, crew: Workers) -> Found:
        """The cheapest sets among the purchases that matter most."""
        ranked = sorted(self.offered, key=self._lean, reverse=True)[:MOST_PURCHASES]
        # what a looser grade saves is known only where prices are the user's own
        alone = {
            p.name: [(c, f) for c, f in self._flags[p.name] if self.prices.money or not c.looser] for p in ranked
        }
        together = companies(
            self._trial(max(self.single // 2, 1)), self.good, alone, self.prices, workers=crew, meter=self.meter
        )
        self._kept = [(p, together[p.name].kept(self.prices)) for p in ranked]
        budget = int(MOST_UNITS * min(1.0, USUAL_CORNERS / len(self.setup.corners)))
        return cheapest(
            self._trial(self.proof), [grades for _, grades in self._kept], self.prices,
            workers=crew, meter=self.meter, most_units=budget, best_grades=self._best_grades(together),
        )  # fmt: skip

    def _lean(self, purchase: Purchase) -> float:
        """How far frequency and margin lean on the purchase's spread and law."""
        found = 0.0
        for p in purchase.members:
            lean = np.nan_to_num(np.abs(self.leaning.get(p.role, (0.0, 0.0))))
            reach = (p.high - p.low) / (2 * abs(p.typical)) + self._law_reach(p.role)
            found += float(lean.sum()) * reach
        return found

    def _law_reach(self, role: str) -> float:
        """The largest change that the law of a part can make over the study's temperatures."""
        p = self.study.parameter(role)
        if p.law is None or p.law.absolute:
            return 0.0
        ends = (np.zeros(1), np.ones(1))
        return max(
            float(np.abs(p.law.change(t, dict.fromkeys(p.law.coefficients, u))).max())
            for t in self.study.design.temperatures_c
            for u in ends
        )

    def _best_grades(self, together: Mapping[str, Company]) -> list[Choice]:
        """Of each purchase the grade that gains most, the most helpful purchase first; those that gain nothing are
        left out."""
        best = [found for p, kept in self._kept if (found := together[p.name].best(kept, self.prices)) is not None]
        return [choice for _, choice in sorted(best, key=lambda pair: -pair[0])]

    def confirmed(self, reaching: Sequence[Reaching]) -> tuple[UpgradeOption, ...]:
        """The choice and its runners-up, with their yield on fresh units."""
        fresh = self._trial(self.proof, self.proof)
        made = []
        for found in reaching:
            good = self._trial(self.proof).flags(found.choices)
            difference = paired_difference(good, self._declared_good, self.confidence)
            again = self._yield(fresh.flags(found.choices))
            self.meter.done(self.proof)
            made.append(replace(self._option(found.choices, found.yield_, difference), confirmed=again))
        return tuple(made)

    def _option(self, choices: tuple[Choice, ...], yield_: Estimate, difference: Estimate) -> UpgradeOption:
        change = self.prices.change(choices)
        return UpgradeOption(
            changes=tuple(c.change for c in choices),
            yield_=yield_,
            difference=difference,
            relative_price=sum(c.relative_price for c in choices),
            price_change=change,
            cost_per_good_unit=self.prices.per_good_unit(change, yield_.estimate),
            looser=any(c.looser for c in choices),
        )

    def account(self, found: Found) -> SearchAccount:
        """How the search went."""
        combined = tuple(p.name for p, _ in self._kept)
        offered = sum(self.prices.money or not c.looser for p, _ in self._kept for c in p.choices)
        return SearchAccount(
            purchases=combined,
            left_out=tuple(p.name for p in self.offered if p.name not in combined),
            possible=found.possible,
            tried=found.tried,
            dominated=offered - sum(len(grades) for _, grades in self._kept),
            exhausted=found.exhausted,
            best=found.best,
        )


def _findings(study: Study, offered: Sequence[Purchase], prices: Prices) -> list[Finding]:
    made = []
    if study.design.yield_target is None:
        made.append(
            Finding(
                "warning", "no-yield-target",
                "no yield target in Design: grades are compared, but no set can be chosen; give the yield wanted",
            )
        )  # fmt: skip
    if study.design.trim_role is not None:
        made.append(
            Finding(
                "warning", "trim-not-applied",
                f"boards are judged as they are assembled, without the trim of {study.design.trim_role}: `limits` "
                "shows what the trim does",
            )
        )  # fmt: skip
    if not offered:
        made.append(
            Finding(
                "warning", "no-other-grade",
                "no part has another grade: the built-in ladders know resistors, capacitors, inductors and crystals "
                "with a tolerance; the sheet Grades can name others",
            )
        )  # fmt: skip
    elif not prices.money:
        bare = [p.name for p in offered if p.price is None or any(c.price is None for c in p.choices)]
        made.append(
            Finding(
                "note", "placeholder-prices",
                f"no price for {'; '.join(bare)}: sets are ordered by relative prices, which are placeholders; give "
                "prices in the BOM (price of one part) or in Grades",
            )
        )  # fmt: skip
    return made
