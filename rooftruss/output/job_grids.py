"""Grids of a whole job: the quote, combinations, cases, assumptions, cautions, and shapes side by side."""

from collections.abc import Sequence
from functools import cache

from rooftruss.basis.job import Job
from rooftruss.design.compare import Alternative
from rooftruss.design.design import Design
from rooftruss.design.family import GROUPS
from rooftruss.design.serviceability import largest
from rooftruss.output.basis_grids import given_rows
from rooftruss.output.cautions import CAUTIONS, MODEL_ASSUMPTIONS
from rooftruss.output.numbering import Numbering
from rooftruss.output.schedule import Cell, Column, Grid
from rooftruss.output.truss_grids import size_text


def quote_grid(designs: Sequence[Design]) -> Grid:
    """One row per truss of the job: what it is, sizes, timber, reactions, worst ratio and result."""
    columns = (
        Column("Truss"),
        Column("Quantity", "count"),
        Column("Shape"),
        Column("Span", "length"),
        Column("Pitch", "pitch"),
        Column("Spacing", "size"),
        Column("Overhang", "size"),
        Column("Top chord"),
        Column("Bottom chord"),
        Column("Webs"),
        Column("Timber each", "volume"),
        Column("Timber in all", "volume"),
        Column("Weight each", "mass"),
        Column("Weight in all", "mass"),
        Column("Most down", "force"),
        Column("Most uplift", "force"),
        Column("Worst ratio", "ratio"),
        Column("Result"),
    )
    return Grid("Trusses", columns, tuple(_quoted(d) for d in designs))


def _quoted(design: Design) -> tuple[Cell, ...]:
    spec, outcome = design.spec, design.outcome
    volume, mass = float(outcome.volume), float(outcome.mass)
    return (
        spec.mark,
        spec.quantity,
        spec.shape,
        spec.span,
        spec.pitch,
        spec.spacing,
        spec.overhang,
        *(sized(design, g) for g in GROUPS),
        volume,
        volume * spec.quantity,
        mass,
        mass * spec.quantity,
        float(outcome.reactions.down.value.max()),
        float(outcome.reactions.uplift.value.max()),
        float(outcome.worst),
        result_text(design),
    )


def sized(design: Design, group: str) -> str:
    """Size and grade of a group: "2x6 SPF No.2"."""
    option = design.sizes[group]
    return f"{size_text(option.section.name, design.spec.plies)} {option.grade.name}"


def result_text(design: Design) -> str:
    """Result of a truss in words."""
    return "all checks met" if design.passes else "NOT met, see its sheet"


def comparison_grid(rows: Sequence[Alternative]) -> Grid:
    """Shapes for one roof side by side."""
    columns = (
        Column("Shape"),
        Column("Panels", "count"),
        Column("Top chord"),
        Column("Bottom chord"),
        Column("Webs"),
        Column("Timber", "volume"),
        Column("Weight", "mass"),
        Column("Most down", "force"),
        Column("Most uplift", "force"),
        Column("Largest deflection", "deflection"),
        Column("Worst ratio", "ratio"),
        Column("Result"),
    )
    numbers = _numbered(rows)
    return Grid("Shapes", columns, tuple(_compared(row, numbers.get(row.shape)) for row in rows))


def comparison_notes(rows: Sequence[Alternative]) -> tuple[str, ...]:
    """The reasons in full that the results of `comparison_grid` give the numbers of: "(1) king post: ..."."""
    return tuple(
        f"({number}) {row.shape}: {_reason(row)}" for row in rows if (number := _numbered(rows).get(row.shape))
    )


def _numbered(rows: Sequence[Alternative]) -> dict[str, int]:
    """Number of the note of each shape that needs one."""
    return {row.shape: n for n, row in enumerate((r for r in rows if r.design is None or r.shortfall), 1)}


def _reason(row: Alternative) -> str:
    if row.design is None:
        return f"not possible: {row.reason}"
    worst, *others = row.design.failures
    more = f"{len(others)} more check{'s' if len(others) > 1 else ''} not met, too"
    return f"NOT met: {worst}" + (f"; {more}" if others else "")


