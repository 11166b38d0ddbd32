"""Simplified analysis of a triangulated truss: axial forces with pinned joints, chords as beams on the panel points.

Its forces are linear in the loads like those of the frame, so what follows (effects, combinations) is the same.
"""

from dataclasses import replace
from functools import cache

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.frame import Solution, solve
from rooftruss.analysis.inspection import joint_forces
from rooftruss.loads.cases import LoadCases
from rooftruss.shapes.truss import Support, Topology, Truss

Array = NDArray[np.float64]


def simplified_solution(
    truss: Truss, stiffness_axial: Array, stiffness_bending: Array, cases: LoadCases, *, support_moments: float
) -> Solution:
    """End forces and reactions of every case; EN 1995-1-1, 5.4.3(2) and (3). displacements are those of the joints of
    the pin-jointed truss.

    Continuous chords are beams on a support at every panel point; their moments there are taken `support_moments`
    [-] times, which stands for the give of the joints, and those in the bays follow. The moment of a tail at the heel
    is given by its own load and stays. The supports of the beams press on the joints of the pin-jointed truss.
    stiffness_axial EA [N] (..., m) matters where that truss is indeterminate, stiffness_bending EI [N m2] (..., m).
    Raises UnstableTrussError where the truss does not stand with pinned joints.
    """
    beams = replace(truss, topology=_on_supports(truss.topology))
    forces = solve(beams, stiffness_axial, stiffness_bending, cases).end_forces.copy()
    less = (support_moments - 1.0) * forces[..., 2::3] * _inner_ends(truss.topology)
    forces[..., 2::3] += less
    shear = less.sum(axis=-1) / truss.length[..., None, :]
    forces[..., 1] += shear
    forces[..., 4] -= shear
    pinned = joint_forces(truss, stiffness_axial, _on_joints(truss, forces, cases.nodal), cases)
    forces[..., 0] += pinned.end_forces[..., 0]
    forces[..., 3] += pinned.end_forces[..., 3]
    return Solution(displacements=pinned.displacements, end_forces=forces, reactions=pinned.reactions)


@cache
def _on_supports(topology: Topology) -> Topology:
    """The topology with every joint held but the tips of tails: chords become beams on their panel points."""
    tips = _tips(topology)
    held = (Support(node=n, horizontal=True, vertical=True) for n in range(len(topology.nodes)) if n not in tips)
    return replace(topology, supports=tuple(held))


@cache
def _tips(topology: Topology) -> frozenset[int]:
    """Free ends of tails."""
    tails = {n for m in topology.members if m.role == "tail" for n in (m.start, m.end)}
    return frozenset(tails - {n for m in topology.members if m.role != "tail" for n in (m.start, m.end)})


@cache
def _inner_ends(topology: Topology) -> Array:
    """1 for each end (m, 2) at an inner support of its beam, 0 where a tail fixes the moment or there is none."""
    tails = {n for m in topology.members if m.role == "tail" for n in (m.start, m.end)}
    return np.array([[float(n not in tails) for n in (m.start, m.end)] for m in topology.members])


def _on_joints(truss: Truss, forces: Array, nodal: Array) -> Array:
    """Loads (..., c, node, 2) on the joints: those given, and what the members press on them."""
    cos, sin = truss.direction[..., None, :, 0], truss.direction[..., None, :, 1]
    out = np.broadcast_to(nodal, (*forces.shape[:-2], *nodal.shape[-2:])).copy()
    for along, across, nodes in ((0, 1, truss.topology.start), (3, 4, truss.topology.end)):
        x = cos * forces[..., along] - sin * forces[..., across]
        y = sin * forces[..., along] + cos * forces[..., across]
        for k, node in enumerate(nodes):
            out[..., node, 0] -= x[..., k]
            out[..., node, 1] -= y[..., k]
    return out
