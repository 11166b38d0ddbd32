"""Numbers of load cases and combinations over a whole job: what trusses share has one number."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from rooftruss.design.design import Design

Key = tuple[object, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Line:
    """One combination of a job, as data for a table."""

    number: int  # from 1
    name: str
    clause: str
    kind: str  # "" for strength, else the kind of the deflection limit
    duration: str
    time_effect: float  # NaN where the scheme has none
    factors: tuple[tuple[str, float], ...]  # (case name, factor)
    marks: tuple[str, ...]  # trusses that have it


@dataclass(frozen=True, slots=True, kw_only=True)
class Numbering:
    """Case name -> number, every combination once, and for each truss the numbers of its own."""

    cases: Mapping[str, int]
    lines: tuple[Line, ...]
    of_mark: Mapping[str, tuple[int, ...]]

    def combinations_of(self, design: Design) -> tuple[int, ...]:
        """Numbers of the combinations of one truss of the job, in its own order."""
        return self.of_mark[design.spec.mark]


def numbering_of(designs: Sequence[Design]) -> Numbering:
    """Cases by action, combinations strength first, each in the order in which the trusses bring them."""
    keys = {d.spec.mark: _keys(d) for d in designs}
    every: dict[Key, list[str]] = {}
    for mark, own in keys.items():
        for key in own:
            every.setdefault(key, []).append(mark)
    ordered = sorted(every, key=lambda key: key[2] != "")
    number = {key: n for n, key in enumerate(ordered, 1)}
    return Numbering(
        cases=_cases(designs),
        lines=tuple(_line(n, key, every[key]) for key, n in number.items()),
        of_mark={mark: tuple(number[key] for key in own) for mark, own in keys.items()},
    )


def _cases(designs: Sequence[Design]) -> dict[str, int]:
    heads = [h for d in designs for h in d.run.cases.heads]
    actions = list(dict.fromkeys(h.action for h in heads))
    names = dict.fromkeys(h.name for h in sorted(heads, key=lambda h: actions.index(h.action)))
    return {name: n for n, name in enumerate(names, 1)}


def _keys(design: Design) -> list[Key]:
    """What makes a combination the same in two trusses: everything that is printed of it."""
    made, names = design.run.combinations, design.run.cases.names
    rows: list[list[tuple[str, float]]] = [[] for _ in made.names]
    for k, c in np.argwhere(made.factors):
        rows[k].append((names[c], float(made.factors[k, c])))
    effects = [None if effect != effect else float(effect) for effect in made.time_effects]  # NaN equals nothing
    columns = (made.names, made.clauses, made.kinds, made.durations, effects, map(tuple, rows))
    return list(zip(*columns, strict=True))


def _line(number: int, key: Key, marks: list[str]) -> Line:
    name, clause, kind, duration, effect, factors = key
    return Line(
        number=number,
        name=str(name),
        clause=str(clause),
        kind=str(kind),
        duration=str(duration),
        time_effect=float("nan") if effect is None else float(effect),  # type: ignore[arg-type]
        factors=factors,  # type: ignore[arg-type]
        marks=tuple(marks),
    )
