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
    if values.strides[-1] != values.itemsize:
        # with the combinations last in memory the search is several times faster than the copy costs
        values = np.ascontiguousarray(values)
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
    forces = np.ascontiguousarray(np.moveaxis(reactions, -3, -1))  # (..., support, 2, k)
    high, low = peak(np.maximum(forces, 0.0), -1), peak(np.maximum(-forces, 0.0), -1)
    return ReactionEnvelope(
        down=_part(high, 1), uplift=_part(low, 1), horizontal=larger_of_signs(_part(high, 0), _part(low, 0))
    )


def _part(found: Peak, direction: int) -> Peak:
    return Peak(value=found.value[..., direction], combination=found.combination[..., direction])
