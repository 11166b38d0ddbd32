"""What the load standards see of a truss (its roof), and what they give back (load cases on its surfaces)."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Roof:
    """Symmetric gable roof over one truss. Arrays `(...,)` or floats [m, Pa]; x runs from the left bearing centre."""

    pitch: Array  # rise over run [-]
    span: Array  # out to out of bearings
    bearing_span: Array  # between bearing centres: x of the right bearing, the ridge is at half of it
    overhang: Array  # plan length of a tail beyond the bearing centre
    rise: Array  # heel to ridge, top-chord centre lines
    spacing: Array

    @property
    def slope(self) -> Array:
        """Roof slope [rad]."""
        return np.arctan(self.pitch)

    @property
    def eave_to_ridge(self) -> Array:
        """Horizontal distance from eave to ridge W [m], overhang included."""
        return self.bearing_span / 2 + self.overhang


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

    surface: "left slope", "right slope" (bearing to ridge), "left tail", "right tail", "ceiling" (bottom chord)
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
