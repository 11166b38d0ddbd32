"""Effects of each case along the members, and their exact extremes under every combination."""

from collections.abc import Iterator
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.envelope import Envelope, Peak, larger_of_signs, peak
from rooftruss.analysis.frame import Solution
from rooftruss.loads.cases import LoadCases, first_segments, further_segments, sum_segments
from rooftruss.shapes.truss import Truss

Array = NDArray[np.float64]
BLOCK = 32_000  # segments x combinations worked on at a time: about 256 kB an array
SLIVER = 1e-6  # [m] a shorter segment is two cuts a rounding apart; its step of moment over its length says nothing


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
    member = list(cases.member_of)
    run = (cases.x1 - cases.x0)[..., None, :]
    direction = truss.direction[..., None, member, :]
    along = cases.q[..., 0] * direction[..., 0] + cases.q[..., 1] * direction[..., 1]
    across = cases.q[..., 1] * direction[..., 0] - cases.q[..., 0] * direction[..., 1]
    count = len(member)
    values = np.empty((*cases.q.shape[:-2], 5 * count))
    moment0, moment1, load, axial0, axial1 = (values[..., i * count : (i + 1) * count] for i in range(5))
    axial_step, shear_step = along * run, across * run
    moment_step = shear_step * (run / 2)
    load[...] = across
    at_start = (solution.end_forces[..., k][..., member] for k in range(3))
    axial0[...], shear0, moment0[...] = (sign * force for sign, force in zip((-1, 1, -1), at_start, strict=True))
    axial1[...] = axial0 - axial_step
    moment1[...] = moment0 + shear0 * run + moment_step
    jumps = _jumps(truss, cases)
    _, rest = first_segments(cases.member_of)
    for s in sorted({*rest, *jumps}):
        if s in rest:  # goes on where the segment before it ends
            axial0[..., s], moment0[..., s] = axial1[..., s - 1], moment1[..., s - 1]
            shear0[..., s] = shear0[..., s - 1] + shear_step[..., s - 1]
        for case, axial, shear in jumps.get(s, []):
            axial0[..., case, s] += axial
            shear0[..., case, s] += shear
        axial1[..., s] = axial0[..., s] - axial_step[..., s]
        moment1[..., s] = moment0[..., s] + shear0[..., s] * run[..., s] + moment_step[..., s]
    return UnitEffects(member_of=cases.member_of, members=truss.length.shape[-1], run=run[..., 0, :], values=values)


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


@dataclass(frozen=True, kw_only=True)
class Demands:
    """What each member has to resist under each combination, arrays (..., k, m), none negative [N, N m].

    tension_least is the smallest tension along a member that is in tension throughout, else 0.
    """

    tension: Array
    compression: Array
    moment_positive: Array
    moment_negative: Array
    shear: Array
    tension_least: Array


def combined_extremes(effects: UnitEffects, factors: Array) -> Extremes:
    """Extremes along every member under the combinations `factors` (k, c).

    The moment of a segment is largest at an end or where its shear passes zero (the vertex of its parabola).
    """
    batch, count = effects.values.shape[:-2], int(np.prod(effects.values.shape[:-2]))
    out = np.empty((5, count, len(factors), effects.members))
    for rows, found in _blocks(effects, factors):
        for target, values in zip(out, found, strict=True):
            target[rows] = np.swapaxes(values, 1, 2)
    shape = (*batch, len(factors), effects.members)
    return Extremes(**{f.name: array.reshape(shape) for f, array in zip(fields(Extremes), out, strict=True)})


def demands_and_envelope(effects: UnitEffects, factors: Array) -> tuple[Demands, Envelope]:
    """Demands on every member under the strength combinations `factors` (k, c), and their envelope.

    The same extremes as `combined_extremes`, split by sign, with the envelope taken while they are at hand.
    """
    batch, count = effects.values.shape[:-2], int(np.prod(effects.values.shape[:-2]))
    out = np.empty((6, count, len(factors), effects.members))
    peaks = []
    for rows, found in _blocks(effects, factors):
        parts = _split_by_sign(*found)
        out[:, rows] = np.swapaxes(parts, 2, 3)
        peaks.append(peak(parts[:5], -1))
    value = np.concatenate([p.value for p in peaks], axis=1).reshape(5, *batch, effects.members)
    number = np.concatenate([p.combination for p in peaks], axis=1).reshape(value.shape)
    tension, compression, high, low, shear = (Peak(value=v, combination=n) for v, n in zip(value, number, strict=True))
    shape = (*batch, len(factors), effects.members)
    demands = Demands(**{f.name: array.reshape(shape) for f, array in zip(fields(Demands), out, strict=True)})
    return demands, Envelope(tension=tension, compression=compression, moment=larger_of_signs(high, low), shear=shear)


def _split_by_sign(axial_max: Array, axial_min: Array, moment_max: Array, moment_min: Array, shear: Array) -> Array:
    """The six fields of Demands (6, b, m, k) from the five extremes (b, m, k)."""
    parts = np.empty((6, *shear.shape))
    np.maximum(axial_max, 0.0, out=parts[0])
    np.negative(axial_min, out=parts[1])
    np.maximum(moment_max, 0.0, out=parts[2])
    np.negative(moment_min, out=parts[3])
    parts[4] = shear
    np.maximum(axial_min, 0.0, out=parts[5])
    np.maximum(parts[1:4:2], 0.0, out=parts[1:4:2])
    return parts


