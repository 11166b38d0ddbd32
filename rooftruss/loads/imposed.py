"""Roof live load and ceiling live load of ASCE 7, chapter 4 (7-16 and 7-22 alike)."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from rooftruss.basis.tables import read_table
from rooftruss.loads.parts import half_roof, whole_roof
from rooftruss.loads.roof import ActionCase, Roof, SurfaceLoad, Value
from rooftruss.units import FOOT, shown

Array = NDArray[np.float64]
CLAUSE = "ASCE 7, 4.8.2"
SAME = 1e-9


def area_factor(area: ArrayLike) -> Array:
    """Reduction R_1 [-] for the tributary area A_t [m2] (...,); ASCE 7, 4.8.2.

    >>> round(float(area_factor(400 * FOOT**2)), 3)
    0.8
    """
    A_t = np.asarray(area, float) / FOOT**2
    return np.clip(1.2 - 0.001 * A_t, 0.6, 1.0)


def pitch_factor(pitch: ArrayLike) -> Array:
    """Reduction R_2 [-] for the rise F in inches per foot; pitch as rise over run (...,); ASCE 7, 4.8.2.

    >>> round(float(pitch_factor(6 / 12)), 3)
    0.9
    """
    F = 12 * np.asarray(pitch, float)
    return np.clip(1.2 - 0.05 * F, 0.6, 1.0)


def roof_live_load(basic: ArrayLike, R_1: Array | float, R_2: Array | float) -> Array:
    """Roof live load L_r [Pa] on plan (...,); ASCE 7, eq. 4.8-1, from the basic load L_o [Pa].

    The clause reduces the 20 psf of ordinary roofs, down to 12 psf. A basic load over 20 psf is no load of an
    ordinary roof: it is not reduced. One below 20 psf is reduced too, yet neither below 12 psf nor below itself.

    >>> PSF = 47.88025898
    >>> round(float(roof_live_load(20 * PSF, 0.6, 0.6)) / PSF, 2)
    12.0
    """
    row = read_table("loads/roof_live_asce7").rows[0]
    ordinary, least = float(row["L_o"]), float(row["L_r_least"])
    L_o = np.asarray(basic, float)
    reduced = np.maximum(L_o * R_1 * R_2, np.minimum(L_o, least))
    return np.where(L_o <= ordinary * (1 + SAME), reduced, L_o)


def roof_live_cases(roof: Roof, roof_live: Array) -> list[ActionCase]:
    """Roof live load (action Lr) on the whole roof and on either half; none where it is zero on all roofs.

    roof_live is the basic load L_o [Pa] (...,). The halves are the partial loading of 4.3.3: they reverse webs that
    the full load leaves alone. Those of a monopitch are the halves of its one slope.
    """
    if not np.any(roof_live):
        return []
    R_1, R_2 = area_factor(roof.span * roof.spacing), pitch_factor(roof.pitch)
    L_r = roof_live_load(roof_live, R_1, R_2)
    ordinary = float(read_table("loads/roof_live_asce7").rows[0]["L_o"])
    low = bool(np.any(np.asarray(roof_live) < ordinary * (1 - SAME)))
    asked = f", which asks for {shown(ordinary, 'pressure', 'US')} on ordinary roofs" if low else ""
    values = (
        Value(symbol="L_o", value=roof_live, kind="pressure", clause=f"ASCE 7, Table 4.3-1{asked}"),
        Value(symbol="A_t", value=np.asarray(roof.span * roof.spacing), kind="roof area", clause=CLAUSE),
        Value(symbol="R_1", value=R_1, kind="factor", clause=CLAUSE),
        Value(symbol="R_2", value=R_2, kind="factor", clause=CLAUSE),
        Value(symbol="L_r", value=L_r, kind="pressure", clause="ASCE 7, eq. 4.8-1"),
    )
    patterns = (
        ("roof live", "full", whole_roof(L_r)),
        ("roof live, left half", "left", half_roof(roof, "left", L_r)),
        ("roof live, right half", "right", half_roof(roof, "right", L_r)),
    )
    return [
        ActionCase(name=name, short=short, action="Lr", pattern="", loads=loads, values=values)
        for name, short, loads in patterns
    ]


def ceiling_live_cases(ceiling_live: Array) -> list[ActionCase]:
    """Ceiling live load (action L) [Pa] on plan over the whole bottom chord; none where it is zero on all trusses."""
    if not np.any(ceiling_live):
        return []
    value = Value(symbol="L", value=ceiling_live, kind="pressure", clause="ASCE 7, Table 4.3-1")
    ceiling = SurfaceLoad(surface="ceiling", kind="plan", pressure=np.asarray(ceiling_live, float))
    return [ActionCase(name="ceiling live", short="", action="L", pattern="", loads=(ceiling,), values=(value,))]
