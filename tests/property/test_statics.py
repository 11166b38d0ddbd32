"""What statics and linear elasticity say of any truss under any load."""

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from rooftruss.analysis.effects import combined_extremes, mid_deflections, unit_effects
from rooftruss.analysis.frame import pin_jointed, solve
from rooftruss.analysis.inspection import joint_loads, nodal_cases, pin_jointed_axial
from rooftruss.shapes.truss import Truss
from tests.strategies import joint_forces, load_sets, numbers, trusses
from tests.support import framed, joint_cases, load_cases, split, stiffness

few = settings(max_examples=40, deadline=None)


def turned(truss, local):
    """Pairs in member axes (..., m, 2) in global axes."""
    c, s = truss.direction[:, 0], truss.direction[:, 1]
    return np.stack([c * local[..., 0] - s * local[..., 1], s * local[..., 0] + c * local[..., 1]], axis=-1)


def applied(truss, loads):
    """All loads of a case as (place, force) pairs."""
    spread, points, nodal = loads

    def at(k, s):
        return truss.start_xy[k] + s * truss.direction[k]

    out = [(at(k, (a + b) / 2), np.array([qx, qy]) * (b - a)) for k, a, b, qx, qy in spread]
    out += [(at(k, s), np.array([fx, fy])) for k, s, fx, fy in points]
    return out + [(truss.xy[n], np.array(f)) for n, f in nodal.items()]


def total(loads):
    return sum(float(np.abs(force).sum()) for _, force in loads)


def moment(place, force):
    return place[0] * force[1] - place[1] * force[0]


def require_equilibrium(truss, loads, cases, solution):
    """Of every joint, every member and the whole, for the one case of a solution."""
    acting = applied(truss, loads)
    scale = total(acting)
    assume(scale > 1.0)
    ends = solution.end_forces[0]
    at_start, at_end = turned(truss, ends[:, :2]), turned(truss, ends[:, 3:5])
    topology = truss.topology

    joints = -cases.nodal[0].copy()
    turning = np.zeros(len(topology.nodes))
    for k, m in enumerate(topology.members):
        joints[m.start] += at_start[k]
        joints[m.end] += at_end[k]
        turning[m.start] += ends[k, 2]
        turning[m.end] += ends[k, 5]
    for support, reaction in zip(topology.supports, solution.reactions[0], strict=True):
        joints[support.node] -= reaction
    assert np.abs(joints).max() < 1e-9 * scale
    assert np.abs(turning).max() < 1e-9 * scale

    for k in range(len(topology.members)):
        spread = [x for x in loads[0] if x[0] == k]
        points = [x for x in loads[1] if x[0] == k]
        on = [*applied(truss, (spread, points, {})), (truss.start_xy[k], at_start[k]), (truss.end_xy[k], at_end[k])]
        assert np.abs(sum(force for _, force in on)).max() < 1e-9 * scale
        assert abs(sum(moment(*pair) for pair in on) + ends[k, 2] + ends[k, 5]) < 1e-9 * scale * 20

    on = acting + [(truss.xy[s.node], r) for s, r in zip(topology.supports, solution.reactions[0], strict=True)]
    assert np.abs(sum(force for _, force in on)).max() < 1e-9 * scale
    assert abs(sum(moment(*pair) for pair in on)) < 1e-9 * scale * 20


@few
@given(st.data())
def test_every_joint_every_member_and_the_whole_are_in_equilibrium(data):
    truss = data.draw(trusses())
    loads = data.draw(load_sets(truss))
    cases = load_cases(truss, [loads])
    require_equilibrium(truss, loads, cases, solve(truss, *stiffness(truss), cases))


