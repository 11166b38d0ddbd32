"""Rules of EN 1995-1-1, 5.4.3 and 9.2.1, for whole trusses.

Check values by hand after the clauses, which are from memory (tables/timber/truss_en1995.csv); beams by statics.
"""

from dataclasses import replace

import numpy as np
import pytest

from rooftruss.analysis.effects import combined_extremes, unit_effects
from rooftruss.analysis.simplified import simplified_solution
from rooftruss.basis.job import CustomSpec
from rooftruss.design.members import runs_of
from rooftruss.design.sizing import size_truss
from rooftruss.design.stages import durations_of
from rooftruss.errors import JobError, OutOfScopeError
from rooftruss.shapes.catalogue import Layout
from rooftruss.timber.check import standard
from rooftruss.timber.ec5_truss import bay_lengths, effective_lengths, joint_force
from rooftruss.timber.terms import Bays
from tests.en_jobs import barn, en_spec
from tests.support import load_cases, placed, stiffness


def test_effective_lengths_after_the_simplified_analysis():
    # 9.2.1(4): bays of 2.2, 2.0, 2.0 m: outer 0.8 x 2.2, inner 0.6 x 2.0, at a node 0.6 x the longer bay
    in_bay, at_node = bay_lengths(np.array([2.2, 2.0, 2.0]))
    assert in_bay.tolist() == pytest.approx([1.76, 1.2, 1.6])
    assert at_node.tolist() == pytest.approx([1.32, 1.2])
    # with a moment at the left end the bay beside the outer one counts in full
    in_bay, _ = bay_lengths(np.array([2.2, 2.0, 2.0]), moment_at_start=True)
    assert in_bay.tolist() == pytest.approx([1.76, 2.0, 1.6])
    in_bay, _ = bay_lengths(np.array([[2.0, 3.0], [1.0, 1.0]]), moment_at_end=True)
    assert in_bay == pytest.approx(np.array([[2.0, 2.4], [1.0, 0.8]]))


def bays(lengths, roles, runs, *, loaded=True):
    return Bays(
        length=np.array(lengths), roles=tuple(roles), runs=tuple(runs), loaded=np.full(len(lengths), fill_value=loaded)
    )


def test_effective_length_of_a_member_is_the_larger_of_bay_and_panel_points():
    rafter = bays([2.2, 2.0, 3.0, 1.5], ["top chord"] * 3 + ["web"], [(0, 1, 2), (3,)])
    # bays 1.76, 1.20, 2.40; nodes 0.6 x 2.2 = 1.32 and 0.6 x 3.0 = 1.80
    assert effective_lengths(rafter, "simplified").tolist() == pytest.approx([1.76, 1.8, 2.4, 1.5])
    assert effective_lengths(rafter, "frame").tolist() == [2.2, 2.0, 3.0, 1.5]
    tail = bays([0.5, 2.2, 2.0, 2.0], ["tail"] + ["top chord"] * 3, [(0, 1, 2, 3)])
    # Euler's 2.0 for the cantilever; the moment of the tail makes the second bay count in full
    assert effective_lengths(tail, "simplified").tolist() == pytest.approx([1.0, 1.76, 2.0, 1.6])


def test_bay_length_without_load_between_the_panel_points_and_in_one_bay():
    # 9.2.1(3)
    still = bays([2.2, 2.0], ["bottom chord"] * 2, [(0, 1)], loaded=False)
    assert effective_lengths(still, "simplified").tolist() == [2.2, 2.0]
    assert effective_lengths(bays([2.2], ["top chord"], [(0,)]), "simplified").tolist() == [2.2]


def test_force_at_every_joint():
    assert joint_force(9.0) == pytest.approx(1900.0)  # 9.2.1(9): 1.0 + 0.1 x 9 kN


def test_runs_of_a_fink_with_tails_and_a_splice():
    made = placed(Layout(shape="fink", panels=4, tails=True, raised_heel=False)).topology
    found = {tuple(made.names[k] for k in run) for run in runs_of(made) if made.members[run[0]].group != "web"}
    assert found == {("tail 1", "top 1", "top 2"), ("tail 2", "top 4", "top 3"), ("bottom 1", "bottom 2", "bottom 3")}
    cut = tuple(replace(m, pinned_end=True) if m.name == "bottom 1" else m for m in made.members)
    cut = tuple(replace(m, pinned_start=True) if m.name == "bottom 2" else m for m in cut)
    names = {tuple(made.names[k] for k in run) for run in runs_of(replace(made, members=cut))}
    assert ("bottom 1",) in names
    assert ("bottom 2", "bottom 3") in names


