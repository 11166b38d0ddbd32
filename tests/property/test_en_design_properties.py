"""The whole way from a Eurocode job to its checks: mirror, growth of loads, batches, countries."""

from dataclasses import fields, replace
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rooftruss.basis.job import TrussSpec
from rooftruss.design.batch import Report, check_many
from rooftruss.shapes.webbing import SHAPES
from tests.en_jobs import EN_SIZES, barn, barn_at, en_spec
from tests.strategies import numbers

few = settings(max_examples=8, deadline=None)
likely = settings(few, derandomize=True)  # true of trusses as they are built, no theorem: the same examples every time
COUNTRIES = {
    "recommended": barn_at(),
    "alternative": barn_at("en1990-6.10ab"),
    "germany": barn_at(national_choices="germany", peak_velocity_pressure=800.0),
    "france": barn_at(national_choices="france", peak_velocity_pressure=800.0, altitude=950.0, loft="storage"),
    "finland": barn_at("en1990-finland", national_choices="finland", peak_velocity_pressure=600.0),
    "mountains": barn_at(altitude=1200.0, exceptional_snow=3000.0, consequence_class="CC3"),
}


@st.composite
def trusses(draw: st.DrawFn) -> TrussSpec:
    """A truss of any shape of the catalogue at plausible dimensions."""
    shape = draw(st.sampled_from(sorted(SHAPES)))
    loads = replace(barn().trusses[0].loads, ceiling_live=draw(st.sampled_from([0.0, 250.0])))
    return en_spec(
        shape=shape,
        span=draw(numbers(4.0, 11.0)),
        pitch=draw(numbers(0.2, 1.05)),  # the barn is 6 m high: its roof cannot rise more
        bottom_pitch=0.15 if SHAPES[shape].sloping_bottom else None,
        overhang=draw(st.sampled_from([0.0, 0.3, 0.6])),
        panels=draw(st.sampled_from(SHAPES[shape].panel_counts)),
        spacing=draw(st.sampled_from([0.4, 0.6, 1.0])),
        loads=loads,
    )


def same(one: Report, k: int, other: Report) -> None:
    for f in fields(Report):
        a, b = getattr(one, f.name)[k], getattr(other, f.name)[0]
        if not isinstance(a, str):
            assert a == pytest.approx(b, rel=1e-9, abs=1e-9), f.name


@few
@given(st.lists(trusses(), min_size=2, max_size=4), st.sampled_from(sorted(COUNTRIES)))
def test_a_batch_is_its_trusses_one_by_one(many, country):
    job = COUNTRIES[country]
    specs = [replace(truss, mark=f"B{k}") for k, truss in enumerate(many)]
    together = check_many(job, specs, [EN_SIZES])
    for k, truss in enumerate(specs):
        same(together, k, check_many(job, [truss], [EN_SIZES]))
        assert together.mark[k] == truss.mark


@few
@given(st.lists(st.tuples(numbers(5.0, 7.4), numbers(0.05, 1.6)), min_size=3, max_size=6))
def test_one_layout_in_many_pitches_is_its_trusses_one_by_one(sizes):
    """Pitches on both sides of 5, 45 and 58 deg share one set of wind cases."""
    specs = [en_spec(mark=f"B{k}", panels=4, span=span, pitch=pitch) for k, (span, pitch) in enumerate(sizes)]
    together = check_many(barn(), specs, [EN_SIZES])
    for k, one in enumerate(specs):
        alone = check_many(barn(), [one], [EN_SIZES])
        for name in ("worst", "bearing", "deflection", "down", "uplift", "mass"):
            assert getattr(together, name)[k] == pytest.approx(float(getattr(alone, name)[0]), rel=1e-9, abs=1e-9)


@likely
@given(trusses(), st.sampled_from(["ground_snow", "peak_velocity_pressure"]))
def test_more_snow_or_wind_never_lowers_the_worst_utilisation(truss, key):
    jobs = [barn_at(**{"peak_velocity_pressure": 500.0, key: 500.0 * n}) for n in (1, 2, 4)]
    worst = [float(check_many(job, [truss], [EN_SIZES]).worst[0]) for job in jobs]
    assert all(b >= a - 1e-9 for a, b in pairwise(worst))


@likely
@given(trusses())
def test_a_higher_class_of_consequences_is_never_milder(truss):
    worst = [
        float(check_many(barn_at(consequence_class=c), [truss], [EN_SIZES]).worst[0]) for c in ("CC1", "CC2", "CC3")
    ]
    assert worst == sorted(worst)


@likely
@given(trusses())
def test_the_alternative_pair_of_expressions_is_never_more_severe(truss):
    """(6.10a) and (6.10b) with xi = 0.85 lie below (6.10), which has the larger of their factors on every load."""
    plain, pair = (check_many(barn_at(s), [truss], [EN_SIZES]) for s in ("en1990-6.10", "en1990-6.10ab"))
    assert pair.utilisation[0] <= plain.utilisation[0] * (1 + 1e-9)
    assert pair.down[0] <= plain.down[0] * (1 + 1e-9)
    assert pair.uplift[0] == pytest.approx(plain.uplift[0], rel=1e-9, abs=1e-9)
    assert pair.deflection == pytest.approx(plain.deflection)
