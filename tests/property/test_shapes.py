"""Every shape of the catalogue: determinate, mirrored onto itself, named in order."""

import numpy as np
import pytest
from sympy import Matrix, Rational

from rooftruss.analysis.frame import require_stable, solve, stiffness_matrix
from rooftruss.analysis.inspection import triangulation
from rooftruss.shapes.catalogue import LETTERS, Layout, topology
from rooftruss.shapes.truss import Truss
from rooftruss.shapes.webbing import SHAPES
from tests.support import joint_cases, layout_name, layouts, placed, stiffness

ALL = list(layouts())
every = pytest.mark.parametrize("layout", ALL, ids=layout_name)


def equilibrium(part, xy, zero=0):
    """Equilibrium matrix of the pin-jointed part: a column for each member and held direction, rows 2 per joint.

    Columns hold coordinate differences (force densities), so that rational coordinates stay rational.
    """
    rows, columns = 2 * len(part.nodes), len(part.members) + sum(s.horizontal + s.vertical for s in part.supports)
    out = np.full((rows, columns), zero, dtype=object)
    for k, m in enumerate(part.members):
        for d in (0, 1):
            run = xy[m.end][d] - xy[m.start][d]
            out[2 * m.start + d, k], out[2 * m.end + d, k] = run, -run
    k = len(part.members)
    for s in part.supports:
        for d, held in enumerate((s.horizontal, s.vertical)):
            if held:
                out[2 * s.node + d, k] = zero + 1
                k += 1
    return out


def test_the_catalogue_is_covered():
    assert len(ALL) == sum(4 * len(shape.panel_counts) for shape in SHAPES.values())
    assert (
        {layout.shape for layout in ALL}
        == set(SHAPES)
        >= {"king post", "queen post", "fink", "howe", "pratt", "scissor"}
    )


@every
def test_members_are_twice_the_joints_less_three(layout):
    part = triangulation(topology(layout)).topology
    assert len(part.members) == 2 * len(part.nodes) - 3
    whole = topology(layout)
    extra = 2 if layout.tails else 0
    assert len(whole.members) - len(part.members) == len(whole.nodes) - len(part.nodes) == extra


@every
@pytest.mark.parametrize("pitch", [0.2, 0.5, 1.0])
def test_equilibrium_matrix_has_full_rank(layout, pitch):
    truss = placed(layout, pitch=pitch, bottom_pitch=pitch / 2)
    part = triangulation(truss.topology)
    matrix = equilibrium(part.topology, truss.xy[list(part.nodes)], 0.0).astype(float)
    assert matrix.shape == (2 * len(part.nodes), 2 * len(part.nodes))
    assert np.linalg.matrix_rank(matrix) == 2 * len(part.nodes)


@pytest.mark.parametrize(
    "layout", [layout for layout in ALL if layout.panels <= 4 and not layout.tails], ids=layout_name
)
def test_equilibrium_matrix_is_regular_in_rational_numbers(layout):
    """Span 24, pitch 1/2, scissor 1/4, heel 1/2: every panel point is rational, and so is the determinant."""
    truss = placed(layout, span=24.0, pitch=0.5, bottom_pitch=0.25, heel=0.5)
    part = triangulation(truss.topology)
    xy = [[Rational(float(v)).limit_denominator(1000) for v in truss.xy[n]] for n in part.nodes]
    assert np.allclose(np.array(xy, float), truss.xy[list(part.nodes)], atol=1e-12)
    assert Matrix(equilibrium(part.topology, xy)).det() != 0


@every
def test_frame_is_stable_and_carries_load(layout):
    truss = placed(layout)
    require_stable(truss.topology, stiffness_matrix(truss, *stiffness(truss))[None])
    peak = truss.topology.nodes[int(truss.xy[:, 1].argmax())]
    solution = solve(truss, *stiffness(truss), joint_cases(truss, {peak: (0.0, -1000.0)}))
    assert solution.reactions[0, :, 1] == pytest.approx([500.0, 500.0], rel=1e-9)


