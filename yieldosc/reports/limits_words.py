"""What `limits` found, as a page: which readings to accept, what gets through, what it costs; the trim."""

from __future__ import annotations

from collections.abc import Iterator

from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import Deviation, bare_percent, listed, margin_text, points_text
from yieldosc.reports.cautions import APPROVAL, REVISIONS, SAFETY
from yieldosc.reports.decision import Cell, Decision, Section, none_seen, number_cell, rate_cell, words
from yieldosc.reports.requirements import percent
from yieldosc.studies.digits import percent_text, rate_text
from yieldosc.studies.limits.acceptance import LimitRates
from yieldosc.studies.limits.results import LimitsResult, TradeLine, TrimResult
from yieldosc.studies.results import Distribution, Estimate

HZ_DIGITS = 9
PPM = "0.0"
EXPECTED = (
    "The test sees one temperature and one moment: what it lets through is what fails elsewhere. Every rate supposes "
    "that no wrong or defective part is fitted; such boards are a reason of their own to test."
)
INSTRUMENT = (
    "The instrument's noise is integrated for each unit; its bias is taken at whichever sign makes a rate worse. "
    "Neither covers drift of the instrument between calibrations."
)


def limits_page(r: LimitsResult) -> Decision:
    """All that is said on the result."""
    return Decision(
        title=f"{r.study.name} · {r.study.circuit.title}",
        stamp=f"digest {r.study.digest[:8]} · seed {r.provenance.seed}",
        words=f"TEST AT {r.test_corner.text}: {_limits_text(r, r.chosen)}",
        tone="open" if r.confirmed is None else "good" if r.confirmed else "bad",
        headline=_headline(r),
        facts=(
            ("Bad units shipped", rate(r.chosen.escapes_shipped), "of the units that pass: P(bad | accepted)"),
            ("Good units rejected", rate(r.chosen.false_rejects), "of the units built: P(rejected and good)"),
            ("Units rejected", rate(r.chosen.rejected), f"of the units built; {rate(r.bad)} are bad"),
        ),
        sections=(
            Section(title="What to do next", sentences=tuple(_next_steps(r)), mark="→", key="steps"),
            _rates(r),
            _trade(r),
            *_resistance(r),
            *_trim(r),
            Section(title="How it was found", sentences=tuple(_method(r)), key="method"),
            Section(
                title="Open points", sentences=tuple(f.text for f in r.findings if f.level == "warning"), mark="?",
                key="open",
            ),
            Section(
                title="Cautions", sentences=(EXPECTED, INSTRUMENT, REVISIONS, APPROVAL, SAFETY), mark="!",
                key="cautions",
            ),
        ),
    )  # fmt: skip


def rate(estimate: Estimate) -> str:
    """A rate as text; what has no weight at all is "below …"."""
    if estimate.failures is None and estimate.estimate * 1e9 < 1:
        return rate_text(none_seen(estimate))
    return rate_text(estimate)


def _limits_text(r: LimitsResult, rates: LimitRates) -> str:
    scale = Deviation.of(r.study.design)
    low, high = (format_quantity(f, "Hz", HZ_DIGITS) for f in (rates.low_hz, rates.high_hz))
    if low.split()[-1] != high.split()[-1]:  # "970 Hz to 1.03 kHz" is easily misread
        low, high = (f"{f:.{HZ_DIGITS}g} Hz" for f in (rates.low_hz, rates.high_hz))
    return f"{low} to {high} ({scale.text(rates.low_hz)} to {scale.text(rates.high_hz)})"


def _headline(r: LimitsResult) -> str:
    if r.escape_limit is None:
        return "No escape limit is given: these are the frequency limits themselves, without a guard band."
    level = ppm(r.escape_limit)
    if not r.chosen_by_level:
        return (
            f"No test limits at this temperature keep shipped escapes to {level}: the lowest upper bound found is "
            f"{ppm(r.floor.rates.escapes_shipped.high)}. Shown are the frequency limits themselves."
        )
    if r.confirmed:
        return f"The upper bound of shipped escapes keeps to {level} on fresh units, at the fewest good units rejected."
    return (
        f"Chosen to keep shipped escapes to {level}, but their upper bound on fresh units is "
        f"{ppm(r.chosen.escapes_shipped.high)}: not confirmed."
    )


