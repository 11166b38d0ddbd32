"""A point load that is walked along a chord: one load case for each place it stops at."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rooftruss.loads.roof import ActionCase, Value
from rooftruss.shapes.truss import Truss

Array = NDArray[np.float64]
TOP = ("left tail", "left slope", "right slope", "right tail")
BOTTOM = ("ceiling",)


@dataclass(frozen=True, slots=True, kw_only=True)
class Stop:
    """The load at one place of its walk: its case, which holds no other load; a joint, or the middle of a member."""

    case: ActionCase
    node: int | None
    member: int | None
    x: Array  # plan position from the left bearing centre (...,) [m]
    force: Array  # downwards (...,) [N]


def stops(
    truss: Truss, surfaces: Sequence[str], force: Array, *, action: str, what: str, symbol: str, clause: str
) -> list[Stop]:
    """Every panel point and every middle of a member of the chord that `surfaces` name, from the left.

    force (...,) [N]; none where it is zero on all trusses. A bearing below takes the load by itself and is left out.
    Places are shares of members, so that a batch shares them.
    """
    if not np.any(force):
        return []
    made = []
    for place, node, member, x in _walk(truss, surfaces):
        case = ActionCase(
            name=f"{what}, {place}",
            short=place,
            action=action,
            pattern="",
            loads=(),
            values=(Value(symbol=symbol, value=force, kind="force", clause=clause),),
        )
        made.append(Stop(case=case, node=node, member=member, x=x, force=np.asarray(force, float)))
    return made


def _walk(truss: Truss, surfaces: Sequence[str]) -> Iterator[tuple[str, int | None, int | None, Array]]:
    made = truss.topology
    seen = {s.node for s in made.supports if s.vertical}
    for k in sorted(made.on(*surfaces), key=lambda k: float(np.ravel(truss.start_xy[..., k, 0])[0])):
        member = made.members[k]
        start, end = truss.start_xy[..., k, 0], truss.end_xy[..., k, 0]
        if member.start not in seen:
            yield f"at {made.nodes[member.start]}", member.start, None, start
        yield f"middle of {member.name}", None, k, (start + end) / 2
        if member.end not in seen:
            yield f"at {made.nodes[member.end]}", member.end, None, end
        seen |= {member.start, member.end}
