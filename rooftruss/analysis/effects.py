"""Effects of each case along the members, and their exact extremes under every combination."""

from collections.abc import Iterator
from dataclasses import dataclass, fields, replace
from functools import cache
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.envelope import Envelope, Peak, larger_of_signs, peak
from rooftruss.analysis.frame import Solution
from rooftruss.loads.cases import LoadCases, first_segments, loads_by_segment, sum_segments
from rooftruss.shapes.truss import Truss

Array = NDArray[np.float64]
BLOCK = 64_000  # segments x combinations worked on at a time: about 512 kB an array
TINY = 1e-200  # [N m] nothing next to what a load does to a segment
NOTHING = 1e-10  # an effect below this share of the largest of its kind in the truss is round-off
SLIVER = 1e-6  # [m] a shorter segment is two cuts a rounding apart; its step of moment over its length says nothing


@dataclass(frozen=True, kw_only=True)
class UnitEffects:
    """Internal forces of every case at the ends of each segment; between them axial force and shear are linear and
    the moment is a parabola. Sums of these with any factors are again of that form.

    member_of (s,); jumps: segments at whose start a point load acts; run (..., s) segment lengths [m]; values
    (5, s, ..., c): moment at start and end, load across, axial force at start and end of each segment
    [N m, N m, N/m, N, N].
    """

    member_of: tuple[int, ...]
    jumps: tuple[int, ...]
    members: int
    run: Array
    values: Array

    @property
    def batch(self) -> tuple[int, ...]:
        """The batch axes."""
        return self.values.shape[2:-1]

    def part(self, rows: slice) -> "UnitEffects":
        """Of some trusses of a batch of one axis."""
        run = self.run if self.run.ndim == 1 else self.run[rows]
        return replace(self, values=self.values[:, :, rows], run=run)


def unit_effects(truss: Truss, cases: LoadCases, solution: Solution) -> UnitEffects:
    """Internal forces along the members from the end forces and the loads on the way."""
    member = list(cases.member_of)
    batch, count = cases.q.shape[:-3], len(member)
    run, cos, sin = (
        np.moveaxis(np.broadcast_to(v, (*batch, count)), -1, 0).reshape(count, -1, 1)
        for v in (cases.x1 - cases.x0, truss.direction[..., member, 0], truss.direction[..., member, 1])
    )
    x, y = loads_by_segment(cases)
    values = np.empty((5, *x.shape))
    moment0, moment1, load, axial0, axial1 = values
    np.multiply(y, cos, out=load)
    load -= x * sin
    axial_step = x * cos
    axial_step += y * sin
    axial_step *= run
    shear_step = load * run
    ends = np.moveaxis(solution.end_forces, (-1, -2), (0, 1))
    at_start = ends.reshape(6, ends.shape[1], -1, ends.shape[-1])
    shear0 = at_start[1][member]
    np.negative(at_start[0][member], out=axial0)
    np.negative(at_start[2][member], out=moment0)
    jumps = _jumps(truss, cases)
    _, rest = first_segments(cases.member_of)
    later = set(rest)
    for s in range(count):
        if s in later:  # goes on where the segment before it ends
            axial0[s], moment0[s] = axial1[s - 1], moment1[s - 1]
            np.add(shear0[s - 1], shear_step[s - 1], out=shear0[s])
        for case, axial, shear in jumps.get(s, []):
            axial0[s, :, case] += np.ravel(axial)
            shear0[s, :, case] += np.ravel(shear)
        np.subtract(axial0[s], axial_step[s], out=axial1[s])
        np.multiply(shear_step[s], 0.5, out=moment1[s])
        moment1[s] += shear0[s]
        moment1[s] *= run[s]
        moment1[s] += moment0[s]
    return UnitEffects(
        member_of=cases.member_of,
        jumps=tuple(sorted(jumps)),
        members=truss.length.shape[-1],
        run=cases.x1 - cases.x0,
        values=values.reshape(5, count, *batch, -1),
    )


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
    batch, count = effects.batch, int(np.prod(effects.batch))
    out = np.empty((5, effects.members, count, len(factors)))
    for rows, found in _blocks(effects, factors):
        out[:, :, rows] = found
    names = [f.name for f in fields(Extremes)]
    return Extremes(**{n: _by_combination(array, batch) for n, array in zip(names, out, strict=True)})


