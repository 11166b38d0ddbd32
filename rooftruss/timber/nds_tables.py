"""Adjustment factors of the NDS that are read from tables, for one edition. Each edition names its own files."""

import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from typing import cast

import numpy as np
from numpy.typing import ArrayLike, NDArray

from rooftruss.basis.grades import reaches
from rooftruss.basis.tables import Cell, Table, read_table
from rooftruss.errors import JobError, OutOfScopeError, nearest

STRENGTHS = ("Fb", "Ft", "Fv", "Fc_perp", "Fc")
PROPERTIES = (*STRENGTHS, "E", "Emin")


@dataclass(frozen=True, slots=True, kw_only=True)
class Product:
    """Constants that go with the kind of product; K_T is NaN where C_T is not for it."""

    column_c: float
    repetitive: float
    K_T: float
    dry_only: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheathed:
    """Constants of C_T: K_M [N/m3] and the reach of the rule [m]."""

    K_M: float
    length_up_to: float
    breadth_up_to: float
    depth_up_to: float


@cache
def table(edition: str, rule: str) -> Table:
    """The table of a rule in an edition ("2018", "2024")."""
    return read_table(f"timber/{read_table('timber/nds_editions').where(edition=edition, rule=rule)['file']}")


@cache
def load_duration_factor(duration: str, *, edition: str) -> float:
    """C_D [-] for the shortest load of a combination; NDS 2.3.2, Table 2.3.2. Raises JobError for an unknown name.

    >>> load_duration_factor("two months", edition="2018")
    1.15
    """
    rows = table(edition, "load duration")
    known = [str(cell) for cell in rows.column("duration")]
    if duration not in known:
        raise JobError(f"load duration {duration!r} is not in NDS Table 2.3.2; {nearest(duration, known)}")
    return _number(rows.where(duration=duration), "C_D")


def require_time_effects(factors: NDArray[np.float64], *, edition: str) -> None:
    """Raises JobError unless every time effect factor lies within NDS Table N3."""
    known = cast("list[float]", table(edition, "time effect").column("lambda"))
    if not bool(np.all((factors >= min(known)) & (factors <= max(known)))):
        raise JobError(
            f"LRFD by the NDS needs a time effect factor of {min(known)} to {max(known)} (Table N3) on every strength "
            f"combination; the scheme gives {', '.join(f'{f:g}' for f in factors)}"
        )


def wet_service_factor(prop: str, reference: float, C_F: float, *, moisture: str, edition: str) -> float:
    """C_M [-] for a reference value [Pa]; NDS Supplement Table 4A: waived for low Fb C_F and Fc C_F.

    >>> wet_service_factor("Ft", 3.1e6, 1.0, moisture="wet", edition="2018")
    1.0
    """
    if moisture == "dry":
        return 1.0
    row = table(edition, "wet service").where(property=prop)
    limit = _number(row, "waived_up_to")
    # The millionth keeps a value that stands exactly at the limit (575 psi x 2) on the side of the table.
    return 1.0 if reference * C_F <= limit * (1 + 1e-6) else _number(row, "C_M")


def temperature_factor(prop: str, *, moisture: str, temperature: str, edition: str) -> float:
    """C_t [-]; NDS 2.3.3, Table 2.3.3."""
    return _number(table(edition, "temperature").where(temperature=temperature, moisture=moisture), prop)


def size_factor(prop: str, size_class: str, breadth: float, depth: float, *, edition: str) -> float:
    """C_F [-] for a dressed size [m]; NDS 4.3.6, Supplement Tables 4A and 4B. Only Fb, Ft and Fc have one.

    Raises OutOfScopeError for a size that the class has no row for.
    """
    if prop not in ("Fb", "Ft", "Fc"):
        return 1.0
    rows = [row for row in table(edition, "size").rows if row["size_class"] == size_class]
    return _number(_first_that_reaches(rows, breadth, depth, f"size factor of {size_class!r}"), prop)


def flat_use_factor(breadth: float, depth: float, *, edition: str) -> float:
    """C_fu [-] on Fb of dimension lumber (not machine rated) bent flatwise; NDS 4.3.7, Supplement Table 4A."""
    rows = list(table(edition, "flat use").rows)
    return _number(_first_that_reaches(rows, breadth, depth, "flat use factor"), "C_fu")


