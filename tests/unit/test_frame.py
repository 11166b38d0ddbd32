"""The frame solver against closed forms, its stability check, and effects along members."""

from dataclasses import replace

import numpy as np
import pytest

from rooftruss.analysis.effects import combined_extremes, mid_deflections, unit_effects
from rooftruss.analysis.frame import pin_jointed, require_stable, solve, stiffness_matrix
from rooftruss.analysis.freedoms import SHAPE_FUNCTIONS, bending_coefficients, freedoms
from rooftruss.errors import UnstableTrussError
from rooftruss.loads.cases import LoadCases
from rooftruss.shapes.catalogue import Layout
from rooftruss.shapes.truss import Truss
from tests.support import framed, joint_cases, load_cases, placed, stiffness

EI = 3.0


def beam(slope=0.0):
    """Single span of 4 m drawn at a slope."""
    top = (4.0 * np.cos(slope), 4.0 * np.sin(slope))
    return framed({"A": (0.0, 0.0), "B": top}, [("s", "A", "B")], {"A": (1, 1), "B": (0, 1)}, pins=False)


def solved(truss, loads=(), points=(), ea=1e3):
    """Solution, extremes and deflections at mid-member of one case."""
    cases = load_cases(truss, [(loads, points, {})])
    ones = np.ones(len(truss.length))
    solution = solve(truss, ea * ones, EI * ones, cases)
    effects = unit_effects(truss, cases, solution)
    sag = mid_deflections(truss, cases, effects, solution, EI * ones)[0]
    return solution, combined_extremes(effects, np.eye(1)), sag


def test_uniform_load_on_a_simple_beam():
    solution, largest, sag = solved(beam(), [(0, 0.0, 4.0, 0.0, -5.0)])
    assert solution.reactions[0].tolist() == pytest.approx(np.array([[0, 10], [0, 10]]))
    assert largest.moment_max[0] == pytest.approx(5 * 4**2 / 8)
    assert largest.moment_min[0] == pytest.approx(0.0, abs=1e-12)
    assert largest.shear[0] == pytest.approx(10)
    assert sag == pytest.approx(-5 * 5 * 4**4 / (384 * EI))


def test_point_load_off_the_middle_of_a_simple_beam():
    """M = P a b / L under the load; deflection at the middle P b (3 L^2 - 4 b^2) / (48 EI), b the shorter part."""
    solution, largest, sag = solved(beam(), points=[(0, 3.0, 0.0, -8.0)])
    assert solution.reactions[0, :, 1] == pytest.approx([2, 6])
    assert largest.moment_max[0] == pytest.approx(8 * 3 * 1 / 4)
    assert largest.shear[0] == pytest.approx(6)
    assert sag == pytest.approx(-8 * 1 * (3 * 4**2 - 4 * 1**2) / (48 * EI))


def test_partial_load_on_a_simple_beam():
    """w over the first half: M_max = 9 w L^2 / 128 at 3/8 L, deflection at the middle 5 w L^4 / (768 EI)."""
    _, largest, sag = solved(beam(), [(0, 0.0, 2.0, 0.0, -5.0)])
    assert largest.moment_max[0] == pytest.approx(9 * 5 * 4**2 / 128)
    assert sag == pytest.approx(-5 * 5 * 4**4 / (768 * EI))


def test_load_across_the_horizontal_on_a_sloping_beam():
    """A rafter, pinned below and on a roller above: N changes sign along it, M = w (L cos)^2 / 8 with w on plan."""
    angle = np.radians(30)
    c, s = np.cos(angle), np.sin(angle)
    solution, largest, _ = solved(beam(slope=angle), [(0, 0.0, 4.0, 0.0, -5.0 * c)])
    load = 5 * 4 * c
    assert solution.reactions[0].ravel() == pytest.approx([0, load / 2, 0, load / 2], abs=1e-12)
    assert solution.reactions[0, 1, 0] == 0.0  # exactly: the roller does not hold it
    assert largest.moment_max[0] == pytest.approx(5 * (4 * c) ** 2 / 8)
    assert largest.axial_min[0] == pytest.approx(-load / 2 * s)
    assert largest.axial_max[0] == pytest.approx(load / 2 * s)


