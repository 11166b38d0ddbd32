"""All rules of the NDS for all members under all combinations: the inner loop of sizing and span tables.

`utilisations` finds the largest ratio under every combination with as few array passes as it takes; `rule_ratios` gives
each rule by itself, for the combination that governs.
"""

from collections.abc import Iterator
from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rooftruss.timber.nds_formulas import AMPLIFIER_FLOOR
from rooftruss.timber.nds_resistance import Resistances
from rooftruss.timber.nds_tables import limit
from rooftruss.timber.terms import Array, Demand, Rule
from rooftruss.timber.worst import blocks, by_member, spread

RULES = (
    Rule(name="tension", clause="3.8.1"),
    Rule(name="compression", clause="3.6.3"),
    Rule(name="slenderness in compression", clause="3.7.1.4"),
    Rule(name="bending", clause="3.3.1"),
    Rule(name="bending less tension", clause="3.9.1, eq. 3.9-2"),
    Rule(name="slenderness in bending", clause="3.3.3.7"),
    Rule(name="tension and bending", clause="3.9.1, eq. 3.9-1"),
    Rule(name="compression and bending", clause="3.9.2, eq. 3.9-3"),
    Rule(name="compression near the Euler stress", clause="3.9.2, f_c < F_cE1"),
    Rule(name="compression and bending, stability", clause="3.9.2, eq. 3.9-4"),
    Rule(name="shear", clause="3.4.2"),
)
(TENSION, COMPRESSION, SLENDER_COLUMN, BENDING, BENDING_LESS_TENSION, SLENDER_BEAM) = range(6)
(TENSION_BENDING, COMPRESSION_BENDING, EULER, STABILITY, SHEAR) = range(6, 11)

# Round-off of the analysis is not a force: below this share of the section's own capacity there is none.
NEGLIGIBLE = 1e-9
_FORCES = ("tension", "compression", "moment_positive", "moment_negative", "shear")


@dataclass(frozen=True, slots=True, kw_only=True)
class _Unit:
    """Stress ratios per unit of force or moment (b, m, 1), or as noted; Euler ratios are 0 for held members."""

    tension: Array  # (b, m, d)
    compression: Array  # (b, m, d)
    compression_bent: Array  # (b, m, d), with C_T
    positive: Array  # (b, m, d)
    negative: Array  # (b, m, d)
    star: Array  # (b, m, d)
    shear: Array  # (b, m, d)
    slender: Array
    slender_positive: Array
    slender_negative: Array
    euler: Array
    euler_weak: Array
    twist_positive: Array
    twist_negative: Array
    relief: Array  # section modulus over area
    least_force: Array
    least_moment: Array


def utilisations(r: Resistances, demand: Demand, index: NDArray[np.intp], edition: str) -> Array:
    """Largest ratio (..., k, m) of all rules; index (k,) tells which duration of `r` each combination has.

    Rules that cannot be the largest are left out: 3.8.1 beside eq. 3.9-1. Members come before combinations in memory,
    as in the effects, so that every pass is over long rows.
    """
    unit = _unit_ratios(r, demand.tension.shape[:-2], edition)
    names = (*_FORCES, *(("tension_least",) if demand.tension_least is not None else ()))
    forces = [by_member(getattr(demand, name)) for name in names]
    out = np.empty(forces[0].shape)
    for part in blocks(out.shape):
        own = _Unit(**{f.name: getattr(unit, f.name)[part] for f in fields(_Unit)})
        _largest(own, [values[part] for values in forces], index, out[part], stiffened=r.stiffened is not r.plain)
    return np.swapaxes(out, -1, -2).reshape(demand.tension.shape)


def _unit_ratios(r: Resistances, batch: tuple[int, ...], edition: str) -> _Unit:
    """Reciprocals of the resistances, so that the inner loop only multiplies."""
    area, modulus = r.area[..., None, :], r.modulus[..., None, :]
    column, beam = limit("column slenderness", edition=edition), limit("bending slenderness", edition=edition)
    ratios: dict[str, Any] = {
        "tension": 1 / (area * r.F_t),
        "compression": 1 / (area * r.plain.F_c),
        "compression_bent": 1 / (area * r.stiffened.F_c),
        "positive": 1 / (modulus * r.positive.F_b),
        "negative": 1 / (modulus * r.negative.F_b),
        "star": 1 / (modulus * r.F_b_star),
        "shear": 1.5 / (area * r.F_v),
        "slender": r.slenderness[..., None, :] / column,
        "slender_positive": r.positive.R_B[..., None, :] / beam,
        "slender_negative": r.negative.R_B[..., None, :] / beam,
        "euler": 1 / (area * r.stiffened.F_cE1[..., None, :]),
        "euler_weak": 1 / (area * r.F_cE2[..., None, :]),
        "twist_positive": 1 / (modulus * r.positive.F_bE[..., None, :]),
        "twist_negative": 1 / (modulus * r.negative.F_bE[..., None, :]),
        "relief": modulus / area,
        "least_force": least_effects(r)[0][..., None, :],
        "least_moment": least_effects(r)[1][..., None, :],
    }
    return _Unit(**{name: _flat(np.swapaxes(v, -1, -2), batch) for name, v in ratios.items()})


def _flat(values: Array, batch: tuple[int, ...]) -> Array:
    """(..., m, d), broadcast over the batch, as (b, m, d)."""
    return np.broadcast_to(values, (*batch, *values.shape[-2:])).reshape(-1, *values.shape[-2:])