@few
@given(st.data())
def test_superposition(data):
    """Effects of factored, added loads are the factored, added effects."""
    truss = data.draw(trusses())
    first, second = data.draw(load_sets(truss)), data.draw(load_sets(truss))
    f, g = data.draw(numbers(-2, 2)), data.draw(numbers(-2, 2))
    nodal = dict.fromkeys({*first[2], *second[2]}, (0.0, 0.0))
    for factor, one in ((f, first), (g, second)):
        for n, (fx, fy) in one[2].items():
            nodal[n] = (nodal[n][0] + factor * fx, nodal[n][1] + factor * fy)
    summed = (
        [(k, a, b, x * qx, x * qy) for x, one in ((f, first), (g, second)) for k, a, b, qx, qy in one[0]],
        [(k, at, x * fx, x * fy) for x, one in ((f, first), (g, second)) for k, at, fx, fy in one[1]],
        nodal,
    )
    solution = solve(truss, *stiffness(truss), load_cases(truss, [first, second, summed]))
    for values in (solution.end_forces, solution.reactions, solution.displacements):
        assert np.allclose(values[2], f * values[0] + g * values[1], rtol=0, atol=1e-9 * np.abs(values).max() + 1e-15)


@few
@given(st.data())
def test_combined_extremes_of_factored_cases_are_those_of_the_summed_case(data):
    truss = data.draw(trusses())
    first, second = data.draw(load_sets(truss)), data.draw(load_sets(truss))
    f = data.draw(numbers(-2, 2))
    scaled = (
        [(k, a, b, f * qx, f * qy) for k, a, b, qx, qy in first[0]] + second[0],
        [(k, at, f * fx, f * fy) for k, at, fx, fy in first[1]] + second[1],
        {
            n: tuple(f * x + y for x, y in zip(first[2].get(n, (0, 0)), second[2].get(n, (0, 0)), strict=True))
            for n in {*first[2], *second[2]}
        },
    )
    cases = load_cases(truss, [first, second, scaled])
    effects = unit_effects(truss, cases, solve(truss, *stiffness(truss), cases))
    found = combined_extremes(effects, np.array([[f, 1.0, 0.0], [0.0, 0.0, 1.0]]))
    for name in ("axial_max", "axial_min", "moment_max", "moment_min", "shear"):
        one, other = getattr(found, name)
        assert np.allclose(one, other, rtol=0, atol=1e-9 * np.abs(effects.values).max() + 1e-12), name


@few
@given(st.data())
def test_mirrored_loads_give_mirrored_forces(data):
    """Upright loads only: sideways ones go to the pinned bearing, which is not mirrored."""
    truss = data.draw(trusses())
    spread, points, nodal = data.draw(load_sets(truss, sideways=False))
    topology, length = truss.topology, truss.length
    members, nodes = topology.mirror_members, topology.mirror_nodes

    def across(k, s):
        """Distance from the start of the mirror image; an upright member is its own way up."""
        same = nodes[topology.members[k].start] == topology.members[members[k]].start
        return s if same else float(length[k]) - s

    image = (
        [(members[k], *sorted((across(k, a), across(k, b))), qx, qy) for k, a, b, qx, qy in spread],
        [(members[k], across(k, at), fx, fy) for k, at, fx, fy in points],
        {nodes[n]: force for n, force in nodal.items()},
    )
    cases = load_cases(truss, [(spread, points, nodal), image])
    solution = solve(truss, *stiffness(truss), cases)
    found = combined_extremes(unit_effects(truss, cases, solution), np.eye(2))
    scale = np.abs(solution.end_forces).max() + 1e-9
    for name in ("axial_max", "axial_min", "shear"):
        assert np.allclose(
            getattr(found, name)[0], getattr(found, name)[1, list(members)], rtol=0, atol=1e-9 * scale
        ), name
    for name in ("moment_max", "moment_min"):
        assert np.allclose(
            getattr(found, name)[0], getattr(found, name)[1, list(members)], rtol=0, atol=1e-8 * scale
        ), name
    assert np.allclose(solution.reactions[0, :, 1], solution.reactions[1, ::-1, 1], rtol=0, atol=1e-9 * scale)


