"""Deflection limits of roof members, growth of deflection under lasting load, and how a deflection is explained."""

from collections.abc import Iterator
from math import isfinite

import numpy as np
from numpy.typing import ArrayLike

from rooftruss.basis.tables import Table, read_table
from rooftruss.errors import JobError, nearest
from rooftruss.timber.terms import Array, Creep, Deflected, DeflectionKind, DeflectionLimit, Step

KINDS = ("live", "wind_snow", "total")
TOTAL = "total"
DEFLECTION_KINDS = tuple(
    DeflectionKind(name=name, symbol="Delta_T" if name == TOTAL else "Delta_ST", combinations=name) for name in KINDS
)


def ceilings() -> tuple[str, ...]:
    """Kinds of ceiling that the limits are given for."""
    return tuple(str(cell) for cell in _limits().column("ceiling"))


def limit_ratio(ceiling: str, kind: str) -> float:
    """Span over the largest vertical deflection [-]; IBC 2021 Table 1604.3, roof members.

    kind: "live" (L or Lr), "wind_snow" (S or W), "total" (D + L). Raises JobError for an unknown ceiling or kind.

    >>> limit_ratio("non-plaster", "total")
    180.0
    """
    if ceiling not in ceilings():
        raise JobError(f"[deflection] ceiling: {ceiling!r} is not known; {nearest(ceiling, ceilings())}")
    if kind not in KINDS:
        raise JobError(f"kind of service combination {kind!r} is not known; {nearest(kind, KINDS)}")
    return float(_limits().where(ceiling=ceiling)[kind])


def deflection_limit(ceiling: str, kind: str) -> DeflectionLimit:
    """Limit of a kind of deflection; IBC 2021 Table 1604.3. Raises JobError like `limit_ratio`."""
    ratio = limit_ratio(ceiling, kind)
    return DeflectionLimit(ratio=ratio, symbol="", source=str(_limits().where(ceiling=ceiling)["source"]))


def horizontal_limit() -> float:
    """Largest horizontal movement at the roller bearing [m]: published practice for scissor trusses."""
    return float(read_table("timber/deflection_practice").where(quantity="horizontal movement at the roller")["limit"])


def final_deflection(lasting: ArrayLike, passing: ArrayLike, creep: Creep) -> Array:
    """Deflection with creep [m] from the immediate ones of lasting and of passing loads; NDS eq. 3.5-1.

    >>> dry = Creep(coefficient=0.5, clause="NDS 2018 3.5.2", text="")
    >>> round(float(final_deflection(0.30, 0.35, dry)), 3)
    0.8
    """
    return (1 + creep.coefficient) * np.asarray(lasting, dtype=np.float64) + np.asarray(passing, dtype=np.float64)


def creep_and_live_deflection(lasting: ArrayLike, passing: ArrayLike, creep: Creep) -> Array:
    """Deflection [m] that IBC Table 1604.3, note d, compares with the column D + L: creep part of dead, plus live.

    >>> dry = Creep(coefficient=0.5, clause="NDS 2018 3.5.2", text="")
    >>> round(float(creep_and_live_deflection(0.30, 0.35, dry)), 3)
    0.5
    """
    return creep.coefficient * np.asarray(lasting, dtype=np.float64) + np.asarray(passing, dtype=np.float64)


def explain_deflection(moved: Deflected, creep: Creep) -> tuple[Step, ...]:
    """A deflection of an unbatched truss in the letters of NDS 3.5.2; the last step is its share of the limit."""
    steps: list[Step] = []
    sums = {True: 0.0, False: 0.0}  # by whether it lasts
    for k in np.flatnonzero(moved.factors):
        w, factor, action = float(moved.immediate[k]), float(moved.factors[k]), moved.actions[k]
        sums[action == "D"] += w * factor
        steps += [
            step(f"Delta_{action}", w, "deflection", "", f"{moved.cases[k]}, unfactored"),
            step(f"factor of {action}", factor, "factor", moved.clause, "in the combination"),
        ]
    grows = moved.kind.name == TOTAL
    long, short = (sums[True], sums[False]) if grows else (0.0, sums[True] + sums[False])
    value = float(final_deflection(long, short, creep))
    if grows:
        steps += [
            step("Delta_LT", long, "deflection", creep.clause, "immediate, of the dead load, which lasts"),
            step("Delta_ST", short, "deflection", creep.clause, "of the other loads"),
            step("K_cr", 1 + creep.coefficient, "factor", creep.clause, creep.text),
            step("Delta_T", value, "deflection", f"{creep.clause}, eq. 3.5-1", "K_cr Delta_LT + Delta_ST"),
        ]
    else:
        steps.append(step("Delta_ST", value, "deflection", creep.clause, "sum of the above, each with its factor"))
    return (*steps, *closing_steps(moved, moved.kind.symbol, value))


def step(symbol: str, value: float, kind: str, clause: str, text: str) -> Step:
    """One line of an explained deflection."""
    return Step(symbol=symbol, value=value, kind=kind, clause=clause, text=text)


def share_of_limit(value: ArrayLike, limit: ArrayLike) -> Array:
    """Size of a deflection [m] over its limit [m]: 0 where nothing moves, infinite where no movement is allowed.

    >>> share_of_limit([0.0, -0.01, 0.01], [0.0, 0.02, 0.0]).tolist()
    [0.0, 0.5, inf]
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        found = np.abs(np.asarray(value, dtype=np.float64)) / np.asarray(limit, dtype=np.float64)
    return np.where(np.isnan(found), 0.0, found)


def closing_steps(moved: Deflected, symbol: str, value: float) -> Iterator[Step]:
    """Length, limit and share of the limit; for a deflection without a limit, that there is none."""
    if not isfinite(moved.limit):
        yield step(symbol, value, "deflection", "", "no limit is in force for it")
        return
    if moved.length != moved.length:
        limit = "limit"
        yield step(limit, moved.limit, "deflection", "[deflection] horizontal", "movement allowed at the roller")
    else:
        limit = f"l/{moved.rule.ratio:g}"
        yield step("l", moved.length, "length", "", "between the bearings beside it, or twice the cantilever")
        yield step(limit, moved.limit, "deflection", moved.rule.source, f"limit of {symbol}")
    share = f"{symbol}/({limit})" if "/" in limit else f"{symbol}/{limit}"
    yield step(share, float(share_of_limit(value, moved.limit)), "factor", moved.rule.source, "share of the limit")


def _limits() -> Table:
    return read_table("timber/deflection_limits_ibc")