def _blocks(effects: UnitEffects, factors: Array) -> Iterator[tuple[slice, tuple[Array, ...]]]:
    """Extremes (b, m, k) of blocks of trusses small enough for the processor's cache, combinations last in memory."""
    batch = effects.values.shape[:-2]
    unit = effects.values.reshape(-1, *effects.values.shape[-2:])
    run = np.broadcast_to(effects.run, (*batch, effects.run.shape[-1])).reshape(len(unit), -1)
    columns = np.ascontiguousarray(factors.T)
    step = max(1, BLOCK // (len(effects.member_of) * len(factors)))
    for start in range(0, len(unit), step):
        rows = slice(start, start + step)
        yield rows, _block_extremes(unit[rows], run[rows], effects.member_of, columns)


def _block_extremes(unit: Array, run: Array, member_of: tuple[int, ...], factors: Array) -> tuple[Array, ...]:
    """The five extremes (b, m, k) of a block of trusses; unit (b, c, 5 s), run (b, s), factors (c, k)."""
    count = len(member_of)
    values = np.matmul(np.swapaxes(unit, 1, 2), factors)
    m0, m1, load, n0, n1 = (values[:, i * count : (i + 1) * count] for i in range(5))
    axial_max = _over_members(np.maximum, np.maximum(n0, n1), member_of)
    axial_min = _over_members(np.minimum, np.minimum(n0, n1, out=n0), member_of)
    per_run = np.divide(1.0, run, out=np.zeros_like(run), where=run > SLIVER)[..., None]
    shear_mean = (m1 - m0) * per_run
    half = load * (run / 2)[..., None]
    steady, change = np.abs(shear_mean), np.abs(half)
    inside = change > steady  # the shear passes zero within the segment
    shear_mean -= half  # now the shear at the start
    shear_mean *= shear_mean
    bulge = np.divide(shear_mean, load, out=np.zeros_like(load), where=inside)
    bulge *= -0.5
    bulge += m0
    high = np.maximum(m0, m1)
    low = np.minimum(m0, m1, out=m0)
    return (
        axial_max,
        axial_min,
        _over_members(np.maximum, np.maximum(high, bulge, out=high), member_of),
        _over_members(np.minimum, np.minimum(low, bulge, out=low), member_of),
        _over_members(np.maximum, np.add(steady, change, out=steady), member_of),
    )


def _over_members(ufunc: np.ufunc, values: Array, member_of: tuple[int, ...]) -> Array:
    """Extreme over the segments (b, s, k) of each member (b, m, k)."""
    first, _ = first_segments(member_of)
    if len(first) == len(member_of):
        return values
    out = values[:, first]
    for members, segments in further_segments(member_of):
        out[:, members] = ufunc(out[:, members], values[:, segments])
    return out


def mid_deflections(truss: Truss, cases: LoadCases, effects: UnitEffects, solution: Solution, ei: Array) -> Array:
    """Vertical deflection of every member's middle under every case (..., c, m) [m], up positive.

    Mean of the end movements, and the bending of the member between its ends by virtual work: the integral of M times
    the moment of a unit force at the middle, over EI; exact by Simpson's rule on segments cut at the middle.
    """
    made = truss.topology
    count = len(effects.member_of)
    m0, m1, load = (effects.values[..., i * count : (i + 1) * count] for i in range(3))
    w0, w1, w2 = (w[..., None, :] for w in _middle_weights(truss, cases))
    bend = sum_segments(m0 * w0 + m1 * w1 + load * w2, effects.member_of, np.empty((*m0.shape[:-1], effects.members)))
    ends = (solution.displacements[..., made.start, 1] + solution.displacements[..., made.end, 1]) / 2
    return np.asarray(ends - bend * (truss.direction[..., 0] / ei)[..., None, :])


def _middle_weights(truss: Truss, cases: LoadCases) -> tuple[Array, Array, Array]:
    """Integrals over each segment (..., s) of a unit force's moment times the shapes of M: what M = m0 (1 - x/run) +
    m1 x/run - w x (run - x)/2 gives per m0, m1 and w."""
    length = truss.length[..., list(cases.member_of)]
    run = cases.x1 - cases.x0
    safe = np.where(run > 0, run, 1.0)
    total = [np.zeros(run.shape) for _ in range(3)]
    for low, high in ((0.0 * length, length / 2), (length / 2, length)):
        a, b = np.clip(cases.x0, low, high), np.clip(cases.x1, low, high)
        for weight, x in ((1, a), (4, (a + b) / 2), (1, b)):
            unit = weight * np.minimum(x, length - x) / 2 * (b - a) / 6
            here = x - cases.x0
            for sum_, shape in zip(total, (1 - here / safe, here / safe, -here * (run - here) / 2), strict=True):
                sum_ += unit * shape
    return total[0], total[1], total[2]
