"""Many trusses at once: grouped into families, run in chunks of bounded memory, on any executor.

Trusses of one layout are one stacked solve; mixed layouts are grouped. Each chunk is independent work, so any
`concurrent.futures.Executor` can carry it.
"""

from collections.abc import Callable, Iterator, Mapping, Sequence
from concurrent.futures import Executor
from dataclasses import dataclass, fields, replace
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from rooftruss.basis.grades import Grade, find_grade
from rooftruss.basis.job import Job, LoadSpec, TrussSpec
from rooftruss.basis.schemes import Scheme, load_scheme
from rooftruss.basis.sections import find_section
from rooftruss.design.design import LIMIT, Outcome, outcome_of
from rooftruss.design.family import GROUPS, Choice, Family, Option, family_of
from rooftruss.design.stages import run
from rooftruss.errors import JobError, RooftrussError
from rooftruss.loads.actions import AreaLoads
from rooftruss.shapes.forming import Dimensions, layout_of
from rooftruss.timber.check import standard
from rooftruss.timber.terms import TimberStandard

if TYPE_CHECKING:
    import pandas as pd

Array = NDArray[np.float64]
CHUNK_BYTES = 48e6  # memory of the largest array of a chunk; about six such arrays live at once
LARGEST_CHUNK = 256  # trusses; more gives no speed, the arrays leave the processor's cache
NUMBERS = tuple(f.name for f in fields(AreaLoads))  # loads that may differ within a family
WORDS = tuple(f.name for f in fields(LoadSpec) if f.name not in NUMBERS)  # what may not
KEPT = 31 * 2**20  # bytes; beyond 32 MB it keeps nothing, and fetching fresh pages costs a fifth of the time
Sizes = Mapping[str, tuple[str, str]]  # group -> (size, grade)


@dataclass(frozen=True, slots=True, kw_only=True)
class Report:
    """Result of a batch, one row per truss in the order given.

    worst (truss,): largest utilisation or deflection ratio; member, rule and combination name where it is; down,
    uplift (truss,) [N]; volume [m3], mass [kg].
    """

    mark: tuple[str, ...]
    worst: Array
    utilisation: Array
    member: tuple[str, ...]
    rule: tuple[str, ...]
    combination: tuple[str, ...]
    bearing: Array
    deflection: Array
    down: Array
    uplift: Array
    volume: Array
    mass: Array

    @property
    def passes(self) -> NDArray[np.bool_]:
        """Whether nothing exceeds its limit (truss,)."""
        return self.worst <= LIMIT

    def frame(self) -> "pd.DataFrame":
        """The same as a data frame, SI units, indexed by mark."""
        import pandas as pd

        columns = {f.name: getattr(self, f.name) for f in fields(self)}
        return pd.DataFrame({**columns, "passes": self.passes}).set_index("mark")


