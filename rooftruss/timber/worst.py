"""What the inner loops of the timber standards share: the order of arrays in memory, and the rule that governs."""

from collections.abc import Callable, Iterable, Iterator
from dataclasses import fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.envelope import Peak, peak
from rooftruss.timber.terms import Array, Checks, Demand, Rule

BLOCK = 24_000  # elements (members x combinations) worked on at a time: about 190 kB an array
NOTHING = 1e-9  # a utilisation below this is round-off of the analysis
Ratios = Iterable[tuple[int, Array]]


def by_member(values: Array) -> Array:
    """(..., k, m) as (b, m, k); no copy of what the effects give, which is in that order in memory."""
    swapped = np.swapaxes(values, -1, -2)
    return swapped.reshape(-1, *swapped.shape[-2:])


def spread(values: Array, index: NDArray[np.intp]) -> Array:
    """(b, m, d) at the durations `index` (k,) of the combinations: (b, m, k).

    A product with zeros and ones, which takes a tenth of the time of gathering.
    """
    ones = (np.arange(values.shape[-1])[:, None] == index).astype(np.float64)
    return np.asarray(values.reshape(-1, values.shape[-1]) @ ones).reshape(*values.shape[:-1], len(index))


def blocks(shape: tuple[int, ...]) -> Iterator[slice]:
    """Slices of the first axis of (b, m, k), small enough for the processor's cache."""
    step = max(1, BLOCK // max(1, shape[1] * shape[2]))
    return (slice(start, start + step) for start in range(0, shape[0], step))


def governing_checks(
    rules: tuple[Rule, ...], utilisation: Array, demand: Demand, ratios: Callable[[Demand, NDArray[np.intp]], Ratios]
) -> Checks:
    """Checks from the utilisation (..., k, m): the governing combination of each member, and the rule it comes from.

    ratios(demand (..., m), combination (..., m)) gives each rule's number and ratio (..., m) for one combination a
    member, in the order of `rules`; of equal ratios the first counts.
    """
    found = peak(utilisation, -2)
    acts = found.value > NOTHING
    row = np.where(acts, found.combination, 0)
    at: dict[str, Any] = {f.name: _taken(getattr(demand, f.name), row) for f in fields(Demand)}
    worst, rule = np.zeros(row.shape), np.zeros(row.shape, np.int8)
    for number, ratio in ratios(Demand(**at), row):
        more = ratio > worst * (1 + NOTHING)
        rule[more] = number
        np.maximum(worst, ratio, out=worst)
    governing = Peak(value=np.where(acts, found.value, 0.0), combination=np.where(acts, found.combination, -1))
    return Checks(rules=rules, utilisation=utilisation, governing=governing, rule=rule)


def _taken(values: Array | None, row: NDArray[np.intp]) -> Array | None:
    """(..., k, m) at one combination a member (..., m)."""
    return None if values is None else np.take_along_axis(values, row[..., None, :], -2)[..., 0, :]
