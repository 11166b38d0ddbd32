"""Zero-force members of the pin-jointed truss: found joint by joint as by hand, and held against the solver.

The pin-jointed idealisation has every load at a joint. Tails stand outside it: a tail is a cantilever of the rafter
that it continues, and its load goes to the two ends of that rafter panel.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cache

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.frame import Solution, pin_jointed, solve
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
    return joint_forces(truss, ea, joint_loads(truss, cases), cases).end_forces[..., 3]


def joint_forces(truss: Truss, ea: Array, loads: Array, like: LoadCases) -> Solution:
    """The pin-jointed truss under `loads` (..., c, node, 2) [N] at its joints in every case of `like`.

    Members and joints are numbered as in `truss`; nothing is kept of tails and their tips, whose loads must be 0.
    Raises UnstableTrussError when the pin-jointed truss is a mechanism.
    """
    part, made = triangulation(truss.topology), truss.topology
    members, nodes = list(part.members), list(part.nodes)
    inner = _part(truss)
    stiffness = np.asarray(ea)[..., members]
    found = solve(inner, stiffness, 0.0 * stiffness, nodal_cases(inner, loads[..., nodes, :], like))
    forces = np.zeros((*found.end_forces.shape[:-2], len(made.members), 6))
    forces[..., members, :] = found.end_forces
    moved = np.zeros((*found.displacements.shape[:-2], len(made.nodes), 2))
    moved[..., nodes, :] = found.displacements
    return Solution(displacements=moved, end_forces=forces, reactions=found.reactions)


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
    """One finding at one joint: member carries nothing. member is "" where a reaction was found to be zero."""

    joint: str
    member: str
    rule: str
    reason: str  # one sentence


@dataclass(frozen=True, slots=True, kw_only=True)
class Inspection:
    """What looking at one joint at a time says of one load case; everything by name."""

    steps: tuple[Step, ...]
    zero: tuple[str, ...]  # members that carry nothing, in the order of the topology
    collinear: tuple[tuple[str, str], ...]  # members in one line that pass their force on to each other unchanged


@dataclass(frozen=True, slots=True)
class _Force:
    """A force that may act at a joint: of a member, a load, or one direction held by a support."""

    kind: str  # "member", "load", "support"
    label: str
    direction: Array


Joints = dict[str, list[_Force]]
HELD = ("horizontal", "vertical")


def inspect_case(truss: Truss, forces: Array) -> Inspection:
    """Zero-force members of an unbatched truss under joint loads (node, 2) [N], as `joint_loads` gives them.

    Where all forces at a joint but one lie in one line, that one is zero, since nothing else acts across the line.
    A force is a member not yet found idle, the load, or a direction held by a support. Joints are taken from left to
    right, again and again until a round finds nothing.
    """
    part = triangulation(truss.topology)
    inner, loads = _part(truss), np.asarray(forces, float)[list(part.nodes)]
    names = inner.topology.names
    if not loads.any():
        reason = "No load acts on any joint in this case, so no member carries anything."
        return Inspection(steps=(Step(joint="", member="", rule="no load", reason=reason),), zero=names, collinear=())
    joints = _joints(inner, loads)
    meeting = {joint: [f.label for f in forces] for joint, forces in joints.items()}
    steps = _balance_of_the_whole(inner, loads, joints)
    while found := [step for joint in joints for step in _at_joint(joint, joints, meeting[joint])]:
        steps += found
    zero = {step.member for step in steps}
    return Inspection(
        steps=tuple(steps),
        zero=tuple(name for name in names if name in zero),
        collinear=tuple(pair for forces in joints.values() for pair in _passing_on(forces)),
    )


def _joints(truss: Truss, loads: Array) -> Joints:
    """Forces that may act at each joint, joints from left to right (the lower of two first)."""
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


def _balance_of_the_whole(truss: Truss, loads: Array, joints: Joints) -> list[Step]:
    """Without a sideways resultant the only support held sideways carries nothing sideways (sum of horizontals)."""
    holders = [s.node for s in truss.topology.supports if s.horizontal]
    least = TOLERANCE * np.abs(loads).max()
    if len(holders) != 1 or abs(loads[:, 0].sum()) > least:
        return []
    joint = truss.topology.nodes[holders[0]]
    none = bool((np.abs(loads[:, 0]) <= least).all())
    why = "no load acts sideways" if none else "the sideways loads cancel out"
    _drop(joints[joint], f"the {HELD[0]} reaction")
    reason = f"Joint {joint}: only this joint is held sideways and {why}, so its horizontal reaction is zero."
    return [Step(joint=joint, member="", rule="balance of the whole", reason=reason)]


def _at_joint(joint: str, joints: Joints, meeting: list[str]) -> list[Step]:
    """All that one joint gives; each find counts at once, here and at the member's other end."""
    steps = []
    while (found := _across_the_line(joints[joint])) is not None:
        force, line = found
        settled = [label for label in meeting if label not in {f.label for f in joints[joint]}]
        steps.append(_step(joint, force, line, settled))
        for forces in joints.values() if force.kind == "member" else (joints[joint],):
            _drop(forces, force.label)
    return steps


