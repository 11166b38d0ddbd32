"""Effects of each case along the members, and their exact extremes under every combination."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.frame import Solution
from rooftruss.loads.cases import LoadCases
from rooftruss.shapes.truss import Truss

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True)
class UnitEffects:
    """Internal forces of every case at the ends of each segment; between them axial force and shear are linear and
    the moment is a parabola. Sums of these with any factors are again of that form.

    member_of (s,); run (..., s) segment lengths [m]; values (..., c, 5 s): moment at start and end, load across,
    axial force at start and end of each segment, in blocks of s [N m, N m, N/m, N, N].
    """

    member_of: tuple[int, ...]
    members: int
    run: Array
    values: Array


def unit_effects(truss: Truss, cases: LoadCases, solution: Solution) -> UnitEffects:
    """Internal forces along the members from the end forces and the loads on the way."""
    member = np.array(cases.member_of)
    run = cases.x1 - cases.x0
    cos, sin = truss.direction[..., None, member, 0], truss.direction[..., None, member, 1]
    along = cases.q[..., 0] * cos + cases.q[..., 1] * sin
    across = cases.q[..., 1] * cos - cases.q[..., 0] * sin
    lengths = run[..., None, :]
    axial_step, shear_step, moment_step = -along * lengths, across * lengths, across * lengths**2 / 2
    shape = np.broadcast_shapes(across.shape, lengths.shape)
    axial0, shear0, moment0 = (np.empty(shape) for _ in range(3))
    ends = solution.end_forces
    jumps = _jumps(truss, cases)
    for s, k in enumerate(cases.member_of):
        if s == 0 or cases.member_of[s - 1] != k:
            axial0[..., s], shear0[..., s], moment0[..., s] = -ends[..., k, 0], ends[..., k, 1], -ends[..., k, 2]
        else:
            axial0[..., s] = axial0[..., s - 1] + axial_step[..., s - 1]
            shear0[..., s] = shear0[..., s - 1] + shear_step[..., s - 1]
            moment0[..., s] = moment0[..., s - 1] + shear0[..., s - 1] * lengths[..., s - 1] + moment_step[..., s - 1]
        for case, axial, shear in jumps.get(s, []):
            axial0[..., case, s] += axial
            shear0[..., case, s] += shear
    moment1 = moment0 + shear0 * lengths + moment_step
    values = np.concatenate([moment0, moment1, np.broadcast_to(across, shape), axial0, axial0 + axial_step], axis=-1)
    return UnitEffects(member_of=cases.member_of, members=truss.length.shape[-1], run=run, values=values)


def _jumps(truss: Truss, cases: LoadCases) -> dict[int, list[tuple[int, Array, Array]]]:
    """Steps of axial force and shear at the start of a segment: segment -> [(case, axial, shear)]."""
    out: dict[int, list[tuple[int, Array, Array]]] = {}
    for p in cases.points:
        cos, sin = truss.direction[..., p.member, 0], truss.direction[..., p.member, 1]
        here = [s for s, k in enumerate(cases.member_of) if k == p.member]
        starts = cases.x0[..., here]
        # The point cuts its member, so some segment starts there; a point at the member's start stands at its first.
        nearest = np.abs(starts - p.at[..., None]).argmin(axis=-1)
        for i, s in enumerate(here):
            on = nearest == i
            if np.any(on):
                axial, shear = -(p.fx * cos + p.fy * sin) * on, (p.fy * cos - p.fx * sin) * on
                out.setdefault(s, []).append((p.case, axial, shear))
    return out


@dataclass(frozen=True, kw_only=True)
class Extremes:
    """Largest internal forces of each member under each combination (..., k, m), all exact.

    axial_max and axial_min with sign (tension positive) [N]; moment_max, moment_min with sign [N m];
    shear is a magnitude [N].
    """

    axial_max: Array
    axial_min: Array
    moment_max: Array
    moment_min: Array
    shear: Array


def combined_extremes(effects: UnitEffects, factors: Array) -> Extremes:
    """Extremes along every member under the combinations `factors` (k, c).

    The moment of a segment is largest at an end or where its shear passes zero (the vertex of its parabola).
    """
    values = np.matmul(factors, effects.values)
    count = len(effects.member_of)
    m0, m1, w, n0, n1 = (values[..., i * count : (i + 1) * count] for i in range(5))
    run = effects.run[..., None, :]
    shear_mean = (m1 - m0) / np.where(run > 0, run, 1.0)
    half = 0.5 * w * run
    shear0 = shear_mean - half
    shear = np.abs(shear_mean) + np.abs(half)
    shear *= run > 0
    inside = np.abs(half) > np.abs(shear_mean)  # the shear changes sign within the segment
    vertex = np.where(inside, m0 - shear0**2 / (2 * np.where(inside, w, 1.0)), m0)
    first = np.searchsorted(np.array(effects.member_of), np.arange(effects.members))
    high, low = np.maximum, np.minimum
    return Extremes(
        axial_max=high.reduceat(high(n0, n1), first, axis=-1),
        axial_min=low.reduceat(low(n0, n1), first, axis=-1),
        moment_max=high.reduceat(high(high(m0, m1), vertex), first, axis=-1),
        moment_min=low.reduceat(low(low(m0, m1), vertex), first, axis=-1),
        shear=high.reduceat(shear, first, axis=-1),
    )


def mid_deflections(truss: Truss, cases: LoadCases, effects: UnitEffects, solution: Solution, ei: Array) -> Array:
    """Vertical deflection of every member's middle under every case (..., c, m) [m], up positive.

    Mean of the end movements, and the bending of the member between its ends by virtual work: the integral of M times
    the moment of a unit force at the middle, over EI; exact by Simpson's rule on segments cut at the middle.
    """
    topology = truss.topology
    count = len(effects.member_of)
    member = np.array(effects.member_of)
    blocks = [effects.values[..., i * count : (i + 1) * count] for i in range(3)]
    length = truss.length[..., member]
    bend = np.zeros(blocks[0].shape)
    for low, high in ((0.0 * length, length / 2), (length / 2, length)):
        a, b = np.clip(cases.x0, low, high), np.clip(cases.x1, low, high)
        middle = (a + b) / 2
        terms = [
            weight * _moment_at(blocks, (x - cases.x0), effects.run) * (np.minimum(x, length - x) / 2)[..., None, :]
            for weight, x in ((1, a), (4, middle), (1, b))
        ]
        bend += sum(terms) * ((b - a) / 6)[..., None, :]
    first = np.searchsorted(member, np.arange(effects.members))
    across = -np.add.reduceat(bend, first, axis=-1) / ei[..., None, :]
    ends = (solution.displacements[..., topology.start, 1] + solution.displacements[..., topology.end, 1]) / 2
    return np.asarray(ends + across * truss.direction[..., None, :, 0])


def _moment_at(blocks: list[Array], x: Array, run: Array) -> Array:
    """Moment of each segment at the distance x from its start."""
    m0, m1, w = blocks
    x, run = x[..., None, :], np.where(run > 0, run, 1.0)[..., None, :]
    return np.asarray(m0 + (m1 - m0) * x / run - w * x * (run - x) / 2)
