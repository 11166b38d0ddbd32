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
