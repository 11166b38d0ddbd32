"""The terminal: grids as tables on stdout; cautions and progress on stderr. Plain text when nobody looks at it."""

import os
import sys
from collections.abc import Collection, Sequence
from itertools import takewhile
from shutil import get_terminal_size
from textwrap import fill
from typing import Literal, TextIO

from rooftruss.basis.job import Job
from rooftruss.design.compare import Alternative
from rooftruss.design.design import Design
from rooftruss.design.idle import idle_members
from rooftruss.output.cautions import TERMINAL_CAUTIONS
from rooftruss.output.job_grids import comparison_grid, comparison_notes, quote_grid
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
TIED = ("Comb.", "unit", "Unit")  # headings of columns that belong to the one before them
BESIDE = 3  # characters between two columns of a table in colour
SHORT_TEXT, LONGEST_WORD = 12, 40  # characters of a text that stays on one line, and of a word that may be broken


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
    _, _, loads = design.combination(int(found.combination[k])).removeprefix("deflection, ").partition(": ")
    return f"deflection nearest its limit: {amount} of {limit} at {found.places[k].name}, {found.about(k)}: {loads}"


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
    """Shapes for one roof side by side, and below them why one is not possible or does not meet a check."""
    print_grid(comparison_grid(rows), job.units)
    for note in comparison_notes(rows):
        print_text(note, indent=4)


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


def print_text(text: str, indent: int = 0) -> None:
    """A sentence on stdout, wrapped at the width of a terminal; later lines begin `indent` characters further in."""
    plain = wants_plain(sys.stdout)
    print(text if plain else fill(text, get_terminal_size().columns, subsequent_indent=indent * " "))


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
    """A table in colour; one too wide for the terminal is cut into several, so that no number or word is broken."""
    from rich.box import SIMPLE_HEAD
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    console, rows = Console(), list(texts(table))
    failed = [any(cell.startswith(MET[False]) for cell in row) for row in rows]
    sizes = [_widths(column, [row[k] for row in rows]) for k, column in enumerate(table.columns)]
    tied = {k for k, column in enumerate(table.columns) if column.heading in TIED}
    parts = cut([least for least, _ in sizes], console.width, tied, _leading(rows))
    for number, part in enumerate(parts):
        title = table.title if number == 0 else ""
        made = Table(title=Text(title, style="bold") if title else None, title_justify="left", box=SIMPLE_HEAD)
        for k, width in zip(part, fitted([sizes[k] for k in part], console.width), strict=True):
            column = table.columns[k]
            heading = f"{column.heading}\n{column.unit}" if column.unit else column.heading
            side: Literal["left", "right"] = "right" if _right(column) else "left"
            made.add_column(Text(heading), justify=side, overflow="fold", width=width)
        for row, fails in zip(rows, failed, strict=True):
            made.add_row(*(Text(row[k]) for k in part), style="bold red" if fails else None)
        console.print(made)


def _leading(rows: Sequence[Sequence[str]]) -> int:
    """Number of columns that tell the rows apart, three at most; 1 where they do not."""
    return next((n for n in (1, 2, 3) if len({tuple(row[:n]) for row in rows}) == len(rows)), 1)


def _widths(column: ShownColumn, cells: Sequence[str]) -> tuple[int, int]:
    """(least, full) width of a column; at the least numbers are whole, short texts on one line, words not broken."""
    words = [word for text in (column.heading, *cells) for word in text.split()]
    whole = [text for text in cells if _right(column) or len(text) <= SHORT_TEXT]
    full = max(len(text) for text in (column.heading, column.unit, *cells))
    return min(max(map(len, [column.unit, *words, *whole])), LONGEST_WORD), full


def cut(widths: Sequence[int], room: int, tied: Collection[int] = (), lead: int = 1) -> list[list[int]]:
    """Numbers of the columns of each table that a wide one is cut into, of like width.

    The first `lead` columns are in all of them; a column of `tied` stays with the one before it.

    >>> cut([5, 20, 20, 20], 80), cut([5, 20, 20, 20, 20], 80), cut([5, 20], 10)
    ([[0, 1, 2, 3]], [[0, 1, 2], [0, 3, 4]], [[0, 1]])
    >>> cut([5, 20, 20, 20], 60, tied={2})
    [[0, 1, 2], [0, 3]]
    """
    blocks: list[list[int]] = []
    for k in range(lead, len(widths)):
        if k in tied and blocks:
            blocks[-1].append(k)
        else:
            blocks.append([k])
    found = _packed(widths, room, blocks, lead)
    narrower = (_packed(widths, less, blocks, lead) for less in range(room - 1, 0, -1) if len(found) > 1)
    return list(takewhile(lambda parts: len(parts) == len(found), (found, *narrower)))[-1]


def _packed(widths: Sequence[int], room: int, blocks: Sequence[Sequence[int]], lead: int) -> list[list[int]]:
    first = list(range(lead))
    parts = [first]
    for block in blocks:
        used = sum(widths[k] + BESIDE for k in (*parts[-1], *block))
        if used >= room and len(parts[-1]) > lead:
            parts.append(first)
        parts[-1] = [*parts[-1], *block]
    return parts


def fitted(sizes: Sequence[tuple[int, int]], room: int) -> list[int]:
    """Widths of columns of these (least, full) widths: full where there is room, those that lack little first.

    >>> fitted([(5, 5), (8, 10), (8, 60)], 50)
    [5, 10, 25]
    """
    widths = [least for least, _ in sizes]
    spare = max(room - 1 - sum(widths) - BESIDE * len(widths), 0)
    lacking = sorted(range(len(sizes)), key=lambda k: sizes[k][1] - sizes[k][0])
    for count, k in zip(range(len(sizes), 0, -1), lacking, strict=True):
        more = min(max(sizes[k][1] - widths[k], 0), spare // count)
        widths[k] += more
        spare -= more
    return widths
