"""Plane frame: one stiffness matrix per truss, every load case a right-hand side of it.

Members are Bernoulli-Euler beams on their centre lines; moment-free ends are condensed into the element.
Batch axes lead outside; `b` below stands for one flattened batch axis. Member-end values are (6, m, b, c) inside this
module, [along, across, rotation] at the start and the end first: each row of one member is one block of memory.
"""

from dataclasses import dataclass, replace
from functools import cache

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.freedoms import DIRECTIONS, Freedoms, bending_coefficients, freedoms, shape_coefficients
from rooftruss.errors import UnstableTrussError
from rooftruss.loads.cases import LoadCases, MemberPoint, loads_by_segment, sum_segments
from rooftruss.shapes.truss import Topology, Truss

Array = NDArray[np.float64]
SINGULAR = 1e-11  # smallest eigenvalue of the scaled stiffness below which the truss counts as a mechanism
START, END = (0, 1, 2), (3, 4, 5)


@dataclass(frozen=True, kw_only=True)
class Solution:
    """Movements and end forces of every case.

    displacements (..., c, node, 2) [m], rotations at member ends are not kept; end_forces (..., c, m, 6) in member
    axes [axial, transverse, moment] at start and end, acting on the member [N, N m]; reactions (..., c, support, 2) [N]
    """

    displacements: Array
    end_forces: Array
    reactions: Array


def solve(truss: Truss, stiffness_axial: Array, stiffness_bending: Array, cases: LoadCases) -> Solution:
    """Solve all cases of a batch with one factorisation per truss.

    stiffness_axial EA [N] and stiffness_bending EI [N m2] are (..., m).
    Raises UnstableTrussError that names a joint and a direction when the truss is a mechanism.
    """
    made, batch = truss.topology, cases.q.shape[:-3]
    number = freedoms(made)
    length, direction = _flat(truss.length, batch, 1), _flat(truss.direction, batch, 2)
    ea, ei = _flat(stiffness_axial, batch, 1), _flat(stiffness_bending, batch, 1)
    nodal = _flat(cases.nodal, batch, 3)
    on_member = _equivalent_forces(made, cases, length, direction, batch)
    load = _to_nodes(number, _rotate(on_member, direction, back=True))
    if np.any(nodal):
        load[number.of_node] += nodal.transpose(2, 3, 0, 1)
    movement = np.zeros(load.shape)
    movement[: number.free] = _factor_and_solve(made, _stiffness(made, ea, ei, length, direction), load)
    forces = _end_forces(made, _rotate(movement[number.of_member.T], direction, back=False), ea, ei, length)
    forces -= on_member
    reactions = _reactions(made, forces, direction, nodal)
    moved = movement[number.of_node].transpose(2, 3, 0, 1)
    return Solution(
        displacements=moved.reshape(*batch, *moved.shape[1:]),
        end_forces=forces.transpose(2, 3, 1, 0).reshape(*batch, -1, len(made.members), 6),
        reactions=reactions.reshape(*batch, *reactions.shape[1:]),
    )


def _flat(array: Array, batch: tuple[int, ...], own: int) -> Array:
    """`array` with its batch axes broadcast and joined to one."""
    tail = array.shape[array.ndim - own :]
    return np.ascontiguousarray(np.broadcast_to(array, (*batch, *tail))).reshape(-1, *tail)


def _by_member(values: Array) -> Array:
    """(b, m) as (m, b, 1), beside member-end values of a row."""
    return np.ascontiguousarray(values.T)[..., None]


def _equivalent_forces(
    topology: Topology, cases: LoadCases, length: Array, direction: Array, batch: tuple[int, ...]
) -> Array:
    """Forces (6, m, b, c) that the member loads put on the ends: integrals of load times shape function."""
    member = np.array(cases.member_of)
    span = length[:, member].T
    a, b = _flat(cases.x0, batch, 1).T / span, _flat(cases.x1, batch, 1).T / span
    # integrals over the segment of xi^k, of which the shape functions are made
    powers = np.stack([(b ** (k + 1) - a ** (k + 1)) * span / (k + 1) for k in range(4)])
    weights = np.einsum("sik,ksb->isb", shape_coefficients(topology)[member], powers)
    weights[[1, 3]] *= span
    x, y = loads_by_segment(cases)
    cos, sin = _by_member(direction[:, member, 0]), _by_member(direction[:, member, 1])
    along, across = x * cos + y * sin, y * cos - x * sin
    out = np.empty((6, length.shape[1], *along.shape[1:]))
    for row, load, weight in (
        (0, along, powers[0] - powers[1]),
        (1, across, weights[0]),
        (2, across, weights[1]),
        (3, along, powers[1]),
        (4, across, weights[2]),
        (5, across, weights[3]),
    ):
        sum_segments(load * weight[..., None], cases.member_of, out[row])
    for point in cases.points:
        _add_point(out, point, topology, length, direction, batch)
    return out


