"""The simplified analysis beside statics, and beside the frame whose bars hardly bend."""

import numpy as np
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from rooftruss.analysis.frame import solve
from rooftruss.analysis.simplified import simplified_solution
from tests.property.test_statics import applied, require_equilibrium, total
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
    require_equilibrium(truss, loads, cases, found)


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
