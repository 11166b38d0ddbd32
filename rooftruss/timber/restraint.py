"""From the lateral restraint of a member to its effective and unsupported lengths across the plane of the truss."""

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from rooftruss.basis.job import Restraint
from rooftruss.errors import JobError, nearest
from rooftruss.timber.terms import Array

SHARES = {"none": 1.0, "midpoint": 1 / 2, "third points": 1 / 3}
HELD_EDGE = {"top chord": "upper", "tail": "upper", "bottom chord": "lower"}
WHOLE_CHORD = ("top chord", "bottom chord")


class RestraintLengths(NamedTuple):
    """Lengths (..., m) [m]: across the plane, and unsupported lengths of the upper and the lower edge; 0 is held."""

    le_weak: Array
    lu_positive: Array
    lu_negative: Array


def restraint_lengths(length: Array, roles: Sequence[str], restraints: Sequence[Restraint]) -> RestraintLengths:
    """Lengths of members (..., m) that are `length` long from panel point to panel point.

    "sheathed": the outer edge (upper of a top chord or tail, lower of a bottom chord) is held throughout: no buckling
    across the plane, full C_L where that edge is compressed (NDS 3.3.3.3; EN 1995-1-1, 6.3.3(5)). The inner edge is
    unsupported from one panel point to the next: there the webs, fixed to the sheathed chord, hold it against rotation
    (NDS 3.3.3.4).
    "spacing", "midpoint", "third points": both edges are held at each restraint, which must stop displacement and
    rotation; "none": only at the ends. Panel points do not hold a chord across the plane: without sheathing, the ends
    of a chord panel are those of the whole chord (all members of its role), and a spacing may span several panels.
    A spacing beyond the whole length counts as that length.
    Raises JobError for an unknown kind or a sheathed web.
    """
    length = np.asarray(length, dtype=np.float64)
    le_weak, lu_positive, lu_negative = (np.empty(length.shape) for _ in range(3))
    for n, (restraint, role) in enumerate(zip(restraints, roles, strict=True)):
        own = length[..., n]
        if restraint.kind == "sheathed":
            edge = _sheathed_edge(role)
            le_weak[..., n] = 0.0
            lu_positive[..., n] = 0.0 if edge == "upper" else own
            lu_negative[..., n] = 0.0 if edge == "lower" else own
        else:
            whole = length[..., [role == r for r in roles]].sum(axis=-1) if role in WHOLE_CHORD else own
            le_weak[..., n] = lu_positive[..., n] = lu_negative[..., n] = _held(restraint, whole)
    return RestraintLengths(le_weak, lu_positive, lu_negative)


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
