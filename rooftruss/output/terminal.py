"""The terminal: grids as tables on stdout; cautions and progress on stderr. Plain text when nobody looks at it."""

import os
import sys
from collections.abc import Sequence
from typing import TextIO

from rooftruss.basis.job import Job
from rooftruss.design.compare import Alternative
from rooftruss.design.design import Design
from rooftruss.design.idle import idle_members
from rooftruss.output.cautions import TERMINAL_CAUTIONS
from rooftruss.output.job_grids import comparison_grid, quote_grid
from rooftruss.output.numbering import Numbering, numbering_of
from rooftruss.output.schedule import MET, Grid, ShownColumn, ShownGrid, shown_grid, texts
from rooftruss.output.truss_grids import (
    deflections_grid,
    members_grid,
    named_combinations_grid,
    reactions_grid,
    sizes_grid,
)
from rooftruss.units import shown

GAP = "  "


def print_quote(job: Job, designs: Sequence[Design]) -> None:
    """One row per truss, and what is not met."""
    print_grid(quote_grid(designs), job.units)
    for design in designs:
        _print_failures(design)


def print_design(job: Job, design: Design) -> None:
    """Sizes of one truss with reactions and the worst deflection."""
    print_sizes([design])
    print_grid(reactions_grid(design, numbering_of([design])), job.units)
    print(_nearest_limit(job, design))
    volume = shown(float(design.outcome.volume), "volume", job.units)
    mass = shown(float(design.outcome.mass), "mass", job.units)
    print(f"one truss: {volume} of timber, {mass}")
    _print_failures(design)


def _nearest_limit(job: Job, design: Design) -> str:
    """Sentence about the deflection nearest its limit."""
    found = design.outcome.deflection
    k = int(found.ratio.argmax())
    amount, limit = (shown(abs(float(v[k])), "deflection", job.units) for v in (found.value, found.limit))
    under = design.combination(int(found.combination[k])).removeprefix("deflection, ")
    return f"deflection nearest its limit: {amount} of {limit} at {found.places[k].name}, {under}"


def print_sizes(designs: Sequence[Design]) -> None:
    """Size and grade of each group."""
    print_grid(sizes_grid(designs), "US")  # no column of it has a unit


def print_envelope(job: Job, design: Design, numbering: Numbering) -> None:
    """Governing effects of every member, reactions, deflections, and the combinations they come from."""
    print(f"Truss {design.spec.mark}\n")
    for grid in (
        members_grid(design, numbering, idle_members(design)),
        reactions_grid(design, numbering),
        deflections_grid(design, numbering),
        named_combinations_grid(design, numbering),
    ):
        print_grid(grid, job.units)


def print_comparison(job: Job, rows: Sequence[Alternative]) -> None:
    """Shapes for one roof side by side."""
    print_grid(comparison_grid(rows), job.units)


def _print_failures(design: Design) -> None:
    for text in (*design.notes, *design.failures):
        print(f"{design.spec.mark} NOT met: {text}" if text in design.failures else f"{design.spec.mark}: {text}")


def print_cautions() -> None:
    """The short cautions, on stderr."""
    print("\n" + "\n".join(TERMINAL_CAUTIONS), file=sys.stderr)


def progress(mark: str) -> None:
    """Say on stderr which truss comes next; nothing when stderr is not looked at."""
    if sys.stderr.isatty():
        print(f"truss {mark} ...", file=sys.stderr)


def print_grid(grid: Grid, units: str) -> None:
    """A grid on stdout: a table in colour on a terminal, columns of plain text elsewhere or with NO_COLOR set."""
    table = shown_grid(grid, units)
    if wants_plain(sys.stdout):
        print("\n".join(plain_lines(table)) + "\n")
    else:
        _print_rich(table)


def wants_plain(stream: TextIO) -> bool:
    """Whether a stream gets plain text: it is no terminal, or the user has set NO_COLOR or a dumb terminal."""
    return not stream.isatty() or bool(os.environ.get("NO_COLOR")) or os.environ.get("TERM") == "dumb"


def plain_lines(table: ShownGrid) -> list[str]:
    """Title, headings, units and rows of a table, aligned, for files and other programs.

    >>> column = ShownColumn("Span", "ft", "0.00")
    >>> plain_lines(ShownGrid("Trusses", (ShownColumn("Truss", "", ""), column), (("T1", 28.0),)))
    ['Trusses', 'Truss   Span', '          ft', 'T1     28.00']
    """
    units = [[c.unit for c in table.columns]] if any(c.unit for c in table.columns) else []
    rows = [[c.heading for c in table.columns], *units, *texts(table)]
    widths = [max(map(len, column)) for column in zip(*rows, strict=True)]
    lines = [
        GAP.join(
            f"{cell:{'>' if _right(c) else '<'}{w}}" for cell, c, w in zip(row, table.columns, widths, strict=True)
        )
        for row in rows
    ]
    return [*([table.title] if table.title else []), *(line.rstrip() for line in lines)]


def _right(column: ShownColumn) -> bool:
    return column.number_format != ""


def _print_rich(table: ShownGrid) -> None:
    from rich.box import SIMPLE_HEAD
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    made = Table(title=Text(table.title, style="bold") if table.title else None, title_justify="left", box=SIMPLE_HEAD)
    for column in table.columns:
        heading = f"{column.heading}\n{column.unit}" if column.unit else column.heading
        made.add_column(Text(heading), justify="right" if _right(column) else "left", overflow="fold")
    for row in texts(table):
        failed = any(cell.startswith(MET[False]) for cell in row)
        made.add_row(*(Text(cell) for cell in row), style="bold red" if failed else None)
    Console().print(made)
