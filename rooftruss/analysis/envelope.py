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
    values = np.moveaxis(values, axis, -1)
    top = values.max(axis=-1)
    first = (values >= (top * (1 - TIE))[..., None]).argmax(axis=-1)
    return Peak(value=top, combination=np.where(top > 0, first, -1))


def signed_peak(high: Array, low: Array, axis: int) -> Peak:
    """Largest magnitude among `high` (positive parts) and `low` (magnitudes of the negative parts), with its sign."""
    up, down = peak(high, axis), peak(low, axis)
    rises = up.value >= down.value
    return Peak(
        value=np.where(rises, up.value, -down.value),
        combination=np.where(rises, up.combination, down.combination),
    )


def reaction_envelope(reactions: Array) -> ReactionEnvelope:
    """Envelope of support forces (..., k, support, 2) on the truss [N], up positive."""
    sideways, up = reactions[..., 0], reactions[..., 1]
    return ReactionEnvelope(
        down=peak(np.maximum(up, 0.0), -2),
        uplift=peak(np.maximum(-up, 0.0), -2),
        horizontal=signed_peak(np.maximum(sideways, 0.0), np.maximum(-sideways, 0.0), -2),
    )
