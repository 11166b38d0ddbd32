"""Grids of the catalogues: shapes, schemes, grades, sections."""

from collections.abc import Mapping, Sequence
from math import isnan

from rooftruss.basis.grades import Grade
from rooftruss.basis.scheme_variants import Variants
from rooftruss.basis.schemes import Scheme, load_scheme, schemes
from rooftruss.basis.sections import Section
from rooftruss.basis.tables import Cell
from rooftruss.output.schedule import Column, Grid
from rooftruss.shapes.webbing import SHAPES

ACTION_WORDS = {
    "D": "dead load of the truss, the roof and the ceiling",
    "L": "live load of the ceiling or loft",
    "Lr": "live load of the roof",
    "S": "snow",
    "R": "rain; no load case is made of it",
    "W": "wind",
    "A": "accidental: exceptional snow on the ground",
}


def shapes_grid() -> Grid:
    """The shapes of the catalogue."""
    rows = tuple((s.name, ", ".join(map(str, s.panel_counts)), s.title) for s in SHAPES.values())
    return Grid("Shapes", (Column("shape"), Column("top-chord panels"), Column("what it is")), rows)


def schemes_grid() -> Grid:
    """The schemes of tables/schemes."""
    made = [load_scheme(name) for name in schemes()]
    rows = tuple((s.name, s.title, s.load_standard, s.timber_standard) for s in made)
    columns = (Column("scheme"), Column("title"), Column("loads"), Column("timber"))
    return Grid("Schemes", columns, rows)


def scheme_grid(scheme: Scheme) -> Grid:
    """The rows of one scheme as the standard prints them."""
    rows = tuple(
        (
            row.clause,
            row.expression,
            row.kind.replace("_", " or ") or "strength",
            "least" if row.dead == "least" else "most",
        )
        for row in scheme.rows
    )
    columns = (Column("clause"), Column("combination"), Column("for"), Column("dead load taken"))
    return Grid(f"{scheme.name}: {scheme.title}", columns, rows)


def variants_text(variants: Variants) -> str:
    """One sentence about the keys of a site that change a scheme which is shown without a site; "" where none does.

    >>> variants_text({"altitude": ("over 1000 m",), "loft": ("storage",)})  # doctest: +ELLIPSIS
    'Factors and durations as no key of [site] changes them. These keys do: altitude (over 1000 m), loft (storage)...'
    """
    if not variants:
        return ""
    keys = ", ".join(f"{key} ({' or '.join(values)})" for key, values in variants.items())
    return (
        f"Factors and durations as no key of [site] changes them. These keys do: {keys}; "
        "`rooftruss schemes NAME --job FILE` shows them as on the site of a job."
    )


def legend_grid(scheme: Scheme) -> Grid:
    """The symbols in the rows of a scheme: the action of a job file that each one is, and how long its load lasts."""
    used = {f.symbol: f.action for row in scheme.rows for term in row.terms for f in term}
    duration = {action: name for name, actions in scheme.durations for action in actions}
    rows = tuple((symbol, action, ACTION_WORDS[action], duration.get(action)) for symbol, action in used.items())
    columns = (Column("symbol"), Column("action"), Column("what it is"), Column("load duration"))
    return Grid("Symbols", columns, rows)


def sections_grid(system: str, found: Sequence[Section]) -> Grid:
    """Sizes with their properties about the strong axis."""
    rows = tuple(
        (
            s.name,
            s.breadth,
            s.depth,
            s.breadth * s.depth,
            s.breadth * s.depth**2 / 6,
            s.breadth * s.depth**3 / 12,
        )
        for s in found
    )
    columns = (
        Column("section"),
        Column("breadth", "size"),
        Column("depth", "size"),
        Column("area", "area"),
        Column("section modulus", "section modulus"),
        Column("inertia", "inertia"),
    )
    return Grid(f"Sections, {system} sizes", columns, rows)


def grades_grid(found: Sequence[Grade]) -> Grid:
    """Reference design values of grades of one family; a grade whose values go by size has a row for each."""
    letters = [key for key in _keys(found) if _is_stress(found, key)]
    rows = tuple(
        (grade.name, _reach(row), *(_number(row.get(letter)) for letter in letters), str(row["source"]))
        for grade in found
        for row in grade.rows
    )
    columns = (
        Column("grade"),
        Column("depth up to", "size"),
        *(Column(letter, "stress") for letter in letters),
        Column("source"),
    )
    return Grid("Grades, reference values before any factor", columns, rows)


def _keys(found: Sequence[Grade]) -> list[str]:
    return list(dict.fromkeys(key for grade in found for row in grade.rows for key in row))


def _is_stress(found: Sequence[Grade], key: str) -> bool:
    """Whether a column holds stresses: every reference value is over 0.1 MPa, and nothing else of a grade is."""
    values = [row[key] for grade in found for row in grade.rows if key in row]
    return all(isinstance(v, float) and (isnan(v) or v > 1e5) for v in values) and any(v == v for v in values)


def _number(cell: object) -> float | None:
    return cell if isinstance(cell, float) and cell == cell else None


def _reach(row: Mapping[str, Cell]) -> float | None:
    return _number(row.get("depth_up_to"))
