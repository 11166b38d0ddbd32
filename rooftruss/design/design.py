"""A finished design: a run of one truss, its envelopes, checks and deflections, and what failed."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from rooftruss.analysis.envelope import Envelope, Peak, ReactionEnvelope, peak, reaction_envelope
from rooftruss.basis.job import TrussSpec
from rooftruss.design.family import GROUPS, Option
from rooftruss.design.serviceability import Deflections, deflections
from rooftruss.design.stages import Run
from rooftruss.units import shown

Array = NDArray[np.float64]
LIMIT = 1.0 + 1e-9  # a utilisation of 1.00 passes


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """What decides about a batch of trusses (...,); arrays (..., m), (..., support) and (..., place)."""

    envelope: Envelope
    reactions: ReactionEnvelope
    utilisation: Peak  # (..., m)
    rule: NDArray[np.int8]  # (..., m) number of the governing rule
    bearing: Peak  # (..., support)
    deflection: Deflections
    volume: Array  # timber of one truss (...,) [m3]
    mass: Array  # (...,) [kg]

    @property
    def worst(self) -> Array:
        """Largest of all utilisations and deflection ratios (...,)."""
        parts = (self.utilisation.value, self.bearing.value, self.deflection.ratio)
        return np.asarray(np.max(np.stack([p.max(axis=-1) for p in parts]), axis=0))

    @property
    def passes(self) -> NDArray[np.bool_]:
        """Whether nothing exceeds its limit (...,)."""
        return self.worst <= LIMIT


def outcome_of(run: Run) -> Outcome:
    """Envelopes and governing checks of a run."""
    solid = run.members.breadth * run.members.depth * run.members.plies * run.members.length
    return Outcome(
        envelope=run.envelope,
        reactions=reaction_envelope(run.reactions),
        utilisation=run.checks.governing,
        rule=run.checks.rule,
        bearing=peak(run.bearing, -2),
        deflection=deflections(run),
        volume=solid.sum(axis=-1),
        mass=(solid * run.members.properties["density"]).sum(axis=-1),
    )


@dataclass(frozen=True, kw_only=True)
class Design:
    """One truss of the job, sized and checked."""

    spec: TrussSpec
    run: Run  # without batch axes
    outcome: Outcome
    notes: tuple[str, ...] = ()

    @cached_property
    def sizes(self) -> dict[str, Option]:
        """Size and grade of each group."""
        return {g: self.run.choice.taken(g) for g in GROUPS}

    @property
    def length_over_all(self) -> float:
        """Plan length between the outermost joints, tails included [m]."""
        return float(np.ptp(self.run.truss.xy[..., 0]))

    @property
    def passes(self) -> bool:
        """Whether every check and limit is met."""
        return bool(self.outcome.passes)

    def combination(self, number: int) -> str:
        """Name of a combination; a dash where nothing acts."""
        return self.run.combinations.names[number] if number >= 0 else "-"

    @cached_property
    def failures(self) -> tuple[str, ...]:
        """One sentence for everything over its limit, worst first."""
        found = [*self._failed_members(), *self._failed_bearings(), *self._failed_deflections()]
        return tuple(text for _, text in sorted(found, key=lambda pair: -pair[0]))

    def _failed_members(self) -> list[tuple[float, str]]:
        out = []
        found = self.outcome.utilisation
        for k, name in enumerate(self.run.members.names):
            value = float(found.value[k])
            if value > LIMIT:
                option = self.sizes[self.run.family.topology.groups[k]]
                rule = self.run.checks.rules[int(self.outcome.rule[k])]
                size, under = f"{option.section.name} {option.grade.name}", self.combination(int(found.combination[k]))
                out.append((value, f"{name} ({size}): {value:.2f} in {rule.name} ({rule.clause}), {under}"))
        return out

    def _failed_bearings(self) -> list[tuple[float, str]]:
        made = self.run.family.topology
        out = []
        for k, support in enumerate(made.supports):
            value = float(self.outcome.bearing.value[k])
            if value > LIMIT:
                under = self.combination(int(self.outcome.bearing.combination[k]))
                where = f"bearing at {made.nodes[support.node]}"
                length = shown(value * float(self.run.bearing_lengths[k]), "size", self.run.family.job.units)
                need = f"a length of {length}, more plies or a denser bottom chord would do"
                out.append((value, f"{where}: {value:.2f} in compression across the grain, {under}; {need}"))
        return out

    def _failed_deflections(self) -> list[tuple[float, str]]:
        found, units = self.outcome.deflection, self.run.family.job.units
        return [
            (
                float(r),
                f"{p.direction} deflection at {p.name}: {shown(abs(float(v)), 'deflection', units)} of "
                f"{shown(float(w), 'deflection', units)}, {float(r):.2f} of its limit, {found.about(k)}, "
                f"{self.combination(int(c))}",
            )
            for k, (p, v, w, r, c) in enumerate(
                zip(found.places, found.value, found.limit, found.ratio, found.combination, strict=True)
            )
            if r > LIMIT
        ]
