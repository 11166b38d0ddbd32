"""Properties of the whole way from a job to its checks: mirror, growth of loads, batches."""

from dataclasses import fields, replace
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rooftruss.basis.grades import find_grade
from rooftruss.basis.job import Job, TrussSpec
from rooftruss.basis.sections import find_section
from rooftruss.design.batch import Report, check_many
from rooftruss.design.design import Outcome, outcome_of
from rooftruss.design.family import Choice, Option, family_of, unbatched
from rooftruss.design.stages import Run, run
from rooftruss.shapes.webbing import SHAPES
from tests.jobs import SIZES, at_site, calm, house, spec
from tests.strategies import numbers

PSF = 47.880258980  # [Pa] 0.45359237 x 9.80665 / 0.3048^2
few = settings(max_examples=20, deadline=None)
likely = settings(few, derandomize=True)  # true of trusses as they are built, no theorem: the same examples every time


def analysed(job: Job, truss: TrussSpec) -> tuple[Run, Outcome]:
    """Stages and outcome of one truss with the sizes of these tests."""
    options = {g: (Option(find_section(size), find_grade(grade)),) for g, (size, grade) in SIZES.items()}
    done = run(unbatched(family_of(job, [truss])), Choice(options=options, index={g: np.array(0) for g in SIZES}))
    return done, outcome_of(done)


@st.composite
def trusses(draw: st.DrawFn) -> TrussSpec:
    """A truss of any shape of the catalogue at plausible dimensions, without point loads."""
    shape = draw(st.sampled_from(sorted(SHAPES)))
    return spec(
        "T1",
        shape=shape,
        span=draw(numbers(4.0, 12.0)),
        pitch=draw(numbers(0.2, 1.0)),
        overhang=draw(st.sampled_from([0.0, 0.3, 0.5])),
        heel_height=draw(st.sampled_from([None, 0.4])),
        spacing=draw(st.sampled_from([0.4, 0.6])),
        panels=draw(st.sampled_from(SHAPES[shape].panel_counts)),
        longest_stock=30.0 if shape in ("king post", "queen post") else 6.1,  # their panels are long
    )


def mirrored(one: np.ndarray, other: np.ndarray) -> bool:
    scale = np.abs(one).max() + 1e-9
    return bool(np.all(np.abs(one - other) <= 1e-8 * scale))


@few
@given(trusses())
def test_vertical_reactions_are_the_same_at_both_ends(truss):
    """With wind, too: the pin alone takes what is sideways, but at the height of the roller, so it turns nothing."""
    _, outcome = analysed(house(), truss)
    for peak in (outcome.reactions.down, outcome.reactions.uplift):
        assert mirrored(peak.value, peak.value[::-1])


@few
@given(trusses())
def test_without_wind_members_and_their_mirror_images_are_alike(truss):
    done, outcome = analysed(calm(), truss)
    assert not any(head.action == "W" for head in done.cases.heads)
    image = list(done.family.topology.mirror_members)
    envelope = outcome.envelope
    for peak in (envelope.tension, envelope.compression, envelope.moment, envelope.shear, outcome.utilisation):
        assert mirrored(np.abs(peak.value), np.abs(peak.value[image]))
    assert outcome.reactions.horizontal.value == pytest.approx(0.0, abs=1e-6 * outcome.reactions.down.value.max())


@few
@given(trusses())
def test_each_case_has_a_mirror_image_among_the_cases(truss):
    """The vertical reactions of the cases, end for end, are the same set."""
    done, _ = analysed(house(), truss)
    up = done.solution.reactions[..., 1]
    there, back = (np.array(sorted(map(tuple, np.round(r, 4).tolist()))) for r in (up, up[:, ::-1]))
    assert np.abs(there - back).max() < 1e-3


