"""All rules of EN 1995-1-1 for all members under all combinations: the inner loop of sizing and span tables.

`utilisations` finds the largest ratio under every combination with as few array passes as it takes; `rule_ratios` gives
each rule by itself, for the combination that governs.
"""

from collections.abc import Iterator
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from rooftruss.timber.ec5_resistance import Resistances
from rooftruss.timber.ec5_truss import TrussRules
from rooftruss.timber.terms import Array, Demand, Rule
from rooftruss.timber.worst import blocks, by_member, spread

RULES = (
    Rule(name="tension", clause="6.1.2, eq. (6.1)"),
    Rule(name="compression", clause="6.1.4, eq. (6.2)"),
    Rule(name="bending", clause="6.1.6, eq. (6.11)"),
    Rule(name="lateral torsional buckling", clause="6.3.3, eq. (6.33)"),
    Rule(name="bending and tension", clause="6.2.3, eq. (6.17)"),
    Rule(name="bending and compression", clause="6.2.4, eq. (6.19)"),
    Rule(name="buckling in the plane", clause="6.3.2, eq. (6.23)"),
    Rule(name="buckling across the plane", clause="6.3.2, eq. (6.24)"),
    Rule(name="lateral torsional buckling with compression", clause="6.3.3, eq. (6.35)"),
    Rule(name="shear", clause="6.1.7, eq. (6.13)"),
)
TENSION, COMPRESSION, BENDING, TORSION, BENDING_TENSION, BENDING_COMPRESSION = range(6)
IN_PLANE, ACROSS, TORSION_COMPRESSION, SHEAR = range(6, 10)

# Round-off of the analysis is not a force: below this share of the section's own capacity there is none.
NEGLIGIBLE = 1e-9


@dataclass(frozen=True, slots=True, kw_only=True)
class _Unit:
    """Stress ratios per unit of force or moment before k_mod/gamma_M, (b, m, 1); `scale` is (b, m, d)."""

    scale: Array  # gamma_M/k_mod
    tension: Array
    compression: Array
    bending: Array
    positive: Array  # with k_crit
    negative: Array
    in_plane: Array  # with k_c
    across: Array
    k_m: Array
    stocky: Array
    shear: Array
    least_force: Array


def utilisations(r: Resistances, demand: Demand, scale: Array, index: NDArray[np.intp], rules: TrussRules) -> Array:
    """Largest ratio (..., k, m) of all rules; gamma_M/k_mod (..., d, m) of each duration, index (k,) picks one.

    What cannot be the largest is left out: (6.1) beside (6.17), (6.11) beside (6.33), (6.2) of a slender member beside
    (6.23). Members come before combinations in memory, as in the effects, so that every pass is over long rows.
    """
    unit = _unit_ratios(r, scale, demand.tension.shape[:-2], rules)
    forces = [by_member(getattr(demand, name)) for name in _FORCES]
    out = np.empty(forces[0].shape)
    for part in blocks(out.shape):
        own = _Unit(**{f.name: getattr(unit, f.name)[part] for f in fields(_Unit)})
        _largest(own, [values[part] for values in forces], index, rules, out[part])
    return np.swapaxes(out, -1, -2).reshape(demand.tension.shape)


_FORCES = ("tension", "compression", "moment_positive", "moment_negative", "shear")


def _unit_ratios(r: Resistances, scale: Array, batch: tuple[int, ...], rules: TrussRules) -> _Unit:
    """Reciprocals of the resistances, so that the inner loop only multiplies. Stocky members do not buckle: 0."""
    slender = 1 - r.stocky
    pressed = rules.compression / (r.area * r.f_c)
    ratios = {
        "tension": 1 / (r.area * r.f_t),
        "compression": pressed,
        "bending": 1 / (r.modulus * r.f_m),
        "positive": 1 / (r.modulus * r.positive.k_crit * r.f_m),
        "negative": 1 / (r.modulus * r.negative.k_crit * r.f_m),
        "in_plane": slender * pressed / r.k_c_y,
        "across": pressed / r.k_c_z,
        "k_m": r.k_m,
        "stocky": r.stocky,
        "shear": 1.5 / (r.area * r.k_cr * r.f_v),
        "least_force": NEGLIGIBLE * r.area * r.f_c,
    }
    flat = {name: _flat(values[..., None], batch) for name, values in ratios.items()}
    return _Unit(scale=_flat(np.swapaxes(scale, -1, -2), batch), **flat)


