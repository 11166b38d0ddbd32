"""What the load standards see of a truss (its roof), and what they give back (load cases on its surfaces)."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
GABLE, MONOPITCH = "gable", "monopitch"  # forms of a roof
SIDES = ("left", "right")


@dataclass(frozen=True, slots=True, kw_only=True)
class Roof:
    """Symmetric gable or monopitch roof over one truss, the same form in a whole batch.

    Arrays `(...,)` or floats [m, Pa]; x runs from the left bearing centre.
    """

    pitch: Array  # rise over run [-]
    span: Array  # out to out of bearings
    bearing_span: Array  # between bearing centres: x of the right bearing, the ridge of a gable is at half of it
    overhang: Array  # plan length of a tail beyond the bearing centre
    rise: Array  # bearing to highest bearing or ridge, top-chord centre lines
    spacing: Array
    form: str = GABLE
    low: str = ""  # side of the low eave of a monopitch
    bare: str = ""  # side of a monopitch that has no tail where the other has one

    @property
    def slope(self) -> Array:
        """Roof slope [rad]."""
        return np.arctan(self.pitch)

    @property
    def eave_to_ridge(self) -> Array:
        """Horizontal distance from eave to ridge W [m], overhang included."""
        return self.bearing_span / 2 + self.overhang

    @property
    def tails(self) -> tuple[Array, Array]:
        """Plan length of roof beyond the left and the right bearing centre [m]; half the bearing without a tail."""
        half = (np.asarray(self.span, float) - self.bearing_span) / 2
        left, right = (half if side == self.bare else np.asarray(self.overhang, float) for side in SIDES)
        return left, right

    @property
    def surfaces(self) -> tuple[tuple[str, Array, Array], ...]:
        """Surfaces from left to right, each with the plan positions of its ends (...,) [m]."""
        (left, right), end = self.tails, np.asarray(self.bearing_span, float)
        start, middle = 0.0 * end, end / 2
        slopes: tuple[tuple[str, Array, Array], ...] = (("left slope", start, middle), ("right slope", middle, end))
        if self.form == MONOPITCH:
            slopes = ((f"{self.low} slope", start, end),)
        return (("left tail", -left, start), *slopes, ("right tail", end, end + right))


@dataclass(frozen=True, slots=True, kw_only=True)
class Value:
    """One intermediate value of a load case, for `explain` and the case list."""

    symbol: str  # as the standard writes it, "C_s"
    value: Array | float  # SI, (...,)
    kind: str  # key of units.US
    clause: str  # "ASCE 7-22 Fig. 7.4-1"


@dataclass(frozen=True, slots=True, kw_only=True)
class SurfaceLoad:
    """Uniform pressure [Pa] on one surface, over the whole of it or the stretch x_from..x_to [m] of plan.

    surface: "left slope", "right slope" (bearing to ridge; a monopitch has the one that rises from its low eave),
             "left tail", "right tail", "ceiling" (bottom chord)
    kind: "plan" (down, per horizontal projection), "slope" (down, per length along the member),
          "normal" (towards the surface from above, per length along it), "right" (horizontal, to the right,
          per vertical projection)
    """

    surface: str
    kind: str
    pressure: Array  # (...,)
    x_from: Array | None = None
    x_to: Array | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class ActionCase:
    """One pattern of one characteristic action, before any factor.

    pattern tells a scheme which alternatives may stand where: for S "balanced", "unbalanced", "minimum",
    "rain on snow", "eave"; for others "" unless a scheme needs it.
    """

    name: str  # unique in the truss: "snow, unbalanced, wind from left"
    short: str  # for combination names: "unbal. left"
    action: str  # "D", "L", "Lr", "S", "W"
    pattern: str
    loads: tuple[SurfaceLoad, ...]
    values: tuple[Value, ...] = ()


Site = Mapping[str, object]
