"""A truss of the job that is given joint by joint: what fixes it, and whether it fits the dimensions of its roof."""

from dataclasses import dataclass
from functools import lru_cache

from rooftruss.basis.job import TrussSpec
from rooftruss.errors import JobError
from rooftruss.shapes.custom import MemberRow, NodeRow, SupportRow, custom_truss
from rooftruss.shapes.truss import Truss

CUSTOM = "custom"
FIT = 5e-3  # [m] what the joints of a custom truss may differ from the dimensions of its roof
STRAIGHT = 1e-3  # sine of the angle up to which two chord members are one straight piece


@dataclass(frozen=True, slots=True, kw_only=True)
class CustomLayout:
    """What fixes a truss that is given joint by joint; it stands beside Layout. Rows as shapes.custom takes them."""

    nodes: tuple[NodeRow, ...]
    members: tuple[MemberRow, ...]
    supports: tuple[SupportRow, ...]  # every bearing length filled in
    panels: int  # of the top chord
    tails: bool
    shape: str = CUSTOM
    raised_heel: bool = False  # the joints say where the chords are, whatever their depth


@lru_cache(maxsize=64)
def made_of(layout: CustomLayout) -> Truss:
    """The truss of a custom layout."""
    return custom_truss(layout.nodes, layout.members, layout.supports)


def custom_layout(spec: TrussSpec) -> CustomLayout:
    """Joints and members of a custom truss, held against the dimensions of the roof that the job gives."""
    given = spec.custom
    if given is None:
        raise JobError(f"shape {CUSTOM!r}: the joints, members and supports are missing")
    roles = [row[1] for row in given.members]
    layout = CustomLayout(
        nodes=given.nodes,
        members=given.members,
        supports=tuple((*row[:3], spec.bearing if row[3] is None else row[3]) for row in given.supports),
        panels=roles.count("top chord"),
        tails="tail" in roles,
    )
    made = made_of(layout)
    for role in ("top chord", "bottom chord"):
        if role not in roles:
            raise JobError(f"member: no member has the role {role!r}; a roof truss has a top chord and a bottom chord")
    _check_bearings(layout, made, spec)
    _check_tails(made, spec)
    _check_pieces(made, spec.timber.longest_stock)
    return layout


def _check_bearings(layout: CustomLayout, made: Truss, spec: TrussSpec) -> None:
    """The outer bearings are where the span and the bearing length of the job put them."""
    carrying = [s for s in made.topology.supports if s.vertical]
    if len(carrying) < 2:
        raise JobError("support: one bearing carries the truss; at least two have to, at the ends of the span")
    left, right = (carrying[k].node for k in (0, -1))
    first, last = float(made.xy[left, 0]), float(made.xy[right, 0])
    wanted = spec.span - spec.bearing
    if abs(first) > FIT or abs(last - first - wanted) > FIT:
        raise JobError(
            f"span: {spec.span:.3f} m less a bearing of {spec.bearing:.3f} m is {wanted:.3f} m, but the "
            f"outer bearings {made.topology.nodes[left]!r} and {made.topology.nodes[right]!r} are "
            f"{last - first:.3f} m apart; joints are at the middle of the bearings"
        )
    for name, _, _, length in layout.supports:
        outer = name in (made.topology.nodes[left], made.topology.nodes[right])
        if outer and abs(length - spec.bearing) > FIT:
            raise JobError(f"support at {name!r}: an outer bearing has the length that the truss gives as bearing")


def _check_tails(made: Truss, spec: TrussSpec) -> None:
    """Tails reach as far as the overhang of the job."""
    end = spec.span - spec.bearing
    tail = spec.overhang + spec.bearing / 2
    tips = {
        m.name: (-float(made.xy[m.start, 0]) if m.surface == "left tail" else float(made.xy[m.end, 0]) - end)
        for m in made.topology.members
        if m.role == "tail"
    }
    if bool(tips) != (spec.overhang > 0):
        raise JobError(f"overhang: {spec.overhang:.3f} m, but the truss has {len(tips)} tails; make the two agree")
    for name, reach in tips.items():
        if abs(reach - tail) > FIT:
            raise JobError(
                f"overhang: {spec.overhang:.3f} m and half a bearing are {tail:.3f} m, but member {name!r} reaches "
                f"{reach:.3f} m beyond the middle of the bearing"
            )


def _check_pieces(made: Truss, stock: float) -> None:
    """No chord piece is longer than the stock; a piece runs on straight through joints where moment passes."""
    chords = [k for k, m in enumerate(made.topology.members) if m.role != "web"]
    before = {made.topology.members[k].end: k for k in chords if not made.topology.members[k].pinned_end}
    length: dict[int, float] = {}
    for k in sorted(chords, key=lambda k: float(made.start_xy[k, 0])):
        member, piece = made.topology.members[k], float(made.length[k])
        last = before.get(member.start)
        if last is not None and not member.pinned_start and _straight(made, last, k):
            piece += length[last]
        length[k] = piece
        if piece > stock + FIT:
            raise JobError(
                f"longest_stock: {stock:.2f} m, but the chord piece that ends with {member.name!r} is {piece:.2f} m "
                "long; allow longer stock, or pin the chord at a joint where it is spliced"
            )


def _straight(made: Truss, one: int, other: int) -> bool:
    a, b = made.direction[one], made.direction[other]
    return bool(abs(a[0] * b[1] - a[1] * b[0]) <= STRAIGHT)
