"""Load cases on the members of a truss: what the surface loads of `roof` become on each member.

Members are cut into segments, so that every load of every case is uniform over a whole segment; point loads
stand at the start of a segment. Which member a segment belongs to is fixed; its ends may differ over a batch.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from rooftruss.loads.roof import ActionCase, SurfaceLoad
from rooftruss.shapes.truss import Truss

Array = NDArray[np.float64]
TAILS = ("left tail", "right tail")


@dataclass(frozen=True, slots=True, kw_only=True)
class MemberPoint:
    """A point load on a member: its case, member, distance from the member's start and force (right, up) (...,)."""

    case: int
    member: int
    at: Array
    fx: Array
    fy: Array


@dataclass(frozen=True, kw_only=True)
class LoadCases:
    """All load cases of one truss or of a batch.

    heads (c,); member_of (s,) member of each segment, ascending; x0, x1 (..., s) its ends from the member's start [m];
    q (..., c, s, 2) load per member length, global right and up [N/m]; points; nodal (..., c, node, 2) [N].
    """

    heads: tuple[ActionCase, ...]
    member_of: tuple[int, ...]
    x0: Array
    x1: Array
    q: Array
    points: tuple[MemberPoint, ...]
    nodal: Array

    @property
    def names(self) -> tuple[str, ...]:
        """Case names."""
        return tuple(h.name for h in self.heads)


@dataclass(frozen=True, slots=True, kw_only=True)
class ChordPoint:
    """A point load given in plan: chord surfaces, position x from the left bearing centre [m], downward force [N]."""

    case: int
    member: int  # the chord member below x
    x: Array
    force: Array


def member_at(truss: Truss, chord: str, x: float) -> int | None:
    """Number of the member of a chord ("top" or "bottom") above or below the place x of an unbatched truss."""
    surfaces = ("left tail", "left slope", "right slope", "right tail") if chord == "top" else ("ceiling",)
    for k in truss.topology.on(*surfaces):
        if truss.start_xy[k, 0] - 1e-9 <= x <= truss.end_xy[k, 0] + 1e-9:
            return k
    return None


def lay_on(
    truss: Truss, heads: Sequence[ActionCase], spacing: Array, self_weight: Array, points: Sequence[ChordPoint] = ()
) -> LoadCases:
    """Put the surface loads of all cases on the members.

    self_weight (..., m) [N/m] acts in every case whose loads name the surface "self-weight".
    """
    breaks = _breaks(truss, heads, points)
    member_of, x0, x1 = _segments(truss, breaks)
    batch = np.broadcast_shapes(truss.xy.shape[:-2], self_weight.shape[:-1], np.shape(spacing))
    # in memory segment by segment, as the analysis wants them; seen as (..., c, s, 2)
    q = np.moveaxis(np.zeros((2, len(member_of), *batch, len(heads))), (0, 1), (-1, -2))
    nodal = np.zeros((*batch, len(heads), len(truss.topology.nodes), 2))
    surface_of = [truss.topology.members[k].surface for k in member_of]
    for c, head in enumerate(heads):
        for load in head.loads:
            if load.surface == "self-weight":
                q[..., c, :, 1] -= self_weight[..., list(member_of)] * load.pressure
                continue
            here = [s for s, surface in enumerate(surface_of) if surface == load.surface]
            if here:  # segments of one surface stand side by side, so a slice reaches them without a copy
                part = slice(here[0], here[-1] + 1) if here[-1] - here[0] + 1 == len(here) else here
                q[..., c, part, :] += _on_segments(truss, load, spacing, [member_of[s] for s in here], x0, x1, here)
            elif load.surface in TAILS:
                _to_heel(truss, load, spacing, nodal[..., c, :, :])
    return LoadCases(
        heads=tuple(heads),
        member_of=member_of,
        x0=np.broadcast_to(x0, (*batch, len(member_of))),
        x1=np.broadcast_to(x1, (*batch, len(member_of))),
        q=q,
        points=tuple(_member_point(truss, p) for p in points),
        nodal=nodal,
    )


def _breaks(truss: Truss, heads: Sequence[ActionCase], points: Sequence[ChordPoint]) -> dict[int, list[Array]]:
    """Plan positions at which each member must be cut."""
    found: dict[int, list[Array]] = {}
    seen: set[tuple[str, int]] = set()
    for head in heads:
        for load in head.loads:
            for x in (load.x_from, load.x_to):
                if x is None or (load.surface, id(x)) in seen:
                    continue
                seen.add((load.surface, id(x)))
                for k in truss.topology.on(load.surface):
                    if _cuts(truss, k, x) and not any(np.array_equal(x, y) for y in found.get(k, [])):
                        found.setdefault(k, []).append(x)
    for point in points:
        found.setdefault(point.member, []).append(point.x)
    return found


def _cuts(truss: Truss, k: int, x: Array) -> bool:
    """Whether a plan position falls inside member k in any truss of the batch."""
    inside = (x > truss.start_xy[..., k, 0]) & (x < truss.end_xy[..., k, 0])
    return bool(np.any(inside))