def rafter_extremes(factor, *, overhang=False):
    """Extremes of the left rafter of two equal bays under 1 kN/m across it: Fink of 4 panels, slope 3:4."""
    truss = placed(
        Layout(shape="fink", panels=4, tails=overhang, raised_heel=False), span=6.4, pitch=0.75, overhang=0.4
    )
    on = [k for k, m in enumerate(truss.topology.members) if m.surface in ("left slope", "left tail")]
    loads = [(k, 0.0, float(truss.length[k]), 600.0, -800.0) for k in on]
    cases = load_cases(truss, [(loads, (), {})])
    found = simplified_solution(truss, *stiffness(truss), cases, support_moments=factor)
    names = truss.topology.names
    return truss, found, combined_extremes(unit_effects(truss, cases, found), np.eye(1)), names.index("top 1")


def test_moments_of_a_rafter_of_two_bays():
    # 5.4.3(3) on two bays of 2 m: w l^2/8 = 0.5, less 10 % at the inner support; from it the bay: R = 1 - 0.45/2, R^2/2
    truss, found, extremes, k = rafter_extremes(0.9)
    assert truss.length[k] == pytest.approx(2.0)
    assert extremes.moment_min[0, k] == pytest.approx(-450.0)
    assert extremes.moment_max[0, k] == pytest.approx(0.775**2 / 2 * 1e3)
    assert extremes.moment_min[0, k + 1] == pytest.approx(-450.0)
    assert found.end_forces[0, k, 5] == pytest.approx(-found.end_forces[0, k + 1, 2])
    assert rafter_extremes(1.0)[2].moment_min[0, k] == pytest.approx(-500.0)


def test_moment_of_a_tail_is_its_own():
    # cantilever of 0.5 m along the slope: w a^2/2 = 125 N m at the heel, which no reduction may change
    truss, found, extremes, k = rafter_extremes(0.9, overhang=True)
    tail = truss.topology.names.index("tail 1")
    assert truss.length[tail] == pytest.approx(0.5)
    assert extremes.moment_min[0, tail] == pytest.approx(-125.0)
    assert found.end_forces[0, k, 2] == pytest.approx(125.0)
    # three-moment equation with 125 at the end: 2 M (2 + 2) = 2 x w l^3/4 - 125 x 2, less 10 %
    assert extremes.moment_min[0, k + 1] == pytest.approx(-0.9 * (4000 - 250) / 8)


def test_axial_forces_are_those_of_the_joints_loaded_by_the_beams():
    truss, found, _, _ = rafter_extremes(0.9)
    reactions = found.reactions[0]
    # the load is 4 kN across the left rafter, (2.4, -3.2) kN at its middle (1.6, 1.2) m
    assert reactions[0, 0] == pytest.approx(-2400.0)
    right = (3200 * 1.6 + 2400 * 1.2) / 6.4
    assert reactions[:, 1].tolist() == pytest.approx([3200 - right, right])
    # cut through top 4, the last web and bottom 3: right heel, top chord at 3:4
    top4 = truss.topology.names.index("top 4")
    assert found.end_forces[0, top4, 3] == pytest.approx(-right / 0.6)


def simplified(**changes):
    spec = en_spec(**changes)
    return replace(spec, timber=replace(spec.timber, options={**spec.timber.options, "truss_analysis": "simplified"}))


def test_compression_is_checked_ten_per_cent_higher():
    one, other = (standard("EN 1995-1-1", {"service_class": 2, "truss_analysis": a}) for a in ("frame", "simplified"))
    assert (one.rules.compression, other.rules.compression) == (1.0, 1.1)  # 9.2.1(5)
    design = size_truss(barn(), simplified())
    run = design.run
    member = run.members.names.index("top 1")
    combination = int(design.outcome.utilisation.combination[member])
    steps = {
        s.symbol: s
        for s in run.family.timber.explain(run.members, run.demand, durations_of(run.combinations), member, combination)
    }
    assert steps["N_c,d"].value == pytest.approx(1.1 * run.demand.compression[combination, member])
    assert "9.2.1(5)" in steps["N_c,d"].text
    assert steps["utilisation"].value == pytest.approx(design.outcome.utilisation.value[member], rel=1e-12)
    assert steps["l_ef,y"].value == pytest.approx(0.8 * run.truss.length[member])


def test_trusses_outside_the_simplified_analysis_are_refused_by_clause():
    with pytest.raises(OutOfScopeError, match=r"5\.4\.3\(1\).*re-entrant"):
        size_truss(barn(), simplified(shape="scissor", panels=None, bottom_pitch=0.15))
    with pytest.raises(OutOfScopeError, match=r"5\.4\.3\(1\).*0\.15 times the span"):
        size_truss(barn(), simplified(pitch=0.25))
    with pytest.raises(JobError, match="truss_analysis"):
        standard("EN 1995-1-1", {"service_class": 2, "truss_analysis": "simple"})


