"""Which form the roof over a custom truss has: the gable or the monopitch that snow and wind cases are laid on."""

from collections.abc import Callable, Mapping
from dataclasses import fields, replace

import numpy as np
from numpy.typing import NDArray

from rooftruss.loads.roof import GABLE, MONOPITCH, SIDES, Roof
from rooftruss.shapes.truss import Truss

Array = NDArray[np.float64]
# form -> what keeps a roof from it, "" where nothing does; the form it looks like comes first
Faults = Mapping[str, str]
ROOF = ("left tail", "left slope", "right slope", "right tail")
FIT = 5e-3  # [m] what a joint may lie off the roof line
LEVEL = 1e-6  # [m] up to which a chord does not rise


def formed(roof: Roof, truss: Truss) -> tuple[Roof, Faults]:
    """The roof in the form that the top chords of an unbatched custom truss give it, and what keeps it from each form.

    roof may be a batch; it is of a form where every pitch and span of the batch fits it. A roof of no form keeps that
    of a gable, with the pitch of its flattest chord where that is less.
    """
    single = _each(roof)
    low = _low_side(truss)
    faults = {GABLE: next(filter(None, (gable_fault(truss, one) for one in single)), "")}
    if low:
        faults = {MONOPITCH: next(filter(None, (monopitch_fault(truss, one, low) for one in single)), ""), **faults}
        if not faults[MONOPITCH]:
            bare = [side for side in SIDES if not truss.topology.on(f"{side} tail")]
            rise = np.asarray(roof.pitch * roof.bearing_span)
            return replace(roof, form=MONOPITCH, low=low, bare=bare[0] if len(bare) == 1 else "", rise=rise), faults
    if faults[GABLE]:
        roof = replace(roof, pitch=np.minimum(roof.pitch, flattest_pitch(truss)))
    return roof, faults


def gable_fault(truss: Truss, roof: Roof) -> str:
    """What keeps the top chords of an unbatched truss from the symmetric gable of `roof`; "" where nothing does.

    The chords have to run from eave to eave, rise at the pitch from both bearings and meet over the middle.
    """
    span, pitch = float(roof.bearing_span), float(roof.pitch)
    chords = truss.topology.on(*ROOF)
    start, end = truss.start_xy[chords, 0], truss.end_xy[chords, 0]
    if name := _off_line(truss, lambda x: pitch * np.minimum(x, span - x)):
        slopes = f"{12 * pitch:.3g}/12 ({np.degrees(np.arctan(pitch)):.3g} deg)"
        return f"joint {name!r} of the top chord is not on slopes of {slopes} that meet over the middle"
    if np.any((start < span / 2 - FIT) & (end > span / 2 + FIT)):
        return "a top chord member runs through the middle of the span, where the ridge is"
    reach = float(roof.overhang) if truss.topology.on("left tail", "right tail") else 0.0
    return _gap(truss, -reach, span + reach)


def monopitch_fault(truss: Truss, roof: Roof, low: str) -> str:
    """What keeps the top chords of an unbatched truss from one slope that rises at the pitch of `roof` from the `low`
    eave ("left" or "right") to the other; "" where nothing does. Either end may have a tail or none.
    """
    pitch = float(roof.pitch) * (1 if low == "left" else -1)
    if name := _off_line(truss, lambda x: pitch * x):
        slope = f"{np.degrees(np.arctan(abs(pitch))):.1f} deg ({12 * abs(pitch):.3g}/12)"
        return f"joint {name!r} of the top chord is not on one slope of {slope} from eave to eave"
    left, right = (float(roof.overhang) if truss.topology.on(f"{side} tail") else 0.0 for side in SIDES)
    return _gap(truss, -left, float(roof.bearing_span) + right)


def _each(roof: Roof) -> list[Roof]:
    """The different roofs of a batch, unbatched."""
    names = [f.name for f in fields(roof) if f.name not in ("form", "low", "bare")]
    columns = np.stack([np.ravel(c) for c in np.broadcast_arrays(*(getattr(roof, n) for n in names))], axis=-1)
    return [
        replace(roof, **dict(zip(names, map(np.asarray, row), strict=True)))  # type: ignore[arg-type]
        for row in np.unique(columns, axis=0)
    ]


def _low_side(truss: Truss) -> str:
    """Side that every top chord rises from; "" where they rise from both, or one is level."""
    rise = (truss.end_xy - truss.start_xy)[truss.topology.on("left slope", "right slope"), 1]
    if np.all(rise > LEVEL):
        return "left"
    return "right" if np.all(rise < -LEVEL) else ""


def _off_line(truss: Truss, height: Callable[[Array], Array]) -> str:
    """Name of the joint of the top chords that is farthest off the roof line height(x) + constant; "" within FIT."""
    chords = truss.topology.on(*ROOF)
    members = truss.topology.members
    nodes = [members[k].start for k in chords] + [members[k].end for k in chords]
    above = truss.xy[nodes, 1] - height(truss.xy[nodes, 0])
    if np.ptp(above) <= FIT:
        return ""
    return truss.topology.nodes[nodes[int(np.abs(above - np.median(above)).argmax())]]


def _gap(truss: Truss, left: float, right: float) -> str:
    """Where the top chords do not run one after the other from the plan position left to right [m]; "" if they do."""
    chords = truss.topology.on(*ROOF)
    here = left
    for low, high in sorted(zip(truss.start_xy[chords, 0].tolist(), truss.end_xy[chords, 0].tolist(), strict=True)):
        if abs(low - here) > FIT:
            return f"the top chords leave a gap or overlap {min(low, here):.2f} m right of the left bearing"
        here = high
    return "" if abs(here - right) <= FIT else "the top chords do not reach the right eave"


def flattest_pitch(truss: Truss) -> float:
    """Least rise over run of the top chords of an unbatched truss."""
    run = truss.direction[truss.topology.on("left slope", "right slope")]
    return float(np.min(np.abs(run[:, 1] / run[:, 0])))
