"""Imposed loads to EN 1991-1-1:2002: a roof that is walked on for maintenance only (category H), and the loft.

The concentrated load Q_k of category H is walked along the top chord (loads.walked) in the place of q_k, with which it
does not act (6.3.4.2(4)).
"""

from typing import cast

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.tables import read_table
from rooftruss.errors import OutOfScopeError
from rooftruss.loads.parts import half_roof, whole_roof
from rooftruss.loads.roof import ActionCase, Roof, SurfaceLoad, Value
from rooftruss.units import shown

Array = NDArray[np.float64]
CLAUSE = "EN 1991-1-1, 6.3.4.2"


def category_h(name: str) -> tuple[float, float, float]:
    """(recommended, least, most) of "q" [Pa] or "Q" [N] of category H; EN 1991-1-1:2002, Table 6.10.

    >>> category_h("Q")
    (1000.0, 900.0, 1500.0)
    """
    row = read_table("loads/imposed_roof_en1991").where(category="H")
    return tuple(cast(float, row[f"{name}_{which}"]) for which in ("k", "least", "most"))  # type: ignore[return-value]


def roof_live_cases(roof: Roof, roof_live: Array) -> list[ActionCase]:
    """Uniform load q_k [Pa, on plan] of category H (action Lr) on the roof and on either half; EN 1991-1-1, 6.3.4.

    A free action (6.2.1(1)): the halves reverse webs that the full load leaves alone. Those of a monopitch are the
    halves of its one slope. None where it is zero on all roofs. Raises OutOfScopeError above the range of Table 6.10:
    such a roof is of category I and has other factors.
    """
    q = np.asarray(roof_live, dtype=float)
    if not np.any(q):
        return []
    most = category_h("q")[2]
    if np.any(q > most * (1 + 1e-9)):
        raise OutOfScopeError(
            f"[loads] roof_live {shown(float(np.max(q)), 'pressure', 'metric')}: EN 1991-1-1, Table 6.10 gives up to "
            f"{shown(most, 'pressure', 'metric')} for roofs of category H; a roof in use is of category I, not covered"
        )
    q = q + np.zeros_like(np.asarray(roof.span, dtype=float))
    value = Value(symbol="q_k", value=q, kind="pressure", clause=f"{CLAUSE}, Table 6.10")
    patterns = (
        ("full", "full", whole_roof(q)),
        ("left half", "left", half_roof(roof, "left", q)),
        ("right half", "right", half_roof(roof, "right", q)),
    )
    return [
        ActionCase(name=f"imposed on roof, {name}", short=short, action="Lr", pattern="", loads=loads, values=(value,))
        for name, short, loads in patterns
    ]


def loft_cases(loft: Array) -> list[ActionCase]:
    """Imposed load of the loft (action L) [Pa, on plan] over the whole bottom chord; none where it is zero.

    Storage fills a loft slowly and is taken over the whole of it; the scheme says whether its psi factors are those of
    category A or of category E (EN 1990, Table A1.1).
    """
    if not np.any(loft):
        return []
    q = np.asarray(loft, dtype=float)
    value = Value(symbol="q_k", value=q, kind="pressure", clause="EN 1991-1-1, 6.3.1 and 6.3.2")
    ceiling = SurfaceLoad(surface="ceiling", kind="plan", pressure=q)
    return [ActionCase(name="imposed in loft", short="", action="L", pattern="", loads=(ceiling,), values=(value,))]
