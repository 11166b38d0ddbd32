"""Zero-force members of the pin-jointed truss: found joint by joint as by hand, and held against the solver.

The pin-jointed idealisation has every load at a joint. Tails stand outside it: a tail is a cantilever of the rafter
that it continues, and its load goes to the two ends of that rafter panel.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.frame import pin_jointed, solve
from rooftruss.loads.cases import LoadCases
from rooftruss.shapes.truss import Support, Topology, Truss

Array = NDArray[np.float64]
TOLERANCE = 1e-9  # of the largest load or force, and of the sine between directions


@dataclass(frozen=True, slots=True, kw_only=True)
class Triangulation:
    """A topology without its tails, every member pinned; members and nodes are the numbers they have in the whole."""

    topology: Topology
    members: tuple[int, ...]
    nodes: tuple[int, ...]


@cache
def triangulation(topology: Topology) -> Triangulation:
    """The part of a topology that is a pin-jointed truss."""
    kept = tuple(k for k, m in enumerate(topology.members) if m.role != "tail")
    nodes = tuple(sorted({n for k in kept for n in (topology.members[k].start, topology.members[k].end)}))
    number = {n: k for k, n in enumerate(nodes)}
    from dataclasses import replace

    part = Topology(
        shape=topology.shape,
        nodes=tuple(topology.nodes[n] for n in nodes),
        members=tuple(
            replace(topology.members[k], start=number[topology.members[k].start], end=number[topology.members[k].end])
            for k in kept
        ),
        supports=tuple(
            Support(node=number[s.node], horizontal=s.horizontal, vertical=s.vertical) for s in topology.supports
        ),
    )
    return Triangulation(topology=pin_jointed(part), members=kept, nodes=nodes)


def _part(truss: Truss) -> Truss:
    part = triangulation(truss.topology)
    return Truss(topology=part.topology, xy=truss.xy[..., list(part.nodes), :], bearing=truss.bearing)


@cache
def _lever_members(topology: Topology) -> tuple[int, ...]:
    """Member over whose ends the load of each member is shared: itself; for a tail, the top chord it continues."""
    out = []
    for k, m in enumerate(topology.members):
        ends = {m.start, m.end}
        beside = [
            j
            for j, other in enumerate(topology.members)
            if m.role == "tail" and other.role == "top chord" and ends & {other.start, other.end}
        ]
        out.append(beside[0] if beside else k)
    return tuple(out)


def joint_loads(truss: Truss, cases: LoadCases) -> Array:
    """Loads at the joints (..., c, node, 2) [N] that stand for all loads of each case.

    Member loads go to the ends of their member by the lever rule; loads of a tail to the ends of the rafter panel
    that it continues (upwards at the far end), so that resultant and moment are those of the loads.
    """
    member = list(cases.member_of)
    batch = cases.q.shape[:-3]
    out = np.zeros(cases.nodal.shape)
    force = cases.q * (cases.x1 - cases.x0)[..., None, :, None]
    middle = (cases.x0 + cases.x1) / 2
    share = _shares(truss, member, middle)
    for s, k in enumerate(member):
        _put(truss.topology, out, k, share[..., None, s], force[..., s, :])
    for p in cases.points:
        share = _shares(truss, [p.member], np.broadcast_to(p.at, batch)[..., None])[..., 0]
        one = np.stack(np.broadcast_arrays(p.fx, p.fy), axis=-1)
        _put(truss.topology, out[..., p.case : p.case + 1, :, :], p.member, share[..., None], one[..., None, :])
    return out + _nodal_inside(truss, cases.nodal)


def _shares(truss: Truss, member: Sequence[int], at: Array) -> Array:
    """Part of a load that goes to the end of its lever member: place along that member over its length (..., s)."""
    lever = [_lever_members(truss.topology)[k] for k in member]
    offset = truss.start_xy[..., list(member), :] - truss.start_xy[..., lever, :]
    along = np.einsum("...sx,...sx->...s", offset, truss.direction[..., lever, :]) + at
    return np.asarray(along / truss.length[..., lever])


def _put(topology: Topology, out: Array, member: int, share: Array, force: Array) -> None:
    """Add a force (..., c, 2) to the joints (..., c, node, 2) at the ends of the lever member of `member`."""
    lever = topology.members[_lever_members(topology)[member]]
    out[..., lever.start, :] += (1 - share)[..., None] * force
    out[..., lever.end, :] += share[..., None] * force


def _nodal_inside(truss: Truss, nodal: Array) -> Array:
    """Joint loads with those at the free ends of tails moved to the rafter that each tail continues."""
    out = np.array(nodal)
    inside = set(triangulation(truss.topology).nodes)
    for k, m in enumerate(truss.topology.members):
        for node, at in ((m.start, 0.0 * truss.length[..., k]), (m.end, truss.length[..., k])):
            if node not in inside:
                force = np.array(out[..., node, :])
                out[..., node, :] = 0.0
                _put(truss.topology, out, k, _shares(truss, [k], at[..., None]), force)
    return out


def pin_jointed_axial(truss: Truss, ea: Array, cases: LoadCases) -> Array:
    """Axial force of every member of the pin-jointed truss (..., c, m) [N], loads moved to the joints; 0 in tails.

    ea (..., m) [N] matters only where the truss is statically indeterminate.
    Raises UnstableTrussError when the pin-jointed truss is a mechanism.
    """
    part = triangulation(truss.topology)
    inner = _part(truss)
    loads = joint_loads(truss, cases)
    stiffness = np.asarray(ea)[..., list(part.members)]
    solution = solve(inner, stiffness, 0.0 * stiffness, nodal_cases(inner, loads[..., list(part.nodes), :], cases))
    out = np.zeros((*loads.shape[:-2], len(truss.topology.members)))
    out[..., list(part.members)] = solution.end_forces[..., 3]
    return out


def nodal_cases(truss: Truss, loads: Array, like: LoadCases) -> LoadCases:
    """The cases of `like` with joint loads (..., c, node, 2) only."""
    count = len(truss.topology.members)
    batch = loads.shape[:-3]
    return LoadCases(
        heads=like.heads,
        member_of=tuple(range(count)),
        x0=np.zeros((*batch, count)),
        x1=np.broadcast_to(truss.length, (*batch, count)),
        q=np.zeros((*batch, loads.shape[-3], count, 2)),
        points=(),
        nodal=loads,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One finding at one joint. member is "" where the finding is about a support, joint where it is about the truss."""

    joint: str
    member: str
    rule: str
    reason: str  # one sentence