def demands_and_envelope(effects: UnitEffects, factors: Array) -> tuple[Demands, Envelope]:
    """Demands on every member under the strength combinations `factors` (k, c), and their envelope.

    The same extremes as `combined_extremes`, split by sign, with the envelope taken while they are at hand. In memory
    the combinations stand last, where the checks want them.
    """
    batch, count = effects.batch, int(np.prod(effects.batch))
    out = np.empty((6, effects.members, count, len(factors)))
    value, number = np.empty((5, effects.members, count)), np.empty((5, effects.members, count), np.intp)
    for rows, found in _blocks(effects, factors):
        parts = out[:, :, rows]
        _split_by_sign(found, parts)
        most = peak(parts[:5], -1)
        value[:, :, rows], number[:, :, rows] = most.value, most.combination
    _drop_round_off(value, number)
    shape = (*batch, effects.members)
    peaks = (Peak(value=v.T.reshape(shape), combination=n.T.reshape(shape)) for v, n in zip(value, number, strict=True))
    tension, compression, high, low, shear = peaks
    names = [f.name for f in fields(Demands)]
    demands = Demands(**{n: _by_combination(array, batch) for n, array in zip(names, out, strict=True)})
    return demands, Envelope(tension=tension, compression=compression, moment=larger_of_signs(high, low), shear=shear)


def _drop_round_off(value: Array, number: NDArray[np.intp]) -> None:
    """Set what is nothing beside the largest effect of its kind in the truss to 0 and its combination to none.

    value and number (5, m, b): tension, compression, sagging and hogging moment, shear.
    """
    for rows in (slice(0, 2), slice(2, 4), slice(4, 5)):
        nothing = value[rows] <= NOTHING * value[rows].max(axis=(0, 1))
        value[rows][nothing], number[rows][nothing] = 0.0, -1


def _by_combination(values: Array, batch: tuple[int, ...]) -> Array:
    """(m, b, k) seen as (..., k, m): no copy for a batch of one axis or none."""
    return values.transpose(1, 2, 0).reshape(*batch, values.shape[2], values.shape[0])


def _split_by_sign(found: Array, out: Array) -> None:
    """The six fields of Demands (6, m, b, k) from the five extremes (5, m, b, k)."""
    axial_max, axial_min, moment_max, moment_min, shear = found
    np.maximum(axial_max, 0.0, out=out[0])
    np.negative(np.minimum(axial_min, 0.0, out=out[1]), out=out[1])
    np.maximum(moment_max, 0.0, out=out[2])
    np.negative(np.minimum(moment_min, 0.0, out=out[3]), out=out[3])
    out[4] = shear
    np.maximum(axial_min, 0.0, out=out[5])


@dataclass(frozen=True, slots=True)
class _Stations:
    """Where the extremes of a topology can be: columns of UnitEffects.values, in rows that stand together by member.

    A moment stands at every end of a segment, once where two segments meet; an axial force too, but twice where a point
    load makes it jump. rows of member m: moments[m], axials[m], segments[m] as (first, end); at[s] is the moment row at
    the start of segment s.
    """

    columns: NDArray[np.intp]
    moments: tuple[tuple[int, int], ...]
    axials: tuple[tuple[int, int], ...]
    segments: tuple[tuple[int, int], ...]
    at: NDArray[np.intp]
    first_load: int
    first_axial: int


@cache
def _stations(member_of: tuple[int, ...], jumps: tuple[int, ...]) -> _Stations:
    """jumps: segments at whose start a point load acts."""
    count = len(member_of)
    moment0, moment1, load, axial0, axial1 = (i * count for i in range(5))
    moments: list[int] = []
    axials: list[int] = []
    at: list[int] = []
    stops: dict[str, list[int]] = {"moments": [], "axials": [], "segments": []}
    for s, member in enumerate(member_of):
        if s == 0 or member != member_of[s - 1]:
            for name, rows in (("moments", moments), ("axials", axials), ("segments", at)):
                stops[name].append(len(rows))
            moments.append(moment0 + s)
            axials.append(axial0 + s)
        elif s in jumps:
            axials.append(axial0 + s)
        at.append(len(moments) - 1)
        moments.append(moment1 + s)
        axials.append(axial1 + s)
    ends = {"moments": len(moments), "axials": len(axials), "segments": count}
    spans = {name: tuple(pairwise([*rows, ends[name]])) for name, rows in stops.items()}
    return _Stations(
        columns=np.array([*moments, *range(load, load + count), *axials]),
        at=np.array(at),
        first_load=len(moments),
        first_axial=len(moments) + count,
        **spans,
    )


