"""One check by the NDS line by line: enough for a checking engineer without the program.

It evaluates the published formulas in their own letters, independently of the inner loop of nds_check, and ends in
the same utilisation.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np

from rooftruss.timber import nds_check as rules
from rooftruss.timber import nds_formulas as nds
from rooftruss.timber.nds_resistance import Lateral, Resistances, Stability, resistances
from rooftruss.timber.nds_tables import limit
from rooftruss.timber.terms import Array, Demand, Members, Step

LETTERS = {"Fb": "F_b", "Ft": "F_t", "Fv": "F_v", "Fc_perp": "F_c_perp", "Fc": "F_c", "E": "E", "Emin": "E_min"}
FACTORS = {  # letter -> clause, text
    "C_M": ("4.3.3", "wet service factor"),
    "C_t": ("4.3.4, Table 2.3.3", "temperature factor"),
    "C_F": ("4.3.6, Supplement Tables 4A and 4B", "size factor (1 for machine rated lumber)"),
    "C_i": ("4.3.8, Table 4.3.8", "incising factor"),
    "K_F": ("Table N1", "format conversion factor"),
    "phi": ("Table N2", "resistance factor"),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class _Case:
    """One member under one combination, all plain numbers: demands [N, N m], and where its resistances stand."""

    member: int
    tension: float
    compression: float
    positive: float
    negative: float
    shear: float
    relief: float
    duration: float
    duration_text: str
    lrfd: bool
    code: str  # "NDS 2018"
    edition: str

    @property
    def moment(self) -> float:
        return max(self.positive, self.negative)


def explain_member(
    members: Members,
    demand: Demand,
    duration: float,
    duration_text: str,
    member: int,
    combination: int,
    *,
    edition: str,
    lrfd: bool,
    buckling_stiffness: bool,
) -> tuple[Step, ...]:
    """Every demand, factor, adjusted stress and ratio of one member of an unbatched truss, and its utilisation."""
    r = resistances(members, np.array([duration]), edition=edition, buckling_stiffness=buckling_stiffness)
    least_force = rules.NEGLIGIBLE * _at(r.area, member) * _at(r.F_c_star, member)
    least_moment = rules.NEGLIGIBLE * _at(r.modulus, member) * _at(r.F_b_star, member)

    def given(values: Array | None, least: float = 0.0) -> float:
        value = 0.0 if values is None else float(values[combination, member])
        return value if value > least else 0.0

    case = _Case(
        member=member,
        tension=given(demand.tension, least_force),
        compression=given(demand.compression, least_force),
        positive=given(demand.moment_positive, least_moment),
        negative=given(demand.moment_negative, least_moment),
        shear=given(demand.shear),
        relief=given(demand.tension_least, least_force),
        duration=duration,
        duration_text=duration_text,
        lrfd=lrfd,
        code=f"NDS {edition}",
        edition=edition,
    )
    steps = [*_given(case, members, r), *_values(case, members, r)]
    ratios = list(_ratios(case, r))
    ranked = [(step.value, rules.RULES[rule]) for rule, step in ratios if rule is not None]
    value, governing = max(ranked, key=lambda found: found[0])  # the first of equal ones, as in the inner loop
    text = f"utilisation, governed by {governing.name}; 1.00 is the limit"
    clause = f"{case.code} {governing.clause}"
    last = Step(symbol="utilisation", value=value, kind="factor", clause=clause, text=text)
    return (*steps, *(step for _, step in ratios), last)


def explain_bearing(
    members: Members, force: float, length: float, support: int, *, edition: str, lrfd: bool
) -> tuple[Step, ...]:
    """Compression across the grain of the chord on its wall plate; NDS 3.10.2."""
    code, p, n = f"NDS {edition}", members.properties, support
    breadth, stress = _at(members.breadth, n) * _at(members.plies, n), _at(p["Fc_perp"], n)
    f_c_perp = max(force, 0.0) / (length * breadth)
    text = "f_c_perp / F_c_perp'; 1.00 is the limit"
    return (
        Step(symbol="R", value=force, kind="force", clause="analysis", text="reaction, upwards on the truss"),
        Step(symbol="l_b", value=length, kind="size", clause="job", text="bearing length"),
        Step(symbol="b", value=breadth, kind="size", clause="job", text="breadth of all plies"),
        *_reference(code, "Fc_perp", p, n, lrfd),
        Step(
            symbol="C_b",
            value=1.0,
            kind="factor",
            clause=f"{code} 3.10.4",
            text="bearing area factor, end of the chord",
        ),
        _stress("F_c_perp'", stress, f"{code} Table 4.3.1", "no load duration or time effect factor"),
        _stress("f_c_perp", f_c_perp, f"{code} 3.10.2", "R / (b l_b)"),
        Step(symbol="utilisation", value=f_c_perp / stress, kind="factor", clause=f"{code} 3.10.2", text=text),
    )


def _at(values: Array, member: int) -> float:
    """Number of one member in an array (m,), (1,) or (1, m)."""
    last = np.ravel(values)
    return float(last[member if last.size > 1 else 0])


def _given(case: _Case, members: Members, r: Resistances) -> Iterator[Step]:
    n = case.member
    sizes = (
        ("breadth", "b", "breadth of one ply"),
        ("depth", "d", "depth"),
        ("le_strong", "l_e1", "effective length in plane"),
    )
    for name, symbol, text in (
        *sizes,
        ("le_weak", "l_e2", "effective length across the plane, 0 where held throughout"),
    ):
        kind = "size" if name in ("breadth", "depth") else "length"
        yield Step(symbol=symbol, value=_at(getattr(members, name), n), kind=kind, clause="job", text=text)
    plies = _at(members.plies, n)
    yield Step(symbol="n", value=plies, kind="factor", clause="job", text="plies")
    yield Step(symbol="A", value=_at(r.area, n), kind="area", clause=f"{case.code} 3.1.2", text="n b d, gross")
    if _at(r.net_area, n) < _at(r.area, n):
        text = "net section in tension, the share of A that joints leave"
        yield Step(symbol="A_n", value=_at(r.net_area, n), kind="area", clause=f"{case.code} 3.1.2", text=text)
    yield Step(
        symbol="S", value=_at(r.modulus, n), kind="section modulus", clause=f"{case.code} 3.3.2.2", text="n b d^2/6"
    )
    demands = (
        ("T", case.tension, "force", "largest tension"),
        (
            "T_least",
            case.relief,
            "force",
            "smallest tension along the member, counted on to relieve bending in eq. 3.9-2",
        ),
        ("P", case.compression, "force", "largest compression"),
        ("M+", case.positive, "moment", "largest sagging moment, upper edge compressed"),
        ("M-", case.negative, "moment", "largest hogging moment, lower edge compressed"),
        ("V", case.shear, "force", "largest shear"),
    )
    for symbol, value, kind, text in demands:
        yield Step(symbol=symbol, value=value, kind=kind, clause="analysis", text=text)


def _reference(code: str, prop: str, p: Mapping[str, Array], member: int, lrfd: bool) -> Iterator[Step]:
    """Reference value of a property and the factors that depend on neither duration nor length."""
    letter = LETTERS[prop]
    source = f"{code} Supplement"
    yield Step(
        symbol=letter, value=_at(p[f"{prop} reference"], member), kind="stress", clause=source, text="reference value"
    )
    for factor, (clause, text) in FACTORS.items():
        if factor in ("K_F", "phi") and not lrfd:
            continue
        if factor == "C_F" and prop not in ("Fb", "Ft", "Fc"):
            continue
        value = _at(p[f"{prop} {factor}"], member)
        yield Step(symbol=f"{factor}({letter})", value=value, kind="factor", clause=f"{code} {clause}", text=text)


def _values(case: _Case, members: Members, r: Resistances) -> Iterator[Step]:
    """Factors and adjusted stresses of what this member has to carry."""
    code, n, p = case.code, case.member, members.properties
    symbol, clause = ("lambda", "Table N3") if case.lrfd else ("C_D", "2.3.2, Table 2.3.2")
    what = "time effect factor" if case.lrfd else "load duration factor"
    text = f"{what}; {case.duration_text}"
    yield Step(symbol=symbol, value=case.duration, kind="factor", clause=f"{code} {clause}", text=text)
    if case.tension:
        yield from _reference(code, "Ft", p, n, case.lrfd)
        yield _stress("F_t'", _tension_stress(case, r), f"{code} Table 4.3.1", "all factors")
    if case.compression or case.moment:
        yield from _reference(code, "Emin", p, n, case.lrfd)
        yield _stress("E_min'", _at(p["Emin"], n), f"{code} Table 4.3.1", "before C_T")
    if case.compression:
        yield from _column_values(case, members, r)
    if case.moment:
        yield from _reference(code, "Fb", p, n, case.lrfd)
        yield Step(
            symbol="C_r", value=_at(r.C_r, n), kind="factor", clause=f"{code} 4.3.9", text="repetitive member factor"
        )
        yield _stress("F_b*", _at(r.F_b_star, n), f"{code} 3.3.3.8", "all factors but C_L")
        for sign, moment, lateral in (("+", case.positive, r.positive), ("-", case.negative, r.negative)):
            if moment:
                l_u = members.lu_positive if sign == "+" else members.lu_negative
                yield from _lateral_values(case, sign, _at(l_u, n), lateral)
    if case.shear:
        yield from _reference(code, "Fv", p, n, case.lrfd)
        yield _stress("F_v'", _at(r.F_v, n), f"{code} Table 4.3.1", "all factors")


def _column_values(case: _Case, members: Members, r: Resistances) -> Iterator[Step]:
    code, n, column = case.code, case.member, _stability(case, r)
    yield from _reference(code, "Fc", members.properties, n, case.lrfd)
    yield _stress("F_c*", _at(r.F_c_star, n), f"{code} 3.7.1.5", "all factors but C_P")
    C_T = _at(r.C_T, n) if case.moment else 1.0
    yield Step(
        symbol="C_T", value=C_T, kind="factor", clause=f"{code} 4.4.2", text="buckling stiffness factor on E_min"
    )
    for symbol, value, text in (
        ("l_e1/d", r.slenderness_strong, "in the plane of the truss"),
        ("l_e2/b", r.slenderness_weak, "across it, one ply"),
    ):
        yield Step(
            symbol=symbol, value=_at(value, n), kind="ratio", clause=f"{code} 3.7.1.3", text=f"slenderness {text}"
        )
    yield from _finite("F_cE1", _at(column.F_cE1, n), f"{code} 3.9.2", "Euler stress in the plane of bending")
    yield from _finite("F_cE2", _at(r.F_cE2, n), f"{code} 3.9.2", "Euler stress across the plane")
    c = _at(members.properties["column_c"], n)
    yield Step(symbol="c", value=c, kind="factor", clause=f"{code} 3.7.1.5", text="of the product")
    text = "column stability factor, by the larger slenderness"
    yield Step(symbol="C_P", value=_at(column.C_P, n), kind="factor", clause=f"{code} eq. 3.7-1", text=text)
    yield _stress("F_c'", _at(column.F_c, n), f"{code} Table 4.3.1", "C_P F_c*")


def _lateral_values(case: _Case, sign: str, l_u: float, lateral: Lateral) -> Iterator[Step]:
    code, n = case.code, case.member
    edge = "upper" if sign == "+" else "lower"
    text = f"unsupported length of the {edge} edge, 0 where held throughout"
    yield Step(symbol=f"l_u{sign}", value=l_u, kind="length", clause=f"{code} 3.3.3.4", text=text)
    text = "effective length, loading not listed"
    yield Step(symbol=f"l_e{sign}", value=_at(lateral.l_e, n), kind="length", clause=f"{code} Table 3.3.3", text=text)
    text = "slenderness ratio, breadth of one ply"
    yield Step(symbol=f"R_B{sign}", value=_at(lateral.R_B, n), kind="ratio", clause=f"{code} eq. 3.3-5", text=text)
    yield from _finite(f"F_bE{sign}", _at(lateral.F_bE, n), f"{code} 3.3.3.8", "critical lateral buckling stress")
    text = "beam stability factor"
    yield Step(symbol=f"C_L{sign}", value=_at(lateral.C_L, n), kind="factor", clause=f"{code} eq. 3.3-6", text=text)
    yield _stress(f"F_b'{sign}", _at(lateral.F_b, n), f"{code} Table 4.3.1", "C_L F_b*")


def _ratios(case: _Case, r: Resistances) -> Iterator[tuple[int | None, Step]]:
    """Every rule that applies, in the order of nds_check.RULES: (rule, its left side or ratio).

    Stresses carry no rule, nor does the margin to the Euler stress: f_c/F_c' is never below it (C_P F_c* <= F_cE).
    """
    n, area = case.member, _at(r.area, case.member)
    column = limit("column slenderness", edition=case.edition)
    f_t, f_c = case.tension / _at(r.net_area, n), case.compression / area
    if case.tension or not (case.compression or case.moment or case.shear):
        net = _at(r.net_area, n) < area
        yield None, _stress("f_t", f_t, f"{case.code} 3.8.1", "T/A_n" if net else "T/A")
        yield _ratio(case, rules.TENSION, "f_t/F_t'", f_t / _tension_stress(case, r), "tension alone")
    if case.compression:
        F_c = _at(_stability(case, r).F_c, n)
        yield None, _stress("f_c", f_c, f"{case.code} 3.6.3", "P/A")
        yield _ratio(case, rules.COMPRESSION, "f_c/F_c'", f_c / F_c, "compression alone")
        slender = _at(r.slenderness, n) / column
        yield _ratio(
            case, rules.SLENDER_COLUMN, f"(l_e/d)/{column:g}", slender, "the larger slenderness over its limit"
        )
    if case.moment:
        yield from _bending_ratios(case, r)
    if case.compression and case.moment:
        yield from _interaction_ratios(case, r)
    if case.shear:
        f_v = float(nds.shear_stress(case.shear, area))
        yield None, _stress("f_v", f_v, f"{case.code} eq. 3.4-2", "1.5 V/A")
        yield _ratio(case, rules.SHEAR, "f_v/F_v'", f_v / _at(r.F_v, n), "shear")


def _signs(case: _Case, r: Resistances) -> Iterator[tuple[str, float, Lateral]]:
    """Sign, bending stress [Pa] and lateral stability of each sign of the moment that occurs."""
    for sign, moment, lateral in (("+", case.positive, r.positive), ("-", case.negative, r.negative)):
        if moment:
            yield sign, moment / _at(r.modulus, case.member), lateral


def _bending_ratios(case: _Case, r: Resistances) -> Iterator[tuple[int | None, Step]]:
    n, area = case.member, _at(r.area, case.member)
    beam = limit("bending slenderness", edition=case.edition)
    f_relief = case.relief / area
    for sign, f_b, lateral in _signs(case, r):
        F_b = _at(lateral.F_b, n)
        yield None, _stress(f"f_b{sign}", f_b, f"{case.code} eq. 3.3-1", "M/S")
        if case.tension:
            value = float(nds.bending_less_tension(f_b, f_relief, F_b))
            text = "bending less the smallest tension along the member, F_b** = F_b'"
            yield _ratio(case, rules.BENDING_LESS_TENSION, f"(f_b{sign} - f_t)/F_b**", value, text)
        else:
            yield _ratio(case, rules.BENDING, f"f_b{sign}/F_b'", f_b / F_b, "bending alone")
    for sign, _, lateral in _signs(case, r):
        text = "slenderness ratio over its limit"
        yield _ratio(case, rules.SLENDER_BEAM, f"R_B{sign}/{beam:g}", _at(lateral.R_B, n) / beam, text)
    if case.tension:
        f_t, f_b = case.tension / _at(r.net_area, n), case.moment / _at(r.modulus, n)
        value = float(nds.tension_and_bending(f_t, _tension_stress(case, r), f_b, _at(r.F_b_star, n)))
        yield _ratio(case, rules.TENSION_BENDING, "f_t/F_t' + f_b/F_b*", value, "left side of eq. 3.9-1")


def _interaction_ratios(case: _Case, r: Resistances) -> Iterator[tuple[int | None, Step]]:
    n, column = case.member, _stability(case, r)
    f_c, F_cE1 = case.compression / _at(r.area, n), _at(column.F_cE1, n)
    near = f_c / F_cE1
    held = 1 - near < nds.AMPLIFIER_FLOOR
    rule = rules.EULER if held else rules.COMPRESSION_BENDING
    relief = case.relief / _at(r.area, n)
    step = Step(
        symbol="f_c/F_cE1",
        value=near,
        kind="factor",
        clause=f"{case.code} {rules.RULES[rules.EULER].clause}",
        text="must stay below 1; the amplifier of eq. 3.9-3 is 1/(1 - f_c/F_cE1)"
        + (", here held at 100" if held else ""),
    )
    yield None, step
    for sign, f_b, lateral in _signs(case, r):
        net = max(f_b - relief, 0.0)
        value = float(nds.compression_and_bending(f_c, _at(column.F_c, n), F_cE1, net, _at(lateral.F_b, n)))
        symbol = f"(f_c/F_c')^2 + f_b{sign}/(F_b' (1 - f_c/F_cE1))"
        yield _ratio(case, rule, symbol, value, "left side of eq. 3.9-3")
    for sign, f_b, lateral in _signs(case, r):
        value = float(nds.compression_and_bending_stability(f_c, _at(r.F_cE2, n), f_b, _at(lateral.F_bE, n)))
        yield _ratio(case, rules.STABILITY, f"f_c/F_cE2 + (f_b{sign}/F_bE)^2", value, "left side of eq. 3.9-4")


def _tension_stress(case: _Case, r: Resistances) -> float:
    """F_t' [Pa]; Resistances hold it per gross area."""
    n = case.member
    return _at(r.F_t, n) * _at(r.area, n) / _at(r.net_area, n)


def _stability(case: _Case, r: Resistances) -> Stability:
    """C_T counts only where compression and bending act together; NDS 4.4.2."""
    return r.stiffened if case.moment else r.plain


def _ratio(case: _Case, rule: int, symbol: str, value: float, text: str) -> tuple[int, Step]:
    clause = f"{case.code} {rules.RULES[rule].clause}"
    return rule, Step(symbol=symbol, value=value, kind="factor", clause=clause, text=text)


def _stress(symbol: str, value: float, clause: str, text: str) -> Step:
    return Step(symbol=symbol, value=value, kind="stress", clause=clause, text=text)


def _finite(symbol: str, value: float, clause: str, text: str) -> Iterator[Step]:
    """A stress that is infinite (and left out) where the member is held throughout."""
    if np.isfinite(value):
        yield _stress(symbol, value, clause, text)
