"""The catalogue's shapes side by side for one roof."""

from collections.abc import Iterator
from dataclasses import dataclass, replace

from rooftruss.basis.job import Job, TrussSpec
from rooftruss.design.design import Design
from rooftruss.design.sizing import size_truss
from rooftruss.errors import JobError, OutOfScopeError
from rooftruss.shapes.webbing import SHAPES


@dataclass(frozen=True, slots=True, kw_only=True)
class Alternative:
    """One shape for the roof: its design, or the reason why it cannot be built there."""

    shape: str
    design: Design | None
    reason: str = ""

    @property
    def shortfall(self) -> str:
        """What is furthest over its limit, in few words: "top 1 1.24 bending"; "" where every check is met."""
        return "" if self.design is None or self.design.passes else _worst(self.design)


def _worst(design: Design) -> str:
    """Place, ratio and check of the largest ratio of a design."""
    made, outcome = design.run.family.topology, design.outcome
    member, bearing, moved = (
        int(ratio.argmax()) for ratio in (outcome.utilisation.value, outcome.bearing.value, outcome.deflection.ratio)
    )
    place, rule = outcome.deflection.places[moved], design.run.checks.rules[int(outcome.rule[member])]
    node = made.nodes[made.supports[bearing].node]
    found = (
        (float(outcome.utilisation.value[member]), made.names[member], rule.name),
        (float(outcome.bearing.value[bearing]), f"bearing {node}", "across the grain"),
        (float(outcome.deflection.ratio[moved]), place.name, f"{place.direction} deflection"),
    )
    ratio, where, what = max(found)
    return f"{where} {ratio:.2f} {what}"


def alternatives(spec: TrussSpec) -> Iterator[TrussSpec]:
    """The truss in every shape of the catalogue; panel count and bottom pitch stay with the shape they belong to."""
    for name in SHAPES:
        yield spec if name == spec.shape else replace(spec, shape=name, panels=None, bottom_pitch=None)


def compare_shapes(job: Job, spec: TrussSpec) -> list[Alternative]:
    """Size the truss in every shape, with the loads, sizes and grades of the job."""
    out = []
    for other in alternatives(spec):
        try:
            out.append(Alternative(shape=other.shape, design=size_truss(job, other)))
        except (JobError, OutOfScopeError) as error:
            out.append(Alternative(shape=other.shape, design=None, reason=str(error)))
    return out