@few
@given(st.data())
def test_scaling(data):
    """k times the load gives k times the effects; a truss k times as large carries the same forces."""
    truss = data.draw(trusses())
    forces = data.draw(joint_forces(truss))
    k = data.draw(numbers(0.25, 4))
    ea, ei = stiffness(truss)
    one, more = ({n: (f * fx, f * fy) for n, (fx, fy) in forces.items()} for f in (1.0, k))
    solution = solve(truss, ea, ei, load_cases(truss, [((), (), one), ((), (), more)]))
    scale = np.abs(solution.end_forces).max() + 1e-9
    assert np.allclose(k * solution.end_forces[0], solution.end_forces[1], rtol=0, atol=1e-10 * scale)

    large = Truss(topology=truss.topology, xy=k * truss.xy, bearing=truss.bearing)
    again = solve(large, ea, ei * k**2, load_cases(large, [((), (), one)]))
    assert np.allclose(
        again.end_forces[0, :, [0, 1, 3, 4]], solution.end_forces[0, :, [0, 1, 3, 4]], rtol=0, atol=1e-9 * scale
    )
    assert np.allclose(again.end_forces[0, :, [2, 5]], k * solution.end_forces[0, :, [2, 5]], rtol=0, atol=1e-8 * scale)
    moved = np.abs(solution.displacements).max() + 1e-15
    assert np.allclose(again.displacements[0], k * solution.displacements[0], rtol=0, atol=1e-8 * moved * max(k, 1))


@few
@given(st.data())
def test_reciprocal_work(data):
    """Work of one load system on the movements of another is the same the other way round (Betti, Maxwell)."""
    truss = data.draw(trusses())
    cases = load_cases(truss, [((), (), data.draw(joint_forces(truss))) for _ in range(2)])
    moved = solve(truss, *stiffness(truss), cases).displacements
    one, other = (cases.nodal[0] * moved[1]).sum(), (cases.nodal[1] * moved[0]).sum()
    assert one == pytest.approx(other, abs=1e-9 * (np.abs(cases.nodal).max() * np.abs(moved).max() + 1e-9))


@few
@given(st.data())
def test_movement_of_a_pin_jointed_truss_by_virtual_work(data):
    """Movement of a joint is the sum of N n L / EA, n the forces of a unit load there."""
    truss = data.draw(trusses(tails=False))
    node = data.draw(st.integers(0, len(truss.topology.nodes) - 1))
    direction = data.draw(st.integers(0, 1))
    unit = {node: (1.0, 0.0) if direction == 0 else (0.0, 1.0)}
    cases = load_cases(truss, [data.draw(load_sets(truss)), ((), (), unit)])
    ea = np.linspace(2e7, 9e7, len(truss.topology.members))
    n = pin_jointed_axial(truss, ea, cases)
    pinned = Truss(topology=pin_jointed(truss.topology), xy=truss.xy, bearing=truss.bearing)
    moved = solve(pinned, ea, 0 * ea, nodal_cases(pinned, joint_loads(truss, cases), cases)).displacements
    work = (n[0] * n[1] * truss.length / ea).sum()
    assert moved[0, node, direction] == pytest.approx(work, abs=1e-9 * np.abs(moved[0]).max() + 1e-15)


@few
@given(st.data())
def test_joint_loads_have_the_resultant_and_moment_of_the_loads(data):
    truss = data.draw(trusses())
    loads = data.draw(load_sets(truss))
    acting = applied(truss, loads)
    moved = [(truss.xy[n], force) for n, force in enumerate(joint_loads(truss, load_cases(truss, [loads]))[0])]
    scale = total(acting) + 1e-6
    assert np.allclose(sum(f for _, f in moved), sum(f for _, f in acting), rtol=0, atol=1e-9 * scale)
    assert sum(moment(*p) for p in moved) == pytest.approx(sum(moment(*p) for p in acting), abs=1e-9 * scale * 20)
    tails = [n for m in truss.topology.members if m.role == "tail" for n in (m.start, m.end)]
    free = [n for n in tails if sum(n in (m.start, m.end) for m in truss.topology.members) == 1]
    assert all(not moved[n][1].any() for n in free)


