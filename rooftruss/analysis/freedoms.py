"""Numbering of the movements of a topology, and the beam element with or without moment-free ends."""

from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from rooftruss.shapes.truss import Topology

Array = NDArray[np.float64]
DIRECTIONS = ("horizontally", "vertically", "in rotation")

# Transverse shape functions of a prismatic beam (Bernoulli-Euler), N_i(xi) = sum_k a[i, k] xi^k, for unit values of
# [deflection at start, rotation at start, deflection at end, rotation at end]; rotations are multiplied by the length.
# Keyed by (start is pinned, end is pinned). The cubic Hermite polynomials and their static condensations.
SHAPE_FUNCTIONS = {
    (False, False): [[1, 0, -3, 2], [0, 1, -2, 1], [0, 0, 3, -2], [0, 0, -1, 1]],
    (True, False): [[1, -1.5, 0, 0.5], [0, 0, 0, 0], [0, 1.5, 0, -0.5], [0, -0.5, 0, 0.5]],
    (False, True): [[1, 0, -1.5, 0.5], [0, 1, -1.5, 0.5], [0, 0, 1.5, -0.5], [0, 0, 0, 0]],
    (True, True): [[1, -1, 0, 0], [0, 0, 0, 0], [0, 1, 0, 0], [0, 0, 0, 0]],
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Freedoms:
    """Numbering of free and held movements.

    of_member (m, 6): number of [u, v, rotation] at start and end; numbers from `free` on are held (supports), and the
    last number `total` stands for a rotation that does not exist. label[k] = (node, direction) of movement k.
    """

    of_member: NDArray[np.intp]
    of_node: NDArray[np.intp]  # (node, 2)
    free: int
    total: int
    label: tuple[tuple[int, int], ...]


@cache
def freedoms(topology: Topology) -> Freedoms:
    """Number the movements of a topology: free translations and rotations first, then those the supports hold."""
    held = {(s.node, d) for s in topology.supports for d, on in ((0, s.horizontal), (1, s.vertical)) if on}
    turning = {m.start for m in topology.members if not m.pinned_start}
    turning |= {m.end for m in topology.members if not m.pinned_end}
    every = [(n, d) for n in range(len(topology.nodes)) for d in (0, 1)] + [(n, 2) for n in sorted(turning)]
    label = [x for x in every if x not in held] + [x for x in every if x in held]
    number = {x: k for k, x in enumerate(label)}
    none = len(label)

    def at_end(node: int, pinned: bool) -> list[int]:
        return [number[node, 0], number[node, 1], none if pinned else number[node, 2]]

    rows = [[*at_end(m.start, m.pinned_start), *at_end(m.end, m.pinned_end)] for m in topology.members]
    return Freedoms(
        of_member=np.array(rows),
        of_node=np.array([[number[n, 0], number[n, 1]] for n in range(len(topology.nodes))]),
        free=len(label) - len(held),
        total=none,
        label=tuple(label),
    )


@cache
def shape_coefficients(topology: Topology) -> Array:
    """Coefficients of the transverse shape functions (m, 4, 4) [freedom, power]."""
    return np.array([SHAPE_FUNCTIONS[m.pinned_start, m.pinned_end] for m in topology.members], dtype=float)


@cache
def bending_coefficients(topology: Topology) -> Array:
    """Bending stiffness (m, 4, 4) for EI = L = 1: the integral of N_i'' N_j'' over the member, by its polynomials."""
    a = shape_coefficients(topology)
    second = np.stack([2 * a[..., 2], 6 * a[..., 3]], axis=-1)  # N'' = second[0] + second[1] xi
    moments = np.array([[1, 1 / 2], [1 / 2, 1 / 3]])
    return np.asarray(np.einsum("mip,pq,mjq->mij", second, moments, second))