@every
def test_mirror_is_its_own_inverse_and_maps_the_truss_onto_itself(layout):
    truss = placed(layout)
    made = truss.topology
    for image in (made.mirror_members, made.mirror_nodes):
        assert [image[k] for k in image] == list(range(len(image)))
    axis = (truss.xy[made.supports[0].node, 0] + truss.xy[made.supports[1].node, 0]) / 2
    assert axis == pytest.approx(4.0)
    expected = truss.xy * [-1, 1] + [2 * axis, 0]
    assert truss.xy[list(made.mirror_nodes)] == pytest.approx(expected, abs=1e-12)
    for k, m in enumerate(made.members):
        other = made.members[made.mirror_members[k]]
        assert {made.mirror_nodes[m.start], made.mirror_nodes[m.end]} == {other.start, other.end}
        assert (m.role, m.group) == (other.role, other.group)
        swapped = made.mirror_nodes[m.start] == other.end and m.start != m.end
        pins = (other.pinned_end, other.pinned_start) if swapped else (other.pinned_start, other.pinned_end)
        assert (m.pinned_start, m.pinned_end) == pins
        assert m.surface.replace("left", "right") == other.surface.replace("left", "right")


@every
def test_names_run_from_the_left(layout):
    truss = placed(layout)
    made = truss.topology
    assert made.nodes == tuple(LETTERS[: len(made.nodes)])
    middle = (truss.start_xy[:, 0] + truss.end_xy[:, 0]) / 2
    for word in ("top", "bottom", "web", "tail"):
        here = [k for k, name in enumerate(made.names) if name.split()[0] == word]
        assert [made.names[k] for k in here] == [f"{word} {k + 1}" for k in range(len(here))]
        assert (np.diff(middle[here]) >= -1e-9).all(), word
    assert len(set(made.names)) == len(made.names)


@every
def test_members_run_from_left_to_right_and_uprights_upwards(layout):
    truss = placed(layout)
    run = truss.end_xy - truss.start_xy
    upright = np.abs(run[:, 0]) < 1e-9
    assert (run[~upright, 0] > 0).all()
    assert (run[upright, 1] > 0).all()
    assert (truss.length > 0.05).all()


@every
def test_surfaces_and_joints_of_the_model(layout):
    """Chords carry the loads and run on over panel points; webs, heel and peak pass no moment; tails run on."""
    truss = placed(layout)
    made = truss.topology
    slope = truss.direction[:, 1]
    for k, m in enumerate(made.members):
        if m.role == "web":
            assert (m.pinned_start, m.pinned_end, m.surface) == (True, True, "")
        if m.role == "top chord":
            assert m.surface == ("left slope" if slope[k] > 0 else "right slope")
    peak = int(truss.xy[:, 1].argmax())
    assert all(m.pinned_end if m.end == peak else True for m in made.members)
    assert all(m.pinned_start if m.start == peak else True for m in made.members)
    tails = [m for m in made.members if m.role == "tail"]
    assert len(tails) == (2 if layout.tails else 0)
    if tails:
        assert not tails[0].pinned_end
        assert not tails[1].pinned_start
    assert [(s.horizontal, s.vertical) for s in made.supports] == [(True, True), (False, True)]


def test_a_batch_is_its_trusses_one_by_one():
    layout = Layout(shape="fink", panels=4, tails=True, raised_heel=False)
    trusses = [placed(layout, span=span) for span in (6.0, 8.0, 11.0)]
    xy, bearing = np.stack([t.xy for t in trusses]), np.stack([t.bearing for t in trusses])
    batch = Truss(topology=trusses[0].topology, xy=xy, bearing=bearing)
    for k, truss in enumerate(trusses):
        assert np.array_equal(batch.one(k).xy, truss.xy)
        assert np.allclose(batch.length[k], truss.length)
