"""What the job gives: the choices an engineer has to review beside the numbers, in the job's units."""

from collections.abc import Iterator, Sequence
from math import atan

from rooftruss.basis.job import Job
from rooftruss.basis.jobkeys import Keys, form_for
from rooftruss.basis.kinds import Quantity
from rooftruss.design.design import Design
from rooftruss.design.family import GROUPS
from rooftruss.design.serviceability import limits_in_force
from rooftruss.units import SYSTEMS, shown

Given = tuple[str, str]  # where it stands in the job file, what it says


def given_rows(job: Job, designs: Sequence[Design]) -> Iterator[Given]:
    """Site, service conditions, restraint, stock, ceiling and bottom pitch that no assumption says already, and the
    deflection limits."""
    assumed = {a.place for a in job.assumptions}
    scheme = designs[0].run.family.scheme
    form = form_for(scheme.load_standard, scheme.timber_standard)
    for key, value in job.site.items():
        if value is not None and f"[site] {key}" not in assumed:
            yield f"[site] {key}", _text(form["site"], key, value, job.units)
    if "[deflection] ceiling" not in assumed:
        yield "[deflection] ceiling", f"as the job gives it: {job.limits.ceiling}"
    for design in designs:
        yield from (("[deflection]", text) for text in limits_in_force(design.run))
    for design in designs:
        yield design.spec.mark, _restraint(job, design)
        yield design.spec.mark, _timber(job, design, form["timber"], assumed)
        if float(design.run.family.size.bottom_pitch) > 0:
            yield design.spec.mark, _bottom_pitch(job, design)


def _text(keys: Keys, key: str, value: object, units: str) -> str:
    kind = keys[key].kind if key in keys else None
    if isinstance(kind, Quantity) and isinstance(value, float) and kind.shows in SYSTEMS[units]:
        return f"as the job gives it: {shown(value, kind.shows, units)}"
    return f"as the job gives it: {value:g}" if isinstance(value, float) else f"as the job gives it: {value}"


def _restraint(job: Job, design: Design) -> str:
    """What the checks took to hold each group sideways; it has to be built."""
    parts = []
    for group in GROUPS:
        held = design.spec.timber.groups[group].restraint
        far = shown(held.spacing, "size", job.units) if held.spacing else ""
        parts.append(f"{group} {f'every {far}' if held.kind == 'spacing' else held.kind}")
    return f"held sideways, as the job gives it: {', '.join(parts)}"


def _timber(job: Job, design: Design, keys: Keys, assumed: set[str]) -> str:
    timber = design.spec.timber
    said = [
        f"{key} {value:g}" if isinstance(value, float) else f"{key} {value}"
        for key, value in timber.options.items()
        if key in keys and f"[timber] {key}" not in assumed and value is not None
    ]
    return ", ".join([*said, f"longest stock {shown(timber.longest_stock, 'length', job.units)}"])


def _bottom_pitch(job: Job, design: Design) -> str:
    rise = float(design.run.family.size.bottom_pitch)
    pitch = f"{12 * rise:.4g}/12" if job.units == "US" else shown(atan(rise), "angle", job.units)
    given = "as the job gives it" if design.spec.bottom_pitch is not None else "half the roof pitch, the job gives none"
    return f"bottom chord pitch {pitch} ({given})"
