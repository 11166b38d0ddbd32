"""Combinations: a scheme applied to the load cases of a truss, as one factor matrix. No numbers of the truss enter."""

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import product

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.schemes import NO_CASE, Factored, Row, Scheme
from rooftruss.errors import TableError

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class CaseHead:
    """What a combination needs to know of a load case.

    pattern: for dead load "most", "least" or "both" (which rows it belongs to); for a variable action the pattern of
    its case, or "with" for a load that joins every alternative of that action (a point load of the user's own).
    """

    name: str
    short: str
    action: str
    pattern: str


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Combinations:
    """k combinations of c cases, strength first."""

    names: tuple[str, ...]  # unique: "D + 0.75L + 0.525S(balanced) + 0.45W(left 1, +i)"
    clauses: tuple[str, ...]
    strength: NDArray[np.bool_]  # (k,)
    kinds: tuple[str, ...]  # "" for strength, else the kind of the deflection limit
    durations: tuple[str, ...]  # of the shortest load present
    time_effects: Array  # (k,) lambda [-]; NaN where the scheme has none
    factors: Array  # (k, c)


@dataclass(frozen=True, slots=True, kw_only=True)
class Expression:
    """One printed row with every "or" decided and every action acting."""

    clause: str
    text: str
    kind: str
    factors: Mapping[str, float]  # by action


@dataclass(frozen=True, slots=True)
class _Part:
    """An acting variable action: its factor and the cases that stand for it."""

    load: Factored
    pattern: str
    short: str
    columns: tuple[int, ...]

    @property
    def text(self) -> str:
        return _written(self.load, self.short)


@dataclass(frozen=True, slots=True)
class _Line:
    """One combination before they are stacked."""

    name: str
    row: Row
    duration: str
    time_effect: float
    factors: tuple[float, ...]


def combine(heads: Sequence[CaseHead], scheme: Scheme, options: Mapping[str, object]) -> Combinations:
    """Every row of the scheme x every "or" choice x every alternative case x every subset of the variable actions.

    Variable actions may be absent in any row (ASCE 7 2.3.1 and 2.4.1: loads not acting must be considered); dead load
    and the leading action of a row never are. Cases of one action exclude each other, except those of pattern "with",
    which join each of them. A pattern the scheme lists as `alone` stands with dead load only. Of combinations with the
    same factors the first is kept.

    No combination is left out for being a smaller multiple of another (D + 0.75Lr beside D + Lr): the interaction of
    compression and bending is not convex, so a point between two that pass need not pass.
    Raises JobError for an unknown option, TableError for a case the scheme does not provide for.
    """
    scheme.check_options(options)
    return _combine(tuple(heads), scheme, tuple(sorted((k, str(v)) for k, v in options.items())))


@lru_cache(maxsize=128)
def _combine(heads: tuple[CaseHead, ...], scheme: Scheme, options: tuple[tuple[str, str], ...]) -> Combinations:
    _every_head_has_a_place(heads, scheme)
    kept: dict[tuple[str, tuple[float, ...]], _Line] = {}
    for row in scheme.rows:
        for line in _lines(row, heads, scheme, dict(options)):
            key = (row.kind, line.factors)
            # The same factors give the same effects and the same duration, so only lambda can differ between two rows.
            # Every strength rises with lambda: the smaller one is never less severe.
            if key not in kept or line.time_effect < kept[key].time_effect:
                kept[key] = line
    lines = sorted(kept.values(), key=lambda line: line.row.kind != "")
    factors = np.array([line.factors for line in lines], dtype=float).reshape(len(lines), len(heads))
    time_effects = np.array([line.time_effect for line in lines], dtype=float)
    strength = np.array([line.row.kind == "" for line in lines], dtype=bool)
    for array in (factors, time_effects, strength):
        array.flags.writeable = False  # shared between all trusses with these cases
    return Combinations(
        names=tuple(line.name for line in lines),
        clauses=tuple(line.row.clause for line in lines),
        strength=strength,
        kinds=tuple(line.row.kind for line in lines),
        durations=tuple(line.duration for line in lines),
        time_effects=time_effects,
        factors=factors,
    )


def _every_head_has_a_place(heads: Sequence[CaseHead], scheme: Scheme) -> None:
    timed = {action for _, actions in scheme.durations for action in actions}
    used = {f.action for row in scheme.rows for term in row.terms for f in term}
    for head in heads:
        if head.action not in timed & used:
            raise TableError(f"scheme {scheme.name} has no combination with {head.action} (load case {head.name!r})")


