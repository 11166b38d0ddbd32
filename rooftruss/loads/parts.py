"""Plan loads on the whole of a roof or on half of it, as both families of standards ask for of live load."""

import numpy as np
from numpy.typing import NDArray

from rooftruss.loads.roof import GABLE, SIDES, Roof, SurfaceLoad

Array = NDArray[np.float64]
ROOF = ("left tail", "left slope", "right slope", "right tail")
HALVES = {"left": ROOF[:2], "right": ROOF[2:]}


def whole_roof(pressure: Array | float) -> tuple[SurfaceLoad, ...]:
    """A load [Pa] on plan on every surface a roof may have; the slope that a monopitch has not carries none of it."""
    return tuple(_plan(surface, pressure) for surface in ROOF)


def half_roof(roof: Roof, side: str, pressure: Array | float) -> tuple[SurfaceLoad, ...]:
    """A load [Pa] on plan on the "left" or "right" half of a roof, with the tail of that side.

    Of a gable the half is the slope of that side, of a monopitch the half of its one slope up to the middle between
    the bearings.
    """
    if roof.form == GABLE:
        return tuple(_plan(surface, pressure) for surface in HALVES[side])
    middle = np.asarray(roof.bearing_span, dtype=float) / 2
    bounds = (None, middle) if side == SIDES[0] else (middle, None)
    return _plan(f"{side} tail", pressure), _plan(f"{roof.low} slope", pressure, *bounds)


def _plan(surface: str, pressure: Array | float, x_from: Array | None = None, x_to: Array | None = None) -> SurfaceLoad:
    return SurfaceLoad(
        surface=surface, kind="plan", pressure=np.asarray(pressure, dtype=float), x_from=x_from, x_to=x_to
    )
