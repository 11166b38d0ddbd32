"""Numbers of EN 1995-1-1 and its national annexes, from tables/timber."""

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import cast

from rooftruss.basis.tables import Cell, Table, read_table
from rooftruss.errors import JobError, OutOfScopeError, TableError, nearest

STRENGTHS = ("f_m_k", "f_t_0_k", "f_c_0_k", "f_c_90_k", "f_v_k", "E_0_mean", "E_0_05", "rho_mean")


@dataclass(frozen=True, slots=True, kw_only=True)
class Product:
    """Constants of solid or glued laminated timber."""

    name: str
    size: float  # reference depth of k_h [m]
    power: float
    most: float
    beta_c: float
    k_m: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Crack:
    """gamma_M [-] and the rule for k_cr of one country, product and service class."""

    gamma_M: float
    k_cr: float  # NaN: from crack_strength
    crack_strength: float  # [Pa], NaN: k_cr as given
    shallow_up_to: float  # [m], NaN: no other value for shallow members
    k_cr_shallow: float

    def factor(self, f_v_k: float, depth: float) -> float:
        """k_cr [-] for a shear strength [Pa] and a depth [m]; not above 1."""
        if not math.isnan(self.crack_strength):
            return min(1.0, self.crack_strength / f_v_k)
        shallow = not math.isnan(self.shallow_up_to) and depth <= self.shallow_up_to + 1e-9
        return self.k_cr_shallow if shallow else self.k_cr


def product(name: str) -> Product:
    """Constants of a product. Raises JobError for one that EN 1995-1-1 gives no k_h or beta_c for here."""
    known = [str(cell) for cell in _table("product").column("product")]
    if name not in known:
        raise JobError(f"product {name!r} of the grade is not known to EN 1995-1-1 here; {nearest(name, known)}")
    row = _table("product").where(product=name)
    return Product(name=name, **{key: _number(row, key) for key in ("size", "power", "most", "beta_c", "k_m")})


def national(choice: str, product_name: str, service_class: int) -> Crack:
    """gamma_M and k_cr of a country. Raises OutOfScopeError for a country whose values are not at hand."""
    table = _table("national")
    known = sorted({str(cell) for cell in table.column("choice")})
    if choice not in known:
        raise OutOfScopeError(f"national_choices {choice!r}: no EN 1995-1-1 values; {nearest(choice, known)}")
    row = table.where(choice=choice, product=product_name, service_class=float(service_class))
    keys = ("gamma_M", "k_cr", "crack_strength", "shallow_up_to", "k_cr_shallow")
    return Crack(**{key: _number(row, key) for key in keys})


def modification_factor(duration: str, service_class: int) -> tuple[float, bool]:
    """(k_mod [-], whether gamma_M applies) of a load duration; EN 1995-1-1, Tables 2.3 and 3.1.

    Raises TableError for a duration that no load of EN 1995-1-1 has.

    >>> modification_factor("short-term", 2), modification_factor("accidental", 1)
    ((0.9, True), (1.1, False))
    """
    table = _table("k_mod")
    known = list(dict.fromkeys(str(cell) for cell in table.column("duration")))
    if duration not in known:
        raise TableError(f"load duration {duration!r} is not in {table.path.name}; {nearest(duration, known)}")
    row = table.where(duration=duration, service_class=float(service_class))
    return _number(row, "k_mod"), row["gamma_M"] == "basic"


def creep_factor(service_class: int) -> float:
    """k_def [-]; EN 1995-1-1, Table 3.2."""
    return _number(_table("k_def").where(service_class=float(service_class)), "k_def")


def contact_addition() -> float:
    """Growth of the contact length on a side [m]; EN 1995-1-1, 6.1.5(1), the same for every product."""
    return _number(_table("bearing").rows[0], "addition")


def bearing_factor(product_name: str, *, over_bearing: bool) -> tuple[float, float]:
    """(k_c,90 [-], longest bearing [m] it may be taken on) of a chord on its wall plate; EN 1995-1-1, 6.1.5(2), (4).

    over_bearing: a load enters the chord over the bearing or closer to it than 2h.

    >>> bearing_factor("glued laminated timber", over_bearing=False)
    (1.75, 0.4)
    """
    row = _table("bearing").where(product=product_name)
    longest = _number(row, "longest")
    return (
        (_number(row, "k_c_90"), math.inf)
        if over_bearing
        else (_number(row, "k_c_90_clear"), math.inf if math.isnan(longest) else longest)
    )


def beam_length_rule(loading: str) -> tuple[float, float]:
    """(l_ef/l, multiple of h added for load on the compressed edge); EN 1995-1-1, Table 6.1."""
    row = _table("bending_length").where(loading=loading)
    return _number(row, "ratio"), _number(row, "addition")


def system_strength() -> tuple[float, float, float]:
    """(k_sys [-], least number of trusses, largest spacing [m]); EN 1995-1-1, 6.6."""
    row = _table("system_strength").rows[0]
    return _number(row, "k_sys"), _number(row, "least_number"), _number(row, "spacing_up_to")


def strengths(row: Mapping[str, Cell]) -> dict[str, float]:
    """Characteristic values of a grade row [Pa, kg/m3]. Raises JobError for one that is missing or not above zero."""
    found = {}
    for key in STRENGTHS:
        value = row.get(key)
        if not isinstance(value, float) or not value > 0:
            raise JobError(f"grade {row['name']!r} lacks {key}, which EN 1995-1-1 needs as a number above zero")
        found[key] = value
    return found


def _number(row: Mapping[str, Cell], key: str) -> float:
    return cast(float, row[key])


def _table(name: str) -> Table:
    return read_table(f"timber/{name}_en1995")
