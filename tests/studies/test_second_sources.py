"""Every allowed fitting of alternates on the same draws; the worst carries the verdict."""

from __future__ import annotations

from dataclasses import replace

import pytest

from yieldosc.errors import InputError
from yieldosc.studies.declared import declared_setup
from yieldosc.studies.second_sources import fittings, worst_fitting
from yieldosc.study import Alternate

UNITS = 8192


def alternate(study, role, fraction, name):
    p = study.parameter(role)
    other = replace(p, low=p.typical * (1 - fraction), high=p.typical * (1 + fraction))
    return Alternate(part=p.part, name=name, parameters=(other,), price=None, place="Alternates!A2")


@pytest.fixture
def worst(ideal_wien):
    def found(study):
        return worst_fitting(study, declared_setup(study, seed=1, evaluator=ideal_wien()))

    return found


def test_without_alternates_the_study_is_as_it_is(make_study, worst):
    study = make_study()
    assert worst(study) == (study, ())


def test_the_worst_combination_carries_the_verdict(make_study, worst):
    """C1 may be ±1 % or ±10 %, C2 ±1 %: worst is the ±10 % C1 beside the declared ±5 % C2."""
    study = make_study(c=0.05)
    study = replace(
        study,
        alternates=(
            alternate(study, "C1", 0.01, "tight"), alternate(study, "C1", 0.10, "loose"),
            alternate(study, "C2", 0.01, "tight"),
        ),
    )  # fmt: skip
    chosen, table = worst(study)
    assert [c.text for c in table] == [
        "C1: as declared, C2: as declared", "C1: as declared, C2: tight", "C1: tight, C2: as declared",
        "C1: tight, C2: tight", "C1: loose, C2: as declared", "C1: loose, C2: tight",
    ]  # fmt: skip
    by_text = {c.text: c.yield_.estimate for c in table}
    assert min(by_text, key=by_text.get) == "C1: loose, C2: as declared"
    assert max(by_text, key=by_text.get) == "C1: tight, C2: tight"
    assert chosen.parameter("C1").high == pytest.approx(1.10 * chosen.parameter("C1").typical)
    assert chosen.parameter("C2") == study.parameter("C2")
    # the same units: the declared fitting differs from itself in nothing, and a tighter one never in count alone
    assert (table[0].difference.low < 0 < table[0].difference.high, table[0].difference.estimate) == (True, 0)
    for c in table:
        assert c.difference.estimate == pytest.approx(c.yield_.estimate - table[0].yield_.estimate, abs=1e-12)


def test_where_the_declared_parts_are_worst_they_stay(make_study, worst):
    study = make_study(c=0.05)
    chosen, table = worst(replace(study, alternates=(alternate(study, "C1", 0.01, "tight"),)))
    assert chosen.parameters == study.parameters
    assert len(table) == 2


def test_roles_of_one_part_are_exchanged_together(make_study, worst):
    """An alternate of several roles brings all of them."""
    study = make_study(c=0.05)
    parts = tuple(replace(p, part="N1") if p.role in ("RF", "RG") else p for p in study.parameters)
    study = replace(study, parameters=parts)
    rf, rg = (replace(study.parameter(r), typical=v, low=v, high=v) for r, v in (("RF", 15e3), ("RG", 10e3)))
    other = Alternate(part="N1", name="weak", parameters=(rf, rg), price=None, place="Alternates!A2")
    chosen, table = worst(replace(study, alternates=(other,)))
    assert chosen.parameter("RF").typical == 15e3  # gain 2.5: nothing starts
    assert table[1].yield_.estimate == 0


@pytest.mark.parametrize(("each", "count"), [(3, 64), (4, 125)])
def test_too_many_combinations_are_refused(make_study, each, count):
    """Three parts with three alternates each make 4³ = 64, which are run; with four each 5³ = 125, which are not."""
    study = make_study()
    made = tuple(alternate(study, role, 0.01 * (k + 1), f"{role} {k}") for role in ("R1", "C1", "C2") for k in range(each))
    study = replace(study, alternates=made)
    if count <= 64:
        assert len(fittings(study)) == count
        return
    with pytest.raises(InputError) as caught:
        fittings(study)
    assert [(f.code, f.text) for f in caught.value.findings] == [
        (
            "too-many-alternates",
            "the sheet Alternates allows 125 combinations; at most 64 are run: leave out alternates that are no worse than "
            "another in every column",
        )
    ]


def test_the_first_fitting_is_the_declared_one_and_none_comes_twice(make_study):
    study = make_study()
    made = fittings(replace(study, alternates=(alternate(study, "C1", 0.01, "a"), alternate(study, "R1", 0.02, "b"))))
    assert [f.fitted for f in made] == [
        (("C1", "as declared"), ("R1", "as declared")), (("C1", "as declared"), ("R1", "b")),
        (("C1", "a"), ("R1", "as declared")), (("C1", "a"), ("R1", "b")),
    ]  # fmt: skip
    assert len({(f.study.parameter("C1").high, f.study.parameter("R1").high) for f in made}) == 4
