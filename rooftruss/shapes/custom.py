"""A truss given joint by joint and member by member, for what the catalogue does not hold."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from rooftruss.errors import JobError, nearest
from rooftruss.shapes.truss import Member, Support, Topology, Truss

Array = NDArray[np.float64]
NodeRow = tuple[str, float, float]  # name, x, y [m]
MemberRow = tuple[str | None, str, str, str, str, bool, bool]  # name, role, start, end, group, pinned start, pinned end
SupportRow = tuple[str, bool, bool, float]  # node, held horizontally, held vertically, bearing length [m]

ROLES = ("top chord", "tail", "bottom chord", "web")  # also the order in which a topology lists its members
GROUPS = ("top chord", "bottom chord", "web")
CLOSE = 1e-6  # of the size of the truss: points closer than this are the same place


def custom_truss(nodes: Sequence[NodeRow], members: Sequence[MemberRow], supports: Sequence[SupportRow]) -> Truss:
    """Truss of given joints, members and bearings; unsymmetric as far as the program is concerned.

    Members are turned to run from left to right (verticals from below up) with their pinned ends, listed by role and
    from the left, and named 'top 1', 'web 2' ... where no name is given. Joints keep their names; x is moved so that
    it counts from the left bearing centre. Roof surfaces follow from the slope of the top chords. The bearing length
    of the truss is the shortest of its supports.

    Raises JobError naming the joint or member for double, unknown or misplaced parts, for parts that do not hang
    together, and where there are too few supports or members to hold the joints. A mechanism that only its geometry
    shows is found by the analysis.
    """
    place = _place(nodes)
    if not supports:
        raise JobError("supports: none is given; a truss needs at least a fixed bearing and a sliding one")
    bearings = [_support(row, place) for row in supports]
    _check_supports(bearings, [row[0] for row in supports])
    left = min(place.xy[s.node, 0] for s in bearings)
    xy = place.xy - np.array([left, 0.0])
    listed = _listed([_member(row, place) for row in members], place)
    _check_geometry(listed, place)
    _check_connected(listed, place)
    topology = Topology(
        shape="custom",
        nodes=place.names,
        members=tuple(replace(m, surface=_surface(m, listed, place)) for m in listed),
        supports=tuple(sorted(bearings, key=lambda s: float(xy[s.node, 0]))),
    )
    _check_count(topology)
    return Truss(topology=topology, xy=xy, bearing=np.asarray(min(row[3] for row in supports), float))


@dataclass(frozen=True, slots=True)
class _Place:
    """Joints by name, number and place (node, 2), and the size of the whole [m]."""

    names: tuple[str, ...]
    xy: Array
    size: float

    def number(self, name: str, whose: str) -> int:
        """Number of a joint. Raises JobError saying which row named it."""
        if name not in self.names:
            raise JobError(f"{whose}: joint {name!r} is not among the nodes; {nearest(name, self.names)}")
        return self.names.index(name)


def _place(nodes: Sequence[NodeRow]) -> _Place:
    names = tuple(name for name, _, _ in nodes)
    for name in names:
        if names.count(name) > 1:
            raise JobError(f"joint {name!r} is given {names.count(name)} times; give each joint its own name")
    xy = np.array([[x, y] for _, x, y in nodes], dtype=float).reshape(-1, 2)
    for name, point in zip(names, xy, strict=True):
        if not np.isfinite(point).all():
            raise JobError(f"joint {name!r}: its place {tuple(map(float, point))} is not a pair of finite lengths")
    if len(names) < 3:
        raise JobError(f"nodes: {len(names)} given; a truss has at least three joints")
    size = float(np.ptp(xy, axis=0).max())
    for a, b in combinations(range(len(names)), 2):
        if np.hypot(*(xy[a] - xy[b])) <= CLOSE * size:
            raise JobError(f"joints {names[a]!r} and {names[b]!r} are in the same place; keep one of them")
    return _Place(names, xy, size)


def _support(row: SupportRow, place: _Place) -> Support:
    name, horizontal, vertical, bearing = row
    if not (horizontal or vertical):
        raise JobError(f"support at joint {name!r} holds nothing; hold it horizontally, vertically or both ways")
    if not 0 < bearing < float("inf"):
        raise JobError(f"support at joint {name!r}: bearing length {bearing} m must be more than zero")
    return Support(node=place.number(name, "support"), horizontal=horizontal, vertical=vertical)


def _check_supports(supports: Sequence[Support], names: Sequence[str]) -> None:
    for name in names:
        if names.count(name) > 1:
            raise JobError(f"support at joint {name!r} is given {names.count(name)} times; join them in one row")
    held = sum(s.horizontal + s.vertical for s in supports)
    if held < 3:
        raise JobError(f"supports: {held} movements are held, at least 3 are needed (a pinned and a sliding bearing)")
    if not any(s.horizontal for s in supports):
        raise JobError("supports: none holds the truss horizontally; pin one of them")
    if not any(s.vertical for s in supports):
        raise JobError("supports: none holds the truss vertically; a bearing has to carry it")


def _member(row: MemberRow, place: _Place) -> Member:
    """Member drawn from left to right, a vertical one from below up; its surface is still open."""
    name, role, start, end, group, pinned_start, pinned_end = row
    whose = f"member {name!r}" if name else f"{role} from {start!r} to {end!r}"
    if role not in ROLES:
        raise JobError(f"{whose}: role {role!r} is unknown; {nearest(role, ROLES)}")
    if group not in GROUPS:
        raise JobError(f"{whose}: group {group!r} is unknown; {nearest(group, GROUPS)}")
    first, last = place.number(start, whose), place.number(end, whose)
    if first == last:
        raise JobError(f"{whose} starts and ends at joint {start!r}; give it two different joints")
    run = place.xy[last] - place.xy[first]
    vertical = abs(run[0]) <= CLOSE * place.size
    if vertical and role != "web":
        raise JobError(f"{whose} is vertical; a {role} carries load on plan, make it a web")
    if (run[1] if vertical else run[0]) < 0:
        first, last, pinned_start, pinned_end = last, first, pinned_end, pinned_start
    return Member(
        name=name or "",
        role=role,
        group=group,
        surface="",
        start=first,
        end=last,
        pinned_start=pinned_start,
        pinned_end=pinned_end,
    )


def _listed(members: Sequence[Member], place: _Place) -> list[Member]:
    """Members by role and from the left, nameless ones named by their number in their role."""
    middle = {id(m): (place.xy[m.start] + place.xy[m.end]) / 2 for m in members}
    ordered = sorted(members, key=lambda m: (ROLES.index(m.role), *map(float, np.round(middle[id(m)], 9))))
    out: list[Member] = []
    for m in ordered:
        count = 1 + sum(other.role == m.role for other in out)
        out.append(replace(m, name=m.name or f"{m.role.split()[0]} {count}"))
    names = [m.name for m in out]
    for name in names:
        if names.count(name) > 1:
            raise JobError(f"member {name!r} is given {names.count(name)} times; give each member its own name")
    return out


def _check_geometry(members: Sequence[Member], place: _Place) -> None:
    """No member twice, through a third joint, or across another."""
    for m in members:
        for n, name in enumerate(place.names):
            if n not in (m.start, m.end) and _distance(place.xy[n], m, place) <= CLOSE * place.size:
                raise JobError(f"member {m.name!r} runs through joint {name!r}; divide it there")
    for a, b in combinations(members, 2):
        ends = {a.start, a.end} & {b.start, b.end}
        if len(ends) == 2:
            raise JobError(f"members {a.name!r} and {b.name!r} join the same two joints; keep one of them")
        if not ends and _cross(a, b, place):
            raise JobError(f"members {a.name!r} and {b.name!r} cross; put a joint where they meet, or move one")


def _distance(point: Array, member: Member, place: _Place) -> float:
    """Distance of a point from the line of a member between its ends [m]."""
    start, end = place.xy[member.start], place.xy[member.end]
    run = end - start
    along = np.clip(np.dot(point - start, run) / np.dot(run, run), 0.0, 1.0)
    return float(np.hypot(*(start + along * run - point)))


def _cross(a: Member, b: Member, place: _Place) -> bool:
    """Whether two members without a common joint cross: each has its ends clearly on both sides of the other."""

    def side(m: Member, point: int) -> float:
        run, to = place.xy[m.end] - place.xy[m.start], place.xy[point] - place.xy[m.start]
        beside = float(run[0] * to[1] - run[1] * to[0])
        on_line = abs(beside) <= CLOSE * place.size * float(np.hypot(*run))  # round-off of members in one line
        return 0.0 if on_line else beside

    return side(a, b.start) * side(a, b.end) < 0 and side(b, a.start) * side(b, a.end) < 0


def _check_connected(members: Sequence[Member], place: _Place) -> None:
    reached, waiting = {0}, [0]
    while waiting:
        here = waiting.pop()
        for m in members:
            if here in (m.start, m.end):
                far = m.end if m.start == here else m.start
                if far not in reached:
                    reached.add(far)
                    waiting.append(far)
    for n, name in enumerate(place.names):
        if not any(n in (m.start, m.end) for m in members):
            raise JobError(f"joint {name!r} has no member; join it to the truss or leave it out")
    apart = [name for n, name in enumerate(place.names) if n not in reached]
    if apart:
        raise JobError(f"joint {apart[0]!r} belongs to a part that no member joins to joint {place.names[0]!r}")


def _surface(member: Member, members: Sequence[Member], place: _Place) -> str:
    """Surface whose loads a member carries: by its role, and on the roof by the side it slopes to."""
    if member.role == "bottom chord":
        return "ceiling"
    if member.role == "top chord":
        return f"{_side(member, members, place)} slope"
    if member.role == "tail":
        return f"{_side_of_tail(member, members, place)} tail"
    return ""


def _side(member: Member, members: Sequence[Member], place: _Place) -> str:
    """Left of the ridge where the chord rises to the right; a level chord goes by the place of the ridge."""
    start, end = place.xy[member.start], place.xy[member.end]
    if abs(end[1] - start[1]) > CLOSE * place.size:
        return "left" if end[1] > start[1] else "right"
    tops = place.xy[[n for m in members if m.role == "top chord" for n in (m.start, m.end)]]
    ridge = tops[tops[:, 1] > tops[:, 1].max() - CLOSE * place.size, 0].mean()
    return "left" if (start[0] + end[0]) / 2 <= ridge + CLOSE * place.size else "right"


def _side_of_tail(tail: Member, members: Sequence[Member], place: _Place) -> str:
    """Side of the free end of a tail, which has to continue a top chord in its line."""
    others = [m for m in members if m is not tail]
    free = [n for n in (tail.start, tail.end) if not any(n in (m.start, m.end) for m in others)]
    if len(free) != 1:
        raise JobError(f"member {tail.name!r} is a tail and needs one free end; make it a top chord or a web")
    heel = tail.end if free[0] == tail.start else tail.start
    chords = [m for m in others if m.role == "top chord" and heel in (m.start, m.end)]
    if not any(_in_line(tail, m, place) for m in chords):
        raise JobError(f"member {tail.name!r} is a tail and has to continue a top chord at joint {place.names[heel]!r}")
    return "left" if free[0] == tail.start else "right"


def _in_line(a: Member, b: Member, place: _Place) -> bool:
    one, other = (place.xy[m.end] - place.xy[m.start] for m in (a, b))
    sine = (one[0] * other[1] - one[1] * other[0]) / (np.hypot(*one) * np.hypot(*other))
    return bool(abs(sine) <= CLOSE)


def _check_count(topology: Topology) -> None:
    """Unknown forces against equations of equilibrium: the count without which no frame can stand.

    A member has an axial force, and a moment at each end that is not pinned; a joint has two equations, and one more
    where members pass moment.
    """
    unknown = sum(3 - m.pinned_start - m.pinned_end for m in topology.members)
    unknown += sum(s.horizontal + s.vertical for s in topology.supports)
    turning = {n for m in topology.members for n, pin in ((m.start, m.pinned_start), (m.end, m.pinned_end)) if not pin}
    missing = 2 * len(topology.nodes) + len(turning) - unknown
    if missing > 0:
        plural = "member or support is" if missing == 1 else "members or supports are"
        raise JobError(f"custom truss: {missing} {plural} missing; the joints can move as a mechanism")
