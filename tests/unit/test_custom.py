"""Trusses given joint by joint: what becomes of the rows, and each refusal in words."""

import numpy as np
import pytest

from rooftruss.analysis.frame import solve
from rooftruss.analysis.inspection import joint_loads, pin_jointed_axial
from rooftruss.errors import JobError, UnstableTrussError
from rooftruss.shapes.catalogue import Layout
from rooftruss.shapes.custom import custom_truss
from tests.support import joint_cases, load_cases, placed, stiffness

# A king post of 8 m with tails, its left bearing at x = 1, drawn in every direction.
NODES = [("L", 1.0, 0.0), ("M", 5.0, 0.0), ("R", 9.0, 0.0), ("P", 5.0, 2.0), ("T", 0.6, -0.2), ("U", 9.4, -0.2)]
MEMBERS = [
    ("post", "web", "P", "M", "web", True, True),
    (None, "bottom chord", "R", "M", "bottom chord", True, False),
    (None, "bottom chord", "L", "M", "bottom chord", True, False),
    (None, "top chord", "P", "R", "top chord", True, False),
    (None, "top chord", "P", "L", "top chord", True, False),
    (None, "tail", "L", "T", "top chord", False, True),
    (None, "tail", "R", "U", "top chord", False, True),
]
SUPPORTS = [("R", False, True, 0.12), ("L", True, True, 0.09)]


def changed(rows, place, **columns):
    """Rows with columns of one row changed, by position."""
    row = list(rows[place])
    for column, value in columns.items():
        row[int(column[1:])] = value
    return [*rows[:place], tuple(row), *rows[place + 1 :]]


def test_members_are_turned_listed_and_named_from_the_left():
    truss = custom_truss(NODES, MEMBERS, SUPPORTS)
    made = truss.topology
    ends = [
        (m.name, made.nodes[m.start] + made.nodes[m.end], m.surface, m.pinned_start, m.pinned_end) for m in made.members
    ]
    assert ends == [
        ("top 1", "LP", "left slope", False, True),
        ("top 2", "PR", "right slope", True, False),
        ("tail 1", "TL", "left tail", True, False),
        ("tail 2", "RU", "right tail", False, True),
        ("bottom 1", "LM", "ceiling", True, False),
        ("bottom 2", "MR", "ceiling", False, True),
        ("post", "MP", "", True, True),
    ]
    assert (made.shape, made.mirror_members, made.mirror_nodes) == ("custom", (), ())
    assert made.nodes == ("L", "M", "R", "P", "T", "U")
    assert [m.group for m in made.members] == ["top chord"] * 4 + ["bottom chord"] * 2 + ["web"]


def test_the_left_bearing_is_the_origin_and_supports_run_from_the_left():
    truss = custom_truss(NODES, MEMBERS, SUPPORTS)
    assert truss.xy[:, 0] == pytest.approx([0, 4, 8, 4, -0.4, 8.4])
    assert truss.xy[:, 1] == pytest.approx([0, 0, 0, 2, -0.2, -0.2])
    assert [(s.node, s.horizontal, s.vertical) for s in truss.topology.supports] == [(0, True, True), (2, False, True)]
    assert float(truss.bearing) == 0.09


def test_a_custom_king_post_is_that_of_the_catalogue():
    """Same forces and movements under a load on a rafter, a tail and the ceiling."""
    ours = custom_truss(NODES, MEMBERS, SUPPORTS)
    theirs = placed(Layout(shape="king post", panels=2, tails=True, raised_heel=False), overhang=0.4)
    results = []
    for truss in (ours, theirs):
        number = {name: k for k, name in enumerate(truss.topology.names)}
        named = [("top 1", 0.0, -700.0), ("tail 1", 0.0, -300.0), ("bottom 2", 0.0, -90.0)]
        loads = [(number[n], 0.0, float(truss.length[number[n]]), qx, qy) for n, qx, qy in named]
        solution = solve(truss, *stiffness(truss), load_cases(truss, [(loads, (), {})]))
        results.append((solution.end_forces[0, [number[n] for n, _, _ in named]], solution.reactions[0]))
    for one, other in zip(*results, strict=True):
        assert one == pytest.approx(other, rel=1e-9, abs=1e-8)


