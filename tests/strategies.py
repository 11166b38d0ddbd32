"""Random trusses and loads for property tests."""

from collections.abc import Mapping

from hypothesis import strategies as st

from rooftruss.shapes.truss import Truss
from tests.support import MemberLoad, PointLoad, layouts, placed

LAYOUTS = list(layouts())
Loads = tuple[list[MemberLoad], list[PointLoad], Mapping[int, tuple[float, float]]]


def numbers(low: float, high: float) -> st.SearchStrategy[float]:
    """Numbers on a grid of a thousandth of the range: as varied as needed, and none so small that it is noise."""
    return st.integers(0, 1000).map(lambda k: low + (high - low) * k / 1000)


@st.composite
def trusses(draw: st.DrawFn, *, tails: bool | None = None) -> Truss:
    """A truss of the catalogue at random dimensions."""
    fitting = [layout for layout in LAYOUTS if tails is None or layout.tails == tails]
    return placed(
        draw(st.sampled_from(fitting)),
        span=draw(numbers(3, 18)),
        pitch=draw(numbers(0.25, 1.5)),
        bottom_pitch=draw(numbers(0.05, 0.2)),
        heel=draw(numbers(0.1, 0.8)),
        overhang=draw(numbers(0.2, 1.0)),
    )


@st.composite
def joint_forces(draw: st.DrawFn, truss: Truss, *, sideways: bool = True) -> Mapping[int, tuple[float, float]]:
    """Loads at up to four joints [N]."""
    nodes = st.integers(0, len(truss.topology.nodes) - 1)
    fx = numbers(-2000, 2000) if sideways else st.just(0.0)
    return draw(st.dictionaries(nodes, st.tuples(fx, numbers(-5000, 5000)), max_size=4))


@st.composite
def load_sets(draw: st.DrawFn, truss: Truss, *, sideways: bool = True) -> Loads:
    """Partial member loads, point loads on members and joint loads of one case."""
    members = st.integers(0, len(truss.topology.members) - 1)
    qx = numbers(-300, 300) if sideways else st.just(0.0)
    fx = numbers(-1000, 1000) if sideways else st.just(0.0)
    spread, points = [], []
    for member in draw(st.lists(members, min_size=1, max_size=4)):
        low, high = sorted(draw(st.lists(st.integers(0, 20), min_size=2, max_size=2, unique=True)))
        length = float(truss.length[member])
        spread.append((member, length * low / 20, length * high / 20, draw(qx), draw(numbers(-900, 900))))
    for member in draw(st.lists(members, max_size=3)):
        at = float(truss.length[member]) * draw(st.integers(1, 19)) / 20
        points.append((member, at, draw(fx), draw(numbers(-2500, 2500))))
    return spread, points, draw(joint_forces(truss, sideways=sideways))
