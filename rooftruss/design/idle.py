"""Zero-force members of a design, case by case: what each member is for."""

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.inspection import TOLERANCE, Summary, pin_jointed_axial, summary, triangulation
from rooftruss.design.design import Design

Array = NDArray[np.float64]
SELF_WEIGHT = "self-weight"
EVERYDAY_SNOW = ("balanced", "undrifted")  # patterns of snow that count as everyday gravity load


def idle_summary(design: Design) -> Summary:
    """Inspection of the pin-jointed truss under every case, and over all strength combinations.

    Self-weight is left out of what is said about combinations: it loads every joint, so it would hide that a member
    carries nothing but timber. Gravity is dead load, ceiling live load and snow over the whole roof.
    Raises UnstableTrussError where the truss does not stand with pinned joints (`Run.triangulated`).
    """
    run = design.run
    heads = run.cases.heads
    gravity = [
        c
        for c, h in enumerate(heads)
        if h.name != SELF_WEIGHT and (h.action in ("D", "L") or (h.action == "S" and h.pattern in EVERYDAY_SNOW))
    ]
    return summary(run.truss, run.stiffness_axial, run.cases, _factors(design), gravity)


def _factors(design: Design) -> Array:
    """Factors (k, c) of the strength combinations without self-weight; those of nothing else are left out."""
    factors = design.run.combinations.factors[design.run.combinations.strength].copy()
    factors[:, [h.name == SELF_WEIGHT for h in design.run.cases.heads]] = 0.0
    return np.asarray(factors[np.any(factors != 0.0, axis=1)])


def idle_members(design: Design) -> frozenset[str]:
    """Members that carry nothing but self-weight in every strength combination; see `idle_summary`, tails left out.

    None where the truss does not stand with pinned joints.
    """
    run = design.run
    if not run.triangulated:
        return frozenset()
    axial = np.abs(_factors(design) @ pin_jointed_axial(run.truss, run.stiffness_axial, run.cases))
    idle = np.all(axial <= TOLERANCE * axial.max(axis=-1, keepdims=True), axis=0)
    made = run.family.topology
    return frozenset(made.names[k] for k in triangulation(made).members if idle[k])
