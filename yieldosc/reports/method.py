"""How the figures were made: one row per step, with its equation and its source."""

from __future__ import annotations

from yieldosc.reports.requirements import percent
from yieldosc.studies.results import Assessment

Row = tuple[str, str, str]


def method_rows(a: Assessment) -> tuple[Row, ...]:
    """(step, what is done, source)."""
    return (*_circuit(a), *_population(), *_rates(a), *_evidence(a), *_scrutiny())


def _circuit(a: Assessment) -> tuple[Row, ...]:
    circuit = a.study.circuit
    return (
        (
            "Network",
            "The branch table gives the nodal determinant D(s) = A(s) + g·B(s), g the gain element; its coefficients "
            "are sums of products of part values, expanded once in symbols.",
            "two-graph expansion: Mayeda & Seshu 1957",
        ),
        (
            "Frequency",
            "The crossing: the frequency at which a real gain puts a pair of roots of D on the imaginary axis, "
            "followed per unit from the closed form.",
            "Barkhausen condition on D(jω) = 0",
        ),
        (
            "Start-up margin",
            "Gain over critical gain; a unit starts when it exceeds 1, the intended pair is the one that grows, and no "
            "upper gain limit is passed.",
            "roots counted by Routh's array",
        ),
        ("Start-up time", "t = ln(V_end/V_0)/σ, σ the real part of the growing pair.", "linear growth e^(σt)"),
        ("Closed form", circuit.closed_form, "the circuit's textbook formula; a start value and a cross-check"),
        ("Model range", circuit.range_text or "no limit stated", "stated with the circuit"),
        *(("Assumption", text, "stated with the circuit") for text in circuit.assumptions),
    )


def _population() -> tuple[Row, ...]:
    return (
        (
            "Value of a part",
            "value(T, age) = initial·(1 + law(T))·(1 + solder)·(1 + drift(age)); every cause has its own random "
            "variable, drawn once per unit and carried through every corner.",
            "sheet 'Inputs used' lists every cause",
        ),
        (
            "Shape",
            "A tolerance without a shape is uniform: it says where parts may lie, not how often. Among independent "
            "symmetric unimodal parts that is the worst for convex symmetric limits.",
            "Barmish & Lagoa, Math. Control Signals Systems 10 (1997) 203",
        ),
        (
            "Reels",
            "Parts of one reel share z = √ρ·z_reel + √(1−ρ)·z_part, u = Φ(z), with the reel share ρ.",
            "Gaussian copula; every part keeps its own distribution",
        ),
    )


def _rates(a: Assessment) -> tuple[Row, ...]:
    return (
        (
            "Yield",
            "Good is a unit that starts on the intended mode and meets every limit at every corner. The interval of "
            "k failures in n units is exact.",
            "Clopper & Pearson, Biometrika 26 (1934) 404",
        ),
        (
            "Verdict",
            f"At most {a.looks_planned} looks at counts fixed beforehand, each interval at 1 − α/{a.looks_planned}, so "
            f"that all hold together at {percent(a.study.design.confidence)}: meets when the lower bound reaches the "
            "target, does not meet when the upper bound misses it, else not proven.",
            "repeated confidence intervals: Jennison & Turnbull, J. R. Statist. Soc. B 51 (1989) 305; Bonferroni",
        ),
        (
            "Differences",
            "Sets of assumptions and tighter grades are run on the same draws; the difference of two yields has the "
            "score interval of paired rates.",
            "Tango, Statist. Med. 17 (1998) 891",
        ),
    )


def _evidence(a: Assessment) -> tuple[Row, ...]:
    return (
        (
            "Leading parts",
            "First-order and total Sobol indices of ln frequency and ln max(margin, 0.001), one group per part or "
            "reel, then per cause inside the leading parts; 16 scramblings give the interval, cut to 0 … 1, where a "
            "share of a variance lies. Two looks fixed beforehand, each at 1 − α/2; parts lead together whose "
            "intervals of the total overlap.",
            "Saltelli et al., Comput. Phys. Commun. 181 (2010) 259",
        ),
        (
            "Failing units",
            "Distance of each part's draws among failing units from those of all units, from 30 failing units on.",
            "Kolmogorov–Smirnov statistic",
        ),
        (
            "Extremes",
            "Three bands: extreme value searched over the box of all part limits, root-sum-square from sensitivities "
            "(± 3 standard deviations; of a margin's logarithm), and the simulated range.",
            "sheet 'Extremes' names each search",
        ),
        (
            "Digits",
            "Two significant digits of the interval's half-width, bounds rounded outward, more where rounding would "
            "tie with the target; the verdict uses unrounded values.",
            "JCGM 101 for the principle",
        ),
    )


def _scrutiny() -> tuple[Row, ...]:
    return (
        (
            "Between temperatures",
            "Units nearer to a limit than twice the largest fall that 512 units show between two temperatures are also "
            "judged halfway and at the turning point of a parabola through three temperatures; what fails there fails. "
            "Enough is an upper bound on flips below a tenth of the half-width of the yield's interval.",
            "sheet 'Import findings' says what was found",
        ),
        (
            "Spread by assumption",
            "Sets that differ in one piece of knowledge, on the same draws; its span is from the lowest to the highest "
            "of them. Samples: distribution-free tolerance intervals, or Student's interval of a mean.",
            "Wilks, Ann. Math. Statist. 12 (1941) 91",
        ),
        (
            "Measured lots",
            "Values are drawn as measured; lots drawn from them with replacement show what so few leave open.",
            "bootstrap: Efron, Ann. Statist. 7 (1979) 1",
        ),
        (
            "Capability",
            "Percentile method: Ppk = min((U − x50)/(x99.865 − x50), (x50 − L)/(x50 − x0.135)), quantiles with "
            "order-statistic intervals from 2,731 units on; pilots by the non-central t distribution.",
            "common practice; Kotz & Johnson, Process Capability Indices, 1993, from memory",
        ),
        (
            "Demonstration",
            "Boards without a failure: n ≥ ln(1 − C)/ln(1 − p).",
            "binomial, no failure",
        ),
    )