def _largest(unit: _Unit, forces: list[Array], index: NDArray[np.intp], out: Array, *, stiffened: bool) -> None:
    """Largest ratio of one block of trusses into `out` (b, m, k).

    stiffened: some member takes C_T, where it is bent as well (4.4.2).
    """
    tension, compression, positive, negative, shear = forces[:5]
    moment = np.maximum(positive, negative)

    def lasting(ratio: Array) -> Array:
        return spread(ratio, index)

    np.multiply(tension, lasting(unit.tension), out=out)
    spare = moment * lasting(unit.star)
    out += spare  # 3.9-1
    np.maximum(out, np.multiply(shear, lasting(unit.shear), out=spare), out=out)
    bending = _bending(unit, forces, index, out, spare)
    pressed = (compression > unit.least_force).astype(np.float64)
    bent = (moment > unit.least_moment).astype(np.float64)
    squeezed = compression * lasting(unit.compression)
    if stiffened:
        np.multiply(compression, lasting(unit.compression_bent), out=squeezed, where=bent > 0)
    np.maximum(out, squeezed, out=out)
    np.maximum(out, pressed * unit.slender, out=out)
    bent *= pressed  # both
    margin = compression * unit.euler
    np.subtract(1, margin, out=margin)
    np.maximum(margin, AMPLIFIER_FLOOR, out=margin)
    np.divide(bending, margin, out=margin)
    squeezed *= squeezed
    margin += squeezed
    margin *= bent
    np.maximum(out, margin, out=out)  # 3.9-3
    twist = np.multiply(positive, unit.twist_positive, out=margin)
    np.maximum(twist, np.multiply(negative, unit.twist_negative, out=squeezed), out=twist)
    twist *= twist
    twist += np.multiply(compression, unit.euler_weak, out=squeezed)
    twist *= bent
    np.maximum(out, twist, out=out)  # 3.9-4


def _bending(unit: _Unit, forces: list[Array], index: NDArray[np.intp], out: Array, spare: Array) -> Array:
    """f_b/F_b by 3.3.1, or 3.9-2 where tension relieves it, counted into `out` with 3.3.3.7; `spare` is used."""
    positive, negative = forces[2:4]
    for slender, moment in ((unit.slender_positive, positive), (unit.slender_negative, negative)):
        if slender.any():
            np.multiply((moment > unit.least_moment).astype(np.float64), slender, out=spare)
            np.maximum(out, spare, out=out)
    upper, lower = (spread(ratio, index) for ratio in (unit.positive, unit.negative))
    if len(forces) > len(_FORCES):
        relief = np.multiply(forces[5], unit.relief, out=spare)
        upper *= positive - relief
        lower *= np.subtract(negative, relief, out=relief)
        np.maximum(upper, 0.0, out=upper)
    else:
        upper *= positive
        lower *= negative
    ratio = np.maximum(upper, lower, out=upper)
    np.maximum(out, ratio, out=out)
    return ratio


def least_effects(r: Resistances) -> tuple[Array, Array]:
    """Force and moment (..., m) below which there is none, whatever the duration."""
    force, moment = r.F_c_star.min(axis=-2), r.F_b_star.min(axis=-2)
    return NEGLIGIBLE * r.area * force, NEGLIGIBLE * r.modulus * moment


def rule_ratios(r: Resistances, force: Demand, least: tuple[Array, Array], edition: str) -> Iterator[tuple[int, Array]]:
    """Ratio (..., m) of each rule under one combination a member: demands (..., m), `r` at the duration of each.

    least: force and moment below which there is none.
    """
    column, beam = limit("column slenderness", edition=edition), limit("bending slenderness", edition=edition)
    least_force, least_moment = least

    def acting(values: Array, least: Array) -> Array:
        return np.where(values > least, values, 0.0)

    f_t, f_c = acting(force.tension, least_force) / r.area, acting(force.compression, least_force) / r.area
    upper, lower = (acting(m, least_moment) / r.modulus for m in (force.moment_positive, force.moment_negative))
    f_b = np.maximum(upper, lower)
    relief = 0.0 if force.tension_least is None else acting(force.tension_least, least_force) / r.area
    F_c = np.where(f_b > 0, r.stiffened.F_c, r.plain.F_c)
    bending = np.maximum(np.maximum((upper - relief) / r.positive.F_b, (lower - relief) / r.negative.F_b), 0.0)
    both = (f_c > 0) & (f_b > 0)
    margin = 1 - f_c / r.stiffened.F_cE1
    amplified = (f_c / F_c) ** 2 + bending / np.maximum(margin, AMPLIFIER_FLOOR)
    twist = np.maximum(upper / r.positive.F_bE, lower / r.negative.F_bE)
    yield TENSION, f_t / r.F_t
    yield COMPRESSION, f_c / F_c
    yield SLENDER_COLUMN, np.where(f_c > 0, r.slenderness / column, 0.0)
    yield BENDING, np.where(f_t > 0, 0.0, bending)
    yield BENDING_LESS_TENSION, np.where(f_t > 0, bending, 0.0)
    yield SLENDER_BEAM, np.maximum((upper > 0) * r.positive.R_B, (lower > 0) * r.negative.R_B) / beam
    yield TENSION_BENDING, f_t / r.F_t + f_b / r.F_b_star
    yield COMPRESSION_BENDING, np.where(both & (margin >= AMPLIFIER_FLOOR), amplified, 0.0)
    yield EULER, np.where(both & (margin < AMPLIFIER_FLOOR), amplified, 0.0)
    yield STABILITY, both * (f_c / r.F_cE2 + twist**2)
    yield SHEAR, 1.5 * force.shear / (r.area * r.F_v)
