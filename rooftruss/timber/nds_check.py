"""All rules of the NDS for all members under all combinations: the inner loop of sizing and span tables.

Per combination and member only a few dozen elementwise operations remain; they run over blocks of trusses whose
arrays stay in the processor's cache.
"""

from collections.abc import Iterator
from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from rooftruss.timber.nds_formulas import AMPLIFIER_FLOOR
from rooftruss.timber.nds_resistance import Resistances, resistances
from rooftruss.timber.nds_tables import limit
from rooftruss.timber.terms import Array, Checks, Demand, Members, Rule
from rooftruss.timber.worst import Worst

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
BLOCK = 48_000  # elements (combinations x members) worked on at a time: about 384 kB an array


@dataclass(frozen=True, slots=True, kw_only=True)
class _Unit:
    """Stress ratios per unit of force or moment, (b, d, m) unless noted; Euler ratios are 0 for held members."""

    tension: Array
    compression: Array
    compression_bent: Array | None  # with C_T; None where no member takes it
    positive: Array
    negative: Array
    star: Array
    shear: Array
    slender: Array  # (b, 1, m) and so on
    slender_positive: Array
    slender_negative: Array
    euler: Array
    euler_weak: Array
    twist_positive: Array
    twist_negative: Array
    relief: Array  # section modulus over area
    least_force: Array
    least_moment: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class _Block:
    """One block of trusses: demands cleaned of round-off (b, k, m), unit ratios, index of the duration of each k."""

    unit: _Unit
    index: NDArray[np.intp]
    tension: Array
    compression: Array
    positive: Array
    negative: Array
    relief: Array | float

    def of_duration(self, ratio: Array) -> Array:
        """(b, d, m) -> (b, k, m)."""
        return np.take(ratio, self.index, axis=1)


def check_members(
    members: Members, demand: Demand, factors: Array, *, edition: str, buckling_stiffness: bool
) -> Checks:
    """Worst utilisation (..., k, m) by chapter 3 for duration `factors` (k,): C_D of ASD, lambda of LRFD."""
    distinct, index = np.unique(factors, return_inverse=True)
    r = resistances(members, distinct, edition=edition, buckling_stiffness=buckling_stiffness)
    shape = demand.tension.shape
    unit = _unit_ratios(r, shape[:-2], edition)
    utilisation = np.zeros(shape)
    rule = np.zeros(shape, np.int8)
    if rule.size:
        flat = (-1, *shape[-2:])
        worst = Worst(utilisation.reshape(flat), rule.reshape(flat))
        for part in _parts(worst.utilisation.shape):
            block = _block(demand, unit, index, part)
            _run(block, demand.shear.reshape(flat)[part], Worst(worst.utilisation[part], worst.rule[part]))
    return Checks(rules=RULES, utilisation=utilisation, rule=rule)


