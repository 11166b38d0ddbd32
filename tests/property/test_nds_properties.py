"""What must hold for any member: more force never helps, a longer member is never stronger, a batch is its parts."""

from dataclasses import fields, replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rooftruss.timber.terms import Demand, Durations, Members
from tests.nds_support import each_combination, members, nds

GRADES = ("SPF No.1/No.2", "SPF Stud", "SP No.2", "DF-L SS", "SPF 2100f-1.8E")
DURATIONS = ("permanent", "ten years", "two months", "seven days", "ten minutes")
ROLES = ("top chord", "bottom chord", "web")
CODES = {
    name: nds(name, buckling_stiffness=stiff)
    for name, stiff in (
        ("NDS 2018 ASD", False),
        ("NDS 2018 LRFD", False),
        ("NDS 2024 ASD", True),
        ("NDS 2024 LRFD", True),
    )
}
lengths = st.one_of(st.just(0.0), st.floats(5, 150))
rows = st.fixed_dictionaries(
    {
        "grade": st.sampled_from(GRADES),
        "size": st.sampled_from(("2x3", "2x4", "2x6", "2x8")),
        "role": st.sampled_from(ROLES),
        "plies": st.integers(1, 3),
        "sharing": st.booleans(),
        "le_strong": lengths,
        "le_weak": lengths,
        "lu_positive": lengths,
        "lu_negative": lengths,
    }
)


def forces(size: float) -> st.SearchStrategy[float]:
    return st.one_of(st.just(0.0), st.floats(size * 1e-3, size))


@st.composite
def demands(draw, count: int, number: int) -> Demand:
    def table(size: float) -> np.ndarray:
        cells = draw(st.lists(forces(size), min_size=count * number, max_size=count * number))
        return np.array(cells).reshape(count, number)

    tension, compression = table(30e3), table(30e3)
    either = np.array(draw(st.lists(st.booleans(), min_size=count * number, max_size=count * number)))
    either = either.reshape(count, number)
    return Demand(
        tension=np.where(either, tension, 0.0),
        compression=np.where(either, 0.0, compression),
        moment_positive=table(2e3),
        moment_negative=table(2e3),
        shear=table(5e3),
        tension_least=np.where(either, 0.9 * tension, 0.0) if draw(st.booleans()) else None,
    )


@st.composite
def situations(draw, count: int = 3, number: int = 2):
    code = CODES[draw(st.sampled_from(sorted(CODES)))]
    made = members(code, *(draw(rows) for _ in range(number)))
    names = tuple(draw(st.sampled_from(DURATIONS)) for _ in range(count))
    effects = np.array([draw(st.sampled_from((0.6, 0.7, 0.8, 1.0))) for _ in range(count)])
    return code, made, draw(demands(count, number)), Durations(names=names, time_effect=effects)


few = settings(max_examples=60, deadline=None)


@few
@given(situations())
def test_utilisations_are_finite_and_name_a_rule(situation):
    code, made, load, lasting = situation
    found = code.check(made, load, lasting)
    assert np.all(np.isfinite(found.utilisation))
    assert np.all(found.utilisation >= 0)
    assert found.rule.min() >= 0
    assert found.rule.max() < len(found.rules)


@few
@given(
    situations(),
    st.sampled_from(("tension", "compression", "moment_positive", "moment_negative", "shear")),
    st.floats(1.0001, 5),
    st.floats(0, 500),
)
def test_more_force_never_lowers_the_utilisation(situation, which, times, more):
    code, made, load, lasting = situation
    value = getattr(load, which)
    greater = replace(load, **{which: np.where(value > 0, value * times + more, 0.0)})
    before, after = code.check(made, load, lasting), code.check(made, greater, lasting)
    assert np.all(after.utilisation >= before.utilisation * (1 - 1e-12))


@few
@given(situations(), st.sampled_from(("le_strong", "le_weak", "lu_positive", "lu_negative")), st.floats(1.01, 3))
def test_a_longer_member_is_never_stronger(situation, which, times):
    code, made, load, lasting = situation
    code = replace(code, buckling_stiffness=False)  # C_T itself grows with the length (NDS eq. 4.4-1)
    longer = replace(made, **{which: getattr(made, which) * times})
    before, after = code.check(made, load, lasting), code.check(longer, load, lasting)
    # Table 3.3.3 steps from 14.42 d to 14.41 d at l_u/d = 7
    assert np.all(after.utilisation >= before.utilisation * (1 - 1e-3))


@few
@given(situations())
def test_explained_and_checked_utilisation_agree(situation):
    code, made, load, lasting = situation
    found = code.check(made, load, lasting)
    for combination, alone in enumerate(each_combination(code, made, load, lasting)):
        for member in range(found.utilisation.shape[1]):
            last = code.explain(made, load, lasting, member, combination)[-1]
            assert last.value == pytest.approx(found.utilisation[combination, member], rel=1e-12, abs=1e-12)
            assert last.value == pytest.approx(alone.governing.value[member], rel=1e-12, abs=1e-9)
            if alone.governing.combination[member] == 0:
                assert last.clause.endswith(found.rules[alone.rule[member]].clause)


def stacked(parts, kind):
    def join(values):
        if isinstance(values[0], dict):
            return {key: np.stack([v[key] for v in values]) for key in values[0]}
        return values[0] if isinstance(values[0], tuple) else np.stack(values)

    return kind(**{f.name: join([getattr(p, f.name) for p in parts]) for f in fields(kind)})


@pytest.mark.parametrize("name", sorted(CODES))
@pytest.mark.parametrize("count", [1, 170])
def test_a_batch_is_its_parts(name, count):
    code, rng = CODES[name], np.random.default_rng(count)
    sizes, trusses, number = ("2x4", "2x6"), 30, 7

    def some_members() -> Members:
        picked = [
            {
                "grade": GRADES[rng.integers(len(GRADES))],
                "size": sizes[rng.integers(2)],
                "role": ROLES[n % 3],
                "sharing": n < 3,
                "le_strong": rng.uniform(10, 90),
                **{key: rng.choice([0.0, 40.0, 80.0]) for key in ("le_weak", "lu_positive", "lu_negative")},
            }
            for n in range(number)
        ]
        return members(code, *picked)

    def some_demand() -> Demand:
        N, M = rng.normal(0, 8e3, (count, number)), rng.normal(0, 400, (count, number))
        parts = [np.maximum(v, 0) for v in (N, -N, M, 50 - M, rng.normal(0, 900, (count, number)), 0.9 * N)]
        return Demand(**dict(zip((f.name for f in fields(Demand)), parts, strict=True)))

    made, loads = [some_members() for _ in range(trusses)], [some_demand() for _ in range(trusses)]
    lasting = Durations(
        names=tuple(rng.choice(DURATIONS, count)), time_effect=rng.choice([0.6, 0.8, 1.0], count).astype(float)
    )
    together = code.check(stacked(made, Members), stacked(loads, Demand), lasting)
    for n in range(trusses):
        alone = code.check(made[n], loads[n], lasting)
        assert np.array_equal(alone.utilisation, together.utilisation[n])
        assert np.array_equal(alone.rule, together.rule[n])
    # one set of members under many demands, and two leading axes
    shared = code.check(made[0], stacked(loads, Demand), lasting)
    assert np.array_equal(shared.utilisation[3], code.check(made[0], loads[3], lasting).utilisation)
    folded = {f.name: getattr(stacked(loads, Demand), f.name).reshape(5, 6, count, number) for f in fields(Demand)}
    assert np.array_equal(
        code.check(made[0], Demand(**folded), lasting).utilisation.reshape(30, count, number), shared.utilisation
    )
