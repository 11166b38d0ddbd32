"""Sizing against trying every choice; what is said when nothing passes."""

from dataclasses import replace
from itertools import product

import numpy as np
import pytest

from rooftruss.basis.job import GroupTimber, TrussSpec
from rooftruss.design.batch import check_many
from rooftruss.design.compare import alternatives, compare_shapes
from rooftruss.design.design import LIMIT, Design
from rooftruss.design.family import GROUPS, options_of
from rooftruss.design.sizing import size_truss
from rooftruss.errors import JobError
from rooftruss.shapes.webbing import SHAPES
from tests.jobs import house, spec


def limited(truss: TrussSpec, **groups: dict[str, tuple[str, ...]]) -> TrussSpec:
    """A truss with other sizes or grades for some of its groups; "_" stands for the blank in a group's name."""
    changed = {g.replace("_", " "): words for g, words in groups.items()}
    made = {g: replace(t, **changed.get(g, {})) for g, t in truss.timber.groups.items()}
    return replace(truss, timber=replace(truss.timber, groups=made))


def every_choice(truss: TrussSpec) -> list[dict[str, tuple[str, str]]]:
    """Each combination of a size and a grade for each group."""

    def kinds(group: GroupTimber) -> list[tuple[str, str]]:
        return [(size, grade) for size in group.sizes for grade in group.grades]

    groups = truss.timber.groups
    return [dict(zip(GROUPS, chosen, strict=True)) for chosen in product(*(kinds(groups[g]) for g in GROUPS))]


def only(choice: dict[str, tuple[str, str]]) -> dict[str, dict[str, tuple[str, ...]]]:
    """The changes for `limited` that leave this one choice."""
    return {g: {"sizes": (size,), "grades": (grade,)} for g, (size, grade) in choice.items()}


def failing_parts(design: Design) -> set[str]:
    """Groups with a member over its limit, and "bearing" and "deflection" as one each, by what is said."""
    made = design.run.family.topology
    group = dict(zip(made.names, made.groups, strict=True))
    return {group.get(text.split(" (")[0], text.split(" at ")[0].split()[-1]) for text in design.failures}


def taken(design: Design) -> dict[str, tuple[str, str]]:
    return {g: (option.section.name, option.grade.name) for g, option in design.sizes.items()}


@pytest.mark.parametrize("truss", [spec("T3"), spec("T1", span=7.0), spec("T2", points=True)], ids=lambda t: t.mark)
def test_the_choice_is_the_least_timber_that_passes(truss):
    choices = every_choice(truss)
    report = check_many(house(), [truss] * len(choices), choices)
    passing = np.flatnonzero(report.passes)
    assert 0 < len(passing) < len(choices)
    least = report.volume[passing].min()
    design = size_truss(house(), truss)
    assert design.passes
    assert design.notes == design.failures == ()
    assert float(design.outcome.volume) == pytest.approx(least)
    first = next(choices[k] for k in passing if report.volume[k] <= least * (1 + 1e-9))
    assert taken(design) == first  # of equal volumes the one listed first


def test_of_equal_volumes_the_grade_listed_first_is_taken():
    strong, weak = "SPF SS", "SPF No.1/No.2"
    roomy = spec("T3", span=3.0)
    for order in ((strong, weak), (weak, strong)):
        design = size_truss(house(), limited(roomy, top_chord={"grades": order, "sizes": ("2x6",)}))
        assert taken(design)["top chord"] == ("2x6", order[0])


def test_when_nothing_passes_the_nearest_is_shown_with_what_failed():
    small = limited(spec("T1"), top_chord={"sizes": ("2x3",)}, bottom_chord={"sizes": ("2x3", "2x4")})
    design = size_truss(house(), small)
    choices = every_choice(small)
    single = [size_truss(house(), limited(small, **only(choice))) for choice in choices]
    assert not design.passes
    best = min(single, key=lambda d: (len(failing_parts(d)), float(d.outcome.worst)))
    assert taken(design) == taken(best)
    assert design.notes == (
        f"none of the {len(choices)} allowed combinations of sizes and grades passes; the nearest is shown",
    )
    over = [k for k, value in enumerate(design.outcome.utilisation.value) if value > LIMIT]
    assert len([t for t in design.failures if "deflection" not in t and "bearing" not in t]) == len(over) > 0
    numbers = [float(text.split(": ")[1].split()[0]) for text in design.failures]
    assert numbers == sorted(numbers, reverse=True)
    assert numbers[0] == pytest.approx(float(design.outcome.worst), abs=0.005)


def test_a_failed_bearing_and_a_failed_deflection_are_said():
    narrow = size_truss(house(), spec("T1", bearing=0.02))
    assert any(text.startswith("bearing at A: ") and "across the grain" in text for text in narrow.failures)
    strict = replace(house(), limits=replace(house().limits, horizontal=1e-4))
    moved = size_truss(strict, spec("T2"))
    assert any(text.startswith("horizontal deflection at ") and "of its limit" in text for text in moved.failures)


def test_sizes_that_leave_no_room_under_a_raised_heel_are_left_out():
    low = spec("T1", heel_height=0.165)  # room for 2x4 and 2x6 top chords over a 2x4, not for a 2x8
    design = size_truss(house(), limited(low, top_chord={"sizes": ("2x8", "2x6")}, bottom_chord={"sizes": ("2x4",)}))
    assert taken(design)["top chord"][0] == "2x6"
    with pytest.raises(JobError, match=r"heel_height: 6\.496 in \(165 mm\) leaves no room for a heel post"):
        size_truss(house(), limited(low, top_chord={"sizes": ("2x8",)}))


def test_options_are_in_the_order_of_the_job_and_unknown_names_are_refused():
    names = [(o.section.name, o.grade.name) for o in options_of(spec("T1"))["bottom chord"]]
    assert names == [("2x4", "SPF No.1/No.2"), ("2x4", "SPF SS"), ("2x6", "SPF No.1/No.2"), ("2x6", "SPF SS")]
    with pytest.raises(JobError, match="section '2x44' is not in tables/sections"):
        options_of(limited(spec("T1"), web={"sizes": ("2x44",)}))


def test_several_plies_carry_more():
    one, two = (size_truss(house(), limited(spec("T3", plies=n), top_chord={"sizes": ("2x4",)})) for n in (1, 2))
    assert float(two.outcome.worst) < float(one.outcome.worst)


def test_comparison_sizes_every_shape_or_says_why_not():
    rows = compare_shapes(house(), spec("T1", longest_stock=11 * 0.3048))
    assert [row.shape for row in rows] == list(SHAPES)
    refused = [row for row in rows if row.design is None]
    assert {row.shape for row in refused} >= {"king post", "queen post"}
    assert all("longest_stock: 11 ft" in row.reason for row in refused)
    for row in rows:
        if row.design:
            assert row.design.spec.shape == row.shape
            assert float(row.design.outcome.worst) > 0


def test_other_shapes_do_not_keep_panels_and_bottom_pitch():
    made = {s.shape: s for s in alternatives(spec("T2", panels=6))}
    assert (made["scissor"].panels, made["scissor"].bottom_pitch) == (6, 0.25)
    assert all((s.panels, s.bottom_pitch) == (None, None) for name, s in made.items() if name != "scissor")