def _add_point(
    out: Array, point: MemberPoint, topology: Topology, length: Array, direction: Array, batch: tuple[int, ...]
) -> None:
    """Add the end forces of a point load: its size times the shape functions at its place."""
    k = point.member
    cos, sin = direction[:, k, 0], direction[:, k, 1]
    fx, fy = _flat(point.fx, batch, 0), _flat(point.fy, batch, 0)
    xi = _flat(point.at, batch, 0) / length[:, k]
    along, across = fx * cos + fy * sin, fy * cos - fx * sin
    values = shape_coefficients(topology)[k] @ np.stack([xi**p for p in range(4)])
    values[[1, 3]] *= length[:, k]
    place = (k, slice(None), point.case)
    for row, force in zip(
        range(6), (along * (1 - xi), *(across * values[:2]), along * xi, *(across * values[2:])), strict=True
    ):
        out[row][place] += force


def _rotate(values: Array, direction: Array, *, back: bool) -> Array:
    """Member-end values (6, m, b, c) from global to member axes, or back."""
    cos, sin = _by_member(direction[..., 0]), _by_member(direction[..., 1] * (-1.0 if back else 1.0))
    out = np.empty_like(values)
    for x, y, turn in (START, END):
        np.multiply(values[x], cos, out=out[x])
        out[x] += values[y] * sin
        np.multiply(values[y], cos, out=out[y])
        out[y] -= values[x] * sin
        out[turn] = values[turn]
    return out


def _to_nodes(number: Freedoms, at_ends: Array) -> Array:
    """Sum of member-end values over the movements (total + 1, b, c)."""
    sums = np.zeros((number.total + 1, *at_ends.shape[2:]))
    for member, movements in enumerate(number.of_member):
        for row, movement in enumerate(movements):
            sums[movement] += at_ends[row, member]
    return sums


def _stiffness(topology: Topology, ea: Array, ei: Array, length: Array, direction: Array) -> Array:
    """Stiffness matrices of the free movements (b, free, free).

    Entries of all members are formed with the batch axis last (whole vectors at a time) and summed entry by entry.
    """
    number = freedoms(topology)
    local = _local_stiffness(topology, ea.T, ei.T, length.T)
    cos, sin = np.ascontiguousarray(direction[..., 0].T), np.ascontiguousarray(direction[..., 1].T)
    turned = _turn_rows(local, cos, sin)
    turned = np.swapaxes(_turn_rows(np.swapaxes(turned, 1, 2), cos, sin), 1, 2)
    order, first, rows, columns = _scatter(topology)
    entries = np.add.reduceat(turned.reshape(-1, ea.shape[0])[order], first, axis=0)
    out = np.zeros((ea.shape[0], number.free, number.free))
    out[:, rows, columns] = entries.T
    return out


def _local_stiffness(topology: Topology, ea: Array, ei: Array, length: Array) -> Array:
    """Element stiffness in member axes (m, 6, 6, b) from vectors (m, b)."""
    bending = bending_coefficients(topology)
    out = np.zeros((ea.shape[0], 6, 6, ea.shape[1]))
    axial = ea / length
    out[:, 0, 0], out[:, 3, 3], out[:, 0, 3], out[:, 3, 0] = axial, axial, -axial, -axial
    scale = [ei / length**3, ei / length**2, ei / length]
    at = (1, 2, 4, 5)
    for i in range(4):
        for j in range(4):
            out[:, at[i], at[j]] = bending[:, i, j, None] * scale[i % 2 + j % 2]
    return out


def _turn_rows(local: Array, cos: Array, sin: Array) -> Array:
    """Rows of (m, 6, 6, b) from member to global axes."""
    out = local.copy()
    c, s = cos[:, None, :], sin[:, None, :]
    for k in (0, 3):
        out[:, k] = c * local[:, k] - s * local[:, k + 1]
        out[:, k + 1] = s * local[:, k] + c * local[:, k + 1]
    return out


@cache
def _scatter(topology: Topology) -> tuple[NDArray[np.intp], ...]:
    """How the 36 m element entries add up to entries of the stiffness: order, starts of equal runs, rows, columns."""
    number = freedoms(topology)
    rows = np.repeat(number.of_member[:, :, None], 6, axis=2).ravel()
    columns = np.repeat(number.of_member[:, None, :], 6, axis=1).ravel()
    kept = np.flatnonzero((rows < number.free) & (columns < number.free))
    place = rows[kept] * number.free + columns[kept]
    order = kept[np.argsort(place, kind="stable")]
    places, first = np.unique(np.sort(place), return_index=True)
    return order, first, places // number.free, places % number.free


