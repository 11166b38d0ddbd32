"""Whether the roof over a truss is the symmetric gable that snow and wind cases are laid on."""

import numpy as np

from rooftruss.loads.roof import Roof
from rooftruss.shapes.truss import Truss

FIT = 5e-3  # [m] what a joint may lie off the roof line


def gable_fault(truss: Truss, roof: Roof) -> str:
    """What keeps the top chords of an unbatched truss from the symmetric gable of `roof`; "" where nothing does.

    The chords have to run from eave to eave, rise at the pitch from both bearings and meet over the middle.
    """
    chords = truss.topology.on("left tail", "left slope", "right slope", "right tail")
    start, end = truss.start_xy[chords], truss.end_xy[chords]
    span, pitch = float(roof.bearing_span), float(roof.pitch)
    tails = any(truss.topology.members[k].role == "tail" for k in chords)
    reach = float(roof.overhang) if tails else 0.0
    points = np.concatenate([start, end])
    above = points[:, 1] - pitch * np.minimum(points[:, 0], span - points[:, 0])
    if np.ptp(above) > FIT:
        name = truss.topology.nodes[int(_nodes(truss, chords)[np.abs(above - np.median(above)).argmax()])]
        return f"joint {name!r} of the top chord is not on slopes of {12 * pitch:.3g}/12 that meet over the middle"
    if np.any((start[:, 0] < span / 2 - FIT) & (end[:, 0] > span / 2 + FIT)):
        return "a top chord member runs through the middle of the span, where the ridge is"
    stops = sorted(zip(start[:, 0].tolist(), end[:, 0].tolist(), strict=True))
    here = -reach
    for low, high in stops:
        if abs(low - here) > FIT:
            return f"the top chords leave a gap or overlap {min(low, here):.2f} m right of the left bearing"
        here = high
    if abs(here - span - reach) > FIT:
        return "the top chords do not reach the right eave"
    return ""


def _nodes(truss: Truss, chords: list[int]) -> list[int]:
    made = truss.topology.members
    return [made[k].start for k in chords] + [made[k].end for k in chords]


def flattest_pitch(truss: Truss) -> float:
    """Least rise over run of the top chords of an unbatched truss."""
    run = truss.direction[truss.topology.on("left slope", "right slope")]
    return float(np.min(np.abs(run[:, 1] / run[:, 0])))
