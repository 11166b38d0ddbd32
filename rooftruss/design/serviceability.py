"""Deflections of a run under the service combinations, beside their limits."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import inf, nan
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rooftruss.design.places import Place, places_of, reaches, tail_ends, unit_movements
from rooftruss.design.stages import Run
from rooftruss.errors import JobError, nearest
from rooftruss.timber.deflection import share_of_limit
from rooftruss.timber.terms import Deflected, DeflectionKind, DeflectionLimit

Array = NDArray[np.float64]
NO_CEILING = "none"  # row of the deflection limits for tail ends: no ceiling hangs there
BLOCK = 64_000  # places x combinations worked on at a time: about 512 kB an array


@dataclass(frozen=True, slots=True, kw_only=True)
class Deflections:
    """The deflection nearest to its limit at each place (..., place) [m], up and right positive; its limit [m],
    the ratio of the two, the number of its combination among all, and the number of its kind among `kinds`.

    Without a service combination that a limit speaks of, values are 0, limits infinite and the numbers -1.
    """

    places: tuple[Place, ...]
    kinds: tuple[DeflectionKind, ...]  # those that are limited
    alone: tuple[bool, ...]  # whether a kind is of the variable loads alone, though its combinations hold others too
    rules: tuple[tuple[DeflectionLimit, ...], ...]  # of each kind, at each place
    value: Array
    limit: Array
    ratio: Array
    combination: NDArray[np.intp]
    kind: NDArray[np.intp]

    def rule(self, place: int) -> DeflectionLimit | None:
        """What limits the governing deflection of one place of an unbatched truss."""
        kind = int(self.kind[place])
        return self.rules[kind][place] if kind >= 0 else None

    def about(self, place: int) -> str:
        """Kind of the governing deflection of one place of an unbatched truss, and its limit."""
        rule = self.rule(place)
        if rule is None:
            return "no service combination is limited"
        sideways = self.places[place].direction == "horizontal"
        kind = int(self.kind[place])
        return about(self.kinds[kind], rule, sideways=sideways, alone=self.alone[kind])


@dataclass(frozen=True, slots=True, kw_only=True)
class Largest:
    """The largest vertical deflection of a kind, of an unbatched truss [m]."""

    kind: DeflectionKind
    alone: bool  # as in Deflections
    rule: DeflectionLimit
    place: Place
    value: float
    combination: int

    @property
    def about(self) -> str:
        """Its kind, and its limit or that it has none."""
        return about(self.kind, self.rule, alone=self.alone)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Looked:
    """One kind of deflection: numbers of its combinations among all (k,), and its factors (k, c)."""

    kind: DeflectionKind
    rows: NDArray[np.intp]
    factors: Array
    alone: bool  # as in Deflections


def about(kind: DeflectionKind, rule: DeflectionLimit, *, sideways: bool = False, alone: bool = False) -> str:
    """A kind of deflection and its limit in words.

    >>> kind = DeflectionKind(name="final", symbol="w_fin", combinations="characteristic")
    >>> about(kind, DeflectionLimit(ratio=250.0, symbol="w_net,fin", source=""))
    'final w_net,fin, l/250'
    """
    name = kind.name.replace("_", " or ")
    symbol = rule.symbol if rule.limits else kind.symbol
    words = f"{name} {symbol}" if symbol else name
    if alone:  # the combination that stands beside it holds permanent loads as well
        words += " of the variable loads alone"
    if sideways:
        return words
    return f"{words}, l/{rule.ratio:g}" if rule.limits else f"{words}, no limit"


def _kinds(run: Run) -> list[DeflectionKind]:
    """Kinds of deflection that the service combinations give, in the order of the scheme.

    Raises JobError for a kind of combination that the timber standard does not know.
    """
    timber, scheme = run.family.timber, run.family.scheme
    known = list(dict.fromkeys(kind.combinations for kind in timber.deflection_kinds))
    made = list(dict.fromkeys(k for k in run.combinations.kinds if k))
    for name in made:
        if name not in known:
            raise JobError(
                f"scheme {scheme.name}: {name!r} is no kind of deflection row that {timber.name} knows; "
                f"{nearest(name, known)}"
            )
    return sorted(
        (k for k in timber.deflection_kinds if k.combinations in made), key=lambda k: made.index(k.combinations)
    )


def _kinds_and_rules(
    run: Run, places: Sequence[Place]
) -> tuple[list[DeflectionKind], list[tuple[DeflectionLimit, ...]]]:
    """Every kind of deflection that is looked at, and its limits at the places: by the ceiling of the job, by none for
    the ends of tails."""
    tips, ceiling, kinds = tail_ends(run, tuple(places)), run.family.job.limits.ceiling, _kinds(run)
    rules = []
    for kind in kinds:
        by_ceiling = {c: run.family.timber.deflection_limit(c, kind.name) for c in (ceiling, NO_CEILING)}
        rules.append(tuple(by_ceiling[NO_CEILING if k in tips else ceiling] for k in range(len(places))))
    return kinds, rules


def _looked(run: Run, kind: DeflectionKind) -> _Looked:
    rows = np.array([k for k, name in enumerate(run.combinations.kinds) if name == kind.combinations], dtype=np.intp)
    given = run.combinations.factors[rows]
    factors = run.family.timber.service_factors(
        given,
        actions=tuple(h.action for h in run.cases.heads),
        kinds=(kind.name,) * len(rows),
        lasting=dict(run.family.scheme.lasting),
    )
    dead = np.array([h.action == "D" for h in run.cases.heads])
    alone = bool(given[:, dead].any()) and not factors[:, dead].any()
    return _Looked(kind=kind, rows=rows, factors=factors, alone=alone)


def of_variable_loads_alone(run: Run, kind: DeflectionKind) -> bool:
    """Whether permanent loads are no part of this kind of deflection, though they are of its combinations."""
    return _looked(run, kind).alone


def extremes(unit: Array, factors: Array) -> tuple[Array, NDArray[np.intp]]:
    """Largest movement, whichever way, of places (..., place, c) under factors (k, c), and its row (..., place).

    Within one kind the limit is the same for every combination, so the largest movement is nearest to it.
    """
    flat = unit.reshape(-1, unit.shape[-1])
    value, row = np.empty(len(flat)), np.empty(len(flat), dtype=np.intp)
    step = max(1, BLOCK // len(factors))
    turned = np.ascontiguousarray(factors.T)
    for start in range(0, len(flat), step):
        part = slice(start, start + step)
        moved = flat[part] @ turned
        each = np.arange(len(moved))
        up, down = moved.argmax(axis=-1), moved.argmin(axis=-1)
        high, low = moved[each, up], moved[each, down]
        upwards = (high > -low) | ((high == -low) & (up < down))
        value[part], row[part] = np.where(upwards, high, low), np.where(upwards, up, down)
    return value.reshape(unit.shape[:-1]), row.reshape(unit.shape[:-1])


def deflections(run: Run) -> Deflections:
    """Deflections of all places under all service combinations against the limit of each kind that has one.

    The ceiling of the job decides on the limits, but for the ends of tails, under which none hangs. A kind without a
    limit is left to `unlimited`. Raises JobError for a kind of combination that the timber standard does not know.
    """
    places = places_of(run)
    limited = [(k, r) for k, r in zip(*_kinds_and_rules(run, places), strict=True) if any(x.limits for x in r)]
    unit, reach = unit_movements(run, places), reaches(run, places)
    sideways = np.array([p.direction == "horizontal" for p in places])
    found: list[tuple[Array, Array, NDArray[np.intp]]] = []  # value, limit, combination
    sought = [_looked(run, kind) for kind, _ in limited]
    for looked, (_, rules) in zip(sought, limited, strict=True):
        value, row = extremes(unit, looked.factors)
        limit = np.where(sideways, run.family.job.limits.horizontal, reach / np.array([r.ratio for r in rules]))
        found.append((value, np.broadcast_to(np.where(np.isnan(limit), inf, limit), value.shape), looked.rows[row]))
    if not found:
        found = [(np.zeros(unit.shape[:-1]), np.full(unit.shape[:-1], inf), np.full(unit.shape[:-1], -1))]
    values, limits, combinations = (np.stack([f[i] for f in found]) for i in range(3))
    ratios = share_of_limit(values, limits)
    nearest_one = ratios.argmax(axis=0)[None]

    def taken(array: NDArray[np.generic]) -> Any:
        return np.take_along_axis(array, nearest_one, 0)[0]

    return Deflections(
        places=places,
        kinds=tuple(kind for kind, _ in limited),
        alone=tuple(looked.alone for looked in sought),
        rules=tuple(rules for _, rules in limited),
        value=taken(values),
        limit=taken(limits),
        ratio=taken(ratios),
        combination=taken(combinations),
        kind=nearest_one[0] if limited else combinations[0],
    )


def limits_in_force(run: Run) -> tuple[str, ...]:
    """One sentence on the deflection limits of a truss, with their source, and one where the ends of tails have others.

    "deflection limits: instantaneous w_inst l/300, final w_net,fin l/250; EN1995-1-1 Table 7.2 and practice".
    """
    places = tuple(p for p in places_of(run) if p.direction == "vertical")
    kinds, rules = _kinds_and_rules(run, places)
    tips = tail_ends(run, places)
    inside = next((k for k in range(len(places)) if k not in tips), None)
    out: list[str] = []
    for k, where in ((inside, ""), (min(tips, default=None), " at the ends of tails")):
        if k is None:
            continue
        held = [(kind, own[k]) for kind, own in zip(kinds, rules, strict=True) if own[k].limits]
        listed = ", ".join(about(kind, rule).replace(", l/", " l/") for kind, rule in held)
        sources = "; ".join(dict.fromkeys(rule.source for _, rule in held))
        text = f"{listed}; {sources}" if held else "none, the scheme has no service combination that one speaks of"
        if not out or not out[0].endswith(text):
            out.append(f"deflection limits{where}: {text}")
    free = [
        about(kind, own[0]).removesuffix(", no limit")
        for kind, own in zip(kinds, rules, strict=True)
        if not any(rule.limits for rule in own)
    ]
    return (*out, *((f"no limit is in force for these deflections: {', '.join(free)}",) if free else ()))


def unlimited(run: Run) -> tuple[Largest, ...]:
    """The largest vertical deflection of each kind that has no limit, of an unbatched truss."""
    places = tuple(p for p in places_of(run) if p.direction == "vertical")
    unit = unit_movements(run, places)
    return tuple(
        _largest(run, kind, rules, places, unit)
        for kind, rules in zip(*_kinds_and_rules(run, places), strict=True)
        if not any(rule.limits for rule in rules)
    )


def largest(run: Run) -> Largest | None:
    """The largest vertical deflection of any kind, limited or not, of an unbatched truss; ends of tails do not count.

    None without a service combination.
    """
    vertical = tuple(p for p in places_of(run) if p.direction == "vertical")
    tips = tail_ends(run, vertical)
    places = tuple(p for k, p in enumerate(vertical) if k not in tips)
    unit = unit_movements(run, places)
    each = [_largest(run, *found, places, unit) for found in zip(*_kinds_and_rules(run, places), strict=True)]
    return max(each, key=lambda found: abs(found.value), default=None)


def _largest(
    run: Run, kind: DeflectionKind, rules: Sequence[DeflectionLimit], places: Sequence[Place], unit: Array
) -> Largest:
    """The largest deflection of one kind at the places, which the cases move by unit (place, c)."""
    looked = _looked(run, kind)
    value, row = extremes(unit, looked.factors)
    k = int(np.abs(value).argmax())
    return Largest(
        kind=kind,
        alone=looked.alone,
        rule=rules[k],
        place=places[k],
        value=float(value[k]),
        combination=int(looked.rows[row[k]]),
    )


def deflected(run: Run, place: int, combination: int, kind: DeflectionKind | None = None) -> Deflected:
    """How a place (number among `places_of`) of an unbatched truss moves under one service combination.

    kind: what is looked at; None is the one nearest to its limit under this combination, or else the largest.
    """
    places = places_of(run)
    each, own = _kinds_and_rules(run, places)
    under = run.combinations.kinds[combination]
    moved = [
        _moved(run, places, place, combination, k, r[place])
        for k, r in zip(each, own, strict=True)
        if k.combinations == under and kind in (None, k)
    ]
    return max(moved, key=lambda m: (float(share_of_limit(_value(run, m), m.limit)), abs(_value(run, m))))


def _moved(
    run: Run, places: tuple[Place, ...], place: int, combination: int, kind: DeflectionKind, rule: DeflectionLimit
) -> Deflected:
    sideways = places[place].direction == "horizontal"
    length = nan if sideways else float(reaches(run, (places[place],))[0])
    most = run.family.job.limits.horizontal if sideways else length / rule.ratio
    return Deflected(
        kind=kind,
        clause=run.combinations.clauses[combination],
        cases=run.cases.names,
        actions=tuple(h.action for h in run.cases.heads),
        immediate=unit_movements(run, (places[place],))[0],
        factors=run.combinations.factors[combination],
        lasting=dict(run.family.scheme.lasting),
        length=length,
        limit=most if rule.limits else inf,
        rule=rule,
    )


def _value(run: Run, moved: Deflected) -> float:
    """The deflection with what creep adds [m]."""
    factors = run.family.timber.service_factors(
        moved.factors[None], actions=moved.actions, kinds=(moved.kind.name,), lasting=moved.lasting
    )
    return float(factors[0] @ moved.immediate)