def test_sideways_point_load_along_a_bar():
    """Half-way load along a bar held at its start: tension up to the load and nothing beyond."""
    solution, largest, _ = solved(beam(), points=[(0, 1.0, 7.0, 0.0)], ea=50.0)
    assert (largest.axial_max[0], largest.axial_min[0]) == pytest.approx((7.0, 0.0))
    assert solution.displacements[0, 1, 0] == pytest.approx(7 * 1.0 / 50)
    assert solution.reactions[0, 0, 0] == pytest.approx(-7.0)


def test_a_load_upwards_hogs():
    solution, largest, sag = solved(beam(), [(0, 0.0, 4.0, 0.0, 5.0)])
    assert largest.moment_min[0] == pytest.approx(-10.0)
    assert sag > 0
    assert (solution.reactions[0, :, 1] < 0).all()


def test_a_cantilever_over_a_support():
    """Tail of 1 m with 6 N/m beyond a 4 m span: M = -w a^2/2 over the bearing, uplift w a^2/(2 L) at the far end."""
    nodes, members = {"T": (-1, 0), "A": (0, 0), "B": (4, 0)}, [("tail", "T", "A"), ("span", "A", "B")]
    truss = framed(nodes, members, {"A": (1, 1), "B": (0, 1)}, pins=False)
    solution, largest, _ = solved(truss, [(0, 0.0, 1.0, 0.0, -6.0)])
    assert largest.moment_min[0] == pytest.approx([-3.0, -3.0])
    assert solution.reactions[0, :, 1] == pytest.approx([6 + 0.75, -0.75])
    # rotation at A times the arm, and the bending of the tail: w a^3 L/(6 EI) + w a^4/(8 EI)
    assert solution.displacements[0, 0, 1] == pytest.approx(-(6 * 4 / 6 + 6 / 8) / EI)


def test_sign_of_tension_moment_and_shear():
    """Tension positive; a chord drawn from left to right sags with positive moment; shear is dM/ds along the walk."""
    members = [("AB", "A", "B"), ("AC", "A", "C"), ("CB", "C", "B")]
    tie = framed({"A": (0, 0), "B": (2, 0), "C": (1, 1)}, members, {"A": (1, 1), "B": (0, 1)})
    solution = solve(tie, *stiffness(tie), joint_cases(tie, {"C": (0.0, -2.0)}))
    assert solution.end_forces[0, :, 3] == pytest.approx([1.0, -np.sqrt(2), -np.sqrt(2)])
    solution, _, _ = solved(beam(), points=[(0, 1.0, 0.0, -4.0)])
    assert solution.end_forces[0, 0, 1] == pytest.approx(3.0)


@pytest.mark.parametrize("pins", list(SHAPE_FUNCTIONS))
def test_shape_functions_take_unit_end_movements(pins):
    """N_i is 1 in its own end movement and 0 in the others; a pinned end turns as it likes, without moment."""
    functions = np.array(SHAPE_FUNCTIONS[pins], float)
    powers, slopes = np.array([[1, 0, 0, 0], [1, 1, 1, 1]]), np.array([[0, 1, 0, 0], [0, 1, 2, 3]])
    ends = np.stack([functions @ powers[0], functions @ slopes[0], functions @ powers[1], functions @ slopes[1]])
    kept = [k for k, pinned in ((0, False), (1, pins[0]), (2, False), (3, pins[1])) if not pinned]
    assert ends[np.ix_(kept, kept)] == pytest.approx(np.eye(len(kept)))
    curvature = np.stack([functions @ [0, 0, 2, 0], functions @ [0, 0, 2, 6]])
    for k in (0, 1):
        assert not pins[k] or curvature[k] == pytest.approx(np.zeros(4))
    for gone in {1, 3} - set(kept):
        assert not functions[gone].any()


