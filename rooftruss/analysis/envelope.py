"""Envelopes: the extreme of each effect over all combinations, and the combination it comes from."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Numbers = NDArray[np.intp]
TIE = 1e-9  # values this close to the largest count as equal: the first combination is named, whatever the last digit


@dataclass(frozen=True, slots=True, kw_only=True)
class Peak:
    """A governing value (...,) and the number of its combination; -1 where nothing acts.

    Strength combinations come first among all, so the number among them is the number among all.
    """

    value: Array
    combination: Numbers


@dataclass(frozen=True, slots=True, kw_only=True)
class Envelope:
    """Governing effects of every member (..., m): tension and compression as magnitudes, the moment with its sign."""

    tension: Peak
    compression: Peak
    moment: Peak
    shear: Peak


@dataclass(frozen=True, slots=True, kw_only=True)
class ReactionEnvelope:
    """Governing support forces (..., support): down (on the bearing) and uplift as magnitudes, horizontal with sign."""

    down: Peak
    uplift: Peak
    horizontal: Peak


def peak(values: Array, axis: int) -> Peak:
    """Largest of values that are not negative, over the combinations on `axis`."""
    # with the combinations last in memory the search is several times faster than the copy costs
    values = np.ascontiguousarray(np.moveaxis(values, axis, -1))
    top = values.max(axis=-1)
    first = (values >= (top * (1 - TIE))[..., None]).argmax(axis=-1)
    return Peak(value=top, combination=np.where(top > 0, first, -1))


def larger_of_signs(high: Peak, low: Peak) -> Peak:
    """The larger of a positive and the magnitude of a negative peak, with its sign."""
    rises = high.value >= low.value
    return Peak(
        value=np.where(rises, high.value, -low.value),
        combination=np.where(rises, high.combination, low.combination),
    )


def reaction_envelope(reactions: Array) -> ReactionEnvelope:
    """Envelope of support forces (..., k, support, 2) on the truss [N], up positive."""
    sideways, up = reactions[..., 0], reactions[..., 1]
    return ReactionEnvelope(
        down=peak(np.maximum(up, 0.0), -2),
        uplift=peak(np.maximum(-up, 0.0), -2),
        horizontal=larger_of_signs(peak(np.maximum(sideways, 0.0), -2), peak(np.maximum(-sideways, 0.0), -2)),
    )
