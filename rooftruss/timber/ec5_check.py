"""All rules of EN 1995-1-1 for all members under all combinations: the inner loop of sizing and span tables.

Demands are divided by k_mod/gamma_M first; then every rule compares them with one characteristic resistance.
"""

from collections.abc import Iterator
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from rooftruss.timber.ec5_resistance import Resistances, resistances
from rooftruss.timber.terms import Array, Checks, Demand, Members, Rule
from rooftruss.timber.worst import Worst

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
BLOCK = 32_000  # elements (combinations x members) worked on at a time: about 256 kB an array


@dataclass(frozen=True, slots=True, kw_only=True)
class _Unit:
    """Stress ratios per unit of force or moment before k_mod/gamma_M, (b, 1, m); `scale` is (b, d, m)."""

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
    least_moment: Array


def check_members(members: Members, demand: Demand, scale: Array, index: NDArray[np.intp]) -> Checks:
    """Worst utilisation (..., k, m) for gamma_M/k_mod (..., d, m) of the distinct durations; index (k,) picks one."""
    shape = demand.tension.shape
    unit = _unit_ratios(resistances(members), scale, shape[:-2])
    utilisation, rule = np.zeros(shape), np.zeros(shape, np.int8)
    if rule.size:
        flat = (-1, *shape[-2:])
        worst = Worst(utilisation.reshape(flat), rule.reshape(flat))
        for part in _parts(worst.utilisation.shape):
            whole = {f.name: getattr(unit, f.name)[part] for f in fields(_Unit)}
            _run(_Unit(**whole), demand, index, part, Worst(worst.utilisation[part], worst.rule[part]))
    return Checks(rules=RULES, utilisation=utilisation, rule=rule)


def _parts(shape: tuple[int, ...]) -> Iterator[slice]:
    step = max(1, BLOCK // (shape[1] * shape[2]))
    return (slice(start, start + step) for start in range(0, shape[0], step))


def _unit_ratios(r: Resistances, scale: Array, batch: tuple[int, ...]) -> _Unit:
    """Reciprocals of the resistances, so that the inner loop only multiplies."""
    ratios = {
        "tension": 1 / (r.area * r.f_t),
        "compression": 1 / (r.area * r.f_c),
        "bending": 1 / (r.modulus * r.f_m),
        "positive": 1 / (r.modulus * r.positive.k_crit * r.f_m),
        "negative": 1 / (r.modulus * r.negative.k_crit * r.f_m),
        "in_plane": 1 / (r.area * r.k_c_y * r.f_c),
        "across": 1 / (r.area * r.k_c_z * r.f_c),
        "k_m": r.k_m,
        "stocky": r.stocky,
        "shear": 1.5 / (r.area * r.k_cr * r.f_v),
        "least_force": NEGLIGIBLE * r.area * r.f_c,
        "least_moment": NEGLIGIBLE * r.modulus * r.f_m,
    }
    flat = {name: _flat(values[..., None, :], batch) for name, values in ratios.items()}
    return _Unit(scale=_flat(scale, batch), **flat)


def _flat(values: Array, batch: tuple[int, ...]) -> Array:
    """(..., d, m), broadcast over the batch, as (b, d, m)."""
    return np.broadcast_to(values, (*batch, *values.shape[-2:])).reshape(-1, *values.shape[-2:])


def _run(unit: _Unit, demand: Demand, index: NDArray[np.intp], part: slice, worst: Worst) -> None:
    flat = (-1, *demand.tension.shape[-2:])
    scale = np.take(unit.scale, index, axis=1)

    def scaled(values: Array, least: Array) -> Array:
        values = values.reshape(flat)[part]
        out = (values > least).astype(np.float64)  # a product of floats, since mixed ones cost twice as much
        out *= values
        out *= scale
        return out

    tension = scaled(demand.tension, unit.least_force) * unit.tension
    force = scaled(demand.compression, unit.least_force)
    positive = scaled(demand.moment_positive, unit.least_moment)
    negative = scaled(demand.moment_negative, unit.least_moment)
    bending = np.maximum(positive, negative)
    bending *= unit.bending
    compression = force * unit.compression
    worst.take(tension, TENSION)
    worst.take(compression, COMPRESSION)
    worst.take(bending, BENDING)
    positive *= unit.positive
    negative *= unit.negative
    torsion = np.maximum(positive, negative, out=positive)
    worst.take(torsion, TORSION)
    tension += bending
    worst.take(tension, BENDING_TENSION)
    _compression(unit, force, compression, bending, torsion, worst)
    shear = demand.shear.reshape(flat)[part] * scale
    shear *= unit.shear
    worst.take(shear, SHEAR)


def _compression(unit: _Unit, force: Array, compression: Array, bending: Array, torsion: Array, worst: Worst) -> None:
    """6.2.4 where both relative slendernesses are up to 0.3, else 6.3.2; and 6.3.3(6) where a moment acts too.

    Compression alone on a stocky member is left to 6.1.4: the square in (6.19) is for the two together. `compression`,
    `bending` and `torsion` are used up.
    """
    acting = (force > 0).astype(np.float64)
    slender = acting * (1 - unit.stocky)
    acting *= bending > 0
    if unit.stocky.any():
        compression *= compression
        compression += bending
        compression *= acting
        compression *= unit.stocky
        worst.take(compression, BENDING_COMPRESSION)
    in_plane = force * unit.in_plane
    in_plane += bending
    in_plane *= slender
    worst.take(in_plane, IN_PLANE)
    across = force * unit.across
    bending *= unit.k_m
    bending += across
    bending *= slender
    worst.take(bending, ACROSS)
    torsion *= torsion
    torsion += across
    torsion *= acting
    worst.take(torsion, TORSION_COMPRESSION)
