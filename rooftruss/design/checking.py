"""Envelopes and checks of a batch, in parts whose demands stay in the processor's cache."""

from dataclasses import fields, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.effects import UnitEffects, demands_and_envelope
from rooftruss.analysis.envelope import Envelope, Peak
from rooftruss.timber.terms import Checks, Demand, Durations, Members, TimberStandard

Array = NDArray[np.float64]
PART = 64  # trusses; the demands of more have to be fetched from memory again


def checked(
    timber: TimberStandard, members: Members, effects: UnitEffects, factors: Array, durations: Durations
) -> tuple[Envelope, Checks]:
    """Envelope of the strength combinations `factors` (k, c) and the checks of every member.

    A batch of one axis that is longer than a part is taken part by part, and what every single combination gave is not
    kept: the utilisations of its checks are None.
    """
    batch = effects.batch
    if len(batch) != 1 or batch[0] <= PART:
        return _part(timber, members, effects, factors, durations)
    parts = []
    for start in range(0, batch[0], PART):
        rows = slice(start, start + PART)
        envelope, checks = _part(timber, _of(members, batch[0], rows), effects.part(rows), factors, durations)
        parts.append((envelope, replace(checks, utilisation=None)))
    envelopes, checks_of = zip(*parts, strict=True)
    names = [f.name for f in fields(Envelope)]
    whole = Envelope(**{n: _joined([getattr(e, n) for e in envelopes]) for n in names})
    return whole, Checks(
        rules=checks_of[0].rules,
        utilisation=None,
        governing=_joined([c.governing for c in checks_of]),
        rule=np.concatenate([c.rule for c in checks_of]),
    )


def demands(effects: UnitEffects, factors: Array) -> Demand:
    """What each member has to resist under each combination."""
    return _demand(demands_and_envelope(effects, factors)[0])


def _part(
    timber: TimberStandard, members: Members, effects: UnitEffects, factors: Array, durations: Durations
) -> tuple[Envelope, Checks]:
    found, envelope = demands_and_envelope(effects, factors)
    return envelope, timber.check(members, _demand(found), durations)


def _demand(found: Any) -> Demand:
    return Demand(**{f.name: getattr(found, f.name) for f in fields(Demand)})


def _of(members: Members, count: int, rows: slice) -> Members:
    """The members of some trusses of a batch of `count`."""
    arrays = {f.name: getattr(members, f.name) for f in fields(Members)}
    own: dict[str, Any] = {n: _rows(v, count, rows) for n, v in arrays.items() if isinstance(v, np.ndarray)}
    return replace(members, **own, properties={n: _rows(v, count, rows) for n, v in members.properties.items()})


def _rows(values: Array, count: int, rows: slice) -> Array:
    """(b, m) of some trusses; an array without the batch axis serves all."""
    return values[rows] if values.ndim > 1 and values.shape[0] == count else values


def _joined(peaks: list[Peak]) -> Peak:
    return Peak(
        value=np.concatenate([p.value for p in peaks]), combination=np.concatenate([p.combination for p in peaks])
    )
