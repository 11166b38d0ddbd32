"""Deflections of a run under the service combinations, beside their limits."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.effects import mid_deflections
from rooftruss.design.stages import Run

Array = NDArray[np.float64]
NO_CEILING = "none"  # row of the deflection limits for tail ends: no ceiling hangs there
SAME_PLACE = 1e-6  # [m]


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """Where a deflection is taken: a node or the middle of a member."""

    name: str
    kind: str  # "node" or "member"
    number: int
    direction: str  # "vertical" or "horizontal"


@dataclass(frozen=True, slots=True, kw_only=True)
class Deflections:
    """The deflection nearest to its limit at each place (..., place) [m], up and right positive; its limit [m],
    the ratio of the two, and the number of its combination among all."""

    places: tuple[Place, ...]
    value: Array
    limit: Array
    ratio: Array
    combination: NDArray[np.intp]


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


def _unit(run: Run, places: tuple[Place, ...]) -> Array:
    """Deflections of every case (..., c, place)."""
    middle = mid_deflections(run.truss, run.cases, run.effects, run.solution, run.stiffness_bending)
    moved = run.solution.displacements
    return np.stack(
        [
            middle[..., p.number] if p.kind == "member" else moved[..., p.number, int(p.direction == "vertical")]
            for p in places
        ],
        axis=-1,
    )


def _reach(run: Run, places: tuple[Place, ...]) -> Array:
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


def _tail_ends(run: Run, places: tuple[Place, ...]) -> set[int]:
    """Numbers of the places that are ends of tails: joints of no other member."""
    made = run.family.topology
    tails = {n for m in made.members if m.role == "tail" for n in (m.start, m.end)}
    tips = tails - {n for m in made.members if m.role != "tail" for n in (m.start, m.end)}
    return {k for k, p in enumerate(places) if p.kind == "node" and p.number in tips}


def deflections(run: Run) -> Deflections:
    """Deflections of all places under all service combinations against the limit of each combination's kind.

    The ceiling of the job decides on the limits, but for the ends of tails, under which none hangs.
    """
    places = places_of(run)
    unit, reach = _unit(run, places), _reach(run, places)
    ceiling, tips = run.family.job.limits.ceiling, _tail_ends(run, places)
    sideways = np.array([p.direction == "horizontal" for p in places])
    service = np.flatnonzero(~run.combinations.strength)
    kinds = [run.combinations.kinds[k] for k in service]
    actions = tuple(h.action for h in run.cases.heads)
    factors = run.family.timber.service_factors(
        run.combinations.factors[service], actions=actions, kinds=tuple(kinds), lasting=dict(run.family.scheme.lasting)
    )
    value = np.matmul(factors, unit)
    ratios = {c: [run.family.timber.deflection_ratio(c, kind) for kind in kinds] for c in {ceiling, NO_CEILING}}
    divisor = np.array([ratios[NO_CEILING if k in tips else ceiling] for k in range(len(places))]).T
    limit = reach[..., None, :] / divisor
    limit = np.where(sideways, run.family.job.limits.horizontal, limit)
    ratio = np.abs(value) / limit
    worst = ratio.argmax(axis=-2)
    pick = np.expand_dims(worst, -2)

    def taken(array: Array) -> Array:
        return np.take_along_axis(np.broadcast_to(array, ratio.shape), pick, -2).squeeze(-2)

    return Deflections(
        places=places, value=taken(value), limit=taken(limit), ratio=taken(ratio), combination=service[worst]
    )
