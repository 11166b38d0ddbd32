"""Places of a truss where deflections are taken, how far each case moves them, and the length their limits go by."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.effects import mid_deflections
from rooftruss.design.stages import Run

Array = NDArray[np.float64]
SAME_PLACE = 1e-6  # [m]


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """Where a deflection is taken: a node or the middle of a member."""

    name: str
    kind: str  # "node" or "member"
    number: int
    direction: str  # "vertical" or "horizontal"


def places_of(run: Run) -> tuple[Place, ...]:
    """Panel points and tail ends, middles of chord members, and the sideways movement of each roller."""
    made = run.family.topology
    held = {s.node for s in made.supports if s.vertical}
    nodes = [
        Place(name=n, kind="node", number=k, direction="vertical") for k, n in enumerate(made.nodes) if k not in held
    ]
    chords = [
        Place(name=m.name, kind="member", number=k, direction="vertical")
        for k, m in enumerate(made.members)
        if m.role.endswith("chord")
    ]
    rollers = [
        Place(name=made.nodes[s.node], kind="node", number=s.node, direction="horizontal")
        for s in made.supports
        if not s.horizontal
    ]
    return (*nodes, *chords, *rollers)


def unit_movements(run: Run, places: tuple[Place, ...]) -> Array:
    """Deflections of every place under every case (..., place, c)."""
    middle = mid_deflections(run.truss, run.cases, run.frame_effects, run.solution, run.stiffness_bending)
    moved = run.solution.displacements
    return np.stack(
        [
            middle[..., p.number] if p.kind == "member" else moved[..., p.number, int(p.direction == "vertical")]
            for p in places
        ],
        axis=-2,
    )


def reaches(run: Run, places: tuple[Place, ...]) -> Array:
    """Length l of the limits l/x for each place (..., place): between the bearings on either side of it, or twice the
    cantilever beyond the last one."""
    made, truss = run.family.topology, run.truss
    at = truss.xy[..., [s.node for s in made.supports if s.vertical], 0]
    middles = (truss.start_xy[..., 0] + truss.end_xy[..., 0]) / 2
    x = np.stack([middles[..., p.number] if p.kind == "member" else truss.xy[..., p.number, 0] for p in places], -1)
    beyond = np.maximum(at[..., :1] - x, x - at[..., -1:])
    after = np.sum(x[..., None] >= at[..., None, :] - SAME_PLACE, axis=-1)
    left = np.clip(after - 1, 0, at.shape[-1] - 2)
    between = np.take_along_axis(at, left + 1, -1) - np.take_along_axis(at, left, -1)
    return np.where(beyond > SAME_PLACE, 2 * beyond, between)


def tail_ends(run: Run, places: tuple[Place, ...]) -> set[int]:
    """Numbers of the places that are ends of tails: joints of no other member."""
    made = run.family.topology
    tails = {n for m in made.members if m.role == "tail" for n in (m.start, m.end)}
    tips = tails - {n for m in made.members if m.role != "tail" for n in (m.start, m.end)}
    return {k for k, p in enumerate(places) if p.kind == "node" and p.number in tips}