def _factor_and_solve(topology: Topology, stiffness: Array, load: Array) -> Array:
    """Movements (free, b, c) under loads (total + 1, b, c)."""
    if not stiffness.shape[-1]:  # beams on supports of which none runs through
        return load[:0]
    require_stable(topology, stiffness[:1])  # rounding hides a mechanism from the solver; one truss of a batch tells
    right = np.ascontiguousarray(np.swapaxes(load[: stiffness.shape[-1]], 0, 1))
    try:
        found = np.linalg.solve(stiffness, right)
    except np.linalg.LinAlgError:
        require_stable(topology, stiffness)
        raise UnstableTrussError(f"{topology.shape}: the truss is a mechanism; add a member or a support") from None
    return np.swapaxes(found, 0, 1)


def require_stable(topology: Topology, stiffness: Array) -> None:
    """Raise UnstableTrussError naming the joint that moves most and its direction in the softest mode.

    stiffness (b, free, free). A mechanism has an eigenvalue of zero in the diagonally scaled matrix.
    """
    for matrix in stiffness:
        diagonal = matrix.diagonal()
        scale = 1 / np.sqrt(np.where(diagonal > 0, diagonal, 1.0))
        scaled = matrix * np.outer(scale, scale)
        if not np.all(diagonal > 0) or np.linalg.eigvalsh(scaled)[0] < SINGULAR:
            raise UnstableTrussError(f"{topology.shape}: {_softest(topology, scaled, scale)}")


def _softest(topology: Topology, scaled: Array, scale: Array) -> str:
    """Which joint moves most, and where to, in the softest mode of a scaled stiffness (free, free)."""
    from scipy.linalg import eigh  # here, because only a mechanism needs it

    _, modes = eigh(scaled, subset_by_index=(0, 0))
    node, direction = freedoms(topology).label[int(np.abs(modes[:, 0] * scale).argmax())]
    return f"joint {topology.nodes[node]} can move {DIRECTIONS[direction]}; add a member or a support there"


def stiffness_matrix(truss: Truss, stiffness_axial: Array, stiffness_bending: Array) -> Array:
    """Stiffness of the free movements (..., free, free) of a batch, for stability checks and tests."""
    batch = np.broadcast_shapes(truss.length.shape[:-1], stiffness_axial.shape[:-1])
    parts = ((stiffness_axial, 1), (stiffness_bending, 1), (truss.length, 1), (truss.direction, 2))
    out = _stiffness(truss.topology, *(_flat(values, batch, own) for values, own in parts))
    return out.reshape(*batch, *out.shape[1:])


def _end_forces(topology: Topology, local: Array, ea: Array, ei: Array, length: Array) -> Array:
    """Forces (6, m, b, c) on the member ends from their movements in member axes; `local` is used up."""
    k = bending_coefficients(topology)[..., None, None]
    span, along = _by_member(length), _by_member(ea / length)
    across, turning = _by_member(ei / length**3), _by_member(ei / length**2)
    out = np.empty_like(local)
    np.subtract(local[3], local[0], out=out[3])
    out[3] *= along
    np.negative(out[3], out=out[0])
    # a rigid sideways movement bends nothing, so the two deflections act by their difference alone
    sway, turn0, turn1 = local[1], local[2], local[5]
    sway -= local[4]
    turn0 *= span
    turn1 *= span
    for row, scale in ((1, across), (2, turning), (5, turning)):
        i = {1: 0, 2: 1, 5: 3}[row]
        np.multiply(sway, k[:, i, 0] * scale, out=out[row])
        out[row] += turn0 * (k[:, i, 1] * scale)
        out[row] += turn1 * (k[:, i, 3] * scale)
    np.negative(out[1], out=out[4])
    return out


def _reactions(topology: Topology, forces: Array, direction: Array, nodal: Array) -> Array:
    """Forces of the supports on the truss (b, c, support, 2); zero in a direction that is not held."""
    out = np.empty((*forces.shape[2:], len(topology.supports), 2))
    for k, support in enumerate(topology.supports):
        out[..., k, :] = -nodal[..., support.node, :]
        for member, ends in enumerate(topology.members):
            for node, (x, y, _) in ((ends.start, START), (ends.end, END)):
                if node == support.node:
                    cos, sin = direction[:, member, 0, None], direction[:, member, 1, None]
                    out[..., k, 0] += cos * forces[x, member] - sin * forces[y, member]
                    out[..., k, 1] += sin * forces[x, member] + cos * forces[y, member]
        out[..., k, :] *= (support.horizontal, support.vertical)
    return out


def pin_jointed(topology: Topology) -> Topology:
    """The same truss with every member pinned at both ends (loads then act at the joints only)."""
    return replace(topology, members=tuple(replace(m, pinned_start=True, pinned_end=True) for m in topology.members))