def _compared(row: Alternative, note: int | None) -> tuple[Cell, ...]:
    design = row.design
    if design is None:
        return (row.shape, *(None,) * 10, f"not possible ({note})")
    outcome = design.outcome
    return (
        row.shape,
        design.run.family.layout.panels,
        *(sized(design, g) for g in GROUPS),
        float(outcome.volume),
        float(outcome.mass),
        float(outcome.reactions.down.value.max()),
        float(outcome.reactions.uplift.value.max()),
        largest_deflection(design),
        float(outcome.worst),
        "all checks met" if design.passes else f"NOT met: {row.shortfall} ({note})",
    )


def largest_deflection(design: Design) -> float:
    """Largest vertical deflection of a panel point or panel middle [m] of any kind, whatever its limit; the ends of
    tails do not count."""
    found = largest(design.run)
    return abs(found.value) if found else 0.0


def combinations_grid(numbering: Numbering, designs: Sequence[Design]) -> Grid:
    """Every combination of the job: clause, name, limit state, duration; for each action its factor and its cases."""
    heads = {h.name: h.action for d in designs for h in d.run.cases.heads}
    actions = tuple(dict.fromkeys(heads[name] for name in numbering.cases))
    timed = any(line.time_effect == line.time_effect for line in numbering.lines)  # NaN: the scheme has none
    parted = any(len(line.marks) < len(designs) for line in numbering.lines)
    columns = (
        Column("No.", "combination"),
        Column("Clause"),
        Column("Combination"),
        Column("Limit state"),
        Column("Load duration"),
        *((Column("Time effect", "factor"),) if timed else ()),
        *(c for a in actions for c in (Column(f"{a} factor", "factor"), Column(f"{a} cases"))),
        *((Column("Trusses"),) if parted else ()),
    )
    rows = []
    for line in numbering.lines:
        acting = [(numbering.cases[name], heads[name], factor) for name, factor in line.factors]
        rows.append(
            (
                line.number,
                line.clause,
                line.name.removeprefix("deflection, "),
                f"deflection, {line.kind.replace('_', ' or ')}" if line.kind else "strength",
                line.duration,
                *((line.time_effect if line.time_effect == line.time_effect else None,) if timed else ()),
                *(cell for a in actions for cell in _factors([(n, f) for n, b, f in acting if b == a])),
                *((", ".join(line.marks) if len(line.marks) < len(designs) else "all",) if parted else ()),
            )
        )
    return Grid("Combinations", columns, tuple(rows))


def _factors(acting: list[tuple[int, float]]) -> tuple[Cell, Cell]:
    """Factor of one action, and the numbers of the cases it multiplies; each with its own where they differ."""
    factors = {f for _, f in acting}
    if len(factors) > 1:
        return None, "; ".join(f"{n} x {f:.4g}" for n, f in acting)
    return (factors.pop(), ", ".join(str(n) for n, _ in acting)) if acting else (None, None)


def assumptions_grid(job: Job, designs: Sequence[Design]) -> Grid:
    """What the job left open and gives, the notes of the timber standard and of single trusses, and the model."""
    rows = [
        *((a.place, a.text) for a in job.assumptions),
        *((d.run.family.timber.name, note) for d in designs for note in d.run.family.timber.notes),
        *((d.spec.mark, note) for d in designs for note in d.notes),
        *((d.spec.mark, note) for d in designs for note in d.run.family.timber.truss_notes(d.length_over_all)),
        *given_rows(job, designs),
        *(("model", text) for text in MODEL_ASSUMPTIONS),
    ]
    about: dict[str, dict[str, None]] = {}  # the places of a sentence that is said of several, in order
    for place, text in rows:
        about.setdefault(text, {})[place] = None
    joined = tuple((", ".join(places), text) for text, places in about.items())
    return Grid("Assumptions", (Column("About"), Column("Taken as")), joined)


@cache
def cautions_grid() -> Grid:
    """The cautions, numbered."""
    return Grid("Cautions", (Column("No.", "count"), Column("Caution")), tuple(enumerate(CAUTIONS, 1)))
