"""Deflections by EN 1995-1-1, 2.2.3 and 7.2: kinds, factors with creep, limits by country, and the explanation."""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from math import nan
from typing import cast

import numpy as np

from rooftruss.basis.tables import Table, read_table
from rooftruss.errors import JobError, nearest
from rooftruss.timber.deflection import closing_steps, step
from rooftruss.timber.ec5_formulas import final_factors
from rooftruss.timber.terms import Array, Deflected, DeflectionKind, DeflectionLimit, Step

CODE = "EN 1995-1-1"
ORDINARY = "ordinary"  # use of a building without rows of its own
CHARACTERISTIC, FREQUENT, QUASI_PERMANENT = "characteristic", "frequent", "quasi-permanent"
INSTANTANEOUS, VARIABLE, FINAL = "instantaneous", "variable", "final"
KINDS = (
    DeflectionKind(name=INSTANTANEOUS, symbol="w_inst", combinations=CHARACTERISTIC),
    DeflectionKind(name=VARIABLE, symbol="w_inst(Q)", combinations=CHARACTERISTIC),
    DeflectionKind(name=FINAL, symbol="w_fin", combinations=CHARACTERISTIC),
    DeflectionKind(name=QUASI_PERMANENT, symbol="w_fin", combinations=QUASI_PERMANENT),
    DeflectionKind(name=FREQUENT, symbol="w_inst", combinations=FREQUENT),
)
LIMITED = {  # kind -> (column of the table, what it limits); the precamber w_c is 0, so w_net,fin is w_fin
    INSTANTANEOUS: (("w_inst", "w_inst"),),
    VARIABLE: (("w_inst_Q", "w_inst(Q)"),),
    FINAL: (("w_net_fin", "w_net,fin"), ("w_fin", "w_fin")),
    QUASI_PERMANENT: (("w_net_fin_qp", "w_net,fin"),),
    FREQUENT: (),
}
ANY = "any"  # rows that do not go by the ceiling


def require_limits(choice: str, building: str) -> None:
    """Raise JobError for a use of the building that the country has no limits of its own for."""
    rows = _limits().rows
    if not any(row["choice"] == choice and row["building"] == building for row in rows):
        where = sorted({str(row["choice"]) for row in rows if row["building"] == building})
        known = sorted({str(row["building"]) for row in rows if row["choice"] == choice})
        raise JobError(
            f"[site] building_use: {building!r} has deflection limits of its own only with national_choices "
            f"{' or '.join(map(repr, where))}; take the line out"
            if where
            else f"[site] building_use: {building!r} is not known; {nearest(building, known)}"
        )


def deflection_limit(ceiling: str, kind: str, *, choice: str, building: str = ORDINARY) -> DeflectionLimit:
    """Limit of a kind of deflection in a country; EN 1995-1-1, Table 7.2, and the annexes to it.

    The stricter one where w_net,fin and w_fin are both limited. Raises JobError for an unknown ceiling or kind, or a
    use of the building without rows.

    >>> deflection_limit("plaster", "final", choice="recommended").ratio
    350.0
    >>> deflection_limit("plaster", "frequent", choice="recommended").limits
    False
    """
    if kind not in LIMITED:
        raise JobError(f"kind of deflection {kind!r} is not one of {CODE}; {nearest(kind, LIMITED)}")
    require_limits(choice, building)
    table = _limits()
    known = list(dict.fromkeys(str(c) for c in table.column("ceiling") if c != ANY))
    if ceiling not in known:
        raise JobError(f"[deflection] ceiling: {ceiling!r} is not known; {nearest(ceiling, known)}")
    own = [r for r in table.rows if r["choice"] == choice and r["building"] == building]
    row = next(r for r in own if r["ceiling"] in (ceiling, ANY))
    found = [(cast(float, row[column]), symbol) for column, symbol in LIMITED[kind]]
    ratio, symbol = max((f for f in found if f[0] == f[0]), default=(nan, ""))
    return DeflectionLimit(ratio=ratio, symbol=symbol, source=str(row["source"]) if symbol else "")


def deflection_factors(factors: Array, kinds: tuple[str, ...], dead: Array, lasting: Array, *, k_def: float) -> Array:
    """Factors (k, c) of each kind of deflection (k,) from those of its combinations; EN 1995-1-1, 2.2.3(3) to (5).

    dead (c,): 1 for permanent loads, else 0; lasting (c,): psi_2 of each case, 1 for permanent loads. All of a
    quasi-permanent combination lasts.
    """
    grown: dict[str, Callable[[Array], Array]] = {
        INSTANTANEOUS: lambda row: row,
        FREQUENT: lambda row: row,
        VARIABLE: lambda row: row * (1 - dead),
        FINAL: lambda row: final_factors(row, lasting, k_def=k_def),
        QUASI_PERMANENT: lambda row: row * (1 + k_def),
    }
    out = np.array(factors, dtype=np.float64)
    for kind in dict.fromkeys(kinds):
        own = [k for k, other in enumerate(kinds) if other == kind]
        out[own] = grown[kind](out[own])
    return out


