"""Members that inspection finds idle are idle; the sentences and the summary say what was found."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rooftruss.analysis.inspection import inspect_case, joint_loads, pin_jointed_axial, summary
from rooftruss.shapes.catalogue import Layout
from tests.strategies import joint_forces, load_sets, trusses
from tests.support import framed, joint_cases, layout_name, layouts, load_cases, placed, stiffness


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_what_inspection_finds_idle_the_solver_finds_unloaded(data):
    truss = data.draw(trusses())
    loads = data.draw(st.one_of(load_sets(truss), joint_forces(truss).map(lambda forces: ([], [], forces))))
    cases = load_cases(truss, [loads])
    hold_against_the_solver(truss, cases)


@pytest.mark.parametrize("layout", list(layouts()), ids=layout_name)
def test_single_joint_loads_over_the_catalogue(layout):
    truss = placed(layout)
    nodes = range(len(truss.topology.nodes))
    hold_against_the_solver(
        truss, load_cases(truss, [((), (), {n: f}) for n in nodes for f in ((0, -1000.0), (700.0, 0))])
    )


def hold_against_the_solver(truss, cases):
    names = truss.topology.names
    axial = pin_jointed_axial(truss, stiffness(truss)[0], cases)
    for forces, loads in zip(axial, joint_loads(truss, cases), strict=True):
        found = inspect_case(truss, loads)
        scale = np.abs(loads).max()
        for name in found.zero:
            assert abs(forces[names.index(name)]) <= 1e-8 * scale, name
        for one, other in found.collinear:
            assert forces[names.index(one)] == pytest.approx(forces[names.index(other)], abs=1e-8 * scale)
        assert {step.member for step in found.steps} - {""} <= set(found.zero)


def inspected(truss, loads):
    return inspect_case(truss, joint_loads(truss, joint_cases(truss, loads))[0])


def test_a_howe_truss_under_an_apex_load_works_only_in_its_chords():
    """Every web but the middle one idles, the end verticals first and then one after the other."""
    truss = placed(Layout(shape="howe", panels=6, tails=False, raised_heel=False))
    peak = truss.topology.nodes[int(truss.xy[:, 1].argmax())]
    found = inspected(truss, {peak: (0.0, -1.0)})
    assert found.zero == tuple(n for n in truss.topology.names if n.startswith("web"))
    assert found.steps[0].rule == "balance of the whole"
    assert found.steps[1].reason == (
        "Joint B: bottom 1 and bottom 2 lie in one line and no load acts on the joint, so web 1 carries nothing."
    )
    assert found.steps[2].reason.startswith("Joint H (nothing in web 1): top 1 and top 2 lie in one line")
    assert ("bottom 1", "bottom 2") in found.collinear


UNLOADED = "and no load acts on the joint, so"
SIDEWAYS = "Joint A: only this joint is held sideways and"
RULES = [  # on a square of two posts, beam, sill and brace
    ({"C": (0, -1)}, "corner", f"Joint D: BD and CD meet at an angle {UNLOADED} BD carries nothing."),
    ({"C": (0, -1)}, "lone member", f"Joint D (nothing in BD): CD is alone {UNLOADED} CD carries nothing."),
    ({"D": (0, -1)}, "load in line", "Joint D: BD and the load lie in one line, so CD carries nothing."),
    (
        {"C": (0, -1)},
        "reaction in line",
        "Joint A (nothing in the horizontal reaction): "
        f"AC and the vertical reaction lie in one line {UNLOADED} AB carries nothing.",
    ),
    (
        {"D": (0, -1)},
        "balance of the whole",
        f"{SIDEWAYS} no load acts sideways, so its horizontal reaction is zero.",
    ),
    (
        {"C": (1, -1), "D": (-1, 0)},
        "balance of the whole",
        f"{SIDEWAYS} the sideways loads cancel out, so its horizontal reaction is zero.",
    ),
]
SQUARE = framed(
    {"A": (0.0, 0.0), "B": (4.0, 0.0), "C": (0.0, 3.0), "D": (4.0, 3.0)},
    [("AB", "A", "B"), ("AC", "A", "C"), ("BD", "B", "D"), ("CD", "C", "D"), ("BC", "B", "C")],
    {"A": (1, 1), "B": (0, 1)},
)


@pytest.mark.parametrize(("loads", "rule", "reason"), RULES)
def test_each_rule_in_words(loads, rule, reason):
    found = inspected(SQUARE, loads)
    assert reason in [step.reason for step in found.steps if step.rule == rule]


def test_a_load_across_the_corner_settles_nothing_there():
    found = inspected(SQUARE, {"D": (3.0, 4.0)})
    assert "D" not in [step.joint for step in found.steps]


def test_a_pinned_support_is_two_unknown_forces():
    """Under a sideways load nothing can be said at the pinned bearing, but at the sliding one it can."""
    nodes = {"A": (0, 0), "B": (4, 0), "C": (0, 3), "D": (4, 3)}
    members = [("AB", "A", "B"), ("AC", "A", "C"), ("BD", "B", "D"), ("CD", "C", "D"), ("AD", "A", "D")]
    found = inspected(framed(nodes, members, {"A": (1, 1), "B": (0, 1)}), {"D": (5.0, 0.0)})
    assert found.zero == ("AB", "AC", "CD")
    assert [s.joint for s in found.steps if s.member == "AB"] == ["B"]
    reason = next(s.reason for s in found.steps if s.member == "AB")
    assert reason == (
        "Joint B: BD and the vertical reaction lie in one line and no load acts on the joint, so AB carries nothing."
    )


def test_nothing_acts_in_a_case_without_load():
    truss = placed(Layout(shape="fink", panels=4, tails=True, raised_heel=False))
    found = inspect_case(truss, np.zeros((len(truss.topology.nodes), 2)))
    assert [s.rule for s in found.steps] == ["no load"]
    assert set(found.zero) == {n for n in truss.topology.names if not n.startswith("tail")}


def test_two_pairs_in_two_lines_pass_their_forces_on():
    """Four bars crossing at an unloaded joint: each pair is one bar for its force, and none need be idle."""
    nodes = {"A": (0, 0), "B": (2, 2), "C": (4, 0), "D": (4, 4), "E": (0, 4)}
    crossing = [("AB", "A", "B"), ("BD", "B", "D"), ("BC", "B", "C"), ("BE", "B", "E")]
    rim = [("AC", "A", "C"), ("CD", "C", "D"), ("AE", "A", "E")]
    truss = framed(nodes, crossing + rim, {"A": (1, 1), "C": (0, 1)})
    found = inspected(truss, {"D": (-1.0, -1.5), "E": (1.0, 0.0)})
    assert not found.zero
    assert found.collinear == (("AB", "BD"), ("BC", "BE"))


def test_summary_tells_idle_from_waking_and_names_what_only_the_solver_sees():
    """Middle post of a Pratt truss: no joint shows that it idles under an apex load and under none below."""
    truss = placed(Layout(shape="pratt", panels=4, tails=False, raised_heel=False))
    names = truss.topology.nodes
    left, right, peak = (names[int(np.abs(truss.xy - p).sum(axis=1).argmin())] for p in ((2, 1), (6, 1), (4, 2)))
    middle = names[int(np.abs(truss.xy - (4, 0)).sum(axis=1).argmin())]
    cases = joint_cases(
        truss, {left: (0, -1e3), right: (0, -1e3), peak: (0, -1e3)}, {middle: (0, -2e3)}, {left: (0, -1e3)}
    )
    ea = stiffness(truss)[0]
    told = summary(truss, ea, cases, np.array([[1.0, 0.0, 1.5], [1.0, 0.0, 0.0]]), gravity=(0, 2))
    ends = {frozenset((names[m.start], names[m.end])): m.name for m in truss.topology.members}
    post = ends[frozenset((middle, peak))]
    assert told.idle == (post,)
    assert [(w.member, w.case) for w in told.waking] == [(post, "case 1")]
    assert told.waking[0].force == pytest.approx(told.axial[1, truss.topology.names.index(post)])
    assert told.waking[0].force > 100
    assert [post in inspection.zero for inspection in told.by_case] == [True, False, True]
    assert summary(truss, ea, cases, np.eye(3), gravity=(0, 1, 2)).waking == ()

    hip = placed(Layout(shape="fink", panels=4, tails=False, raised_heel=False))
    quiet = summary(hip, stiffness(hip)[0], joint_cases(hip, {"A": (0, -1e3)}), np.eye(1), gravity=(0,))
    assert set(quiet.by_case[0].zero) | {m for _, ms in quiet.beyond_inspection for m in ms} == set(hip.topology.names)


def test_summary_names_members_beyond_inspection():
    """Brace of a queen-post truss under equal loads: idle by the balance of a cut, not of a joint."""
    nodes = {"A": (0, 0), "B": (10, 0), "C": (20, 0), "D": (30, 0), "F": (10, 10), "E": (20, 10)}
    members = [(ends, *ends) for ends in ("AB", "BC", "CD", "AF", "FE", "DE", "BF", "BE", "CE")]
    truss = framed(nodes, members, {"A": (1, 1), "D": (0, 1)})
    told = summary(truss, np.ones(9), joint_cases(truss, {"B": (0, -4), "C": (0, -4)}), np.eye(1), gravity=(0,))
    assert told.beyond_inspection == (("case 0", ("BE",)),)
    assert told.idle == ("BE",)