def test_bending_stiffness_of_textbooks():
    """12, 6, 4, 2 for both ends fast; 3 for one pinned end; nothing for two."""
    nodes, members = {"A": (0, 0), "B": (1, 0)}, [("s", "A", "B")]
    table = {
        pins: bending_coefficients(framed(nodes, members, {}, {"s": pins}).topology)[0] for pins in SHAPE_FUNCTIONS
    }
    fast = [[12, 6, -12, 6], [6, 4, -6, 2], [-12, -6, 12, -6], [6, 2, -6, 4]]
    assert table[False, False] == pytest.approx(np.array(fast))
    assert table[False, True] == pytest.approx(np.array([[3, 3, -3, 0], [3, 3, -3, 0], [-3, -3, 3, 0], [0, 0, 0, 0]]))
    assert table[True, False] == pytest.approx(np.array([[3, 0, -3, 3], [0, 0, 0, 0], [-3, 0, 3, -3], [3, 0, -3, 3]]))
    assert not table[True, True].any()


def test_movements_are_numbered_once_and_held_ones_last():
    truss = placed(Layout(shape="fink", panels=4, tails=True, raised_heel=False))
    number = freedoms(truss.topology)
    assert number.total - number.free == 3
    assert {number.label[k] for k in range(number.free, number.total)} == {(0, 0), (0, 1), (3, 1)}
    assert len(set(number.label)) == number.total
    turning = {n for n, direction in number.label if direction == 2}
    ends = [end for m in truss.topology.members for end in ((m.start, m.pinned_start), (m.end, m.pinned_end))]
    assert turning == {n for n, pinned in ends if not pinned}
    assert number.of_member.shape == (len(truss.topology.members), 6)


def test_stiffness_is_symmetric_and_positive():
    truss = placed(Layout(shape="howe", panels=6, tails=True, raised_heel=True))
    matrix = stiffness_matrix(truss, *stiffness(truss))
    assert np.allclose(matrix, matrix.T, rtol=0, atol=1e-9 * np.abs(matrix).max())
    scale = 1 / np.sqrt(matrix.diagonal())
    assert np.linalg.eigvalsh(matrix * np.outer(scale, scale))[0] > 1e-6


def stacked(points, names):
    """Point loads of single trusses as one of the batch."""
    return replace(points[0], **{name: np.stack([getattr(p, name) for p in points]) for name in names})


def test_a_batch_of_trusses_gives_what_each_gives_alone():
    """Different spans, stiffnesses and loads at once; all cases with one factorisation."""
    layout = Layout(shape="fink", panels=4, tails=True, raised_heel=False)
    trusses = [placed(layout, span=span, pitch=pitch) for span, pitch in ((6.0, 0.4), (8.0, 0.5), (11.0, 0.7))]
    count = len(trusses[0].length)
    ea, ei = np.linspace(2e7, 9e7, 3 * count).reshape(3, count), np.linspace(3e4, 9e4, 3 * count).reshape(3, count)
    single = []
    for k, truss in enumerate(trusses):
        half = float(truss.length[1]) / 2
        loads = [(m, 0.0, float(truss.length[m]), 40.0 * k, -300.0) for m in range(4)]
        first = (loads, [(1, half, 0.0, -900.0)], {2: (100.0, 0.0)})
        single.append(load_cases(truss, [first, ([], [], {1: (0.0, -500.0 * (k + 1))})]))
    together = LoadCases(
        heads=single[0].heads,
        member_of=single[0].member_of,
        points=(stacked([c.points[0] for c in single], ("at", "fx", "fy")),),
        **{name: np.stack([getattr(c, name) for c in single]) for name in ("x0", "x1", "q", "nodal")},
    )
    batch = Truss(topology=trusses[0].topology, xy=np.stack([t.xy for t in trusses]), bearing=np.full(3, 0.09))
    factors = np.array([[1.35, 1.5], [1.0, 0.0], [0.9, -1.0]])
    whole = solve(batch, ea, ei, together)
    extremes = combined_extremes(unit_effects(batch, together, whole), factors)
    sag = mid_deflections(batch, together, unit_effects(batch, together, whole), whole, ei)
    for k, (truss, cases) in enumerate(zip(trusses, single, strict=True)):
        alone = solve(truss, ea[k], ei[k], cases)
        for name in ("end_forces", "reactions", "displacements"):
            value = getattr(alone, name)
            assert np.allclose(getattr(whole, name)[k], value, rtol=0, atol=1e-9 * np.abs(value).max()), name
        effects = unit_effects(truss, cases, alone)
        for name in ("axial_max", "axial_min", "moment_max", "moment_min", "shear"):
            value = getattr(combined_extremes(effects, factors), name)
            assert np.allclose(getattr(extremes, name)[k], value, rtol=0, atol=1e-8 * np.abs(value).max()), name
        assert sag[k] == pytest.approx(mid_deflections(truss, cases, effects, alone, ei[k]), abs=1e-9)


