"""Deflection limits of roof members and growth of deflection under lasting load."""

import numpy as np
from numpy.typing import ArrayLike

from rooftruss.basis.tables import Table, read_table
from rooftruss.errors import JobError, nearest
from rooftruss.timber.terms import Array, Creep

KINDS = ("live", "wind_snow", "total")


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


def _limits() -> Table:
    return read_table("timber/deflection_limits_ibc")