def incising_factor(prop: str, *, incised: bool, edition: str) -> float:
    """C_i [-]; NDS 4.3.8, Table 4.3.8."""
    return _number(table(edition, "incising").where(property=prop), "C_i") if incised else 1.0


def format_and_resistance(prop: str, *, edition: str) -> tuple[float, float]:
    """K_F and phi of LRFD [-]; NDS Tables N1 and N2."""
    row = table(edition, "format").where(property=prop)
    return _number(row, "K_F"), _number(row, "phi")


def product(name: str, *, edition: str) -> Product:
    """Constants of a kind of product. Raises JobError for an unknown one."""
    rows = table(edition, "product")
    known = [str(cell) for cell in rows.column("product")]
    if name not in known:
        raise JobError(f"product {name!r} of a grade is not known to the NDS; {nearest(name, known)}")
    row = rows.where(product=name)
    return Product(
        column_c=_number(row, "column_c"),
        repetitive=_number(row, "C_r"),
        K_T=_number(row, "K_T"),
        dry_only=row["conditions"] == "dry",
    )


def repetitive_conditions(*, edition: str) -> tuple[float, float]:
    """Least number of members [-] and largest spacing [m] that C_r asks for; NDS 4.3.9."""
    row = table(edition, "repetitive").rows[0]
    return _number(row, "least_number"), _number(row, "spacing_up_to")


def sheathed_chord(*, edition: str) -> Sheathed:
    """Constants of C_T for lumber at 19 percent moisture or less when sheathed; NDS 4.4.2."""
    row = table(edition, "buckling stiffness").where(seasoning="19 percent or less when sheathed")
    return Sheathed(
        K_M=_number(row, "K_M"),
        length_up_to=_number(row, "length_up_to"),
        breadth_up_to=_number(row, "breadth_up_to"),
        depth_up_to=_number(row, "depth_up_to"),
    )


def bearing_area(*, edition: str) -> tuple[float, float, float]:
    """Addition to the bearing length, length below which it counts, and least end distance [m]; NDS 3.10.4."""
    row = table(edition, "bearing area").rows[0]
    return _number(row, "addition"), _number(row, "length_below"), _number(row, "end_distance")


def limit(name: str, *, edition: str) -> float:
    """Largest "column slenderness" (3.7.1.4) or "bending slenderness" (3.3.3.7) [-]."""
    return _number(table(edition, "limit").where(limit=name), "value")


def effective_length(role: str, *, edition: str) -> float:
    """K_e [-] of a column in the plane of the truss, by the role of the member; NDS 3.7.1.2 and Appendix G."""
    return _number(table(edition, "effective length").where(role=role), "factor")


def creep_factor(moisture: str, *, edition: str) -> float:
    """Time dependent deformation factor K_cr [-]; NDS 3.5.2."""
    return _number(table(edition, "creep").where(moisture=moisture), "K_cr")


def effective_bending_length(l_u: ArrayLike, depth: ArrayLike, *, loading: str, edition: str) -> NDArray[np.float64]:
    """Effective span length l_e [m] of a bending member for an unsupported length l_u; NDS Table 3.3.3.

    >>> round(float(effective_bending_length(24.0, 3.5, loading="uniform", edition="2018")), 2)
    49.44
    """
    l_u, depth = np.asarray(l_u, dtype=float), np.asarray(depth, dtype=float)
    rows = [row for row in table(edition, "bending length").rows if row["loading"] == loading]
    if not rows:
        raise JobError(f"loading {loading!r} is not in NDS Table 3.3.3")
    lengths = [_number(row, "on_length") * l_u + _number(row, "on_depth") * depth for row in rows]
    length = lengths[-1]
    for row, shorter in zip(rows[-2::-1], lengths[-2::-1], strict=True):
        length = np.where(l_u / depth < _number(row, "ratio_up_to"), shorter, length)
    return length


def _first_that_reaches(rows: list[Mapping[str, Cell]], breadth: float, depth: float, what: str) -> Mapping[str, Cell]:
    for row in rows:
        if reaches(row, "breadth_up_to", breadth) and reaches(row, "depth_up_to", depth):
            return row
    raise OutOfScopeError(
        f"the NDS Supplement (Tables 4A, 4B) has no {what} for a size of {breadth * 1e3:.0f} x {depth * 1e3:.0f} mm"
    )


def _number(row: Mapping[str, Cell], column: str) -> float:
    value = row[column]
    return value if isinstance(value, float) else math.nan