@dataclass(frozen=True, slots=True, kw_only=True)
class Inspection:
    """What can be said of one load case by looking at the joints one at a time; everything by name."""

    steps: tuple[Step, ...]
    zero: tuple[str, ...]  # members that carry nothing, in the order of the topology
    collinear: tuple[tuple[str, str], ...]  # members in one line that pass their force on to each other


@dataclass(frozen=True, slots=True)
class _Force:
    """A force that may act at a joint: a member, the load, or one direction of a support."""

    kind: str  # "member", "load", "support"
    label: str
    direction: Array


def inspect_case(truss: Truss, forces: Array) -> Inspection:
    """Zero-force members of an unbatched truss under joint loads (node, 2) [N], as `joint_loads` gives them.

    Where all forces at a joint but one lie in one line, that one is zero: nothing else acts across the line. A force
    is a member not yet found idle, the load, or a direction held by a support. Joints are taken from left to right,
    again and again until a round finds nothing.
    """
    part = triangulation(truss.topology)
    inner, loads = _part(truss), np.asarray(forces, float)[list(part.nodes)]
    names = inner.topology.names
    if not loads.any():
        reason = "No load acts on any joint in this case, so no member carries anything."
        return Inspection(steps=(Step(joint="", member="", rule="no load", reason=reason),), zero=names, collinear=())
    joints = _joints(inner, loads)
    steps = [step for step in (_idle_sideways(inner, loads),) if step is not None]
    for step in steps:
        _drop(joints, step.joint, f"the {HELD[0]} reaction")
    idle: list[str] = []
    while found := _round(joints, idle):
        steps += found
    return Inspection(
        steps=tuple(steps),
        zero=tuple(n for n in names if n in idle),
        collinear=tuple(pair for forces in joints.values() for pair in _passing_on(forces)),
    )


HELD = ("horizontal", "vertical")
Joints = dict[str, list[_Force]]


def _joints(truss: Truss, loads: Array) -> Joints:
    """Forces that may act at each joint, joints from left to right (from below where one stands over the other)."""
    topology = truss.topology
    out: Joints = {topology.nodes[n]: [] for n in np.lexsort((truss.xy[:, 1], truss.xy[:, 0]))}
    for k, m in enumerate(topology.members):
        out[topology.nodes[m.start]].append(_Force("member", m.name, truss.direction[k]))
        out[topology.nodes[m.end]].append(_Force("member", m.name, -truss.direction[k]))
    size = np.hypot(loads[:, 0], loads[:, 1])
    for n in np.flatnonzero(size > TOLERANCE * size.max()):
        out[topology.nodes[n]].append(_Force("load", "the load", loads[n] / size[n]))
    for s in topology.supports:
        for held, name, direction in zip((s.horizontal, s.vertical), HELD, np.eye(2), strict=True):
            if held:
                out[topology.nodes[s.node]].append(_Force("support", f"the {name} reaction", direction))
    return out


def _idle_sideways(truss: Truss, loads: Array) -> Step | None:
    """Equilibrium of the whole: without a sideways resultant, the only horizontal support carries nothing sideways."""
    holders = [s.node for s in truss.topology.supports if s.horizontal]
    if len(holders) != 1 or abs(loads[:, 0].sum()) > TOLERANCE * np.abs(loads).max():
        return None
    joint = truss.topology.nodes[holders[0]]
    none = not (np.abs(loads[:, 0]) > TOLERANCE * np.abs(loads).max()).any()
    why = "no load acts sideways" if none else "the sideways loads cancel each other"
    reason = f"Joint {joint}: it alone is held sideways and {why}, so the horizontal reaction is zero."
    return Step(joint=joint, member="", rule="balance of the whole", reason=reason)


def _round(joints: Joints, idle: list[str]) -> list[Step]:
    """One walk over all joints; what is found at a joint counts from there on."""
    steps: list[Step] = []
    for joint, forces in joints.items():
        for force, others in _off_the_line(forces):
            gone = [f for f in idle if f in _names_at(joints, joint)]
            steps.append(_step(joint, force, others, gone))
            if force.kind == "member":
                idle.append(force.label)
    for step in steps:
        for joint in joints:
            if step.member:
                _drop(joints, joint, step.member)
        if not step.member:
            _drop(joints, step.joint, step.rule)
    return steps
