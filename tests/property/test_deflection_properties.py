"""Deflections: the largest of all combinations, growth by creep and by load, batches, schemes with few rows."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rooftruss.basis.grades import find_grade
from rooftruss.basis.schemes import Scheme
from rooftruss.basis.sections import find_section
from rooftruss.design.design import outcome_of
from rooftruss.design.family import Choice, Option, family_of, unbatched
from rooftruss.design.places import places_of
from rooftruss.design.serviceability import deflected, deflections, extremes, limits_in_force, unlimited
from rooftruss.design.stages import Run, run
from rooftruss.errors import JobError
from rooftruss.timber.ec5 import ec5_standard
from rooftruss.timber.nds import nds_standard
from rooftruss.timber.terms import Deflected
from tests.en_jobs import EN_SIZES, barn_at, en_spec
from tests.strategies import numbers

few = settings(max_examples=10, deadline=None)
quick = settings(deadline=None)
ACTIONS = ("D", "D", "S", "W", "L")


@quick
@given(st.integers(1, 4), st.integers(1, 5), st.integers(1, 40), st.integers(1, 6), st.integers(0, 2**32 - 1))
def test_the_extreme_is_that_of_every_combination_by_itself(trusses, places, count, cases, seed):
    rng = np.random.default_rng(seed)
    unit = rng.integers(-3, 4, size=(trusses, places, cases)).astype(float)  # exact, with many ties
    factors = rng.integers(0, 3, size=(count, cases)).astype(float)
    value, row = extremes(unit, factors)
    for t in range(trusses):
        for p in range(places):
            every = [float(np.dot(f, unit[t, p])) for f in factors]
            largest = max(map(abs, every))
            assert abs(value[t, p]) == largest
            assert row[t, p] == [abs(v) for v in every].index(largest)  # the first of equals
            assert every[row[t, p]] == value[t, p]


@pytest.mark.parametrize("block", [1, 7, 10_000])
def test_extremes_do_not_depend_on_the_blocks(block, monkeypatch):
    rng = np.random.default_rng(3)
    unit, factors = rng.normal(size=(5, 4, 6)), rng.normal(size=(9, 6))
    value, row = extremes(unit, factors)
    monkeypatch.setattr("rooftruss.design.serviceability.BLOCK", block)
    again = extremes(unit, factors)
    assert value == pytest.approx(again[0])
    assert np.array_equal(row, again[1])


@quick
@given(
    st.lists(numbers(0.0, 1.0), min_size=5, max_size=5),
    st.lists(numbers(0.0, 20.0), min_size=5, max_size=5),
    st.tuples(numbers(0.0, 0.8), numbers(0.0, 0.8), numbers(0.0, 0.8)),
    st.sampled_from([1, 2, 3]),
)
def test_what_pushes_one_way_only_grows(factors, w, psi_2, service_class):
    """EN 1995-1-1, 2.2.3: w_fin is w_inst and k_def times what lasts; w_inst(Q) is a part of w_inst."""
    code = ec5_standard("EN 1995-1-1", {"service_class": service_class})
    lasting = dict(zip(("S", "W", "L"), psi_2, strict=True))
    given_factors = np.array([[1.0, 1.0, *factors[2:]]])

    def moved(kind: str) -> float:
        rows = code.service_factors(given_factors, actions=ACTIONS, kinds=(kind,), lasting=lasting)
        return float(rows[0] @ np.array(w))

    assert moved("variable") <= moved("instantaneous") + 1e-9
    assert moved("instantaneous") <= moved("final") + 1e-9
    assert moved("frequent") == pytest.approx(moved("instantaneous"))
    k_def = {1: 0.6, 2: 0.8, 3: 2.0}[service_class]  # EN 1995-1-1, Table 3.2
    assert moved("quasi-permanent") == pytest.approx((1 + k_def) * moved("instantaneous"))


@quick
@given(
    st.sampled_from(["instantaneous", "variable", "final", "quasi-permanent", "frequent"]),
    st.lists(st.sampled_from([0.0, 0.2, 0.3, 0.5, 0.6, 0.7, 1.0]), min_size=3, max_size=3),
    st.lists(numbers(-20.0, 20.0), min_size=5, max_size=5),
    st.tuples(numbers(0.0, 0.8), numbers(0.0, 0.8), numbers(0.0, 0.8)),
)
def test_what_is_explained_is_what_is_checked(kind, factors, w, psi_2):
    """Whatever the factors of a scheme are, also where its quasi-permanent rows are not those of its lasting shares."""
    code = ec5_standard("EN 1995-1-1", {"service_class": 2})
    lasting = dict(zip(("S", "W", "L"), psi_2, strict=True))
    row = np.array([1.0, 1.0, *factors])
    value = float(code.service_factors(row[None], actions=ACTIONS, kinds=(kind,), lasting=lasting)[0] @ np.array(w))
    moved = Deflected(
        kind=next(k for k in code.deflection_kinds if k.name == kind),
        clause="6.5.3",
        cases=tuple("abcde"),
        actions=ACTIONS,
        immediate=np.array(w),
        factors=row,
        lasting=lasting,
        length=8.0,
        limit=0.02,
        rule=code.deflection_limit("plaster", kind),
    )
    assert code.explain_deflection(moved)[-1].value == pytest.approx(abs(value) / 0.02, rel=1e-9, abs=1e-9)


@pytest.mark.parametrize(("ceiling", "inside"), [("plaster", 350), ("none", 250)])
def test_no_ceiling_hangs_under_the_end_of_a_tail(ceiling, inside):
    # EN 1995-1-1, Table 7.2: w_net,fin l/350 over plaster, l/250 at the ends of tails, which l/300 on w_inst precedes
    job = barn_at()
    job = replace(job, limits=replace(job.limits, ceiling=ceiling))
    made = sized(job, en_spec(overhang=0.5))
    found = deflections(made)
    number = next(n for n, k in enumerate(found.kinds) if k.name == "final")
    tails = {m.start for m in made.family.topology.members if m.role == "tail"}
    tails |= {m.end for m in made.family.topology.members if m.role == "tail"}
    for place, rule in zip(found.places, found.rules[number], strict=True):
        tip = place.kind == "node" and place.direction == "vertical" and place.number in tails
        assert rule.ratio == (250 if tip else inside), place
    assert any("at the ends of tails" in text for text in limits_in_force(made)) == (ceiling == "plaster")


def sized(job, spec) -> Run:
    options = {g: (Option(find_section(size), find_grade(grade)),) for g, (size, grade) in EN_SIZES.items()}
    choice = Choice(options=options, index={g: np.array(0) for g in options})
    return run(unbatched(family_of(job, [spec])), choice)


@few
@given(numbers(5.0, 10.0), numbers(0.3, 0.9), numbers(1.1, 3.0))
def test_more_dead_load_is_nearer_to_the_limit(span, pitch, times):
    """A symmetric truss under its own kind of load sinks more in its middle the more it carries."""
    light = en_spec(span=span, pitch=pitch)
    loads = replace(light.loads, roof_dead=light.loads.roof_dead * times, roof_dead_least=light.loads.roof_dead * times)
    one, two = (deflections(sized(barn_at(wind_loaded_area=10.0), s)) for s in (light, replace(light, loads=loads)))
    names = [p.name for p in one.places]
    k = names.index("bottom 2")
    assert two.ratio[k] > one.ratio[k]
    assert two.limit[k] > 0


@few
@given(numbers(5.0, 10.0), st.sampled_from(["recommended", "germany", "france"]))
def test_a_truss_explained_under_its_governing_combination_has_its_ratio(span, country):
    site = {} if country == "recommended" else {"national_choices": country, "peak_velocity_pressure": 800.0}
    made = sized(barn_at(**site), en_spec(span=span, overhang=0.4))
    found = deflections(made)
    for k in range(len(found.places)):
        kind, combination = found.kinds[int(found.kind[k])], int(found.combination[k])
        steps = made.family.timber.explain_deflection(deflected(made, k, combination, kind))
        assert steps[-1].value == pytest.approx(float(found.ratio[k]), rel=1e-9)
        nearest_to = made.family.timber.explain_deflection(deflected(made, k, combination))
        assert nearest_to[-1].value == pytest.approx(float(found.ratio[k]), rel=1e-9)


# --- schemes with other rows ---------------------------------------------------------------------------------------


def with_rows(made: Run, keep: str) -> Run:
    """The run under its scheme with the service rows of one kind only ("": none)."""
    scheme: Scheme = made.family.scheme
    kept = replace(scheme, rows=tuple(r for r in scheme.rows if r.kind in ("", keep)))
    return run(replace(made.family, scheme=kept), made.choice)


def test_a_scheme_without_service_rows_limits_nothing():
    made = with_rows(sized(barn_at(), en_spec()), "")
    found = deflections(made)
    assert not found.value.any()
    assert not found.ratio.any()
    assert np.isinf(found.limit).all()
    assert {*found.combination, *found.kind} == {-1}
    assert found.about(0) == "no service combination is limited"
    assert found.rule(0) is None
    assert unlimited(made) == ()
    assert limits_in_force(made) == (
        "deflection limits: none, the scheme has no service combination that one speaks of",
    )
    assert np.isfinite(outcome_of(made).worst)


def test_rows_of_a_kind_without_limit_are_shown_and_limit_nothing():
    made = with_rows(sized(barn_at(), en_spec()), "frequent")
    assert (deflections(made).ratio == 0).all()
    (largest,) = unlimited(made)
    assert (largest.kind.name, largest.value != 0) == ("frequent", True)
    moved = deflected(made, places_of(made).index(largest.place), largest.combination)
    last = made.family.timber.explain_deflection(moved)[-1]
    assert last.value == pytest.approx(largest.value)
    assert last.text == "no limit is in force for it"


def test_rows_of_another_standard_are_refused():
    made = sized(barn_at(), en_spec())
    scheme = replace(
        made.family.scheme,
        rows=tuple(replace(r, kind="total") if r.kind == "frequent" else r for r in made.family.scheme.rows),
    )
    with pytest.raises(
        JobError, match=r"scheme en1990-6.10: 'total' is no kind of .* that EN 1995-1-1 knows; allowed: "
    ):
        deflections(run(replace(made.family, scheme=scheme), made.choice))


def test_no_movement_allowed_at_the_roller_is_an_infinite_share():
    made = sized(barn_at(), en_spec())
    job = replace(made.family.job, limits=replace(made.family.job.limits, horizontal=0.0))
    found = deflections(replace(made, family=replace(made.family, job=job)))
    k = next(k for k, p in enumerate(found.places) if p.direction == "horizontal")
    assert np.isinf(found.ratio[k])
    steps = made.family.timber.explain_deflection(
        deflected(replace(made, family=replace(made.family, job=job)), k, int(found.combination[k]))
    )
    assert np.isinf(steps[-1].value)


def test_total_deflection_of_the_nds_by_hand():
    """NDS 2018, eq. 3.5-1, K_cr = 1.5 for seasoned lumber used dry: 1.5 x (0.20 + 0.10) + 0.35 = 0.80."""
    code = nds_standard(
        "NDS 2018 ASD", {"moisture": "dry", "temperature": "normal", "incised": False, "buckling_stiffness": False}
    )
    rows = code.service_factors(np.array([[1.0, 1.0, 1.0]]), actions=("D", "D", "L"), kinds=("total",))
    assert float(rows[0] @ np.array([0.20, 0.10, 0.35])) == pytest.approx(0.80)