def _parts(shape: tuple[int, ...]) -> Iterator[slice]:
    step = max(1, BLOCK // (shape[1] * shape[2]))
    return (slice(start, start + step) for start in range(0, shape[0], step))


def _unit_ratios(r: Resistances, batch: tuple[int, ...], edition: str) -> _Unit:
    """Reciprocals of the resistances, so that the inner loop only multiplies."""
    area, modulus = r.area[..., None, :], r.modulus[..., None, :]
    column, beam = limit("column slenderness", edition=edition), limit("bending slenderness", edition=edition)
    plain, bent = r.plain, r.stiffened
    ratios: dict[str, Any] = {
        "tension": 1 / (area * r.F_t),
        "compression": 1 / (area * plain.F_c),
        "compression_bent": None if bent is plain else 1 / (area * bent.F_c),
        "positive": 1 / (modulus * r.positive.F_b),
        "negative": 1 / (modulus * r.negative.F_b),
        "star": 1 / (modulus * r.F_b_star),
        "shear": 1.5 / (area * r.F_v),
        "slender": r.slenderness[..., None, :] / column,
        "slender_positive": r.positive.R_B[..., None, :] / beam,
        "slender_negative": r.negative.R_B[..., None, :] / beam,
        "euler": 1 / (area * bent.F_cE1[..., None, :]),
        "euler_weak": 1 / (area * r.F_cE2[..., None, :]),
        "twist_positive": 1 / (modulus * r.positive.F_bE[..., None, :]),
        "twist_negative": 1 / (modulus * r.negative.F_bE[..., None, :]),
        "relief": modulus / area,
        "least_force": NEGLIGIBLE * area * r.F_c_star.min(axis=-2, keepdims=True),
        "least_moment": NEGLIGIBLE * modulus * r.F_b_star.min(axis=-2, keepdims=True),
    }
    flat: dict[str, Any] = {name: None if v is None else _flat(v, batch) for name, v in ratios.items()}
    return _Unit(**flat)


def _flat(values: Array, batch: tuple[int, ...]) -> Array:
    """(..., d, m), broadcast over the batch, as (b, d, m)."""
    return np.broadcast_to(values, (*batch, *values.shape[-2:])).reshape(-1, *values.shape[-2:])


def _block(demand: Demand, unit: _Unit, index: NDArray[np.intp], part: slice) -> _Block:
    whole = {f.name: getattr(unit, f.name) for f in fields(_Unit)}
    own: dict[str, Any] = {name: None if v is None else v[part] for name, v in whole.items()}
    u = _Unit(**own)
    flat = (-1, *demand.tension.shape[-2:])

    def clean(values: Array, least: Array) -> Array:
        values = values.reshape(flat)[part]
        return _where(values > least, values)

    relief: Array | float = 0.0
    if demand.tension_least is not None:
        relief = clean(demand.tension_least, u.least_force) * u.relief
    return _Block(
        unit=u,
        index=index,
        tension=clean(demand.tension, u.least_force),
        compression=clean(demand.compression, u.least_force),
        positive=clean(demand.moment_positive, u.least_moment),
        negative=clean(demand.moment_negative, u.least_moment),
        relief=relief,
    )


def _where(flags: NDArray[np.bool_], values: Array) -> Array:
    """`values` where the flag is set, else 0; a product of floats, since mixed products cost twice as much."""
    out = flags.astype(np.float64)
    out *= values
    return out


def _run(block: _Block, shear: Array, worst: Worst) -> None:
    moment = np.maximum(block.positive, block.negative)
    tension = block.tension * block.of_duration(block.unit.tension)
    worst.take(tension, TENSION)
    compressed, bent = block.compression > 0, moment > 0
    compression = _compression(block, compressed, bent, worst)
    bending = _bending(block, worst)
    tension += moment * block.of_duration(block.unit.star)  # 3.9-1; with no tension it cannot exceed 3.3.1
    worst.take(tension, TENSION_BENDING)
    _compression_bending(block, compression, bending, compressed & bent, worst)
    worst.take(shear * block.of_duration(block.unit.shear), SHEAR)


def _compression(block: _Block, compressed: NDArray[np.bool_], bent: NDArray[np.bool_], worst: Worst) -> Array:
    """3.6.3 and 3.7.1.4; C_T only where there is bending too (4.4.2). Returns f_c/F_c."""
    ratio = block.of_duration(block.unit.compression)
    if block.unit.compression_bent is not None:
        np.copyto(ratio, block.of_duration(block.unit.compression_bent), where=bent)
    ratio *= block.compression
    worst.take(ratio, COMPRESSION)
    worst.take(_where(compressed, block.unit.slender), SLENDER_COLUMN)
    return ratio


def _bending(block: _Block, worst: Worst) -> Array:
    """3.3.1, or 3.9-2 where there is tension, and 3.3.3.7. Returns f_b/F_b of the worse sign."""
    unit, relieved = block.unit, isinstance(block.relief, np.ndarray)
    positive = block.positive - block.relief if relieved else block.positive
    negative = block.negative - block.relief if relieved else block.negative
    ratio = np.maximum(positive * block.of_duration(unit.positive), negative * block.of_duration(unit.negative))
    if relieved:
        np.maximum(ratio, 0.0, out=ratio)
    worst.take(ratio, (block.tension > 0).view(np.int8) + np.int8(BENDING))
    slender = _where(block.positive > 0, unit.slender_positive)
    np.maximum(slender, _where(block.negative > 0, unit.slender_negative), out=slender)
    worst.take(slender, SLENDER_BEAM)
    return ratio


def _compression_bending(
    block: _Block, compression: Array, bending: Array, both: NDArray[np.bool_], worst: Worst
) -> None:
    """3.9-3 with its guard and 3.9-4, only where there are both: either alone has its own rule."""
    unit = block.unit
    margin = 1 - block.compression * unit.euler
    held = margin < AMPLIFIER_FLOOR
    np.maximum(margin, AMPLIFIER_FLOOR, out=margin)
    np.divide(bending, margin, out=margin)
    margin += compression * compression
    acting = both.astype(np.float64)
    margin *= acting
    worst.take(margin, held.view(np.int8) + np.int8(COMPRESSION_BENDING))
    twist = np.maximum(block.positive * unit.twist_positive, block.negative * unit.twist_negative)
    twist *= twist
    twist += block.compression * unit.euler_weak
    twist *= acting
    worst.take(twist, STABILITY)
