"""Gable roofs for tests of the load modules, and what a test reads from their cases."""

import math
from collections.abc import Iterable, Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from rooftruss.loads.roof import ActionCase, Roof
from rooftruss.units import FOOT


def roof_of(
    *, pitch: ArrayLike, span: ArrayLike, bearing_span: ArrayLike, overhang: ArrayLike, spacing: ArrayLike
) -> Roof:
    """Roof [m]; pitch as rise over run, overhang from the middle of the bearing."""
    return Roof(
        pitch=np.asarray(pitch, float),
        span=np.asarray(span, float),
        bearing_span=np.asarray(bearing_span, float),
        overhang=np.asarray(overhang, float),
        rise=np.asarray(pitch, float) * np.asarray(bearing_span, float) / 2,
        spacing=np.asarray(spacing, float),
    )


def roof_in_feet(
    pitch: ArrayLike = 0.5,
    *,
    span: ArrayLike,
    bearing_span: ArrayLike | None = None,
    overhang: ArrayLike = 0.0,
    spacing: ArrayLike = 2.0,
) -> Roof:
    """Roof [ft] whose bearings have no length unless the distance between their middles is given."""
    bearing_span = span if bearing_span is None else bearing_span
    span, bearing_span, overhang, spacing = (
        np.asarray(v, float) * FOOT for v in (span, bearing_span, overhang, spacing)
    )
    return roof_of(pitch=pitch, span=span, bearing_span=bearing_span, overhang=overhang, spacing=spacing)


def gable_in_metres(pitch_deg: float, *, span: float, overhang: float, bearing: float = 0.1) -> Roof:
    """Roof [m] of trusses 0.6 m apart; overhang from the outside of the bearing."""
    return roof_of(
        pitch=math.tan(math.radians(pitch_deg)),
        span=span,
        bearing_span=span - bearing,
        overhang=overhang + bearing / 2,
        spacing=0.6,
    )


def named(cases: Iterable[ActionCase], short: str) -> ActionCase:
    """The case of this short name."""
    return next(case for case in cases if case.short == short)


def values(case: ActionCase) -> Mapping[str, NDArray[np.float64]]:
    """Values that a case comes from, by symbol."""
    return {value.symbol: np.asarray(value.value) for value in case.values}
