"""Timber by EN 1995-1-1:2004+A1:2008+A2:2014, solid and glued laminated softwood."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.grades import Grade
from rooftruss.basis.sections import Section
from rooftruss.errors import JobError, nearest
from rooftruss.timber import ec5_deflection, ec5_truss
from rooftruss.timber import ec5_tables as tables
from rooftruss.timber.ec5_check import RULES, rule_ratios, utilisations
from rooftruss.timber.ec5_explain import explain_bearing, explain_member
from rooftruss.timber.ec5_formulas import contact_length, size_factor
from rooftruss.timber.ec5_resistance import bearing_factors, resistances
from rooftruss.timber.ec5_tables import contact_addition
from rooftruss.timber.ec5_truss import TrussRules
from rooftruss.timber.terms import (
    Array,
    Bays,
    Checks,
    Creep,
    Deflected,
    DeflectionKind,
    DeflectionLimit,
    Demand,
    Durations,
    Members,
    Simplified,
    Step,
)
from rooftruss.timber.worst import governing_checks

NAME = "EN 1995-1-1"
SERVICE_CLASSES = (1, 2, 3)


@dataclass(frozen=True, slots=True, kw_only=True)
class Ec5:
    """EN 1995-1-1 under the service conditions of a job."""

    service_class: int
    load_sharing: bool | None  # None: by the conditions of 6.6
    national_choices: str
    load_over_bearing: bool = True  # l_1 < 2h of 6.1.5
    truss_analysis: str = ec5_truss.FRAME  # or SIMPLIFIED
    node_loaded: bool = False  # loads act mainly at the panel points
    building: str = ec5_deflection.ORDINARY  # its use, for the deflection limits

    @property
    def name(self) -> str:
        """Name in the register."""
        return NAME

    @property
    def notes(self) -> tuple[str, ...]:
        """Choices that belong among the printed assumptions."""
        own = self.national_choices != "recommended"
        country = f"values of {self.national_choices.capitalize()}" if own else "recommended values"
        clear = (
            "k_c,90 of discrete supports over the bearings: the job says that no load enters a chord within 2h of them "
            "(EN 1995-1-1, 6.1.5(4))"
        )
        return (
            *(() if self.load_over_bearing else (clear,)),
            "the largest axial force and the largest moment of a member are taken together (EN 1995-1-1, 6.2.3, 6.3.2)",
            "moment constant between lateral restraints, the least favourable row of EN 1995-1-1, Table 6.1",
            *ec5_truss.notes(self.truss_analysis, self.rules),
            f"gamma_M and k_cr: {country} (EN 1995-1-1, 2.4.1 and 6.1.7)",
        )

    @property
    def rules(self) -> TrussRules:
        """What 9.2.1 makes of the checks."""
        return ec5_truss.truss_rules(self.truss_analysis, node_loaded=self.node_loaded)

    @property
    def simplified(self) -> Simplified | None:
        """The simplified analysis where the job asks for it; EN 1995-1-1, 5.4.3."""
        return ec5_truss.simplified_analysis() if self.truss_analysis == ec5_truss.SIMPLIFIED else None

    def truss_notes(self, length: float) -> tuple[str, ...]:
        """The force that every joint has to pass on; EN 1995-1-1, 9.2.1(9)."""
        force = ec5_truss.joint_force(length) / 1e3
        return (
            f"joints, which are not designed here, have to pass on F_r,d = {force:.2f} kN in any direction in the "
            "plane, short-term, service class 2 (EN 1995-1-1, 9.2.1(9))",
        )

    def effective_lengths(self, bays: Bays) -> Array:
        """Effective lengths (..., m) [m] in the plane of the truss; EN 1995-1-1, 9.2.1(3) and (4)."""
        return ec5_truss.effective_lengths(bays, self.truss_analysis, node_loaded=self.node_loaded)

    def properties(self, grade: Grade, section: Section) -> dict[str, float]:
        """Characteristic values and what depends on the size [Pa, -] of a grade; E is E_0,mean, density rho_mean.

        Raises JobError for a grade of another family or without a needed value.
        """
        if grade.family != "EN":
            raise JobError(f"grade {grade.name!r} is for {grade.family}, the scheme checks by {NAME}")
        row = dict(grade.values_for(section))
        found = tables.strengths(row)
        product = tables.product(str(row.get("product", "")))
        crack = tables.national(self.national_choices, product.name, self.service_class)
        shape = {"size": product.size, "power": product.power, "most": product.most}
        k_c_90, longest = tables.bearing_factor(product.name, over_bearing=self.load_over_bearing)
        G_05 = row.get("G_05", np.nan)
        return found | {
            "E": found["E_0_mean"],
            "density": found["rho_mean"],
            "G_05": G_05 if isinstance(G_05, float) else np.nan,
            "k_h,m": float(size_factor(section.depth, **shape)),
            "k_h,t": float(size_factor(max(section.depth, section.breadth), **shape)),
            "beta_c": product.beta_c,
            "k_m": product.k_m,
            "gamma_M": crack.gamma_M,
            "k_cr": crack.factor(found["f_v_k"], section.depth),
            "k_c,90": k_c_90,
            "k_c,90 up to": longest,
        }

    def scale(self, members: Members, durations: Durations) -> tuple[Array, NDArray[np.intp]]:
        """gamma_M/k_mod (..., d, m) of each distinct duration, and which of them each combination has (k,)."""
        distinct, index = np.unique(np.array(durations.names, dtype=str), return_inverse=True)
        factors = [tables.modification_factor(str(name), self.service_class) for name in distinct]
        k_mod = np.array([factor for factor, _ in factors])
        basic = np.array([applies for _, applies in factors])
        gamma_M = members.properties["gamma_M"][..., None, :]
        return np.where(basic[:, None], gamma_M, 1.0) / k_mod[:, None], index

    def check(self, members: Members, demand: Demand, durations: Durations) -> Checks:
        """Worst utilisation (..., k, m) of every member under every combination; EN 1995-1-1, chapter 6."""
        r = resistances(members)
        scale, index = self.scale(members, durations)
        flat = np.broadcast_to(scale, (*demand.tension.shape[:-2], *scale.shape[-2:]))

        def ratios(force: Demand, row: NDArray[np.intp]) -> Iterator[tuple[int, Array]]:
            here = np.take_along_axis(flat, index[row][..., None, :], -2)[..., 0, :]
            return rule_ratios(r, force, here, self.rules)

        found = utilisations(r, demand, scale, index, self.rules)
        return governing_checks(RULES, found, demand, ratios)

    def bearing(self, reaction: Array, members: Members, length: Array, durations: Durations) -> Array:
        """Utilisation (..., k, s) across the grain; EN 1995-1-1, 6.1.5. Uplift gives 0."""
        scale, index = self.scale(members, durations)
        strength = bearing_factors(members, length) * members.properties["f_c_90_k"]
        resistance = strength * members.breadth * members.plies * contact_length(length, addition=contact_addition())
        return np.maximum(reaction, 0.0) * np.take(scale, index, axis=-2) / resistance[..., None, :]

    def explain(
        self, members: Members, demand: Demand, durations: Durations, member: int, combination: int
    ) -> tuple[Step, ...]:
        """The check of one member of an unbatched truss, line by line; its last step is the utilisation of `check`."""
        duration = self._duration(members, durations, member, combination)
        return explain_member(members, demand, duration, member, combination, self.rules)

    def explain_bearing(
        self,
        reaction: Array,
        members: Members,
        length: Array,
        durations: Durations,
        support: int,
        combination: int,
    ) -> tuple[Step, ...]:
        """The bearing check of one support of an unbatched truss, line by line."""
        bearing_length = float(np.broadcast_to(length, members.breadth.shape)[support])
        duration = self._duration(members, durations, support, combination)
        force = float(reaction[combination, support])
        return explain_bearing(members, force, bearing_length, duration, support)

    def _duration(
        self, members: Members, durations: Durations, member: int, combination: int
    ) -> tuple[str, int, float, float]:
        """(name, service class, k_mod, gamma_M) for one member under one combination."""
        name = durations.names[combination]
        k_mod, basic = tables.modification_factor(name, self.service_class)
        gamma_M = float(np.ravel(members.properties["gamma_M"])[member]) if basic else 1.0
        return name, self.service_class, k_mod, gamma_M

    def shares_load(self, *, role: str, sheathed: bool, quantity: int, spacing: float) -> bool:
        """Whether k_sys applies; EN 1995-1-1, 6.6. The job may set it for all chords or for none; webs never share."""
        if role == "web":
            return False
        if self.load_sharing is not None:
            return self.load_sharing
        _, least_number, spacing_up_to = tables.system_strength()
        return sheathed and quantity >= least_number and spacing <= spacing_up_to * (1 + 1e-9)

    def creep(self) -> Creep:
        """Creep under lasting load, k_def; EN 1995-1-1, 3.1.4 and Table 3.2."""
        k_def = tables.creep_factor(self.service_class)
        text = f"k_def = {k_def:g}, service class {self.service_class}: what lasts deflects {1 + k_def:g} times as far"
        return Creep(coefficient=k_def, clause="EN 1995-1-1 Table 3.2", text=text)

    @property
    def deflection_kinds(self) -> tuple[DeflectionKind, ...]:
        """w_inst, that of the variable loads alone, w_fin, and those of the other combinations of EN 1990, 6.5.3."""
        return ec5_deflection.KINDS

    def service_factors(
        self,
        factors: Array,
        *,
        actions: tuple[str, ...],
        kinds: tuple[str, ...],
        lasting: Mapping[str, float],
    ) -> Array:
        """Factors (k, c) of each kind of deflection from those of its combinations, with creep; 2.2.3.

        lasting: psi_2 by action, 0 for one that is not there; dead load lasts.
        """
        dead = np.array([a == "D" for a in actions], dtype=float)
        share = np.array([1.0 if a == "D" else lasting.get(a, 0.0) for a in actions])
        return ec5_deflection.deflection_factors(factors, kinds, dead, share, k_def=self.creep().coefficient)

    def deflection_limit(self, ceiling: str, kind: str) -> DeflectionLimit:
        """Limit of a kind of deflection; EN 1995-1-1, Table 7.2, or the annex of the country."""
        return ec5_deflection.deflection_limit(ceiling, kind, choice=self.national_choices, building=self.building)

    def explain_deflection(self, moved: Deflected) -> tuple[Step, ...]:
        """A deflection line by line; its last step is the share of the limit."""
        k_def = self.creep().coefficient
        return ec5_deflection.explain_deflection(moved, k_def=k_def, service_class=self.service_class)


def ec5_standard(name: str, options: Mapping[str, object]) -> Ec5:
    """EN 1995-1-1 with the keys service_class (1, 2, 3), load_sharing ("auto", true, false), load_over_bearing,
    truss_analysis ("frame", "simplified"), node_loaded, building_use and national_choices.

    All but the first may be left out: "auto", true, "frame", false, "ordinary", "recommended". Other keys of [timber]
    are not the standard's. Raises JobError naming the key that is missing or wrong, OutOfScopeError for a country whose
    values are not at hand.
    """
    service_class = options.get("service_class")
    if isinstance(service_class, bool) or service_class not in SERVICE_CLASSES:
        raise JobError(f"[timber] service_class: {service_class!r} must be 1, 2 or 3 ({name}, 2.3.1.3)")
    country = str(options.get("national_choices", "recommended"))
    tables.national(country, "solid timber", int(service_class))
    building = str(options.get("building_use") or ec5_deflection.ORDINARY)
    ec5_deflection.require_limits(country, building)
    return Ec5(
        service_class=int(service_class),
        load_sharing=_sharing(options.get("load_sharing", "auto")),
        national_choices=country,
        load_over_bearing=bool(options.get("load_over_bearing", True)),
        truss_analysis=_analysis(str(options.get("truss_analysis", ec5_truss.FRAME))),
        node_loaded=bool(options.get("node_loaded", False)),
        building=building,
    )


def _analysis(given: str) -> str:
    if given not in ec5_truss.ANALYSES:
        raise JobError(f"[timber] truss_analysis: {given!r} is not known; {nearest(given, ec5_truss.ANALYSES)}")
    return given


def _sharing(given: object) -> bool | None:
    if given == "auto":
        return None
    if not isinstance(given, bool):
        raise JobError(f"[timber] load_sharing: {given!r} must be 'auto', true or false")
    return given