def _lines(row: Row, heads: tuple[CaseHead, ...], scheme: Scheme, options: Mapping[str, object]) -> Iterator[_Line]:
    """All combinations of one row, those with everything absent first."""
    dead = [_Part(f, "", *_dead(heads, row.dead)) for term in row.terms for f in term if f.action == "D"]
    dead = [part for part in dead if part.columns]
    variable = [term for term in row.terms if term[0].action != "D"]
    storage = scheme.option("ceiling_live_use", options) == "storage"
    choices = [[None, *_parts(term, row, heads, scheme, options)] for term in variable]
    for picked in product(*choices):
        acting = [part for part in picked if part is not None]
        if not (dead or acting) or not _may_stand_together(acting, scheme, options):
            continue
        if row.leading and row.leading not in {part.load.action for part in acting}:
            continue
        parts = [*dead, *acting]
        yield _Line(
            name=_name(parts, row.kind),
            row=row,
            duration=_shortest(parts, scheme),
            time_effect=row.time_effect_storage if storage else row.time_effect,
            factors=_factors(parts, len(heads)),
        )


def _dead(heads: tuple[CaseHead, ...], which: str) -> tuple[str, tuple[int, ...]]:
    """(word for the name, columns) of the dead load `which`; where no least dead load is given, the most is used."""
    patterns = {head.pattern for head in heads if head.action == "D"}
    taken = "least" if which == "least" and "least" in patterns else "most"
    columns = tuple(i for i, head in enumerate(heads) if head.action == "D" and head.pattern in (taken, "both"))
    return "least" if taken == "least" else "", columns


def _parts(
    term: Sequence[Factored], row: Row, heads: tuple[CaseHead, ...], scheme: Scheme, options: Mapping[str, object]
) -> Iterator[_Part]:
    """Each case that may stand for a term of this row."""
    companions = dict(scheme.companion_patterns)
    any_companion = scheme.option("companion_snow", options) == "any"
    for load in term:
        restricted = load.action in row.companions and load.action in companions and not any_companion
        for pattern, short, columns in _alternatives(heads, load.action):
            if not restricted or pattern in (*companions[load.action], "with"):
                yield _Part(load, pattern, short, columns)


def _alternatives(heads: tuple[CaseHead, ...], action: str) -> Iterator[tuple[str, str, tuple[int, ...]]]:
    """(pattern, short, columns) of the cases of one action that exclude each other."""
    own = [(i, head) for i, head in enumerate(heads) if head.action == action]
    joining = tuple(i for i, head in own if head.pattern == "with")
    single = [(i, head) for i, head in own if head.pattern != "with"]
    shorts = [head.short for _, head in single]
    for i, head in single:
        yield head.pattern, head.short if shorts.count(head.short) == 1 else head.name, (i, *joining)
    if joining and not single:
        yield "with", "", joining


def _may_stand_together(acting: Sequence[_Part], scheme: Scheme, options: Mapping[str, object]) -> bool:
    alone = dict(scheme.alone_patterns)
    if len(acting) > 1 and any(part.pattern in alone.get(part.load.action, ()) for part in acting):
        return False
    actions = {part.load.action for part in acting}
    return not ({"L", "Lr"} <= actions and scheme.option("ceiling_live", options) == "apart from roof live")


def _shortest(parts: Sequence[_Part], scheme: Scheme) -> str:
    present = {part.load.action for part in parts}
    return [name for name, actions in scheme.durations if present & set(actions)][-1]


def _factors(parts: Sequence[_Part], count: int) -> tuple[float, ...]:
    factors = [0.0] * count
    for part in parts:
        for column in part.columns:
            factors[column] = part.load.factor
    return tuple(factors)


def _name(parts: Sequence[_Part], kind: str) -> str:
    text = " + ".join(part.text for part in parts)
    return f"deflection, {kind.replace('_', ' or ')}: {text}" if kind else text


def _written(load: Factored, short: str = "") -> str:
    """
    >>> _written(Factored(action="S", symbol="S", factor=0.525), "balanced")
    '0.525S(balanced)'
    """
    number = "" if math.isclose(load.factor, 1.0) else f"{load.factor:.6g}"
    return f"{number}{load.symbol}({short})" if short else f"{number}{load.symbol}"


def expressions(scheme: Scheme) -> list[Expression]:
    """The rows of a scheme with each "or" written out, rain (of which no load case is made) included."""
    return [
        Expression(
            clause=row.clause,
            text=" + ".join(_written(load) for load in picked),
            kind=row.kind,
            factors={load.action: load.factor for load in picked},
        )
        for row in scheme.rows
        for picked in product(*row.terms)
    ]


def expression_count(scheme: Scheme, *, with_rain: bool = True) -> int:
    """Number of strength combinations of a scheme before load cases are put in, for the catalogue of schemes."""
    return sum(e.kind == "" and (with_rain or NO_CASE not in e.factors) for e in expressions(scheme))