def forces_at(truss, loads, ends, member, x, *, beyond):
    """Axial force, shear and moment at the distance x from the start, from the start forces and the loads up to x."""
    cos, sin = truss.direction[member]
    axial, shear, bending = -ends[0], ends[1], -ends[2] + ends[1] * x
    for k, low, high, qx, qy in loads[0]:
        if k == member:
            run = min(max(x - low, 0.0), high - low)
            along, across = qx * cos + qy * sin, qy * cos - qx * sin
            axial, shear, bending = (
                axial - along * run,
                shear + across * run,
                bending + across * run * (x - low - run / 2),
            )
    for k, at, fx, fy in loads[1]:
        if k == member and (at < x or (beyond and at == x)):
            along, across = fx * cos + fy * sin, fy * cos - fx * sin
            axial, shear, bending = axial - along, shear + across, bending + across * (x - at)
    return axial, shear, bending


@settings(max_examples=25, deadline=None)
@given(st.data())
def test_extremes_are_exact(data):
    """Against 4000 stations and all places where a load starts, ends or stands, from either side."""
    truss = data.draw(trusses())
    loads = data.draw(load_sets(truss))
    cases = load_cases(truss, [loads])
    solution = solve(truss, *stiffness(truss), cases)
    found = combined_extremes(unit_effects(truss, cases, solution), np.eye(1))
    member = data.draw(st.sampled_from([x[0] for x in loads[0]] + [x[0] for x in loads[1]]))
    length = float(truss.length[member])
    kinks = [x for k, a, b, *_ in loads[0] if k == member for x in (a, b)] + [x[1] for x in loads[1] if x[0] == member]
    stations = [(x, False) for x in np.linspace(0, length, 4001)] + [(x, side) for x in kinks for side in (False, True)]
    sampled = np.array(
        [forces_at(truss, loads, solution.end_forces[0, member], member, x, beyond=side) for x, side in stations]
    )
    scale = np.abs(sampled).max() + 1e-9
    steepest = sum(abs(x[3]) + abs(x[4]) for x in loads[0] if x[0] == member)
    slack = steepest * (length / 4000) ** 2 / 8  # the peak of a parabola between two stations
    axial, shear, bending = sampled.T
    for name, expected, missed in (
        ("axial_max", axial.max(), 0.0),
        ("axial_min", axial.min(), 0.0),
        ("shear", np.abs(shear).max(), 0.0),
        ("moment_max", bending.max(), slack),
        ("moment_min", -(-bending).max(), -slack),
    ):
        value = getattr(found, name)[0, member]
        low, high = sorted((expected, expected + missed))
        assert low - 1e-9 * scale <= value <= high + 1e-9 * scale, name


@settings(max_examples=25, deadline=None)
@given(st.data())
def test_deflection_at_mid_member_is_that_of_a_node_put_there(data):
    """Loads stand across the members: their stretch under loads along them is not counted."""
    truss = data.draw(trusses())
    spread, points, nodal = data.draw(load_sets(truss))

    def across(k, size):
        return float(-truss.direction[k, 1] * size), float(truss.direction[k, 0] * size)

    spread = [(k, a, b, *across(k, qy)) for k, a, b, _, qy in spread]
    points = [(k, at, *across(k, fy)) for k, at, _, fy in points]
    member = spread[0][0]
    middle = float(truss.length[member]) / 2
    ea, ei = stiffness(truss)
    cases = load_cases(truss, [(spread, points, nodal)])
    solution = solve(truss, ea, ei, cases)
    found = mid_deflections(truss, cases, unit_effects(truss, cases, solution), solution, ei)[0, member]

    cut, beyond = split(truss, member, middle), len(truss.topology.members)
    moved_spread, moved_points = [], []
    for k, a, b, qx, qy in spread:
        if k != member:
            moved_spread.append((k, a, b, qx, qy))
            continue
        if a < middle:
            moved_spread.append((k, a, min(b, middle), qx, qy))
        if b > middle:
            moved_spread.append((beyond, max(a, middle) - middle, b - middle, qx, qy))
    for k, at, fx, fy in points:
        here = k == member and at > middle
        moved_points.append((beyond if here else k, at - middle if here else at, fx, fy))
    moved = solve(cut, *stiffness(cut), load_cases(cut, [(moved_spread, moved_points, nodal)])).displacements[0]
    assert found == pytest.approx(moved[-1, 1], abs=1e-8 * np.abs(moved).max() + 1e-15)


