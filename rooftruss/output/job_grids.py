"""Grids of a whole job: the quote, combinations, cases, assumptions, cautions, and shapes side by side."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cache

from rooftruss.analysis.combinations import Combinations
from rooftruss.basis.job import Job
from rooftruss.design.compare import Alternative
from rooftruss.design.design import Design
from rooftruss.design.stages import GROUPS
from rooftruss.loads.roof import ActionCase, Value
from rooftruss.output.cautions import CAUTIONS, MODEL_ASSUMPTIONS
from rooftruss.output.schedule import Cell, Column, Grid, Measure
from rooftruss.output.truss_grids import size_text, surfaces_grid

ACTIONS = {"D": "dead", "L": "ceiling live", "Lr": "roof live", "S": "snow", "W": "wind"}


def quote_grid(designs: Sequence[Design]) -> Grid:
    """One row per truss of the job: what it is, sizes, timber, reactions, worst ratio and result."""
    columns = (
        Column("Truss"),
        Column("Quan-tity", "count"),
        Column("Shape"),
        Column("Span", "length"),
        Column("Pitch", "pitch"),
        Column("Spacing", "size"),
        Column("Over-hang", "size"),
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
        Column("Worst ratio", "ratio"),
        Column("Result"),
    )
    return Grid("Shapes", columns, tuple(_compared(row) for row in rows))


def _compared(row: Alternative) -> tuple[Cell, ...]:
    design = row.design
    if design is None:
        return (row.shape, *(None,) * 9, f"not possible: {row.reason}")
    outcome = design.outcome
    return (
        row.shape,
        design.run.family.layout.panels,
        *(sized(design, g) for g in GROUPS),
        float(outcome.volume),
        float(outcome.mass),
        float(outcome.reactions.down.value.max()),
        float(outcome.reactions.uplift.value.max()),
        float(outcome.worst),
        "all checks met" if design.passes else "; ".join(("NOT met", *design.failures[:1])),
    )


@dataclass(frozen=True, slots=True)
class Shared:
    """Trusses that have the same table, and the first of them to make it from."""

    designs: tuple[Design, ...]

    @property
    def first(self) -> Design:
        """The truss that stands for all."""
        return self.designs[0]

    @property
    def marks(self) -> str:
        """Marks of all."""
        return ", ".join(d.spec.mark for d in self.designs)


def _shared(keys: Sequence[object], designs: Sequence[Design]) -> list[Shared]:
    groups: dict[object, list[Design]] = {}
    for key, design in zip(keys, designs, strict=True):
        groups.setdefault(key, []).append(design)
    return [Shared(tuple(group)) for group in groups.values()]


def sharing_combinations(designs: Sequence[Design]) -> list[Shared]:
    """Trusses grouped by equal cases and combinations."""
    runs = [d.run for d in designs]
    keys = [(r.cases.names, r.combinations.names, r.combinations.factors.tobytes()) for r in runs]
    return _shared(keys, designs)


def sharing_cases(designs: Sequence[Design]) -> list[Shared]:
    """Trusses grouped by equal cases, values included."""
    return _shared([(_values_key(d), surfaces_grid(d).rows) for d in designs], designs)


def _values_key(design: Design) -> tuple[object, ...]:
    return tuple((h.name, tuple(map(_value_key, h.values))) for h in design.run.cases.heads)


def _value_key(value: Value) -> tuple[object, ...]:
    return (value.symbol, float(value.value), value.clause)


def combinations_grid(combinations: Combinations, heads: Sequence[ActionCase]) -> Grid:
    """Every combination: clause, name, limit state, load duration, and for each action its factor and its cases."""
    actions = tuple(dict.fromkeys(h.action for h in heads))
    timed = bool((combinations.time_effects == combinations.time_effects).any())  # NaN: the scheme has none
    columns = (
        Column("No.", "combination"),
        Column("Clause"),
        Column("Combination"),
        Column("Limit state"),
        Column("Load duration"),
        *((Column("Time effect", "factor"),) if timed else ()),
        *(c for a in actions for c in (Column(f"{a} factor", "factor"), Column(f"{a} cases"))),
    )
    place = {a: [k for k, h in enumerate(heads) if h.action == a] for a in actions}
    rows = []
    for n, name in enumerate(combinations.names):
        row = combinations.factors[n]
        effect = float(combinations.time_effects[n])
        rows.append(
            (
                n,
                combinations.clauses[n],
                name.removeprefix("deflection, "),
                "strength" if combinations.strength[n] else f"deflection, {combinations.kinds[n].replace('_', ' or ')}",
                combinations.durations[n],
                *((effect if effect == effect else None,) if timed else ()),
                *(cell for a in actions for cell in _factors([(k, float(row[k])) for k in place[a] if row[k]])),
            )
        )
    return Grid("Combinations", columns, tuple(rows))


def _factors(acting: list[tuple[int, float]]) -> tuple[Cell, Cell]:
    """Factor of one action, and the numbers of the cases it multiplies; every factor by itself where they differ."""
    factors = {f for _, f in acting}
    if len(factors) > 1:
        return "each", "; ".join(f"{k + 1}: {f:.4g}" for k, f in acting)
    return (factors.pop(), ", ".join(str(k + 1) for k, _ in acting)) if acting else (None, None)


def values_grid(design: Design) -> Grid:
    """Intermediate values of the load cases; what all cases of an action share is listed once, ahead of them."""
    columns = (
        Column("Case"),
        Column("Load case"),
        Column("Symbol"),
        Column("Value", "own"),
        Column("Clause"),
    )
    heads = design.run.cases.heads
    rows: list[tuple[Cell, ...]] = []
    for action in dict.fromkeys(h.action for h in heads):
        own = [(k, h) for k, h in enumerate(heads) if h.action == action and h.values]
        common = _common([h for _, h in own])
        listed = set(map(_value_key, common))
        rows += _value_rows(f"all {action}", f"every case of {ACTIONS.get(action, action)} load", common)
        for k, head in own:
            rows += _value_rows(str(k + 1), head.name, [v for v in head.values if _value_key(v) not in listed])
    return Grid("Values", columns, tuple(rows))


def _common(heads: Sequence[ActionCase]) -> list[Value]:
    """Values that all of several cases have."""
    if len(heads) < 2:
        return []
    rest = [set(map(_value_key, h.values)) for h in heads[1:]]
    return [v for v in heads[0].values if all(_value_key(v) in values for values in rest)]


def _value_rows(number: str, name: str, values: Sequence[Value]) -> Iterator[tuple[Cell, ...]]:
    for k, v in enumerate(values):
        yield (number if k == 0 else None, name if k == 0 else None, v.symbol, Measure(float(v.value), v.kind), v.clause)


def assumptions_grid(job: Job, designs: Sequence[Design]) -> Grid:
    """What the job left open, what the timber standard notes, what is said of single trusses, and the model."""
    noted = dict.fromkeys(note for d in designs for note in d.run.family.timber.notes)
    rows = [
        *((a.place, a.text) for a in job.assumptions),
        *(("timber", note) for note in noted),
        *((d.spec.mark, note) for d in designs for note in d.notes),
        *(("model", text) for text in MODEL_ASSUMPTIONS),
    ]
    return Grid("Assumptions", (Column("About"), Column("Taken as")), tuple(rows))


@cache
def cautions_grid() -> Grid:
    """The cautions, numbered."""
    return Grid("Cautions", (Column("No.", "count"), Column("Caution")), tuple(enumerate(CAUTIONS, 1)))


def geometry_grid(design: Design) -> Grid:
    """Panel points of a truss; x from the left bearing centre, y up from it."""
    columns = (Column("Panel point"), Column("x", "length"), Column("y", "length"))
    nodes = design.run.family.topology.nodes
    return Grid("Panel points", columns, tuple((n, float(x), float(y)) for n, (x, y) in zip(nodes, design.run.truss.xy, strict=True)))