@pytest.mark.parametrize("arm", [0.15, 0.3, 0.6, 1.25])
def test_two_cuts_a_rounding_apart_do_not_spoil_the_shear(arm):
    """A load ends a rounding before its tail does: the step of moment over that sliver is mere rounding."""
    nodes, members = {"T": (-arm, 0), "A": (0, 0), "B": (4, 0)}, [("tail", "T", "A"), ("span", "A", "B")]
    truss = framed(nodes, members, {"A": (1, 1), "B": (0, 1)}, pins=False)
    _, largest, _ = solved(truss, [(0, 0.0, float(np.nextafter(arm, 0.0)), 0.0, -6000.0)])
    assert largest.shear[0, 0] == pytest.approx(6000 * arm, rel=1e-9)
    assert largest.moment_min[0, 0] == pytest.approx(-3000 * arm**2, rel=1e-9)


def test_pin_jointed_pins_every_end_and_changes_nothing_else():
    truss = placed(Layout(shape="pratt", panels=4, tails=False, raised_heel=False))
    pinned = pin_jointed(truss.topology)
    assert all(m.pinned_start and m.pinned_end for m in pinned.members)
    assert [(m.name, m.start, m.end, m.surface) for m in pinned.members] == [
        (m.name, m.start, m.end, m.surface) for m in truss.topology.members
    ]
    assert (pinned.nodes, pinned.supports) == (truss.topology.nodes, truss.topology.supports)


OPEN_FRAME = {"A": (0.0, 0.0), "B": (4.0, 0.0), "C": (4.3, 3.1), "D": (0.3, 3.2)}
RING = [("AB", "A", "B"), ("BC", "B", "C"), ("CD", "C", "D"), ("AD", "A", "D")]


@pytest.mark.parametrize(
    ("members", "supports", "message"),
    [
        (RING, {"A": (1, 1), "B": (0, 1)}, r"given: joint [CD] can move horizontally; add a member or a support there"),
        ([*RING, ("AC", "A", "C")], {"A": (0, 1), "B": (0, 1)}, r"joint [ABCD] can move horizontally"),
        ([*RING[:3], ("AC", "A", "C")], {"A": (1, 1), "B": (0, 1)}, r"joint D can move"),
    ],
    ids=["no brace", "no horizontal support", "a bar that dangles"],
)
def test_a_mechanism_is_named(members, supports, message):
    """With joints off any grid, so that no pivot of the stiffness is exactly zero."""
    truss = framed(OPEN_FRAME, members, supports)
    with pytest.raises(UnstableTrussError, match=message):
        require_stable(truss.topology, stiffness_matrix(truss, *stiffness(truss))[None])
    with pytest.raises(UnstableTrussError, match=message):
        solve(truss, *stiffness(truss), joint_cases(truss, {"C": (0.0, -1.0)}))


def test_solving_a_mechanism_with_a_joint_that_nothing_holds_is_refused():
    truss = framed({**OPEN_FRAME, "E": (9.0, 9.0)}, [*RING, ("AC", "A", "C")], {"A": (1, 1), "B": (0, 1)})
    with pytest.raises(UnstableTrussError, match="joint E can move"):
        solve(truss, *stiffness(truss), joint_cases(truss, {"C": (0.0, -1.0)}))