def ppm(share: float) -> str:
    """A share in ppm, three digits."""
    value = share * 1e6
    if 0 < value < 0.1:
        return "below 0.1 ppm"
    return f"{value:,.0f} ppm" if value >= 1000 else f"{value:.3g} ppm"


def _next_steps(r: LimitsResult) -> Iterator[str]:
    if r.escape_limit is None:
        yield "State an escape limit (ppm) in the Design sheet: then test limits are chosen for it."
    elif not r.chosen_by_level:
        yield (
            "Test at another temperature as well, improve the design, or accept more escapes: what fails elsewhere "
            "hardly shows in this reading."
        )
    elif not r.confirmed:
        yield f"Simulate more units (--units {4 * r.units}), or take the next lower level of the trade below."
    else:
        yield f"Accept a board when it starts at {r.test_corner.text} and reads {_limits_text(r, r.chosen)}."
        if r.bad.high <= r.escape_limit:
            yield "The predicted population keeps to this level untested; the test finds wrong and defective parts."
    yield from _resistance_step(r)
    yield from _trim_step(r)


def _resistance_step(r: LimitsResult) -> Iterator[str]:
    test = r.resistance_test
    if test is None or not test.lines:
        return
    if test.chosen is not None:
        line = test.lines[test.chosen]
        yield (
            f"Require a start with {format_quantity(line.added_ohm, 'Ω', 3)} added in series with the crystal unit: it "
            f"keeps boards that pass and fail to start elsewhere to the escape limit and rejects "
            f"{rate(line.false_rejects)} of good ones."
        )
    elif r.escape_limit is not None and test.start_failures.high <= r.escape_limit:
        yield "A series-resistance test is not needed for the predicted population; it would find wrong parts."
    free = [line for line in test.lines if line.false_rejects.failures == 0]
    if test.chosen is None and free:
        yield (
            f"Every simulated unit starts with {format_quantity(free[-1].added_ohm, 'Ω', 3)} added in series: a start "
            "with it may be required at the cost of no good unit seen."
        )


def _trim_step(r: LimitsResult) -> Iterator[str]:
    t = r.trim
    if t is None:
        return
    low, high = (format_quantity(v, t.unit, 3) for v in (t.suggested_low, t.suggested_high))
    yield (
        f"Trim {t.role} from {low} to {high}, middle {format_quantity(t.needed['q50'], t.unit, 3)}: that range brings "
        f"{percent_text(_share_as_yield(t.suggested_reached))} of fresh units to the target."
    )


def _share_as_yield(share: Estimate) -> Estimate:
    """A counted share, written as a yield is."""
    failures = None if share.failures is None or share.units is None else share.units - share.failures
    return Estimate(
        estimate=share.estimate, low=share.low, high=share.high, confidence=share.confidence, units=share.units,
        failures=failures,
    )  # fmt: skip


RATES = (
    ("escapes_shipped", "escapes, per shipped unit", "P(bad | accepted)"),
    ("escapes_built", "escapes, per built unit", "P(accepted and bad)"),
    ("missed", "missed share of bad units", "P(accepted | bad)"),
    ("false_rejects", "false rejects, per built unit", "P(rejected and good)"),
    ("rejected", "rejected, per built unit", "P(rejected)"),
)


def _rates(r: LimitsResult) -> Section:
    rows = tuple(
        (words(name), words(meaning), rate_cell(getattr(r.chosen, field))) for field, name, meaning in RATES
    )
    scale = Deviation.of(r.study.design)
    return Section(
        title="What these limits do",
        note=f"bad: fails at any corner or end of life; accepted: starts and reads {scale.text(r.chosen.low_hz)} to "
        f"{scale.text(r.chosen.high_hz)}; {r.units:,} fresh units",
        columns=(("rate", ""), ("meaning", ""), ("estimate", "right")), rows=rows, sentences=tuple(_bad_by(r)),
        key="rates",
    )  # fmt: skip