def check_many(
    job: Job,
    specs: Sequence[TrussSpec],
    sizes: Sequence[Sizes],
    *,
    executor: Executor | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> Report:
    """Analyse and check many trusses with given sizes and grades.

    sizes: one mapping per truss, or a single one for all, of group to (size, grade) names. `progress(done, all)` is
    called after every chunk. Raises JobError naming the truss whose input does not fit.
    """
    if len(sizes) not in (1, len(specs)):
        raise JobError(
            f"sizes for {len(sizes)} trusses were given, {len(specs)} trusses; give one for each, or one for all"
        )
    np.empty(KEPT, dtype=np.uint8)  # the GNU allocator keeps freed memory of the largest size it has seen freed
    chunks = list(_chunks(job, specs, list(sizes) * (len(specs) if len(sizes) == 1 else 1)))
    results = executor.map(_chunk_report, chunks) if executor else map(_chunk_report, chunks)
    parts: list[Report] = []
    rows: list[NDArray[np.intp]] = []
    for chunk, part in zip(chunks, results, strict=True):
        parts.append(part)
        rows.append(chunk.rows)
        if progress:
            progress(sum(map(len, rows)), len(specs))
    return _joined(parts, rows)


@dataclass(frozen=True, slots=True)
class _Chunk:
    rows: NDArray[np.intp]  # numbers of the trusses in the caller's order
    family: Family
    choice: Choice
    marks: tuple[str, ...]


def _shared_settings(job: Job, scheme: Scheme, spec: TrussSpec) -> tuple[object, ...]:
    """What trusses must have in common beside their layout to be one family."""
    loads, groups = spec.loads, spec.timber.groups
    options = tuple(sorted(spec.timber.options.items()))
    timber = _standard(scheme.timber_in_force(job.scheme_options), options)
    restraints = tuple(groups[group].restraint for group in GROUPS)
    return (
        options,
        restraints,
        tuple(
            timber.shares_load(role=g, sheathed=x.kind == "sheathed", quantity=spec.quantity, spacing=spec.spacing)
            for g, x in zip(GROUPS, restraints, strict=True)
        ),
        tuple(getattr(loads, name) for name in WORDS),
        tuple(spec.timber.own_grades),
        tuple(getattr(loads, name) > 0 for name in NUMBERS),  # a load of zero makes no case
    )


@cache
def _standard(name: str, options: tuple[tuple[str, object], ...]) -> TimberStandard:
    return standard(name, dict(options))


def _chunks(job: Job, specs: Sequence[TrussSpec], sizes: Sequence[Sizes]) -> Iterator[_Chunk]:
    groups: dict[object, list[int]] = {}
    settings: dict[object, tuple[object, ...]] = {}
    scheme = load_scheme(job.scheme, Path(job.folder))
    for k, spec in enumerate(specs):
        # trusses made from one another share these objects, so what follows from them is found once
        same = (id(spec.loads), id(spec.timber), spec.quantity, spec.spacing)
        if same not in settings:
            settings[same] = _shared_settings(job, scheme, spec)
        alone = k if spec.loads.points or spec.loads.cases else -1  # a point may stand on another member in the next
        try:
            groups.setdefault((layout_of(spec), settings[same], alone), []).append(k)
        except JobError as error:
            raise JobError(f"truss {spec.mark}: {error}") from None
    for rows in groups.values():
        family = family_of(job, [specs[k] for k in rows])
        choice = _choice([sizes[k] for k in rows], {grade.name: grade for grade in specs[rows[0]].timber.own_grades})
        step = _chunk_length(family)
        for start in range(0, len(rows), step):
            part = slice(start, start + step)
            yield _Chunk(
                np.array(rows[part]), _part(family, part), choice.part(part), tuple(specs[k].mark for k in rows[part])
            )


def _choice(sizes: Sequence[Sizes], own: Mapping[str, Grade]) -> Choice:
    options: dict[str, tuple[Option, ...]] = {}
    index: dict[str, NDArray[np.intp]] = {}
    for group in GROUPS:
        names = [s[group] for s in sizes]
        kinds = list(dict.fromkeys(names))
        number = {kind: k for k, kind in enumerate(kinds)}
        options[group] = tuple(Option(find_section(size), own.get(grade) or find_grade(grade)) for size, grade in kinds)
        index[group] = np.array([number[name] for name in names])
    return Choice(options=options, index=index)


def _chunk_length(family: Family) -> int:
    """Trusses per chunk: the widest array holds 5 numbers per segment under every combination (about 200)."""
    numbers = 5 * 2 * len(family.topology.members) * 200
    return int(max(1, min(LARGEST_CHUNK, CHUNK_BYTES // (8 * numbers))))


def _part(family: Family, rows: slice) -> Family:
    size = Dimensions(**{f.name: getattr(family.size, f.name)[rows] for f in fields(Dimensions)})
    loads = AreaLoads(**{f.name: getattr(family.loads, f.name)[rows] for f in fields(AreaLoads)})
    points = tuple(replace(p, x=p.x[rows], force=p.force[rows]) for p in family.points)
    return replace(family, size=size, loads=loads, points=points)


def _named_error(error: RooftrussError, chunk: _Chunk) -> RooftrussError:
    """The error of a chunk with the mark of the first of its trusses that has it alone."""
    for k, mark in enumerate(chunk.marks):
        one = slice(k, k + 1)
        try:
            run(_part(chunk.family, one), chunk.choice.part(one))
        except RooftrussError as own:
            return type(own)(f"truss {mark}: {own}")
    return error


def _chunk_report(chunk: _Chunk) -> Report:
    try:
        done = run(chunk.family, chunk.choice)
    except RooftrussError as error:
        raise _named_error(error, chunk) from None
    outcome = outcome_of(done)
    each = np.arange(len(chunk.rows))
    member = outcome.utilisation.value.argmax(axis=-1)
    return Report(
        mark=chunk.marks,
        worst=outcome.worst,
        utilisation=outcome.utilisation.value[each, member],
        member=tuple(done.members.names[k] for k in member),
        rule=tuple(done.checks.rules[k].name for k in outcome.rule[each, member]),
        combination=tuple(_named(done.combinations.names, k) for k in outcome.utilisation.combination[each, member]),
        **_totals(outcome),
    )


def _named(names: tuple[str, ...], number: int) -> str:
    return names[number] if number >= 0 else "-"


def _totals(outcome: Outcome) -> dict[str, Array]:
    return {
        "bearing": outcome.bearing.value.max(axis=-1),
        "deflection": outcome.deflection.ratio.max(axis=-1),
        "down": outcome.reactions.down.value.max(axis=-1),
        "uplift": outcome.reactions.uplift.value.max(axis=-1),
        "volume": outcome.volume,
        "mass": outcome.mass,
    }


def _joined(parts: Sequence[Report], rows: Sequence[NDArray[np.intp]]) -> Report:
    """Chunk reports as one, in the caller's order."""
    order = np.argsort(np.concatenate(rows)) if rows else np.zeros(0, dtype=np.intp)
    columns: dict[str, object] = {}
    for f in fields(Report):
        values = [getattr(p, f.name) for p in parts]
        if f.type == Array:
            columns[f.name] = np.concatenate(values)[order] if values else np.zeros(0)
        else:
            flat = [x for part in values for x in part]
            columns[f.name] = tuple(flat[k] for k in order)
    return Report(**columns)  # type: ignore[arg-type]
