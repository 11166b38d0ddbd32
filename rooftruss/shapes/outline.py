"""Chord lines: heights of the top and bottom chord centre lines over the span."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Outline:
    """Symmetric gable outline; every field an array (...,) or float, lengths [m], pitches as rise over run."""

    span: Array  # between bearing centres
    pitch: Array
    bottom_pitch: Array
    heel: Array  # height of the top-chord centre line over the bottom-chord centre line at the bearing, 0 unless raised
    overhang: Array  # plan length of the tail beyond the bearing centre

    def top(self, fraction: float) -> tuple[Array, Array]:
        """Point of the top chord at a fraction of the span."""
        x = self.span * fraction
        return x, self.heel + self.pitch * np.minimum(x, self.span - x)

    def bottom(self, fraction: float) -> tuple[Array, Array]:
        """Point of the bottom chord at a fraction of the span."""
        x = self.span * fraction
        return x, self.bottom_pitch * np.minimum(x, self.span - x)

    def tail(self, *, left: bool) -> tuple[Array, Array]:
        """End of a tail."""
        return (-self.overhang if left else self.span + self.overhang), self.heel - self.pitch * self.overhang

    @property
    def rise(self) -> Array:
        """Height of the peak over the heel of the top chord [m]."""
        return self.pitch * self.span / 2
