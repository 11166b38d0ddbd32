"""Timber by the NDS (ANSI/AWC), editions 2018 and 2024, by allowable stress (ASD) or load and resistance (LRFD)."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.grades import Grade
from rooftruss.basis.sections import Section
from rooftruss.basis.tables import Cell, read_table
from rooftruss.errors import JobError, OutOfScopeError, nearest
from rooftruss.timber import deflection
from rooftruss.timber import nds_tables as tables
from rooftruss.timber.nds_check import RULES, least_effects, rule_ratios, utilisations
from rooftruss.timber.nds_explain import explain_bearing, explain_member
from rooftruss.timber.nds_formulas import lumber_density
from rooftruss.timber.nds_resistance import at_durations, resistances
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
    Step,
)
from rooftruss.timber.worst import governing_checks

MOISTURES = ("dry", "wet")
TEMPERATURES = ("normal", "100 to 125 F", "125 to 150 F")


@dataclass(frozen=True, slots=True, kw_only=True)
class Nds:
    """The NDS in one edition and method, under the service conditions of a job."""

    edition: str  # "2018", "2024"
    method: str  # "ASD", "LRFD"
    moisture: str
    temperature: str
    incised: bool
    buckling_stiffness: bool
    repetitive: bool | None  # None: by the conditions of 4.3.9
    net_section: float = 1.0  # least share of the section that joints leave in tension

    @property
    def name(self) -> str:
        """Name in the register."""
        return f"NDS {self.edition} {self.method}"

    @property
    def notes(self) -> tuple[str, ...]:
        """Choices that belong among the printed assumptions."""
        notes = [
            f"the largest axial force and the largest moment of a member are taken together (NDS {self.edition}, 3.9)",
            "beam stability by the loading not listed in NDS Table 3.3.3, the least favourable row",
            "bearing area factor C_b = 1.0: trusses rest at the ends of their chords (NDS 3.10.4)",
        ]
        if self.net_section < 1:
            notes.append(
                f"joints leave {self.net_section:g} of the section in tension (NDS {self.edition}, 3.1.2); "
                "everything else is checked on the gross section"
            )
        if self.buckling_stiffness:
            notes.append(
                "C_T taken: lumber at 19 percent moisture or less when the roof sheathing is nailed (NDS 4.4.2)"
            )
        if self.edition == "2024":
            notes.append("NDS 2024: reference values, factors and shear rules are those of 2018; check 3.4 for changes")
        return tuple(notes)

    @property
    def simplified(self) -> None:
        """The NDS leaves the analysis to 3.1.3: forces are those of the frame."""
        return None

    def truss_notes(self, length: float) -> tuple[str, ...]:
        """Nothing beside the notes of every truss."""
        return ()

    def effective_lengths(self, bays: Bays) -> Array:
        """K_e times the length from panel point to panel point (..., m) [m]; NDS 3.7.1 and Appendix G."""
        K_e = np.array([tables.effective_length(role, edition=self.edition) for role in bays.roles])
        return np.asarray(K_e * bays.length)

    def properties(self, grade: Grade, section: Section) -> dict[str, float]:
        """Reference values, their factors and the products [Pa, -] of a grade in a size; NDS Table 4.3.1.

        "Fb", "Ft" ... hold every factor that depends on neither duration nor length, K_F and phi with LRFD;
        "E" is the mean modulus C_M C_t C_i E, "density" [kg/m3] the self weight at the moisture of the job.
        Raises JobError for a grade of another family or without a needed value, OutOfScopeError for a size the
        grade is not made in.
        """
        if grade.family != "NDS":
            raise JobError(f"grade {grade.name!r} is for {grade.family}, the scheme checks by the {self.name}")
        row = grade.values_for(section)
        missing = [key for key in (*tables.PROPERTIES, "product") if key not in row]
        if missing:
            raise JobError(f"grade {grade.name!r} ({grade.table}) lacks {', '.join(missing)}; the NDS needs it")
        product = tables.product(str(row["product"]), edition=self.edition)
        if product.dry_only and (self.moisture != "dry" or self.incised):
            raise OutOfScopeError(
                f"grade {grade.name!r}: NDS 8.1.4 gives {row['product']} lumber for dry, untreated use only"
            )
        values = {
            "density": self._density(grade, row),
            "column_c": product.column_c,
            "C_r": product.repetitive,
            "net_section": self.net_section,
            "K_T": product.K_T if product.K_T > 0 else 0.0,
        }
        for prop in tables.PROPERTIES:
            values |= self._adjusted(prop, row, section)
        return values

    def _adjusted(self, prop: str, row: Mapping[str, Cell], section: Section) -> dict[str, float]:
        edition, reference = self.edition, _positive(row, prop)
        C_F = tables.size_factor(prop, str(row["size_class"]), section.breadth, section.depth, edition=edition)
        factors = {
            "C_M": tables.wet_service_factor(prop, reference, C_F, moisture=self.moisture, edition=edition),
            "C_t": tables.temperature_factor(
                prop, moisture=self.moisture, temperature=self.temperature, edition=edition
            ),
            "C_F": C_F,
            "C_i": tables.incising_factor(prop, incised=self.incised, edition=edition),
            "K_F": 1.0,
            "phi": 1.0,
        }
        if self.method == "LRFD":
            factors["K_F"], factors["phi"] = tables.format_and_resistance(prop, edition=edition)
        values = {f"{prop} {letter}": factor for letter, factor in factors.items()}
        return values | {f"{prop} reference": reference, prop: reference * float(np.prod(list(factors.values())))}

    def _density(self, grade: Grade, row: Mapping[str, Cell]) -> float:
        if "density" in row:
            return _positive(row, "density")
        if "G" not in row:
            raise JobError(f"grade {grade.name!r} ({grade.table}) lacks G or density; self weight needs one of them")
        content = read_table("timber/self_weight_moisture").where(moisture=self.moisture)["content"]
        return float(lumber_density(_positive(row, "G"), float(content)))

    def duration_factors(self, durations: Durations) -> Array:
        """C_D (ASD, by the shortest load) or lambda (LRFD, by the scheme) of each combination (k,)."""
        if self.method == "ASD":
            return np.array([tables.load_duration_factor(name, edition=self.edition) for name in durations.names])
        factors = np.asarray(durations.time_effect, dtype=float)
        tables.require_time_effects(factors, edition=self.edition)
        return factors

    def check(self, members: Members, demand: Demand, durations: Durations) -> Checks:
        """Worst utilisation (..., k, m) of every member under every combination; NDS chapter 3."""
        distinct, index = np.unique(self.duration_factors(durations), return_inverse=True)
        r = resistances(members, distinct, edition=self.edition, buckling_stiffness=self.buckling_stiffness)
        batch = demand.tension.shape[:-2]

        def ratios(force: Demand, row: NDArray[np.intp]) -> Iterator[tuple[int, Array]]:
            return rule_ratios(at_durations(r, index[row], batch), force, least_effects(r), self.edition)

        return governing_checks(RULES, utilisations(r, demand, index, self.edition), demand, ratios)

    def bearing(self, reaction: Array, members: Members, length: Array, durations: Durations) -> Array:
        """Utilisation (..., k, s) across the grain; NDS 3.10.2. Neither C_D nor lambda applies; uplift gives 0.

        A truss rests at the ends of its chords, where C_b = 1.0 (3.10.4); it is not counted elsewhere either.
        """
        resistance = members.properties["Fc_perp"] * members.breadth * members.plies * np.asarray(length)
        return np.maximum(reaction, 0.0) / resistance[..., None, :]

    def explain(
        self, members: Members, demand: Demand, durations: Durations, member: int, combination: int
    ) -> tuple[Step, ...]:
        """The check of one member of an unbatched truss, line by line; its last step is the utilisation of `check`."""
        factor = float(self.duration_factors(durations)[combination])
        duration = f"shortest load: {durations.names[combination]}" if self.method == "ASD" else "row of the scheme"
        return explain_member(
            members,
            demand,
            factor,
            duration,
            member,
            combination,
            edition=self.edition,
            lrfd=self.method == "LRFD",
            buckling_stiffness=self.buckling_stiffness,
        )

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
        force = float(reaction[combination, support])
        return explain_bearing(
            members, force, bearing_length, support, edition=self.edition, lrfd=self.method == "LRFD"
        )

    def shares_load(self, *, role: str, sheathed: bool, quantity: int, spacing: float) -> bool:
        """Whether C_r applies; NDS 4.3.9: three or more members not over 24 in apart, joined by sheathing.

        The key `repetitive` of the job may set it for all chords or for none. Webs never share load.
        """
        if role == "web":
            return False
        least_number, spacing_up_to = tables.repetitive_conditions(edition=self.edition)
        if self.repetitive and spacing > spacing_up_to * (1 + 1e-9):
            raise OutOfScopeError(
                f"[timber] repetitive = true: NDS {self.edition}, 4.3.9 gives C_r to members not over 24 in apart; "
                'set it false or "auto"'
            )
        if self.repetitive is not None:
            return self.repetitive
        return sheathed and quantity >= least_number and spacing <= spacing_up_to * (1 + 1e-9)

    def creep(self) -> Creep:
        """Creep under lasting load, K_cr - 1; NDS 3.5.2. IBC Table 1604.3, note d, takes that share of dead load."""
        K_cr = tables.creep_factor(self.moisture, edition=self.edition)
        text = f"K_cr = {K_cr:g}, {self.moisture} service: lasting load deflects {K_cr:g} times its immediate amount"
        return Creep(coefficient=K_cr - 1, clause=f"NDS {self.edition} 3.5.2", text=text)

    def service_factors(
        self,
        factors: Array,
        *,
        actions: tuple[str, ...],
        kinds: tuple[str, ...],
        lasting: Mapping[str, float] | None = None,
    ) -> Array:
        """Factors (k, c) with K_cr on dead load in combinations of the kind "total"; NDS eq. 3.5-1.

        This is the whole deflection in the long run. IBC Table 1604.3, note d, would accept its creep part with live
        load only.
        """
        dead = np.array([action == "D" for action in actions])
        total = np.array([kind == "total" for kind in kinds])
        return np.where(total[:, None] & dead, factors * (1 + self.creep().coefficient), factors)

    @property
    def deflection_kinds(self) -> tuple[DeflectionKind, ...]:
        """The columns of IBC Table 1604.3."""
        return deflection.DEFLECTION_KINDS

    def deflection_limit(self, ceiling: str, kind: str) -> DeflectionLimit:
        """Limit of a kind of deflection; IBC 2021 Table 1604.3."""
        return deflection.deflection_limit(ceiling, kind)

    def explain_deflection(self, moved: Deflected) -> tuple[Step, ...]:
        """A deflection line by line; its last step is the share of the limit."""
        return deflection.explain_deflection(moved, self.creep())


def nds_standard(name: str, options: Mapping[str, object]) -> Nds:
    """The NDS called `name` ("NDS 2018 ASD") with the keys moisture, temperature, incised and buckling_stiffness.

    The keys repetitive ("auto", true or false; "auto" without it: by the conditions of 4.3.9) and net_section (a share
    above 0, 1 without it) may stand beside them.
    Other keys of [timber] are not the standard's. Raises JobError naming the key that is missing or wrong.
    """
    _, edition, method = name.split()
    moisture, temperature = _word(options, "moisture", MOISTURES), _word(options, "temperature", TEMPERATURES)
    stiff = _flag(options, "buckling_stiffness")
    if stiff and moisture != "dry":
        raise JobError(
            '[timber] buckling_stiffness: NDS 4.4.2 allows C_T only in dry service; set it false or moisture = "dry"'
        )
    return Nds(
        edition=edition,
        method=method,
        moisture=moisture,
        temperature=temperature,
        incised=_flag(options, "incised"),
        buckling_stiffness=stiff,
        repetitive=None if options.get("repetitive", "auto") == "auto" else _flag(options, "repetitive"),
        net_section=_share(options.get("net_section", 1.0)),
    )


def _word(options: Mapping[str, object], key: str, allowed: tuple[str, ...]) -> str:
    value = options.get(key)
    if value not in allowed:
        raise JobError(f"[timber] {key}: {value!r} is not a choice of the NDS; {nearest(str(value), allowed)}")
    return str(value)


def _flag(options: Mapping[str, object], key: str) -> bool:
    value = options.get(key)
    if not isinstance(value, bool):
        raise JobError(f"[timber] {key}: {value!r} must be true or false")
    return value


def _share(value: object) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float) or not 0 < value <= 1:
        raise JobError(f"[timber] net_section: {value!r} must be a share of the section above 0, at most 1 (NDS 3.1.2)")
    return float(value)


def _positive(row: Mapping[str, Cell], key: str) -> float:
    value = row[key]
    if not isinstance(value, float) or not value > 0:
        raise JobError(f"grade {row['name']!r}: {key} is {value!r}, it must be a number above zero")
    return value
