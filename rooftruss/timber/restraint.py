"""From the lateral restraint of a member to its effective and unsupported lengths across the plane of the truss."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from rooftruss.basis.job import Restraint
from rooftruss.errors import JobError, nearest
from rooftruss.timber.check import Array

SHARES = {"none": 1.0, "midpoint": 1 / 2, "third points": 1 / 3}
HELD_EDGE = {"top chord": "upper", "tail": "upper", "bottom chord": "lower"}


@dataclass(frozen=True, slots=True, kw_only=True)
class RestraintLengths:
    """Lengths (..., m) [m]: across the plane, and unsupported lengths of the upper and the lower edge; 0 is held."""

    le_weak: Array
    lu_positive: Array
    lu_negative: Array


def restraint_lengths(
    length: Array, restraints: Sequence[Restraint], panel: Array, roles: Sequence[str]
) -> RestraintLengths:
    """Lengths of members (..., m) that are `length` long between their own ends across the plane, `panel` in it.

    "sheathed": the outer edge (upper of a top chord or tail, lower of a bottom chord) is held throughout: no buckling
    across the plane, full C_L where that edge is compressed (NDS 3.3.3.3; EN 1995-1-1, 6.3.3(5)). The inner edge is
    unsupported from one panel point to the next: there the webs, fixed to the sheathed chord, hold it against rotation
    (NDS 3.3.3.4).
    "spacing", "midpoint", "third points": both edges are held at each restraint, which must stop displacement and
    rotation; "none": only at the ends of the member. A spacing beyond the member's own length counts as that length.
    Raises JobError for an unknown kind or a sheathed web.
    """
    length, panel = np.broadcast_arrays(np.asarray(length, dtype=float), np.asarray(panel, dtype=float))
    le_weak, lu_positive, lu_negative = (np.empty(length.shape) for _ in range(3))
    for n, (restraint, role) in enumerate(zip(restraints, roles, strict=True)):
        if restraint.kind == "sheathed":
            edge = _sheathed_edge(role)
            le_weak[..., n] = 0.0
            lu_positive[..., n] = 0.0 if edge == "upper" else panel[..., n]
            lu_negative[..., n] = 0.0 if edge == "lower" else panel[..., n]
        else:
            held = _held(restraint, length[..., n])
            le_weak[..., n] = lu_positive[..., n] = lu_negative[..., n] = held
    return RestraintLengths(le_weak=le_weak, lu_positive=lu_positive, lu_negative=lu_negative)


def _sheathed_edge(role: str) -> str:
    if role not in HELD_EDGE:
        raise JobError(f"restraint 'sheathed' is for chords, not for a {role}; write a spacing, 'midpoint' or 'none'")
    return HELD_EDGE[role]


def _held(restraint: Restraint, length: Array) -> Array:
    if restraint.kind == "spacing":
        if not restraint.spacing or restraint.spacing < 0:
            raise JobError("restraint by spacing needs the distance between restraints, for example '24 in'")
        return np.minimum(restraint.spacing, length)
    if restraint.kind not in SHARES:
        known = ("sheathed", "spacing", *SHARES)
        raise JobError(f"restraint {restraint.kind!r} is not known; {nearest(restraint.kind, known)}")
    return length * SHARES[restraint.kind]
