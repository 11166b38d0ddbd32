"""Load cases that the job gives itself, on the surfaces and members of a truss."""

from collections.abc import Iterator, Sequence

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.job import CaseLoad, OwnCase
from rooftruss.errors import JobError, nearest
from rooftruss.loads.roof import ActionCase, SurfaceLoad
from rooftruss.shapes.truss import Truss

Array = NDArray[np.float64]
ROOF = ("left tail", "left slope", "right slope", "right tail")


def own_cases(truss: Truss, cases: Sequence[OwnCase], bearing: Array, spacing: Array) -> list[ActionCase]:
    """Cases of the job without their point loads; bearing and spacing (...,) [m].

    A line load is the pressure that gives it on a strip as wide as the spacing. Raises JobError naming the case for a
    member that the truss has not, or that no surface covers (webs).
    """
    return [
        ActionCase(
            name=case.name,
            short=case.name,
            action=case.action,
            pattern=case.pattern,
            loads=tuple(_loads(truss, case, bearing, spacing)),
        )
        for case in cases
    ]


def _loads(truss: Truss, case: OwnCase, bearing: Array, spacing: Array) -> Iterator[SurfaceLoad]:
    for load in case.loads:
        pressure = _pressure(load, spacing)
        given = tuple(None if x is None else np.asarray(x - bearing / 2) for x in (load.x_from, load.x_to))
        for surface in ROOF if load.surface == "roof" else (load.surface,) if load.surface else ():
            yield SurfaceLoad(surface=surface, kind=load.kind, pressure=pressure, x_from=given[0], x_to=given[1])
        for name in load.members:
            k = _member(truss, case.name, name)
            start, end = truss.start_xy[..., k, 0], truss.end_xy[..., k, 0]
            yield SurfaceLoad(
                surface=truss.topology.members[k].surface,
                kind=load.kind,
                pressure=pressure,
                x_from=start if given[0] is None else np.maximum(start, given[0]),
                x_to=end if given[1] is None else np.minimum(end, given[1]),
            )


def _pressure(load: CaseLoad, spacing: Array) -> Array:
    if load.pressure is not None:
        return np.asarray(load.pressure)
    return np.asarray((load.line or 0.0) / spacing)


def _member(truss: Truss, case: str, name: str) -> int:
    """Number of a chord member."""
    made = truss.topology
    chords = [m.name for m in made.members if m.surface]
    if name not in chords:
        if name in made.names:
            raise JobError(
                f"[[loads.case]] {case!r}: {name!r} is a web, which no area load reaches; give points instead"
            )
        raise JobError(f"[[loads.case]] {case!r}: there is no member {name!r}; {nearest(name, chords)}")
    return made.names.index(name)