def _blocks(effects: UnitEffects, factors: Array) -> Iterator[tuple[slice, Array]]:
    """Extremes (5, m, b, k) of blocks of trusses small enough for the processor's cache."""
    count = len(effects.member_of)
    unit = effects.values.reshape(5 * count, -1, effects.values.shape[-1])
    run = np.broadcast_to(effects.run, (*effects.batch, count)).reshape(-1, count).T
    where, columns = _stations(effects.member_of, effects.jumps), np.ascontiguousarray(factors.T)
    step = max(1, BLOCK // (count * max(1, len(factors))))
    for start in range(0, unit.shape[1], step):
        rows = slice(start, start + step)
        yield rows, _block_extremes(unit[:, rows], run[:, rows], where, columns)


def _block_extremes(unit: Array, run: Array, where: _Stations, factors: Array) -> Array:
    """The five extremes (5, m, b, k) of a block of trusses; unit (5 s, b, c), run (s, b), factors (c, k).

    All rows of all trusses are multiplied with the factors at once; every pass after it is over whole rows (b, k).
    Forces are taken times the length of the segment, so that only the shear has to be divided by it.
    """
    rows = unit[where.columns]
    length = run[:, :, None]
    rows[where.first_load : where.first_axial] *= length**2 / 2
    values = (rows.reshape(-1, rows.shape[-1]) @ factors).reshape(*rows.shape[:2], -1)
    moments, axials = values[: where.first_load], values[where.first_axial :]
    half = values[where.first_load : where.first_axial]  # half the step of the shear over a segment, times its length
    out = np.empty((5, len(where.segments), *values.shape[1:]))
    _over_members(np.maximum, axials, where.axials, out[0])
    _over_members(np.minimum, axials, where.axials, out[1])
    _over_members(np.maximum, moments, where.moments, out[2])
    _over_members(np.minimum, moments, where.moments, out[3])
    start = moments[where.at]
    mean = moments[where.at + 1]
    mean -= start  # mean shear, times the length
    steady, change = np.abs(mean), np.abs(half)
    inside = (change > steady).astype(np.float64)  # the shear passes zero within the segment
    steady += change
    steady *= np.divide(1.0, length, out=np.zeros_like(length), where=length > SLIVER)
    _over_members(np.maximum, steady, where.segments, out[4])
    mean -= half  # now the shear V0 at the start
    mean *= mean
    half *= -4.0
    half -= TINY  # a segment without load has no vertex; 0 over this is 0
    mean /= half
    mean *= inside
    mean += start  # moment at the vertex, m0 - V0^2 / (2 w); at the start where there is none
    _fold(np.maximum, mean, where.segments, out[2])
    _fold(np.minimum, mean, where.segments, out[3])
    return out


def _over_members(ufunc: np.ufunc, values: Array, spans: tuple[tuple[int, int], ...], out: Array) -> None:
    """Extreme over the rows (r, b, k) of each member into `out` (m, b, k)."""
    for target, (first, end) in zip(out, spans, strict=True):
        if end - first == 1:
            target[...] = values[first]
        else:
            ufunc(values[first], values[first + 1], out=target)
            for row in range(first + 2, end):
                ufunc(target, values[row], out=target)


def _fold(ufunc: np.ufunc, values: Array, spans: tuple[tuple[int, int], ...], out: Array) -> None:
    """The same, on top of what is in `out`."""
    for target, (first, end) in zip(out, spans, strict=True):
        for row in range(first, end):
            ufunc(target, values[row], out=target)


def mid_deflections(truss: Truss, cases: LoadCases, effects: UnitEffects, solution: Solution, ei: Array) -> Array:
    """Vertical deflection of every member's middle under every case (..., c, m) [m], up positive.

    Mean of the end movements, and the bending of the member between its ends by virtual work: the integral of M times
    the moment of a unit force at the middle, over EI; exact by Simpson's rule on segments cut at the middle.
    """
    made = truss.topology
    m0, m1, load = effects.values[:3]
    w0, w1, w2 = (np.moveaxis(w, -1, 0)[..., None] for w in _middle_weights(truss, cases))
    every = m0 * w0
    every += m1 * w1
    every += load * w2
    bend = np.moveaxis(sum_segments(every, effects.member_of, np.empty((effects.members, *every.shape[1:]))), 0, -1)
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