def _flat(values: Array, batch: tuple[int, ...]) -> Array:
    """(..., m, d), broadcast over the batch, as (b, m, d)."""
    return np.broadcast_to(values, (*batch, *values.shape[-2:])).reshape(-1, *values.shape[-2:])


def _largest(unit: _Unit, forces: list[Array], index: NDArray[np.intp], rules: TrussRules, out: Array) -> None:
    """Largest ratio of one block of trusses into `out` (b, m, k). Linear rules first; they share gamma_M/k_mod."""
    tension, compression, positive, negative, shear = forces
    scale = spread(unit.scale, index)
    torsion = positive * unit.positive
    np.maximum(torsion, np.multiply(negative, unit.negative, out=out), out=torsion)
    bending = np.maximum(positive, negative)
    bending *= unit.bending
    in_plane = compression * unit.in_plane
    in_plane += bending
    across = compression * unit.across
    pressed = np.multiply(bending, unit.k_m, out=out)
    pressed += across * (1 - unit.stocky) if unit.stocky.any() else across
    np.maximum(pressed, in_plane, out=in_plane)
    if rules.combined < 1:
        in_plane *= (compression > unit.least_force) * (1 / rules.combined - 1) + 1
    np.multiply(tension, unit.tension, out=out)
    out += bending
    if rules.axial < 1:
        out *= (tension > unit.least_force) * (1 / rules.axial - 1) + 1
    np.maximum(out, in_plane, out=out)
    np.maximum(out, torsion, out=out)
    np.maximum(out, np.multiply(shear, unit.shear, out=in_plane), out=out)
    out *= scale
    _squares(unit, compression, bending, torsion, across, scale, rules, out)


def _squares(
    unit: _Unit,
    compression: Array,
    bending: Array,
    torsion: Array,
    across: Array,
    scale: Array,
    rules: TrussRules,
    out: Array,
) -> None:
    """(6.35), and (6.2) and (6.19) of stocky members; the arrays are used up.

    (6.35) is for compression and moment together; without a moment it is no more than (6.24).
    """
    torsion *= scale
    torsion *= torsion
    across *= scale
    torsion += across
    torsion *= (compression > unit.least_force).astype(np.float64)
    np.maximum(out, torsion, out=out)
    if unit.stocky.any() or rules.axial < 1:
        alone = compression * unit.compression
        alone *= scale
        np.maximum(out, alone / rules.axial, out=out)
        alone *= alone
        alone += bending * scale
        both = (compression > unit.least_force) & (bending > NEGLIGIBLE)
        alone *= unit.stocky * both / rules.combined
        np.maximum(out, alone, out=out)


def rule_ratios(r: Resistances, force: Demand, scale: Array, rules: TrussRules) -> Iterator[tuple[int, Array]]:
    """Ratio (..., m) of each rule under one combination a member: demands (..., m), gamma_M/k_mod (..., m)."""

    def acting(values: Array, least: Array) -> Array:
        return np.where(values > least, values, 0.0) * scale

    least_force, least_moment = NEGLIGIBLE * r.area * r.f_c, NEGLIGIBLE * r.modulus * r.f_m
    N_t = acting(force.tension, least_force)
    N_c = rules.compression * acting(force.compression, least_force)
    positive, negative = (acting(m, least_moment) for m in (force.moment_positive, force.moment_negative))
    t, c = N_t / (r.area * r.f_t), N_c / (r.area * r.f_c)
    m = np.maximum(positive, negative) / (r.modulus * r.f_m)
    torsion = np.maximum(positive / r.positive.k_crit, negative / r.negative.k_crit) / (r.modulus * r.f_m)
    slender, both = (N_c > 0) * (1 - r.stocky), (N_c > 0) & (m > 0)
    yield TENSION, t / rules.axial
    yield COMPRESSION, c / rules.axial
    yield BENDING, m
    yield TORSION, torsion
    yield BENDING_TENSION, np.where(N_t > 0, (t + m) / rules.axial, m)
    yield BENDING_COMPRESSION, both * r.stocky * (c**2 + m) / rules.combined
    yield IN_PLANE, slender * (c / r.k_c_y + m) / rules.combined
    yield ACROSS, slender * (c / r.k_c_z + r.k_m * m) / rules.combined
    yield TORSION_COMPRESSION, both * (torsion**2 + c / r.k_c_z)
    yield SHEAR, 1.5 * force.shear * scale / (r.area * r.k_cr * r.f_v)