def test_the_load_of_a_tail_goes_to_the_rafter_that_it_continues():
    """1000 N at the end of a tail of 0.4 m on plan: 1100 N at the heel, 100 N upwards at the other end, 4 m away."""
    truss = custom_truss(NODES, MEMBERS, SUPPORTS)
    cases = joint_cases(truss, {"T": (0.0, -1000.0)})
    at = dict(zip(truss.topology.nodes, joint_loads(truss, cases)[0], strict=True))
    assert at["L"] == pytest.approx([0, -1100])
    assert at["P"] == pytest.approx([0, 100])
    assert not at["T"].any()
    axial = pin_jointed_axial(truss, stiffness(truss)[0], cases)[0]
    assert axial[truss.topology.names.index("tail 1")] == 0


def test_level_top_chords_go_by_the_side_of_the_ridge():
    """A flat top: the level chords left and right of its middle belong to the slopes on their side."""
    nodes = [("A", 0, 0), ("B", 2, 1), ("C", 4, 1), ("D", 6, 1), ("E", 8, 0), ("F", 4, 0)]
    chords = [("A", "B"), ("B", "C"), ("C", "D"), ("D", "E")]
    members = [(None, "top chord", a, b, "top chord", True, True) for a, b in chords]
    members += [(None, "bottom chord", a, b, "bottom chord", True, True) for a, b in (("A", "F"), ("F", "E"))]
    members += [(None, "web", a, b, "web", True, True) for a, b in (("B", "F"), ("C", "F"), ("D", "F"))]
    truss = custom_truss(nodes, members, [("A", True, True, 0.09), ("E", False, True, 0.09)])
    assert [m.surface for m in truss.topology.members[:4]] == ["left slope", "left slope", "right slope", "right slope"]


REFUSED = {
    "joint twice": ({"nodes": [*NODES, ("M", 3.0, 1.0)]}, "joint 'M' is given 2 times; give each joint its own name"),
    "two joints in one place": (
        {"nodes": [*NODES, ("N", 5.0, 2.0)]},
        "joints 'P' and 'N' are in the same place; keep one of them",
    ),
    "place not finite": ({"nodes": changed(NODES, 3, c2=float("nan"))}, "joint 'P': its place .* finite lengths"),
    "too few joints": ({"nodes": NODES[:2]}, "nodes: 2 given; a truss has at least three joints"),
    "member twice": (
        {"members": changed(MEMBERS, 1, c0="post")},
        "member 'post' is given 2 times; give each member its own name",
    ),
    "default name taken": ({"members": changed(MEMBERS, 0, c0="top 1")}, "member 'top 1' is given 2 times"),
    "unknown joint": (
        {"members": changed(MEMBERS, 0, c2="Q")},
        "member 'post': joint 'Q' is not among the nodes; allowed: 'L', 'M'",
    ),
    "unknown joint of a nameless member": (
        {"members": changed(MEMBERS, 3, c3="RR")},
        "top chord from 'P' to 'RR': joint 'RR' is not among the nodes; did you mean 'R'",
    ),
    "unknown role": (
        {"members": changed(MEMBERS, 0, c1="webs")},
        "role 'webs' is unknown; did you mean 'web'",
    ),
    "unknown group": ({"members": changed(MEMBERS, 0, c4="chord")}, "member 'post': group 'chord' is unknown"),
    "no length": (
        {"members": changed(MEMBERS, 0, c2="M")},
        "member 'post' starts and ends at joint 'M'; give it two different joints",
    ),
    "upright chord": (
        {"members": changed(MEMBERS, 0, c1="top chord")},
        "member 'post' is vertical; a top chord carries load on plan, make it a web",
    ),
    "same ends": (
        {"members": [*MEMBERS, ("second post", "web", "M", "P", "web", True, True)]},
        "members 'post' and 'second post' join the same two joints; keep one of them",
    ),
    "through a joint": (
        {"members": [*MEMBERS, ("long", "web", "L", "R", "web", True, True)]},
        "member 'long' runs through joint 'M'; divide it there",
    ),
    "crossing": (
        {"nodes": [*NODES, ("S", 3.0, 1.6)], "members": [*MEMBERS, ("brace", "web", "S", "M", "web", True, True)]},
        "members 'top 1' and 'brace' cross; put a joint where they meet, or move one",
    ),
    "loose joint": (
        {"nodes": [*NODES, ("S", 3.0, 1.6)]},
        "joint 'S' has no member; join it to the truss",
    ),
    "two parts": (
        {
            "nodes": [*NODES, ("S", 3.0, 3.0), ("V", 4.0, 4.0)],
            "members": [*MEMBERS, (None, "web", "S", "V", "web", True, True)],
        },
        "joint 'S' belongs to a part that no member joins to joint 'L'",
    ),
    "tail without free end": (
        {"members": changed(MEMBERS, 1, c1="tail")},
        "is a tail and needs one free end; make it a top chord or a web",
    ),
    "tail off its rafter": (
        {"nodes": changed(NODES, 4, c2=0.0)},
        "member 'tail 1' is a tail and has to continue a top chord at joint 'L'",
    ),
    "no support": ({"supports": []}, "supports: none is given"),
    "support at an unknown joint": (
        {"supports": changed(SUPPORTS, 0, c0="Q")},
        "support: joint 'Q' is not among the nodes",
    ),
    "support twice": (
        {"supports": [*SUPPORTS, ("L", True, False, 0.1)]},
        "support at joint 'L' is given 2 times; join them in one row",
    ),
    "support that holds nothing": ({"supports": changed(SUPPORTS, 0, c2=False)}, "support at joint 'R' holds nothing"),
    "no bearing length": (
        {"supports": changed(SUPPORTS, 0, c3=0.0)},
        "support at joint 'R': bearing length 0.0 m must be more than zero",
    ),
    "one support": ({"supports": SUPPORTS[1:]}, "supports: 2 movements are held, at least 3 are needed"),
    "nothing held sideways": (
        {"supports": [(n, False, True, 0.1) for n in "LMR"]},
        "supports: none holds the truss horizontally; pin one of them",
    ),
    "nothing held upwards": (
        {"supports": [(n, True, False, 0.1) for n in "LMR"]},
        "supports: none holds the truss vertically; a bearing has to carry it",
    ),
    "a member short": (
        {"nodes": NODES[:4], "members": [(*row[:5], True, True) for row in MEMBERS[1:5]]},
        "custom truss: 1 member or support is missing; the joints can move as a mechanism",
    ),
    "two members short": (
        {"nodes": NODES[:4], "members": [(*row[:5], True, True) for row in MEMBERS[1:4]]},
        "custom truss: 2 members or supports are missing",
    ),
}


