"""Surface loads laid on members: by hand on a small truss, and as sums."""

import numpy as np
import pytest

from rooftruss.loads.cases import ChordPoint, LoadCases, lay_on, member_at, per_length
from rooftruss.loads.roof import ActionCase, SurfaceLoad
from rooftruss.shapes.catalogue import Layout
from rooftruss.shapes.truss import Truss
from tests.support import placed

SPACING, SLOPE = 0.6, np.hypot(1.0, 0.5)
SURFACES = ("left tail", "left slope", "right slope", "right tail")


def king(*, tails: bool = True) -> Truss:
    """King post, 8 m between bearing centres, pitch 1:2, tails of 0.5 m in plan; bearings 0.09 m long."""
    return placed(Layout(shape="king post", panels=2, tails=tails, raised_heel=False))


def case(*loads: SurfaceLoad, action: str = "S") -> ActionCase:
    return ActionCase(name=f"case {action}", short="", action=action, pattern="", loads=loads)


def load(surface: str, kind: str, pressure: float, low: float | None = None, high: float | None = None) -> SurfaceLoad:
    ends = [None if x is None else np.asarray(x) for x in (low, high)]
    return SurfaceLoad(surface=surface, kind=kind, pressure=np.asarray(pressure), x_from=ends[0], x_to=ends[1])


def laid(truss: Truss, *cases: ActionCase, weight: float = 0.0, points: tuple[ChordPoint, ...] = ()) -> LoadCases:
    return lay_on(truss, cases, np.asarray(SPACING), np.full(truss.length.shape, weight), points)


def total(cases: LoadCases) -> np.ndarray:
    """Resultant (case, 2)."""
    return np.einsum("csx,s->cx", cases.q, cases.x1 - cases.x0) + cases.nodal.sum(axis=1)


@pytest.mark.parametrize(
    ("kind", "expected"),
    [
        ("plan", (0.0, -1000 * SPACING * 4.5)),
        ("slope", (0.0, -1000 * SPACING * 4.5 * SLOPE)),
        ("normal", (1000 * SPACING * 2.25, -1000 * SPACING * 4.5)),
        ("right", (1000 * SPACING * 2.25, 0.0)),
    ],
)
def test_each_kind_of_load_on_the_left_half_of_the_roof(kind, expected):
    """4.5 m in plan, 2.25 m in height."""
    made = laid(king(), case(load("left tail", kind, 1000.0), load("left slope", kind, 1000.0)))
    assert total(made)[0] == pytest.approx(expected)


def test_pressure_on_the_right_slope_pushes_to_the_left():
    made = laid(king(), case(load("right slope", "normal", 1000.0)))
    assert total(made)[0] == pytest.approx((-1000 * SPACING * 2, -1000 * SPACING * 4))


def test_the_ceiling_loads_the_bottom_chord_only():
    truss = king()
    made = laid(truss, case(load("ceiling", "plan", 500.0)))
    loaded = {truss.topology.names[k] for s, k in enumerate(made.member_of) if np.any(made.q[0, s])}
    assert loaded == {"bottom 1", "bottom 2"}
    assert total(made)[0] == pytest.approx((0.0, -500 * SPACING * 8))


def test_a_stretch_of_load_cuts_its_member_and_no_other():
    truss = king()
    made = laid(truss, case(load("left slope", "plan", 1000.0, 1.0, 3.0)))
    segments = [s for s, k in enumerate(made.member_of) if truss.topology.names[k] == "top 1"]
    assert len(made.member_of) == len(truss.topology.members) + 2
    assert made.x0[segments] == pytest.approx([0.0, SLOPE, 3 * SLOPE])
    assert made.x1[segments] == pytest.approx([SLOPE, 3 * SLOPE, 4 * SLOPE])
    assert made.q[0, segments, 1] == pytest.approx([0.0, -1000 * SPACING / SLOPE, 0.0])
    assert total(made)[0] == pytest.approx((0.0, -1000 * SPACING * 2))