def test_deflection_and_moments_of_a_beam_by_symbols():
    """Propped over three supports with a partial load and a point load: exact beam theory by singularity functions."""
    from sympy import Rational, symbols
    from sympy.physics.continuum_mechanics.beam import Beam

    r0, r1, r2 = symbols("r0 r1 r2")
    beam = Beam(Rational(9), Rational(1), Rational(1))
    for place, force in ((0, r0), (4, r1), (9, r2)):
        beam.apply_load(force, place, -1)
    beam.apply_load(-3, Rational(5), -1)
    beam.apply_load(-2, 1, 0, end=3)
    beam.bc_deflection = [(0, 0), (4, 0), (9, 0)]
    beam.solve_for_reaction_loads(r0, r1, r2)

    nodes, supports = {"A": (0, 0), "B": (4, 0), "C": (9, 0)}, {"A": (1, 1), "B": (0, 1), "C": (0, 1)}
    ours = framed(nodes, [("s1", "A", "B"), ("s2", "B", "C")], supports, pins=False)
    cases = load_cases(ours, [([(0, 1.0, 3.0, 0.0, -2.0)], [(1, 1.0, 0.0, -3.0)], {})])
    ones = np.ones(2)
    solution = solve(ours, ones, ones, cases)
    effects = unit_effects(ours, cases, solution)
    expected = [float(beam.reaction_loads[r]) for r in (r0, r1, r2)]
    assert solution.reactions[0, :, 1] == pytest.approx(expected, rel=1e-10)
    x = beam.variable
    sag = [float(beam.deflection().subs(x, place)) for place in (2, Rational(13, 2))]
    assert mid_deflections(ours, cases, effects, solution, ones)[0] == pytest.approx(sag, rel=1e-9)
    hogging = float(beam.bending_moment().subs(x, 4))  # the other sign there
    assert solution.end_forces[0, 0, 5] == pytest.approx(-hogging, rel=1e-10)


@pytest.mark.parametrize("loaded", ["left", "lopsided"])
def test_truss_forces_by_symbols(loaded):
    """A king-post truss and its double, solved in rational numbers by an independent program."""
    from sympy import Rational
    from sympy.physics.continuum_mechanics.truss import Truss as SymbolicTruss

    nodes = {"A": (0, 0), "B": (4, 0), "C": (8, 0), "D": (12, 0), "F": (4, 3), "G": (8, Rational(7, 2))}
    members = [("1", "A", "B"), ("2", "B", "C"), ("3", "C", "D"), ("4", "A", "F"), ("5", "F", "G"), ("6", "G", "D")]
    members += [("7", "B", "F"), ("8", "C", "G"), ("9", "B", "G")]
    loads = {"F": (0, -7)} if loaded == "left" else {"B": (0, -5), "F": (2, -3), "G": (-4, -11)}
    symbolic = SymbolicTruss()
    symbolic.add_node(*((name, x, y) for name, (x, y) in nodes.items()))
    symbolic.add_member(*members)
    symbolic.apply_support(("A", "pinned"), ("D", "roller"))
    for name, (fx, fy) in loads.items():
        for size, angle in ((fx, 0), (fy, 90)):
            if size:
                symbolic.apply_load((name, abs(size), angle if size > 0 else angle + 180))
    symbolic.solve()
    truss = framed({n: (float(x), float(y)) for n, (x, y) in nodes.items()}, members, {"A": (1, 1), "D": (0, 1)})
    found = pin_jointed_axial(truss, np.ones(9), joint_cases(truss, loads))[0]
    expected = [float(symbolic.internal_forces[name]) for name, _, _ in members]
    assert np.abs(expected).max() > 1
    assert found == pytest.approx(expected, abs=1e-9 * np.abs(expected).max())