def falls(reports: list[Report]) -> list[tuple[float, float]]:
    """Neighbours of which the second has the smaller worst ratio.

    Left out is the step away from a slenderness limit: it asks only whether there is compression, not how much.
    """
    out = []
    for one, other in pairwise(reports):
        slender = one.rule[0].startswith("slenderness") and one.utilisation[0] == one.worst[0]
        if other.worst[0] < one.worst[0] - 1e-9 and not slender:
            out.append((float(one.worst[0]), float(other.worst[0])))
    return out


def reported(job: Job, *specs: TrussSpec) -> list[Report]:
    return [check_many(job, [one], [SIZES]) for one in specs]


@likely
@given(trusses(), numbers(0.1, 1.0))
def test_more_ground_snow_never_lowers_the_worst_utilisation(truss, step):
    jobs = [at_site(ground_snow=(20 + 25 * k * step) * PSF, wind_speed=0.0) for k in range(4)]
    assert falls([check_many(job, [truss], [SIZES]) for job in jobs]) == []


@likely
@given(trusses(), st.sampled_from(["roof_dead", "ceiling_dead", "roof_live", "ceiling_live"]), numbers(0.1, 1.0))
def test_more_of_any_load_downwards_never_lowers_the_worst_utilisation(truss, name, step):
    """Where no wind blows: under wind, dead load also holds the roof down."""
    start = getattr(truss.loads, name)
    specs = [replace(truss, loads=replace(truss.loads, **{name: start + 8 * k * step * PSF})) for k in range(4)]
    assert falls(reported(calm(), *specs)) == []


@likely
@given(trusses(), numbers(0.05, 0.4))
def test_a_longer_span_under_gravity_never_lowers_the_worst_utilisation(truss, step):
    """The same layout and sizes over 9 to 10.6 m; from 20 ft between eave and ridge unbalanced snow is another."""
    free = replace(truss, timber=replace(truss.timber, longest_stock=30.0))
    specs = [replace(free, span=9.0 + k * step) for k in range(5)]
    assert falls(reported(calm(), *specs)) == []


@likely
@given(trusses())
def test_more_plies_and_a_smaller_spacing_never_raise_the_worst_utilisation(truss):
    """A bearing has the breadth of all plies, a deflection the stiffness of all."""
    assert falls(reported(calm(), replace(truss, plies=3), replace(truss, plies=2), truss)) == []
    assert falls(reported(calm(), *(replace(truss, spacing=s) for s in (0.3, 0.4, 0.5, 0.6)))) == []


@few
@given(st.lists(trusses(), min_size=2, max_size=6))
def test_a_batch_is_its_trusses_one_by_one(many):
    specs = [replace(truss, mark=f"B{k}") for k, truss in enumerate(many)]
    together = check_many(house(), specs, [SIZES])
    for k, truss in enumerate(specs):
        alone = check_many(house(), [truss], [SIZES])
        for f in fields(Report):
            a, b = getattr(together, f.name)[k], getattr(alone, f.name)[0]
            if not isinstance(a, str):
                assert a == pytest.approx(b, rel=1e-9, abs=1e-9), f.name
        assert together.mark[k] == truss.mark


@few
@given(trusses(), st.lists(st.tuples(numbers(4.0, 12.0), numbers(0.05, 1.2)), min_size=2, max_size=5))
def test_one_layout_in_many_dimensions_is_its_trusses_one_by_one(truss, sizes):
    """Pitches on both sides of every limit of the snow and wind rules share one set of cases."""
    plain = replace(truss, shape="fink", panels=4, heel_height=None, timber=replace(truss.timber, longest_stock=30.0))
    specs = [replace(plain, mark=f"B{k}", span=span, pitch=pitch) for k, (span, pitch) in enumerate(sizes)]
    together = check_many(house(), specs, [SIZES])
    alone = [check_many(house(), [one], [SIZES]) for one in specs]
    for name in ("worst", "bearing", "deflection", "down", "uplift", "mass"):
        assert getattr(together, name) == pytest.approx([float(getattr(r, name)[0]) for r in alone], rel=1e-9, abs=1e-9)