def _bad_by(r: LimitsResult) -> Iterator[str]:
    """How the bad units fail, by the first outcome that any corner shows."""
    if r.bad_by:
        told = listed([f"{count:,} {name.replace('_', ' ')}" for name, count in r.bad_by.items()])
        yield f"Bad units of {r.units:,}, by what they show first: {told}."


def _trade(r: LimitsResult) -> Section:
    scale = Deviation.of(r.study.design)
    lines = _distinct(r.trade)
    rows = tuple(
        (
            words("no guard band" if line.level is None else f"at most {ppm(line.level)}"),
            number_cell(scale.value(line.rates.low_hz), scale.text(line.rates.low_hz), "0.00"),
            number_cell(scale.value(line.rates.high_hz), scale.text(line.rates.high_hz), "0.00"),
            _ppm_cell(line.rates.escapes_shipped), _ppm_cell(line.rates.false_rejects), _ppm_cell(line.rates.rejected),
        )
        for line in lines if line.rates is not None
    )  # fmt: skip
    unreached = [ppm(line.level) for line in r.trade if line.rates is None and line.level is not None]
    return Section(
        title="Escapes against good units rejected", key="trade", rows=rows,
        note="the limits that reject the fewest good units for a level of shipped escapes; rates on fresh units, in "
        "ppm with their upper bound",
        columns=(
            ("shipped escapes", ""), ("low", "right"), ("high", "right"), ("escapes", "right"),
            ("false rejects", "right"), ("rejected", "right"),
        ),
        sentences=(f"No limits on these units keep to {', '.join(unreached)}: {_floor(r)}",) if unreached else (),
    )  # fmt: skip


def _ppm_cell(estimate: Estimate) -> Cell:
    shown, most = (ppm(share).removesuffix(" ppm") for share in (estimate.estimate, estimate.high))
    return Cell(f"{shown} (≤ {most})", estimate.estimate * 1e6, PPM)


def _distinct(trade: tuple[TradeLine, ...]) -> list[TradeLine]:
    """Of lines with the same limits the strictest level alone: it says the most."""
    kept: dict[tuple[float, float], TradeLine] = {}
    for line in trade:
        if line.rates is not None:
            key = (round(line.rates.low_hz, 6), round(line.rates.high_hz, 6))
            if line.level is not None or key not in kept:
                kept[key] = line
    return list(kept.values())


def _floor(r: LimitsResult) -> str:
    rates = r.floor.rates
    text = f"the lowest upper bound found is {ppm(rates.escapes_shipped.high)}, with {_limits_text(r, rates)}"
    if r.floor.closing:  # an estimate of 0 would say more than the bound before it
        text += f"; as the limits close around one reading, the estimate of escapes goes to {ppm(r.floor.closing)}"
    return f"{text}."


def _resistance(r: LimitsResult) -> tuple[Section, ...]:
    test = r.resistance_test
    if test is None or not test.lines:
        return ()
    rows = tuple(
        (
            number_cell(line.added_ohm, format_quantity(line.added_ohm, "Ω", 3), '0" Ω"'),
            rate_cell(line.start_escapes), rate_cell(line.false_rejects),
        )
        for line in test.lines
    )  # fmt: skip
    return (
        Section(
            title="Series-resistance test",
            note="added in series with the crystal unit: the board must still start at the test; escapes are units "
            f"whose start fails at some corner ({rate(test.start_failures)} of {test.units:,})",
            columns=(("added", "right"), ("start escapes, built", "right"), ("good units rejected", "right")),
            rows=rows, key="resistance",
        ),
    )  # fmt: skip


