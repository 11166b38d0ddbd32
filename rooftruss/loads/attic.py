"""Ceiling live load of an attic with limited storage: where the webs leave room to store things, and the load there.

The room is a rectangle that stands on the bottom chord and that no other member crosses. It is measured on centre
lines: the depths of the members would make it smaller, so what is found is never less than the standard's.
"""

from typing import cast

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.tables import read_table
from rooftruss.loads.roof import ActionCase, SurfaceLoad, Value
from rooftruss.shapes.truss import Truss

Array = NDArray[np.float64]
CLAUSE = "ASCE 7, Table 4.3-1; IBC 2021, Table 1607.1"
FAR = 1e9  # [m] where an obstacle is put that does not reach the room


def rule(name: str) -> float:
    """A value of tables/loads/attic_asce7 [SI]: width and height of the room, steepest bottom chord, load beside."""
    return cast(float, read_table("loads/attic_asce7").rows[0][name])


def storage_portions(truss: Truss) -> list[tuple[Array, Array]]:
    """Stretches (from, to) [m] of plan (...,) of the bottom chord above which the room fits, from the left.

    In a truss of a batch that lacks a stretch the others have, its end is not right of its start. None where the bottom
    chord is steeper than the rule allows in every truss of the batch.
    """
    low, high = _obstacles(truss)
    bottom = truss.topology.on("ceiling")
    first = truss.start_xy[..., bottom, 0].min(axis=-1)
    last = truss.end_xy[..., bottom, 0].max(axis=-1)
    order = low.argsort(axis=-1)
    low, high = (np.take_along_axis(x, order, -1) for x in (low, high))
    blocked = np.maximum.accumulate(np.concatenate([first[..., None], high], axis=-1), axis=-1)
    free_to = np.minimum(np.concatenate([low, last[..., None]], axis=-1), last[..., None])
    real = np.concatenate([low < FAR, np.ones_like(first, dtype=bool)[..., None]], axis=-1)
    fits = real & (free_to - blocked >= rule("width") * (1 - 1e-9)) & _level(truss)[..., None]
    free_to = np.where(fits, free_to, blocked)
    return [(blocked[..., k], free_to[..., k]) for k in range(blocked.shape[-1]) if np.any(fits[..., k])]


def _level(truss: Truss) -> NDArray[np.bool_]:
    """Whether no part of the bottom chord is steeper than the rule allows (...,)."""
    run = truss.direction[..., truss.topology.on("ceiling"), :]
    return np.asarray((np.abs(run[..., 1] / run[..., 0]) <= rule("pitch_most") * (1 + 1e-9)).all(axis=-1))


def _obstacles(truss: Truss) -> tuple[Array, Array]:
    """Stretch of plan (..., n) that each member but the bottom chords takes from the room above the bottom chord."""
    bottom = truss.topology.on("ceiling")
    others = [k for k in range(len(truss.topology.members)) if k not in bottom]
    start, end = truss.start_xy[..., others, :], truss.end_xy[..., others, :]
    x0, x1 = start[..., 0], end[..., 0]
    y0, y1 = (p[..., 1] - _chord_height(truss, bottom, p[..., 0]) for p in (start, end))
    height = rule("height")
    # Shares of the member between which it is lower than the room; the bottom chord is taken straight below a member.
    rise = np.where(np.abs(y1 - y0) > 1e-9, y1 - y0, 1e-9)
    at_floor, at_top = np.clip(-y0 / rise, 0, 1), np.clip((height - y0) / rise, 0, 1)
    a, b = x0 + at_floor * (x1 - x0), x0 + at_top * (x1 - x0)
    inside = (np.minimum(y0, y1) < height) & (np.maximum(y0, y1) > 1e-9)
    return np.where(inside, np.minimum(a, b), FAR), np.where(inside, np.maximum(a, b), -FAR)


def _chord_height(truss: Truss, bottom: list[int], x: Array) -> Array:
    """Height of the bottom chord below plan positions (..., n); beyond its ends that of its nearest end."""
    out = np.full(x.shape, np.nan)
    for k in bottom:
        x0, x1 = truss.start_xy[..., k, 0][..., None], truss.end_xy[..., k, 0][..., None]
        y0, y1 = truss.start_xy[..., k, 1][..., None], truss.end_xy[..., k, 1][..., None]
        share = np.clip((x - x0) / (x1 - x0), 0.0, 1.0)
        here = (x >= x0 - 1e-9) & (x <= x1 + 1e-9)
        out = np.where(here, y0 + share * (y1 - y0), out)
        if k == bottom[0]:
            out = np.where(x < x0, y0, out)
        if k == bottom[-1]:
            out = np.where(x > x1, y1, out)
    return out


def attic_cases(truss: Truss, rest: Array, storage: Array) -> list[ActionCase]:
    """Live load (action L) [Pa, on plan] of the bottom chord: `storage` where the room fits, `rest` beside it."""
    portions = storage_portions(truss)
    loads = [SurfaceLoad(surface="ceiling", kind="plan", pressure=np.asarray(rest, float))]
    values = [
        Value(symbol="L", value=rest, kind="pressure", clause=CLAUSE),
        Value(symbol="L storage", value=storage, kind="pressure", clause=CLAUSE),
    ]
    for number, (x_from, x_to) in enumerate(portions, 1):
        more = np.where(x_to > x_from, storage - rest, 0.0)
        loads.append(SurfaceLoad(surface="ceiling", kind="plan", pressure=more, x_from=x_from, x_to=x_to))
        for word, x in (("from", x_from), ("to", x_to)):
            values.append(Value(symbol=f"room {number}, {word} x", value=x, kind="length", clause=CLAUSE))
    return [
        ActionCase(
            name="ceiling live, storage", short="", action="L", pattern="", loads=tuple(loads), values=tuple(values)
        )
    ]
