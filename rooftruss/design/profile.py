"""Whether trusses are of the kind that a simplified analysis is kept to."""

from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from rooftruss.design.family import Family
from rooftruss.errors import OutOfScopeError
from rooftruss.shapes.truss import Truss
from rooftruss.timber.terms import Simplified
from rooftruss.units import shown

Array = NDArray[np.float64]
FIT = 1e-6  # of the square of the span: a corner that turns by less is straight
NEAR = 1e-3  # [m]
STRAIGHT = 0.02  # sine of the angle between members of one line, about 1 deg
FRAME = 'write [timber] truss_analysis = "frame"'


def height_of(truss: Truss) -> Array:
    """Height (...,) [m] between the highest and the lowest joint of the chords, tails left out."""
    y = truss.xy[..., _chord_joints(truss), 1]
    return np.asarray(y.max(axis=-1) - y.min(axis=-1))


def deepest_chord(truss: Truss, rules: Simplified) -> Array:
    """Depth (...,) [m] that the chords have to stay below for the simplified analysis."""
    return height_of(truss) / rules.height_over_depth


def require_profile(family: Family, truss: Truss, depth: Array, rules: Simplified) -> None:
    """Raise OutOfScopeError unless the simplified analysis of `rules` is for these trusses.

    It asks for chords in one line between hinges, bearings at the ends, no re-entrant corner, and a height over the
    span and over the depth (...,) [m] of the deeper chord.
    """
    units = family.job.units
    _require_straight(truss, rules)
    _require_end_bearings(truss, rules)
    corner = _reentrant(truss)
    if corner is not None:
        raise OutOfScopeError(
            f"{rules.clause}(1): the simplified analysis is for trusses without re-entrant corners, here the chords "
            f"turn inwards at {corner}; {FRAME}"
        )
    height = height_of(truss)
    span = np.asarray(family.size.bearing_span)
    for least, what in (
        (rules.height_over_span * span, f"{rules.height_over_span:g} times the span"),
        (rules.height_over_depth * depth, f"{rules.height_over_depth:g} times the depth of the deeper chord"),
    ):
        least = np.broadcast_to(least, np.broadcast_shapes(least.shape, height.shape))
        low = np.flatnonzero(np.ravel(height <= least))
        if low.size:
            tall = np.broadcast_to(height, least.shape)
            raise OutOfScopeError(
                f"{rules.clause}(1): the simplified analysis is for trusses higher than {what}, here "
                f"{shown(float(np.ravel(least)[low[0]]), 'length', units)}, and the truss is "
                f"{shown(float(np.ravel(tall)[low[0]]), 'length', units)} high; {FRAME}"
            )


def _require_straight(truss: Truss, rules: Simplified) -> None:
    """Chords are beams in one line: where members pass moment to each other, they are two that go straight on."""
    made = truss.topology
    for node, name in enumerate(made.nodes):
        stiff = [
            k
            for k, m in enumerate(made.members)
            if (m.start == node and not m.pinned_start) or (m.end == node and not m.pinned_end)
        ]
        for a, b in combinations(stiff, 2):
            one, other = truss.direction[..., a, :], truss.direction[..., b, :]
            turn = np.abs(one[..., 0] * other[..., 1] - one[..., 1] * other[..., 0])
            if len(stiff) > 2 or np.any(turn > STRAIGHT):
                raise OutOfScopeError(
                    f"{rules.clause}(3): the simplified analysis takes chords as beams in one line, and here "
                    f"{made.names[a]!r} and {made.names[b]!r} pass moment to each other at joint {name!r}; pin them "
                    f"there, or {FRAME}"
                )


def _require_end_bearings(truss: Truss, rules: Simplified) -> None:
    """Bearings stand below the ends of the chords."""
    made = truss.topology
    x = truss.xy[..., 0]
    ends = x[..., _chord_joints(truss)]
    for support in made.supports:
        here = x[..., support.node]
        inside = (here > ends.min(axis=-1) + NEAR) & (here < ends.max(axis=-1) - NEAR)
        if np.any(inside):
            raise OutOfScopeError(
                f"{rules.clause}(1): the simplified analysis is for trusses that bear at their heels, and here a "
                f"bearing stands below joint {made.nodes[support.node]!r}; {FRAME}"
            )


def _chord_joints(truss: Truss) -> list[int]:
    made = truss.topology
    return sorted({n for m in made.members if m.role.endswith("chord") for n in (m.start, m.end)})


def _reentrant(truss: Truss) -> str | None:
    """Panel point where the outline turns inwards in some truss of the batch; None where it does not.

    The outline runs along the bottom chord and back along the top chord; every turn of it has to be to the left.
    """
    made = truss.topology
    bottom = _line(truss, made.on("ceiling"))
    top = _line(truss, made.on("left slope", "right slope"))
    ring = list(dict.fromkeys([*bottom, *reversed(top)]))
    xy = truss.xy[..., ring, :]
    step = np.roll(xy, -1, axis=-2) - xy
    turn = np.roll(step, 1, axis=-2)
    cross = turn[..., 0] * step[..., 1] - turn[..., 1] * step[..., 0]
    size = np.ptp(truss.xy[..., 0], axis=-1)[..., None] ** 2
    inward = np.reshape(cross < -FIT * size, (-1, len(ring))).any(axis=0)
    return made.nodes[ring[int(inward.argmax())]] if inward.any() else None


def _line(truss: Truss, members: list[int]) -> list[int]:
    """Joints of chord members from left to right."""
    nodes = {n for k in members for n in (truss.topology.members[k].start, truss.topology.members[k].end)}
    x = truss.xy.reshape(-1, *truss.xy.shape[-2:])[0, :, 0]
    return sorted(nodes, key=lambda n: float(x[n]))