def explain_deflection(moved: Deflected, *, k_def: float, service_class: int) -> tuple[Step, ...]:
    """A deflection of an unbatched truss in the letters of EN 1995-1-1; the last step is its share of the limit."""
    loads = _loads(moved)
    steps = [step for load in loads for step in _acting(load, moved)]
    w_inst = sum(load.factor * load.w for load in loads)
    steps.append(_instantaneous(moved, w_inst))
    value = w_inst
    if moved.kind.name in (FINAL, QUASI_PERMANENT):
        lasts = sum(load.lasting * load.w for load in loads)
        value += k_def * lasts
        steps += _shares(moved, loads)
        steps += [
            step(
                "w_inst,qp",
                lasts,
                "deflection",
                f"{CODE} 2.2.3(3)",
                "what lasts of them, by psi_2; permanent loads in full",
            ),
            step("k_def", k_def, "factor", f"{CODE} Table 3.2", f"deformation factor, service class {service_class}"),
            step("w_creep", k_def * lasts, "deflection", f"{CODE} 2.2.3, eq. (2.2) to (2.5)", "k_def times what lasts"),
            step(
                "w_fin",
                value,
                "deflection",
                f"{CODE} 7.2, eq. (7.2)",
                "w_inst + w_creep; w_net,fin is the same, w_c = 0",
            ),
        ]
    return (*steps, *closing_steps(moved, moved.rule.symbol or moved.kind.symbol, value))


@dataclass(frozen=True, slots=True, kw_only=True)
class _Load:
    """One case that acts, all plain numbers."""

    name: str
    action: str
    sub: str  # subscript: "G", "Q,1"
    w: float  # [m], unfactored
    factor: float
    factor_letter: str  # "psi_0"; "" for 1
    lasting: float  # share that lasts

    @property
    def factor_symbol(self) -> str:
        return f"{self.factor_letter},{self.sub[2:]}" if self.factor_letter else f"factor of {self.sub}"


LETTERS = {"psi_0": "it accompanies", "psi_1": "it leads", "psi_2": "what lasts of it"}


def _acting(load: _Load, moved: Deflected) -> tuple[Step, Step]:
    told = LETTERS.get(load.factor_letter, "permanent load" if load.action == "D" else "it leads")
    return (
        step(f"w_inst,{load.sub}", load.w, "deflection", "", f"{load.name}, action {load.action}, unfactored"),
        step(load.factor_symbol, load.factor, "factor", f"EN 1990 {moved.clause}", told),
    )


def _instantaneous(moved: Deflected, value: float) -> Step:
    if moved.kind.name == VARIABLE:
        return step("w_inst(Q)", value, "deflection", f"{CODE} 2.2.3(2)", "sum of the above, the variable loads alone")
    clause = "2.2.3(2)" if moved.kind.combinations == CHARACTERISTIC else "2.2.3(3)"
    source = "EN 1990 6.5.3" if moved.kind.name == FREQUENT else f"{CODE} {clause}"
    told = f"sum of the above, each with its factor: {moved.kind.combinations} combination"
    return step("w_inst", value, "deflection", source, told)


def _shares(moved: Deflected, loads: Sequence[_Load]) -> Iterator[Step]:
    """psi_2 of the variable loads, where their factor is not that already."""
    for load in loads:
        if load.action != "D" and load.factor_letter != "psi_2":
            symbol, text = f"psi_2,{load.sub[2:]}", f"what lasts of {load.name}"
            yield step(symbol, load.lasting, "factor", "EN 1990 Table A1.1", text)


def _loads(moved: Deflected) -> list[_Load]:
    """The cases that act: permanent loads, then the leading action, then the others."""
    acting = [int(k) for k in np.flatnonzero(moved.factors)]
    if moved.kind.name == VARIABLE:
        acting = [k for k in acting if moved.actions[k] != "D"]
    leading = _leading(moved, acting)
    acting.sort(key=lambda k: (moved.actions[k] != "D", moved.actions[k] != leading, k))
    dead = sum(moved.actions[k] == "D" for k in acting)
    out, counts = [], {"G": 0, "Q": 0}
    for k in acting:
        action, factor = moved.actions[k], float(moved.factors[k])
        letter = "G" if action == "D" else "Q"
        counts[letter] += 1
        lasting = 1.0 if action == "D" else moved.lasting.get(action, 0.0)
        out.append(
            _Load(
                name=moved.cases[k],
                action=action,
                sub="G" if letter == "G" and dead == 1 else f"{letter},{counts[letter]}",
                w=float(moved.immediate[k]),
                factor=factor,
                factor_letter=_letter(moved.kind, action, action == leading),
                lasting=factor if moved.kind.name == QUASI_PERMANENT else lasting,
            )
        )
    return out


def _leading(moved: Deflected, acting: Sequence[int]) -> str:
    """The leading action: in full under a characteristic combination, with more than its psi_2 under a frequent one."""
    for k in acting:
        action, factor = moved.actions[k], float(moved.factors[k])
        least = 1.0 if moved.kind.combinations == CHARACTERISTIC else moved.lasting.get(action, 0.0) + 1e-9
        if action != "D" and factor >= least and moved.kind.combinations != QUASI_PERMANENT:
            return action
    return ""


def _letter(kind: DeflectionKind, action: str, leads: bool) -> str:
    """The letter that EN 1990, 6.5.3 has for the factor of a load; "" for 1."""
    if action == "D" or (leads and kind.combinations == CHARACTERISTIC):
        return ""
    if leads:
        return "psi_1"
    return "psi_0" if kind.combinations == CHARACTERISTIC else "psi_2"


def _limits() -> Table:
    return read_table("timber/deflection_limits_en1995")
