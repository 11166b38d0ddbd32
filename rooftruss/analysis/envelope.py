"""Envelopes: the extreme of each effect over all combinations, and the combination it comes from."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.effects import Extremes

Array = NDArray[np.float64]
Numbers = NDArray[np.intp]


@dataclass(frozen=True, slots=True, kw_only=True)
class Peak:
    """A governing value (...,) and the number of its combination among all combinations; -1 where nothing acts."""

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


def peak(values: Array, numbers: Numbers, axis: int) -> Peak:
    """Largest value over the combinations on `axis`; `numbers` are the combinations' numbers among all.

    The first of equal values is taken, so that a mirrored case does not win by the last digit's rounding.
    """
    top = values.max(axis=axis, keepdims=True)
    near = values >= top - 1e-9 * np.abs(top)
    first = near.argmax(axis=axis)
    best = np.take_along_axis(values, np.expand_dims(first, axis), axis).squeeze(axis)
    return Peak(value=best, combination=np.where(best > 0, numbers[first], -1))


def signed_peak(values: Array, numbers: Numbers, axis: int) -> Peak:
    """Like `peak` for the largest magnitude; the value keeps its sign."""
    found = peak(np.abs(values), numbers, axis)
    place = np.searchsorted(numbers, np.maximum(found.combination, numbers[0]))
    value = np.take_along_axis(values, np.expand_dims(place, axis), axis).squeeze(axis)
    return Peak(value=value, combination=found.combination)


def envelope_of(extremes: Extremes, numbers: Numbers) -> Envelope:
    """Envelope of the extremes (..., k, m) of the combinations `numbers` (k,), ascending."""
    larger = np.abs(extremes.moment_max) >= np.abs(extremes.moment_min)
    moment = np.where(larger, extremes.moment_max, extremes.moment_min)
    return Envelope(
        tension=peak(np.maximum(extremes.axial_max, 0.0), numbers, -2),
        compression=peak(np.maximum(-extremes.axial_min, 0.0), numbers, -2),
        moment=signed_peak(moment, numbers, -2),
        shear=peak(extremes.shear, numbers, -2),
    )


def reaction_envelope(reactions: Array, numbers: Numbers) -> ReactionEnvelope:
    """Envelope of support forces (..., k, support, 2) on the truss [N], up positive."""
    return ReactionEnvelope(
        down=peak(np.maximum(reactions[..., 1], 0.0), numbers, -2),
        uplift=peak(np.maximum(-reactions[..., 1], 0.0), numbers, -2),
        horizontal=signed_peak(reactions[..., 0], numbers, -2),
    )