def test_stretches_of_a_batch_are_each_its_own():
    """In the second truss the stretch ends beyond the peak: all of its slope is loaded, a segment has no length."""
    truss = king()
    both = Truss(topology=truss.topology, xy=np.stack([truss.xy, truss.xy]), bearing=np.full(2, 0.09))
    one = SurfaceLoad(
        surface="left slope", kind="plan", pressure=np.full(2, 1000.0), x_from=None, x_to=np.array([2.0, 9.0])
    )
    made = lay_on(both, [case(one)], np.full(2, SPACING), np.zeros(both.length.shape))
    forces = np.einsum("bsx,bs->bx", made.q[:, 0], made.x1 - made.x0)
    assert forces[:, 1] == pytest.approx([-1000 * SPACING * 2, -1000 * SPACING * 4])


def test_self_weight_hangs_on_every_member():
    truss = king()
    made = laid(truss, case(load("self-weight", "slope", 1.0), action="D"), weight=40.0)
    assert total(made)[0] == pytest.approx((0.0, -40 * truss.length.sum()))
    assert np.all(made.q[..., 1] < 0)


def test_without_a_tail_the_roof_over_the_outer_half_of_the_bearing_presses_on_the_heel():
    truss = king(tails=False)
    roof = [load(surface, "plan", 1000.0) for surface in SURFACES]
    made = laid(truss, case(*roof))
    heel = truss.topology.nodes.index("A")
    assert made.nodal[0, heel] == pytest.approx((0.0, -1000 * SPACING * 0.045))
    assert total(made)[0] == pytest.approx((0.0, -1000 * SPACING * 8.09))


def test_a_stretch_on_a_missing_tail_counts_for_what_it_covers_of_the_bearing():
    """The outer half of the left bearing reaches from -0.045 m to 0."""
    truss = king(tails=False)
    for low, high, share in ((None, -0.015, 2 / 3), (-0.015, None, 1 / 3), (0.0, 4.0, 0.0), (-0.5, -0.045, 0.0)):
        made = laid(truss, case(load("left tail", "plan", 1000.0, low, high)))
        assert total(made)[0] == pytest.approx((0.0, -1000 * SPACING * 0.045 * share), abs=1e-9)


def test_a_point_load_stands_on_its_member_and_cuts_it():
    truss = king()
    member = member_at(truss, "top", 1.0)
    assert member == truss.topology.names.index("top 1")
    point = ChordPoint(case=0, member=member, x=np.asarray(1.0), force=np.asarray(700.0))
    made = laid(truss, case(action="D"), points=(point,))
    (stood,) = made.points
    assert float(stood.at) == pytest.approx(SLOPE)
    assert (float(stood.fx), float(stood.fy)) == (0.0, -700.0)
    assert made.member_of.count(member) == 2


@pytest.mark.parametrize(
    ("chord", "x", "name"),
    [
        ("top", -0.3, "tail 1"),
        ("top", 5.0, "top 2"),
        ("bottom", 5.0, "bottom 2"),
        ("bottom", 8.2, None),
        ("top", 9.0, None),
    ],
)
def test_the_member_above_or_below_a_place(chord, x, name):
    truss = king()
    found = member_at(truss, chord, x)
    assert (None if found is None else truss.topology.names[found]) == name


def test_segments_ascend_and_cover_every_member_once():
    truss = king()
    cuts = [
        load("left slope", "plan", 1.0, 0.5, 2.5),
        load("right slope", "plan", 1.0, 5.5),
        load("ceiling", "plan", 1.0),
    ]
    made = laid(truss, case(*cuts))
    assert list(made.member_of) == sorted(made.member_of)
    covered = np.zeros(len(truss.topology.members))
    np.add.at(covered, list(made.member_of), made.x1 - made.x0)
    assert covered == pytest.approx(truss.length)


def test_an_unknown_kind_of_load_is_refused():
    with pytest.raises(ValueError, match="unknown kind of surface load 'sideways'"):
        per_length("sideways", np.asarray(1.0), np.asarray(1.0), np.asarray(0.0))