@pytest.mark.parametrize("fault", REFUSED)
def test_a_faulty_truss_is_refused_by_name(fault):
    parts, message = REFUSED[fault]
    given = {"nodes": NODES, "members": MEMBERS, "supports": SUPPORTS} | parts
    with pytest.raises(JobError, match=message):
        custom_truss(**given)


def test_a_mechanism_that_only_its_geometry_shows_is_left_to_the_analysis():
    """One panel has a brace, the other none; a second pin makes up the number, but not the brace."""
    nodes = [("A", 0, 0), ("B", 3, 0), ("C", 6, 0), ("D", 0, 2), ("E", 3, 2.2), ("F", 6, 2.1)]
    pairs = ["AB", "BC", "DE", "EF", "AD", "BE", "CF", "AE"]
    members = [(None, "web", a, b, "web", True, True) for a, b in pairs]
    supports = [("A", True, True, 0.1), ("C", True, True, 0.1)]
    truss = custom_truss(nodes, members, supports)
    with pytest.raises(UnstableTrussError, match=r"custom: joint [BCEF] can move"):
        solve(truss, *stiffness(truss), joint_cases(truss, {"E": (10.0, -1.0)}))


def test_unsymmetric_trusses_are_solved():
    """Reactions of an off-centre peak load by the lever rule."""
    nodes = changed(NODES[:4], 3, c1=3.0)
    truss = custom_truss(nodes, changed(MEMBERS[:5], 0, c0=None), SUPPORTS)
    solution = solve(truss, *stiffness(truss), joint_cases(truss, {"P": (0.0, -1000.0)}))
    assert solution.reactions[0, :, 1] == pytest.approx([750.0, 250.0])
    assert np.abs(solution.reactions[0, :, 0]).max() < 1e-9
