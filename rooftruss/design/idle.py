"""Zero-force members of a design, case by case: what each member is for."""

import numpy as np

from rooftruss.analysis.inspection import Summary, summary
from rooftruss.design.design import Design

SELF_WEIGHT = "self-weight"
EVERYDAY_SNOW = ("balanced", "undrifted")  # patterns of snow that count as everyday gravity load


def idle_summary(design: Design) -> Summary:
    """Inspection of the pin-jointed truss under every case, and over all strength combinations.

    Self-weight is left out of what is said about combinations: it loads every joint, so it would hide that a member
    carries nothing but timber. Gravity is dead load, ceiling live load and snow over the whole roof.
    """
    run = design.run
    heads = run.cases.heads
    factors = run.combinations.factors[run.combinations.strength].copy()
    factors[:, [h.name == SELF_WEIGHT for h in heads]] = 0.0
    acting = factors[np.any(factors != 0.0, axis=1)]
    gravity = [
        c
        for c, h in enumerate(heads)
        if h.name != SELF_WEIGHT and (h.action in ("D", "L") or (h.action == "S" and h.pattern in EVERYDAY_SNOW))
    ]
    return summary(run.truss, run.stiffness_axial, run.cases, acting, gravity)
