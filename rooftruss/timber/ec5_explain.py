"""One check by EN 1995-1-1 line by line: enough for a checking engineer without the program.

It evaluates the published formulas in their own letters, independently of the inner loop of ec5_check, and ends in
the same utilisation.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from rooftruss.timber import ec5_check as rules
from rooftruss.timber import ec5_formulas as ec5
from rooftruss.timber.ec5_resistance import Lateral, Resistances, bearing_factors, resistances
from rooftruss.timber.ec5_tables import contact_addition
from rooftruss.timber.ec5_truss import TrussRules
from rooftruss.timber.terms import Array, Demand, Members, Step

CODE = "EN 1995-1-1"
Duration = tuple[str, int, float, float]  # name, service class, k_mod, gamma_M


@dataclass(frozen=True, slots=True, kw_only=True)
class _Case:
    """One member under one combination: demands [N, N m], section, and design strengths [Pa], all plain numbers."""

    member: int
    tension: float
    compression: float
    positive: float
    negative: float
    shear: float
    k_mod: float
    gamma_M: float
    beta_c: Array
    G_05: Array
    r: Resistances
    rules: TrussRules

    @property
    def moment(self) -> float:
        return max(self.positive, self.negative)

    def of(self, values: Array) -> float:
        """Number of this member in an array (m,)."""
        return _at(values, self.member)

    def design(self, strength: Array) -> float:
        """Design strength of a characteristic one that already holds k_sys."""
        return float(ec5.design_strength(self.of(strength), k_mod=self.k_mod, gamma_M=self.gamma_M, k_sys=1.0))


def explain_member(
    members: Members, demand: Demand, duration: Duration, member: int, combination: int, rules_of_truss: TrussRules
) -> tuple[Step, ...]:
    """Every demand, factor, design strength and ratio of one member of an unbatched truss, and its utilisation."""
    r = resistances(members)
    least_force = rules.NEGLIGIBLE * _at(r.area * r.f_c, member)
    least_moment = rules.NEGLIGIBLE * _at(r.modulus * r.f_m, member)

    def given(values: Array, least: float = 0.0) -> float:
        value = float(values[combination, member])
        return value if value > least else 0.0

    case = _Case(
        member=member,
        tension=given(demand.tension, least_force),
        compression=rules_of_truss.compression * given(demand.compression, least_force),
        positive=given(demand.moment_positive, least_moment),
        negative=given(demand.moment_negative, least_moment),
        shear=given(demand.shear),
        k_mod=duration[2],
        gamma_M=duration[3],
        beta_c=members.properties["beta_c"],
        G_05=members.properties["G_05"],
        r=r,
        rules=rules_of_truss,
    )
    ratios = list(_ratios(case))
    found = ((s.value, rules.RULES[k]) for k, s in ratios)
    value, governing = max(found, key=lambda pair: pair[0], default=(0.0, rules.RULES[rules.TENSION]))
    last = Step(
        symbol="utilisation",
        value=value,
        kind="factor",
        clause=f"{CODE} {governing.clause}",
        text=f"utilisation, governed by {governing.name}; 1.00 is the limit",
    )
    return (
        *_sizes(case, members),
        *_demands(case),
        *_factors(duration),
        *_values(case, members),
        *(s for _, s in ratios),
        last,
    )


def explain_bearing(
    members: Members, force: float, length: float, duration: Duration, support: int
) -> tuple[Step, ...]:
    """Compression across the grain of the chord `support` of `members` on its wall plate; EN 1995-1-1, 6.1.5."""
    clause = f"{CODE} 6.1.5"
    addition, k_c_90 = contact_addition(), _at(bearing_factors(members, np.asarray(length)), support)
    breadth = _at(members.breadth * members.plies, support)
    l_ef = float(ec5.contact_length(length, addition=addition))
    f_k = _at(members.properties["f_c_90_k"], support)
    f_d = float(ec5.design_strength(f_k, k_mod=duration[2], gamma_M=duration[3], k_sys=1.0))
    sigma = max(force, 0.0) / (breadth * l_ef)
    text = f"of l = {length * 1e3:.0f} mm, longer by {addition * 1e3:.0f} mm on the side away from the end"
    return (
        Step(symbol="F_c,90,d", value=force, kind="force", clause="analysis", text="reaction, upwards on the truss"),
        Step(symbol="l_ef", value=l_ef, kind="size", clause=f"{clause}(1)", text=text),
        Step(symbol="b", value=breadth, kind="size", clause="job", text="breadth of all plies"),
        *_factors(duration),
        _stress("f_c,90,k", f_k, "grade", "characteristic strength across the grain"),
        _stress("f_c,90,d", f_d, f"{CODE} eq. (2.14)", "k_mod f_c,90,k / gamma_M"),
        _factor("k_c,90", k_c_90, *_bearing_factor(clause, k_c_90)),
        _stress("sigma_c,90,d", sigma, f"{clause}, eq. (6.4)", "F_c,90,d / (b l_ef)"),
        _factor("utilisation", sigma / (k_c_90 * f_d), f"{clause}, eq. (6.3)", "sigma_c,90,d / (k_c,90 f_c,90,d)"),
    )


def _bearing_factor(clause: str, k_c_90: float) -> tuple[str, str]:
    """Clause of k_c,90 and what it rests on."""
    if k_c_90 > 1:
        return f"{clause}(4)", "discrete support, no load within 2h of it, as the job says"
    return f"{clause}(2)", "the load enters at the heel"


def _sizes(case: _Case, members: Members) -> Iterator[Step]:
    for symbol, values, kind, text in (
        ("b", members.breadth, "size", "breadth of one ply"),
        ("h", members.depth, "size", "depth"),
        ("plies", members.plies, "ratio", "plies"),
    ):
        yield Step(symbol=symbol, value=case.of(values), kind=kind, clause="job", text=text)
    length = case.of(members.length)
    times = f", {case.of(members.le_strong) / length:.3g} times the length between panel points" if length else ""
    tail = members.roles[case.member] == "tail"
    yield Step(
        symbol="l_ef,y",
        value=case.of(members.le_strong),
        kind="length",
        clause="Euler" if tail else f"{CODE} {case.rules.lengths}",
        text=f"effective length in the plane of the truss{times}",
    )
    text = "effective length across the plane, 0 where held throughout"
    yield Step(symbol="l_ef,z", value=case.of(members.le_weak), kind="length", clause="job", text=text)
    yield Step(symbol="A", value=case.of(case.r.area), kind="area", clause="b h", text="area of all plies")
    yield Step(
        symbol="W_y", value=case.of(case.r.modulus), kind="section modulus", clause="b h^2/6", text="of all plies"
    )


def _demands(case: _Case) -> Iterator[Step]:
    more = case.rules.compression
    pressed = "largest compression" + (f", {more:g} times what the analysis gives (9.2.1(5))" if more != 1 else "")
    for symbol, value, kind, text in (
        ("N_t,d", case.tension, "force", "largest tension"),
        ("N_c,d", case.compression, "force", pressed),
        ("M_y,d+", case.positive, "moment", "largest sagging moment, upper edge compressed"),
        ("M_y,d-", case.negative, "moment", "largest hogging moment, lower edge compressed"),
        ("V_d", case.shear, "force", "largest shear"),
    ):
        yield Step(symbol=symbol, value=value, kind=kind, clause="analysis", text=text)


def _factors(duration: Duration) -> Iterator[Step]:
    name, service_class, k_mod, gamma_M = duration
    yield _factor("k_mod", k_mod, f"{CODE} Table 3.1", f"shortest load: {name}; service class {service_class}")
    yield _factor("gamma_M", gamma_M, f"{CODE} Table 2.3", "partial factor of the material")


def _values(case: _Case, members: Members) -> Iterator[Step]:
    """Strengths and stability factors of what this member has to carry."""
    p, r = members.properties, case.r
    yield _factor("k_sys", case.of(r.k_sys), f"{CODE} 6.6", "system strength, 1 without load sharing")
    if case.tension:
        yield _stress("f_t,0,k", case.of(p["f_t_0_k"]), "grade", "characteristic tensile strength")
        yield _factor("k_h,t", case.of(p["k_h,t"]), f"{CODE} 3.2(3), 3.3(3)", "size factor of the larger side")
        yield _stress("f_t,0,d", case.design(r.f_t), f"{CODE} eq. (2.14)", "k_sys k_h k_mod f_t,0,k / gamma_M")
    if case.compression:
        yield from _column_values(case, members)
    if case.moment:
        yield _stress("f_m,k", case.of(p["f_m_k"]), "grade", "characteristic bending strength")
        yield _factor("k_h,m", case.of(p["k_h,m"]), f"{CODE} 3.2(3), 3.3(3)", "size factor of the depth")
        yield _stress("f_m,d", case.design(r.f_m), f"{CODE} eq. (2.14)", "k_sys k_h k_mod f_m,k / gamma_M")
        for sign, moment, lateral in _signs(case):
            if moment:
                yield from _lateral_values(
                    case, sign, members.lu_positive if sign == "+" else members.lu_negative, lateral
                )
    if case.shear:
        yield _stress("f_v,k", case.of(p["f_v_k"]), "grade", "characteristic shear strength")
        yield _factor("k_cr", case.of(r.k_cr), f"{CODE} 6.1.7(2)", "cracks, b_ef = k_cr b")
        yield _stress("f_v,d", case.design(r.f_v), f"{CODE} eq. (2.14)", "k_sys k_mod f_v,k / gamma_M")


def _column_values(case: _Case, members: Members) -> Iterator[Step]:
    p, r = members.properties, case.r
    yield _stress("f_c,0,k", case.of(p["f_c_0_k"]), "grade", "characteristic compressive strength")
    yield _stress("f_c,0,d", case.design(r.f_c), f"{CODE} eq. (2.14)", "k_sys k_mod f_c,0,k / gamma_M")
    yield _stress("E_0,05", case.of(p["E_0_05"]), "grade", "fifth percentile of the modulus")
    yield _factor("beta_c", case.of(p["beta_c"]), f"{CODE} eq. (6.29)", "straightness")
    slender = (r.lambda_rel_y, r.lambda_rel_z)
    sides = ((members.le_strong, members.depth, "h"), (members.le_weak, members.breadth, "b"))
    for axis, (l_ef, side, letter), relative, k_c, plane in zip(
        "yz", sides, slender, (r.k_c_y, r.k_c_z), ("in the plane of the truss", "across it, one ply"), strict=True
    ):
        ratio = case.of(l_ef) * np.sqrt(12.0) / case.of(side)
        yield _factor(f"lambda_{axis}", ratio, f"{CODE} 6.3.2(1)", f"l_ef,{axis} sqrt(12) / {letter}, {plane}")
        eq = {"y": ("6.21", "6.25", "6.27"), "z": ("6.22", "6.26", "6.28")}[axis]
        text = f"lambda_{axis} / pi sqrt(f_c,0,k / E_0,05)"
        yield _factor(f"lambda_rel,{axis}", case.of(relative), f"{CODE} eq. ({eq[0]})", text)
        yield _factor(f"k_c,{axis}", case.of(k_c), f"{CODE} eq. ({eq[1]})", _column_text(case, axis, relative, eq[2]))


def _column_text(case: _Case, axis: str, relative: Array, eq: str) -> str:
    """How k_c comes about: k of eq. (6.27) or (6.28), or that the member is stocky."""
    slender, beta_c = case.of(relative), case.of(case.beta_c)
    if slender <= 0.3:
        return f"1, since lambda_rel,{axis} is not above 0.3"
    k = 0.5 * (1 + beta_c * (slender - 0.3) + slender**2)
    return f"1 / (k + sqrt(k^2 - lambda_rel^2)), k = {k:.4g} by eq. ({eq})"


def _lateral_values(case: _Case, sign: str, l_u: Array, lateral: Lateral) -> Iterator[Step]:
    edge = "upper" if sign == "+" else "lower"
    text = f"distance between restraints of the {edge} edge, 0 where held throughout"
    yield Step(symbol=f"l{sign}", value=case.of(l_u), kind="length", clause="job", text=text)
    if case.of(l_u):
        length = case.of(lateral.l_ef)
        added = length > case.of(l_u)
        text = "constant moment, l" + (" + 2h, load on the compressed edge" if added else "")
        yield Step(symbol=f"l_ef{sign}", value=length, kind="length", clause=f"{CODE} Table 6.1", text=text)
        critical = case.of(lateral.sigma_m_crit)
        glued = bool(np.isfinite(case.of(case.G_05)))
        text = "pi sqrt(E_0,05 I_z G_05 I_tor) / (l_ef W_y)" if glued else "0.78 b^2 E_0,05 / (h l_ef)"
        yield _stress(f"sigma_m,crit{sign}", critical, f"{CODE} eq. ({'6.31' if glued else '6.32'})", text)
        text = "sqrt(k_h f_m,k / sigma_m,crit)"
        yield _factor(f"lambda_rel,m{sign}", case.of(lateral.lambda_rel_m), f"{CODE} eq. (6.30)", text)
    yield _factor(f"k_crit{sign}", case.of(lateral.k_crit), f"{CODE} eq. (6.34)", _torsion_text(case, lateral))


def _torsion_text(case: _Case, lateral: Lateral) -> str:
    """The branch of eq. (6.34)."""
    slender = case.of(lateral.lambda_rel_m)
    if not case.of(lateral.l_ef):
        return "1, the compressed edge is held throughout (6.3.3(5))"
    if slender <= 0.75:
        return "1, since lambda_rel,m is not above 0.75"
    return "1.56 - 0.75 lambda_rel,m" if slender <= 1.4 else "1 / lambda_rel,m^2"


def _signs(case: _Case) -> tuple[tuple[str, float, Lateral], ...]:
    return (("+", case.positive, case.r.positive), ("-", case.negative, case.r.negative))


def _ratios(case: _Case) -> Iterator[tuple[int, Step]]:
    """Every rule that applies, in the order of ec5_check.RULES: (rule, left side)."""
    r, area = case.r, case.of(case.r.area)
    sigma_t, sigma_c, sigma_m = case.tension / area, case.compression / area, case.moment / case.of(r.modulus)
    t, m = sigma_t / case.design(r.f_t), sigma_m / case.design(r.f_m)
    axial = (case.rules.axial, case.rules.clause)
    if case.tension:
        yield _ratio(rules.TENSION, "sigma_t,0,d/f_t,0,d", t, _shown("sigma_t,0,d", sigma_t, "N_t,d / A"), *axial)
    if case.compression:
        c = sigma_c / case.design(r.f_c)
        yield _ratio(rules.COMPRESSION, "sigma_c,0,d/f_c,0,d", c, _shown("sigma_c,0,d", sigma_c, "N_c,d / A"), *axial)
    if case.moment:
        yield _ratio(
            rules.BENDING, "sigma_m,y,d/f_m,y,d", m, _shown("sigma_m,y,d", sigma_m, "M_y,d / W_y, the larger moment")
        )
        for sign, moment, lateral in _signs(case):
            value = moment / case.of(r.modulus) / case.design(r.f_m) / case.of(lateral.k_crit)
            if moment:
                yield _ratio(rules.TORSION, f"sigma_m,d{sign}/(k_crit f_m,d)", value, "of this sign alone")
    if case.moment and case.tension:
        value = float(ec5.bending_and_tension(t, m))
        yield _ratio(rules.BENDING_TENSION, "sigma_t/f_t + sigma_m,y/f_m,y", value, f"{t:.4g} + {m:.4g}", *axial)
    if case.compression:
        yield from _compression_ratios(case, c, m)
    if case.shear:
        tau = float(ec5.shear_stress(case.shear, area, 1.0, k_cr=case.of(r.k_cr)))
        yield _ratio(rules.SHEAR, "tau_d/f_v,d", tau / case.design(r.f_v), _shown("tau_d", tau, "1.5 V_d / (k_cr A)"))


def _compression_ratios(case: _Case, c: float, m: float) -> Iterator[tuple[int, Step]]:
    """6.2.4 or 6.3.2, and 6.3.3(6), from c = sigma_c/f_c and m = sigma_m,y/f_m,y."""
    r, k_m = case.r, case.of(case.r.k_m)
    k_c_y, k_c_z = case.of(r.k_c_y), case.of(r.k_c_z)
    limit = (case.rules.combined, case.rules.clause)
    if case.of(r.stocky) and case.moment:
        value = float(ec5.bending_and_compression(c, m))
        yield _ratio(
            rules.BENDING_COMPRESSION, "(sigma_c/f_c)^2 + sigma_m,y/f_m,y", value, f"{c:.4g}^2 + {m:.4g}", *limit
        )
    if not case.of(r.stocky):
        value = float(ec5.column_in_plane(c, k_c_y, m))
        text = f"{c:.4g}/{k_c_y:.4g} + {m:.4g}"
        yield _ratio(rules.IN_PLANE, "sigma_c/(k_c,y f_c) + sigma_m,y/f_m,y", value, text, *limit)
        value = float(ec5.column_across(c, k_c_z, m, k_m=k_m))
        text = f"{c:.4g}/{k_c_z:.4g} + {k_m:g} x {m:.4g}"
        yield _ratio(rules.ACROSS, "sigma_c/(k_c,z f_c) + k_m sigma_m,y/f_m,y", value, text, *limit)
    if case.moment:
        torsion = max(moment / (case.of(r.modulus) * case.of(v.k_crit)) for _, moment, v in _signs(case))
        value = float(ec5.torsion_and_compression(c, k_c_z, torsion / case.design(r.f_m), 1.0))
        symbol = "(sigma_m,d/(k_crit f_m,d))^2 + sigma_c,0,d/(k_c,z f_c,0,d)"
        text = f"{torsion / case.design(r.f_m):.4g}^2 + {c:.4g}/{k_c_z:.4g}, the worse sign of the moment"
        yield _ratio(rules.TORSION_COMPRESSION, symbol, value, text)


def _ratio(rule: int, symbol: str, value: float, text: str, limit: float = 1.0, clause: str = "") -> tuple[int, Step]:
    """limit: what the sum may reach where 9.2.1 asks for less than 1; the ratio is taken to it."""
    if limit != 1:
        symbol, value, text = f"({symbol})/{limit:g}", value / limit, f"{text}; up to {limit:g} by {clause}"
    return rule, _factor(symbol, value, f"{CODE} {rules.RULES[rule].clause}", text)


def _stress(symbol: str, value: float, clause: str, text: str) -> Step:
    return Step(symbol=symbol, value=value, kind="stress", clause=clause, text=text)


def _factor(symbol: str, value: float, clause: str, text: str) -> Step:
    return Step(symbol=symbol, value=value, kind="factor", clause=clause, text=text)


def _shown(symbol: str, stress: float, formula: str) -> str:
    return f"{symbol} = {formula} = {stress / 1e6:.4g} N/mm2"


def _at(values: Array, member: int) -> float:
    """Number of one member in an array (m,) or (1,)."""
    last = np.ravel(values)
    return float(last[member if last.size > 1 else 0])