def _trim(r: LimitsResult) -> tuple[Section, ...]:
    t = r.trim
    if t is None:
        return ()
    scale = Deviation.of(r.study.design)
    low, high = (format_quantity(v, t.unit, 4) for v in (t.low, t.high))
    rows = tuple(
        (
            words(c.corner.text), *_quantiles(scale, c.before), *_quantiles(scale, c.after),
            _margin(c.margin_before), _margin(c.margin_after),
        )
        for c in t.corners
    )  # fmt: skip
    return (
        Section(
            title=f"Trim of {t.role}: {low} to {high}, {t.kind}",
            note=f"frequency from the target, 0.1 % and 99.9 % points; start-up margin, 0.1 % point; {t.units:,} units",
            columns=(
                ("corner", ""), ("low, before", "right"), ("high, before", "right"), ("low, after", "right"),
                ("high, after", "right"), ("margin before", "right"), ("margin after", "right"),
            ),
            rows=rows, sentences=tuple(_trim_sentences(t)), key="trim",
        ),
    )  # fmt: skip


def _quantiles(scale: Deviation, d: Distribution | None) -> tuple[Cell, Cell]:
    if d is None:
        return words("—"), words("—")
    return (
        number_cell(scale.value(d.q001), scale.text(d.q001), "0.000"),
        number_cell(scale.value(d.q999), scale.text(d.q999), "0.000"),
    )


def _margin(d: Distribution | None) -> Cell:
    return words("—") if d is None else number_cell(d.q001, margin_text(d.q001), "0.000")


def _trim_sentences(t: TrimResult) -> Iterator[str]:
    yield (
        f"Yield {bare_percent(t.yield_before)} before, {percent_text(t.yield_after)} after the trim: "
        f"{points_text(t.difference)} on the same units."
    )
    yield (
        f"{percent_text(_share_as_yield(t.reached))} of units reach the target within the instrument's error; "
        f"{rate(t.at_low)} end at the low stop, {rate(t.at_high)} at the high one, {rate(t.ceased)} stop oscillating "
        f"first, {rate(t.unreadable)} give no reading."
    )
    low, middle, high = (format_quantity(t.needed[q], t.unit, 4) for q in ("q0005", "q50", "q9995"))
    yield (
        f"Setting needed: median {middle}, 99.9 % of units between {low} and {high} "
        f"({rate(t.unmet)} find none from {format_quantity(t.searched[0], t.unit, 3)} to "
        f"{format_quantity(t.searched[1], t.unit, 3)})."
    )
    lost = _margin_lost(t)
    if lost is not None:
        yield lost


def _margin_lost(t: TrimResult) -> str | None:
    """The worst start-up margin before and after: pulling costs margin."""
    pairs = [
        (c.margin_before.q001, c.margin_after.q001)
        for c in t.corners if c.margin_before is not None and c.margin_after is not None
    ]  # fmt: skip
    if not pairs:
        return None
    before, after = min(b for b, _ in pairs), min(a for _, a in pairs)
    return f"Start-up margin, 0.1 % point, worst corner: {margin_text(before)} before, {margin_text(after)} after."


def _instrument(r: LimitsResult) -> str:
    noise = f"sd {format_quantity(r.sd_hz, 'Hz', 3)}" if r.sd_hz else "free of noise"
    bias = f"bias within ±{format_quantity(r.bias_hz, 'Hz', 3)}" if r.bias_hz else "free of bias"
    return f"{noise}, {bias}"


def _method(r: LimitsResult) -> Iterator[str]:
    yield (
        f"Chosen on units 1 to {r.units:,}, reported on the next {r.units:,}; instrument: "
        f"{_instrument(r)}."
    )
    yield (
        "Low and high limit are chosen separately over all pairs of a grid: the fewest good units rejected while the "
        f"upper bound of shipped escapes ({percent(r.study.design.confidence)}, Fay and Feuer 1997) keeps to the "
        "level. The bound that chooses is taken as from a quarter of the units where there are enough of them, so that "
        "fresh units confirm it in about nine of ten cases."
    )
    yield (
        "The same simulated boards are read at the test and judged at every corner, so the figures hold exactly as "
        "much as this reading says about the other corners."
    )