def _drop(forces: list[_Force], label: str) -> None:
    forces[:] = [f for f in forces if f.label != label]


def _parallel(a: _Force, b: _Force) -> bool:
    return bool(abs(a.direction[0] * b.direction[1] - a.direction[1] * b.direction[0]) < TOLERANCE)


def _across_the_line(forces: list[_Force]) -> tuple[_Force, list[_Force]] | None:
    """First force that is alone across the one line of all the others, with those others."""
    for force in forces:
        others = [f for f in forces if f is not force]
        in_line = all(_parallel(others[0], f) for f in others[1:])
        if force.kind != "load" and in_line and not (others and _parallel(others[0], force)):
            return force, others
    return None


def _step(joint: str, force: _Force, line: list[_Force], settled: list[str]) -> Step:
    """The finding that `force` is zero, in words."""
    loaded = any(f.kind == "load" for f in line)
    unloaded = "" if loaded else " and no load acts on the joint"
    if not line:
        rule, why = "lone member", f"{force.label} is alone{unloaded}"
    elif len(line) == 1:
        rule, why = "corner", f"{force.label} and {line[0].label} meet at an angle{unloaded}"
    else:
        rule = "load in line" if loaded else "branch" if all(f.kind == "member" for f in line) else "reaction in line"
        why = f"{_listed([f.label for f in line])} lie in one line{unloaded}"
    where = f"Joint {joint}" + (f" (nothing in {_listed(settled)})" if settled else "")
    member = force.kind == "member"
    end = f"{force.label} carries nothing" if member else f"{force.label} is zero"
    return Step(joint=joint, member=force.label if member else "", rule=rule, reason=f"{where}: {why}, so {end}.")


def _listed(words: list[str]) -> str:
    return words[0] if len(words) == 1 else ", ".join(words[:-1]) + " and " + words[-1]


def _passing_on(forces: list[_Force]) -> list[tuple[str, str]]:
    """Pairs of members in one line, when everything else at the joint lies in one other line."""
    members = [f for f in forces if f.kind == "member"]
    pairs = []
    for k, one in enumerate(members):
        for other in members[k + 1 :]:
            rest = [f for f in forces if f is not one and f is not other]
            aside = all(_parallel(rest[0], f) for f in rest[1:]) and not (rest and _parallel(rest[0], one))
            if _parallel(one, other) and aside:
                pairs.append((one.label, other.label))
    return pairs


@dataclass(frozen=True, slots=True, kw_only=True)
class Waking:
    """A member idle under gravity, and the other case in which its force is largest [N]."""

    member: str
    case: str
    force: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Summary:
    """Zero-force members over all cases and combinations of one pin-jointed truss; everything by name."""

    by_case: tuple[Inspection, ...]  # in the order of the cases
    axial: Array  # (c, m) [N]
    idle: tuple[str, ...]  # members that carry nothing in every combination
    waking: tuple[Waking, ...]
    beyond_inspection: tuple[tuple[str, tuple[str, ...]], ...]  # case -> members only the solver finds unloaded


def summary(truss: Truss, ea: Array, cases: LoadCases, factors: Array, gravity: Sequence[int]) -> Summary:
    """Inspection of every case of an unbatched truss, held against the solver.

    ea (m,) [N]; factors (k, c) of the combinations; gravity: numbers of the cases that count as gravity. A member is
    unloaded when its force is below 1e-9 of the largest in that case or combination; tails are left out.
    """
    names, loads = truss.topology.names, joint_loads(truss, cases)
    axial = pin_jointed_axial(truss, ea, cases)
    inside = list(triangulation(truss.topology).members)
    by_case = tuple(inspect_case(truss, case) for case in loads)
    quiet, quiet_combined = _unloaded(axial), _unloaded(np.asarray(factors) @ axial)
    beyond = (
        (name, tuple(names[k] for k in inside if quiet[c, k] and names[k] not in by_case[c].zero))
        for c, name in enumerate(cases.names)
    )
    return Summary(
        by_case=by_case,
        axial=axial,
        idle=tuple(names[k] for k in inside if quiet_combined[:, k].all()),
        waking=_waking(truss, cases, axial, quiet, gravity),
        beyond_inspection=tuple((name, members) for name, members in beyond if members),
    )


def _unloaded(axial: Array) -> NDArray[np.bool_]:
    """Whether each force (k, m) is nothing beside the largest of its row."""
    return np.asarray(np.abs(axial) <= TOLERANCE * np.abs(axial).max(axis=-1, keepdims=True))


def _waking(
    truss: Truss, cases: LoadCases, axial: Array, quiet: NDArray[np.bool_], gravity: Sequence[int]
) -> tuple[Waking, ...]:
    """Members that carry nothing under any gravity case, but do under another."""
    others = [c for c in range(len(cases.names)) if c not in set(gravity)]
    if not others or not gravity:
        return ()
    out = []
    for k in triangulation(truss.topology).members:
        c = max(others, key=lambda c: abs(axial[c, k]))
        if quiet[list(gravity), k].all() and not quiet[c, k]:
            out.append(Waking(member=truss.topology.names[k], case=cases.names[c], force=float(axial[c, k])))
    return tuple(out)