def test_chords_too_deep_for_the_simplified_analysis_are_left_out():
    spec = simplified(span=5.0, pitch=0.5, overhang=0.0, shape="king post", panels=None)
    top = replace(spec.timber.groups["top chord"], sizes=("45x220", "45x95"))
    spec = replace(spec, timber=replace(spec.timber, groups={**spec.timber.groups, "top chord": top}))
    design = size_truss(barn(), spec)  # 1.2 m high: chords up to 120 mm
    assert design.sizes["top chord"].section.name == "45x95"
    assert any("too deep for the simplified analysis" in note for note in design.notes)
    only = replace(spec.timber.groups["top chord"], sizes=("45x220",))
    spec = replace(spec, timber=replace(spec.timber, groups={**spec.timber.groups, "top chord": only}))
    with pytest.raises(OutOfScopeError, match="10 times the depth"):
        size_truss(barn(), spec)


def test_chords_of_one_bay_are_beams_on_two_supports():
    # a king post whose bottom chord is spliced in the middle and whose rafters are one bay: nothing runs through
    spec = simplified(shape="king post", panels=None, span=6.0, overhang=0.0)
    stock = replace(spec.timber, longest_stock=5.4)
    run = size_truss(barn(), replace(spec, timber=stock)).run
    assert all(len(r) == 1 for r in runs_of(run.truss.topology))
    case, top = run.cases.names.index("dead, top chord"), run.members.names.index("top 1")
    assert run.forces.end_forces[case, top, 2] == pytest.approx(0.0, abs=1e-9)
    # roof load w across a rafter of length l: w l^2/8 in its middle
    normal = 550 * 0.6 * float(run.truss.direction[top, 0])
    found = combined_extremes(run.effects, np.eye(len(run.cases.names)))
    assert found.moment_max[case, top] == pytest.approx(normal * float(run.truss.length[top]) ** 2 / 8)


def custom(pins, *, support="C", triangulated=True):
    """A custom king post with tails under the simplified analysis; pins: the pinned ends of the rafters."""
    nodes = (("A", 0.0, 0.0), ("B", 3.0, 0.0), ("C", 6.0, 0.0), ("D", 3.0, 1.5), ("E", 1.5, 0.75), ("F", 4.5, 0.75))
    members = [
        ("top chord", "A", "E", (pins, False)),
        ("top chord", "E", "D", (False, pins)),
        ("top chord", "D", "F", (pins, False)),
        ("top chord", "F", "C", (False, pins)),
        ("bottom chord", "A", "B", (True, False)),
        ("bottom chord", "B", "C", (False, True)),
        ("web", "B", "D", (True, True)),
    ]
    if triangulated:
        members += [("web", "B", "E", (True, True)), ("web", "B", "F", (True, True))]
    spec = CustomSpec(
        nodes=nodes,
        members=tuple(
            (f"m{k}", role, a, b, "web" if role == "web" else role, *ends)
            for k, (role, a, b, ends) in enumerate(members)
        ),
        supports=(("A", True, True, None), (support, False, True, None)),
    )
    return simplified(shape="custom", custom=spec, span=6.1, pitch=0.5, overhang=0.0, bearing=0.1, panels=None)


def test_custom_trusses_under_the_simplified_analysis():
    assert size_truss(barn(), custom(pins=True)).run.forces is not None
    with pytest.raises(OutOfScopeError, match=r"5\.4\.3\(3\).*pass moment to each other at joint"):
        size_truss(barn(), custom(pins=False))
    with pytest.raises(OutOfScopeError, match=r"5\.4\.3\(2\).*every joint pinned.*joint [EF]"):
        size_truss(barn(), custom(pins=True, triangulated=False))


def test_bearings_inside_the_span_are_refused():
    inner = custom(pins=True)
    supports = (*inner.custom.supports, ("B", False, True, None))
    with pytest.raises(OutOfScopeError, match=r"5\.4\.3\(1\).*below joint 'B'"):
        size_truss(barn(), replace(inner, custom=replace(inner.custom, supports=supports)))


def test_bay_length_where_loads_act_at_the_panel_points():
    rafter = bays([2.2, 2.0], ["top chord"] * 2, [(0, 1)])
    assert effective_lengths(rafter, "simplified", node_loaded=True).tolist() == [2.2, 2.0]


@pytest.mark.parametrize(("analysis", "axial", "combined"), [("frame", 1.0, 0.9), ("simplified", 0.7, 0.7)])
def test_limits_where_loads_act_at_the_panel_points(analysis, axial, combined):
    # 9.2.1(1) and (6)
    rules = standard("EN 1995-1-1", {"service_class": 1, "truss_analysis": analysis, "node_loaded": True}).rules
    assert (rules.axial, rules.combined) == (axial, combined)
