"""The simplified analysis beside statics, and beside the frame whose bars hardly bend."""

import numpy as np
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from rooftruss.analysis.frame import solve
from rooftruss.analysis.simplified import simplified_solution
from tests.property.test_statics import applied, moment, total, turned
from tests.strategies import load_sets, trusses
from tests.support import load_cases, stiffness

few = settings(max_examples=30, deadline=None)


@few
@given(st.data(), st.floats(0.5, 1.0))
def test_every_joint_every_member_and_the_whole_are_in_equilibrium(data, factor):
    truss = data.draw(trusses())
    loads = data.draw(load_sets(truss))
    cases = load_cases(truss, [loads])
    found = simplified_solution(truss, *stiffness(truss), cases, support_moments=factor)
    acting = applied(truss, loads)
    scale = total(acting)
    assume(scale > 1.0)
    ends = found.end_forces[0]
    at_start, at_end = turned(truss, ends[:, :2]), turned(truss, ends[:, 3:5])
    made = truss.topology
    joints, turning = -cases.nodal[0].copy(), np.zeros(len(made.nodes))
    for k, m in enumerate(made.members):
        joints[m.start] += at_start[k]
        joints[m.end] += at_end[k]
        turning[m.start] += ends[k, 2]
        turning[m.end] += ends[k, 5]
    for support, reaction in zip(made.supports, found.reactions[0], strict=True):
        joints[support.node] -= reaction
    assert np.abs(joints).max() < 1e-8 * scale
    assert np.abs(turning).max() < 1e-8 * scale
    for k in range(len(made.members)):
        own = applied(truss, ([x for x in loads[0] if x[0] == k], [x for x in loads[1] if x[0] == k], {}))
        on = [*own, (truss.start_xy[k], at_start[k]), (truss.end_xy[k], at_end[k])]
        assert np.abs(sum(force for _, force in on)).max() < 1e-8 * scale
        assert abs(sum(moment(*pair) for pair in on) + ends[k, 2] + ends[k, 5]) < 1e-7 * scale
    held = [(truss.xy[s.node], r) for s, r in zip(made.supports, found.reactions[0], strict=True)]
    assert np.abs(sum(force for _, force in acting + held)).max() < 1e-8 * scale
    assert abs(sum(moment(*pair) for pair in acting + held)) < 1e-7 * scale


@few
@given(st.data())
def test_the_frame_comes_near_it_as_its_members_become_stiff_along_and_weak_across(data):
    truss = data.draw(trusses())
    loads = data.draw(load_sets(truss))
    cases = load_cases(truss, [loads])
    ea, ei = stiffness(truss)
    scale = total(applied(truss, loads))
    assume(scale > 1.0)
    found = simplified_solution(truss, ea, ei, cases, support_moments=1.0)
    frame = solve(truss, ea, 1e-7 * ei, cases)  # the joints then move so little that they are supports
    assert np.abs(found.end_forces - frame.end_forces).max() < 1e-5 * scale
    assert np.abs(found.reactions - frame.reactions).max() < 1e-5 * scale
