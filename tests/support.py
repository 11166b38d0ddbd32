"""Trusses and loads for tests, built straight from the objects of the package."""

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import replace
from itertools import pairwise, product

import numpy as np
from numpy.typing import NDArray

from rooftruss.loads.cases import LoadCases, MemberPoint
from rooftruss.loads.roof import ActionCase
from rooftruss.shapes.catalogue import Layout, place
from rooftruss.shapes.outline import Outline
from rooftruss.shapes.truss import Member, Support, Topology, Truss
from rooftruss.shapes.webbing import SHAPES

Array = NDArray[np.float64]
MemberLoad = tuple[int, float, float, float, float]  # member, from, to [m from its start], qx, qy [N/m]
PointLoad = tuple[int, float, float, float]  # member, at [m from its start], fx, fy [N]


def layouts() -> Iterator[Layout]:
    """Every layout of the catalogue without splices."""
    for shape in SHAPES.values():
        for panels, tails, raised in product(shape.panel_counts, (False, True), (False, True)):
            yield Layout(shape=shape.name, panels=panels, tails=tails, raised_heel=raised)


def layout_name(layout: Layout) -> str:
    extras = [word for word, on in (("tails", layout.tails), ("raised heel", layout.raised_heel)) if on]
    return " ".join([layout.shape, str(layout.panels), *extras])


def placed(
    layout: Layout,
    *,
    span: float = 8.0,
    pitch: float = 0.5,
    bottom_pitch: float = 0.25,
    heel: float = 0.4,
    overhang: float = 0.5,
) -> Truss:
    """A layout at dimensions [m]; bottom pitch, heel and overhang count only where the layout has them."""
    outline = Outline(
        span=np.asarray(span),
        pitch=np.asarray(pitch),
        bottom_pitch=np.asarray(bottom_pitch if SHAPES[layout.shape].sloping_bottom else 0.0),
        heel=np.asarray(heel if layout.raised_heel else 0.0),
        overhang=np.asarray(overhang if layout.tails else 0.0),
    )
    return place(layout, outline, 0.09)


def framed(
    nodes: Mapping[str, Sequence[float]],
    members: Iterable[Sequence[object]],
    supports: Mapping[str, Sequence[int]],
    pins: Mapping[str, tuple[bool, bool]] | bool = True,
) -> Truss:
    """Truss or frame of named nodes and members [name, start, end], as drawn; pins at all ends, none, or by member."""
    number = {name: k for k, name in enumerate(nodes)}
    made = []
    for name, start, end in members:
        pinned = (pins, pins) if isinstance(pins, bool) else pins[str(name)]
        made.append(
            Member(
                name=str(name),
                role="web",
                group="web",
                surface="",
                start=number[str(start)],
                end=number[str(end)],
                pinned_start=pinned[0],
                pinned_end=pinned[1],
            )
        )
    held = tuple(
        Support(node=number[name], horizontal=bool(row[0]), vertical=bool(row[1])) for name, row in supports.items()
    )
    topology = Topology(shape="given", nodes=tuple(nodes), members=tuple(made), supports=held)
    return Truss(topology=topology, xy=np.array([list(p) for p in nodes.values()], float), bearing=np.asarray(0.0))


def head(name: str, action: str = "D") -> ActionCase:
    return ActionCase(name=name, short=name, action=action, pattern="", loads=())


def load_cases(
    truss: Truss,
    cases: Sequence[tuple[Sequence[MemberLoad], Sequence[PointLoad], Mapping[int, tuple[float, float]]]],
    extra_cuts: Iterable[tuple[int, float]] = (),
) -> LoadCases:
    """Cases of an unbatched truss from member loads, point loads and joint loads {node: (fx, fy)}."""
    lengths = truss.length
    stops: list[set[float]] = [{0.0, float(length)} for length in lengths]
    for loads, points, _ in cases:
        for k, low, high, _, _ in loads:
            stops[k] |= {low, high}
        for k, at, _, _ in points:
            stops[k].add(at)
    for k, at in extra_cuts:
        stops[k].add(at)
    cut = [(k, a, b) for k, places in enumerate(map(sorted, stops)) for a, b in pairwise(places)]
    q = np.zeros((len(cases), len(cut), 2))
    nodal = np.zeros((len(cases), len(truss.topology.nodes), 2))
    for c, (loads, _, at_joints) in enumerate(cases):
        for member, low, high, qx, qy in loads:
            for s, (k, a, b) in enumerate(cut):
                if k == member and low <= a and b <= high:
                    q[c, s] += (qx, qy)
        for node, force in at_joints.items():
            nodal[c, node] += force
    return LoadCases(
        heads=tuple(head(f"case {c}") for c in range(len(cases))),
        member_of=tuple(k for k, _, _ in cut),
        x0=np.array([a for _, a, _ in cut]),
        x1=np.array([b for _, _, b in cut]),
        q=q,
        points=tuple(
            MemberPoint(case=c, member=k, at=np.asarray(at), fx=np.asarray(fx), fy=np.asarray(fy))
            for c, (_, points, _) in enumerate(cases)
            for k, at, fx, fy in points
        ),
        nodal=nodal,
    )


def joint_cases(truss: Truss, *loads: Mapping[str, Sequence[float]]) -> LoadCases:
    """Cases of joint loads {node name: (fx, fy)} only."""
    numbered = [{truss.topology.nodes.index(n): (float(f[0]), float(f[1])) for n, f in one.items()} for one in loads]
    return load_cases(truss, [((), (), one) for one in numbered])


def stiffness(truss: Truss, ea: float = 5e7, ei: float = 7e4) -> tuple[Array, Array]:
    """EA [N] and EI [N m2] of every member, of the size of a 38 x 140 mm chord."""
    return np.full(truss.length.shape, ea), np.full(truss.length.shape, ei)


def split(truss: Truss, member: int, at: float) -> Truss:
    """The same frame with a new node, the last one, on a member; its part beyond becomes the last member."""
    old = truss.topology.members[member]
    count = len(truss.topology.nodes)
    first = replace(old, end=count, pinned_end=False)
    second = replace(old, name=old.name + " beyond", start=count, pinned_start=False)
    members = (*truss.topology.members[:member], first, *truss.topology.members[member + 1 :], second)
    topology = replace(truss.topology, nodes=(*truss.topology.nodes, "new"), members=members)
    point = truss.start_xy[member] + at * truss.direction[member]
    return Truss(topology=topology, xy=np.vstack([truss.xy, point]), bearing=truss.bearing)
