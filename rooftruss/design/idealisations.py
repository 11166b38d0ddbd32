"""The two idealisations of a truss side by side: the frame, and the pin-jointed truss."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.effects import combined_extremes
from rooftruss.analysis.inspection import pin_jointed_axial
from rooftruss.design.design import Design

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Idealisations:
    """Unfactored forces of every case and member (c, m), tension positive [N], and the bending [N m] only a frame has.

    The moment is the larger of sagging and hogging, with its sign. A tail is no member of the pin-jointed truss: 0.
    """

    pin_jointed: Array
    frame: Array  # the axial force of largest magnitude along the member
    moment: Array


def idealisations(design: Design) -> Idealisations:
    """Pin-jointed and frame forces of one truss, per case."""
    run = design.run
    found = combined_extremes(run.frame_effects, np.eye(len(run.cases.heads)))
    return Idealisations(
        pin_jointed=pin_jointed_axial(run.truss, run.stiffness_axial, run.cases),
        frame=_larger(found.axial_max, found.axial_min),
        moment=_larger(found.moment_max, found.moment_min),
    )


def _larger(high: Array, low: Array) -> Array:
    return np.where(np.abs(high) >= np.abs(low), high, low)