def _segments(truss: Truss, breaks: dict[int, list[Array]]) -> tuple[tuple[int, ...], Array, Array]:
    member_of: list[int] = []
    ends: list[tuple[Array, Array]] = []
    zero = np.zeros(truss.xy.shape[:-2])
    for k in range(len(truss.topology.members)):
        length = truss.length[..., k]
        cuts = [_along(truss, k, x) for x in breaks.get(k, [])]
        inner = list(np.sort(np.stack(np.broadcast_arrays(*cuts)), axis=0)) if cuts else []
        stops = [zero, *inner, length]
        for a, b in pairwise(stops):
            member_of.append(k)
            ends.append((a, b))
    x0, x1 = (np.stack(np.broadcast_arrays(*(pair[i] for pair in ends)), axis=-1) for i in (0, 1))
    return tuple(member_of), x0, x1


def _along(truss: Truss, k: int, x: Array) -> Array:
    """Distance along member k of the plan position x, kept on the member."""
    start, end = truss.start_xy[..., k, 0], truss.end_xy[..., k, 0]
    return np.clip((x - start) / (end - start), 0.0, 1.0) * truss.length[..., k]


def _on_segments(
    truss: Truss, load: SurfaceLoad, spacing: Array, members: list[int], x0: Array, x1: Array, here: list[int]
) -> Array:
    """Load per member length (..., segment, 2) of one surface load on the segments `here`."""
    cos, sin = truss.direction[..., members, 0], truss.direction[..., members, 1]
    line = (np.asarray(load.pressure) * spacing)[..., None]
    q = np.stack(np.broadcast_arrays(*per_length(load.kind, line, cos, sin)), axis=-1)
    if load.x_from is None and load.x_to is None:
        return q
    middle = truss.start_xy[..., members, 0] + cos * (x0 + x1)[..., here] / 2
    low = -np.inf if load.x_from is None else np.asarray(load.x_from)[..., None]
    high = np.inf if load.x_to is None else np.asarray(load.x_to)[..., None]
    return q * ((middle > low) & (middle < high))[..., None]


def per_length(kind: str, line: Array, cos: Array, sin: Array) -> tuple[Array, Array]:
    """Horizontal and vertical load per member length of a load `line` [N/m] of one kind of SurfaceLoad.

    >>> [float(x) for x in per_length("plan", np.array(100.0), np.array(0.8), np.array(0.6))]
    [0.0, -80.0]
    >>> [float(x) for x in per_length("normal", np.array(100.0), np.array(0.8), np.array(-0.6))]
    [-60.0, -80.0]
    """
    if kind == "plan":
        return 0.0 * line, -line * np.abs(cos)
    if kind == "slope":
        return 0.0 * line, -line + 0.0 * cos
    if kind == "normal":
        return line * sin, -line * cos
    if kind == "right":
        return line * np.abs(sin), 0.0 * line
    raise ValueError(f"unknown kind of surface load {kind!r}")


def _to_heel(truss: Truss, load: SurfaceLoad, spacing: Array, nodal: Array) -> None:
    """Without a tail, the roof over the outer half of a bearing presses on the joint over it: on the heel, or on the
    upper end of the one slope of a monopitch."""
    left = load.surface == "left tail"
    chords = truss.topology.on("left slope", "right slope")
    if not chords:
        return
    chord = chords[0] if left else chords[-1]
    node = truss.topology.members[chord].start if left else truss.topology.members[chord].end
    cos, sin = truss.direction[..., chord, 0], truss.direction[..., chord, 1]
    length = truss.bearing / 2 / cos * _covered(truss, load, node, left=left)
    qx, qy = per_length(load.kind, np.asarray(load.pressure) * spacing, cos, sin)
    nodal[..., node, 0] += qx * length
    nodal[..., node, 1] += qy * length


def _covered(truss: Truss, load: SurfaceLoad, node: int, *, left: bool) -> Array:
    """Share of the outer half of the bearing below a joint that a stretch of load covers (...,)."""
    end, half = truss.xy[..., node, 0], truss.bearing / 2
    low, high = (end - half, end) if left else (end, end + half)
    start = low if load.x_from is None else np.clip(load.x_from, low, high)
    stop = high if load.x_to is None else np.clip(load.x_to, low, high)
    return np.asarray(np.maximum(stop - start, 0.0) / half)


def _member_point(truss: Truss, point: ChordPoint) -> MemberPoint:
    at = _along(truss, point.member, point.x)
    return MemberPoint(case=point.case, member=point.member, at=at, fx=np.zeros_like(at), fy=-point.force + 0 * at)


def loads_by_segment(cases: LoadCases) -> tuple[Array, Array]:
    """Horizontal and vertical load per length (s, b, c), batch axes joined; no copy of cases that `lay_on` made."""
    rows = np.moveaxis(cases.q, (-2, -1), (1, 0))  # (2, s, ..., c)
    flat = rows.reshape(2, rows.shape[1], -1, rows.shape[-1])
    return flat[0], flat[1]


def sum_segments(values: Array, member_of: Sequence[int], out: Array) -> Array:
    """Sums of segment values (s, ...) over each member, written to `out` (m, ...)."""
    first, rest = first_segments(tuple(member_of))
    out[...] = values[first]
    for s in rest:
        out[member_of[s]] += values[s]
    return out


@cache
def first_segments(member_of: tuple[int, ...]) -> tuple[NDArray[np.intp], tuple[int, ...]]:
    """Numbers of the first segment of each member, and of all other segments."""
    first = np.searchsorted(np.array(member_of), np.arange(member_of[-1] + 1))
    return first, tuple(s for s in range(len(member_of)) if s not in set(first.tolist()))
