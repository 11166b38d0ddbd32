"""Grids: what workbook, terminal and data frames show, as frozen tables of SI values, and how they are shown."""

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from rooftruss.units import SYSTEMS, Display

if TYPE_CHECKING:
    import pandas as pd

SI_LABELS = {  # units of a frame that asks for "SI"
    "length": "m",
    "size": "m",
    "area": "m2",
    "inertia": "m4",
    "section modulus": "m3",
    "force": "N",
    "moment": "N m",
    "line load": "N/m",
    "pressure": "Pa",
    "stress": "Pa",
    "speed": "m/s",
    "volume": "m3",
    "mass": "kg",
    "density": "kg/m3",
    "deflection": "m",
    "angle": "rad",
    "ratio": "-",
    "factor": "-",
}
MET = {True: "met", False: "NOT met"}
NOTHING = "-"  # shown where no combination gives an effect


@dataclass(frozen=True, slots=True)
class Measure:
    """A value with its own kind, for columns whose rows differ in unit."""

    value: float
    kind: str


Cell = float | int | str | bool | Measure | None


@dataclass(frozen=True, slots=True)
class Column:
    """One column of a grid.

    kind: a key of units.US (an SI value), or "text", "count" (whole number), "combination" (its number among all from
    0, -1 where nothing acts), "pitch" (rise over run), "result" (whether the limit is met), "own" (a Measure).
    """

    heading: str
    kind: str = "text"


@dataclass(frozen=True, slots=True)
class Grid:
    """A table of SI values; None is an empty cell."""

    title: str
    columns: tuple[Column, ...]
    rows: tuple[tuple[Cell, ...], ...]


@dataclass(frozen=True, slots=True)
class ShownColumn:
    """One column as shown: its unit ("" for none) and the spreadsheet format of its numbers ("" for text)."""

    heading: str
    unit: str
    number_format: str

    @property
    def label(self) -> str:
        """Heading with its unit, for one line."""
        return f"{self.heading} [{self.unit}]" if self.unit else self.heading


ShownCell = float | int | str | None


@dataclass(frozen=True, slots=True)
class ShownGrid:
    """A grid in one system of units: numbers and words only."""

    title: str
    columns: tuple[ShownColumn, ...]
    rows: tuple[tuple[ShownCell, ...], ...]


def shown_grid(grid: Grid, units: str) -> ShownGrid:
    """The grid in the units "US", "metric" or "SI". An "own" column becomes two: value and unit.

    >>> grid = Grid("", (Column("Span", "length"), Column("Pitch", "pitch")), ((8.5344, 0.5),))
    >>> shown_grid(grid, "US").rows
    ((28.0, '6/12'),)
    """
    pairs = [_column(column, units) for column in grid.columns]
    columns = tuple(c for shown, _ in pairs for c in shown)
    kinds = [kind for _, kind in pairs]
    rows = tuple(
        tuple(x for cell, kind in zip(row, kinds, strict=True) for x in _cells(cell, kind, units)) for row in grid.rows
    )
    return ShownGrid(grid.title, columns, rows)


def display(kind: str, units: str) -> Display:
    """How one kind of quantity is shown in "US", "metric" or "SI"."""
    if units == "SI":
        return Display(SI_LABELS[kind], 1.0, "General")
    return SYSTEMS[units][kind]


def _column(column: Column, units: str) -> tuple[tuple[ShownColumn, ...], Display | str]:
    """The shown columns of a column, and what turns its cells into shown ones."""
    heading, kind = column.heading, column.kind
    if kind == "own":
        return (ShownColumn(heading, "", "General"), ShownColumn("Unit", "", "")), kind
    if kind in ("text", "result"):
        return (ShownColumn(heading, "", ""),), kind
    if kind in ("count", "combination"):
        return (ShownColumn(heading, "", "0"),), kind
    if kind == "pitch":
        return ((ShownColumn(heading, "", "") if units == "US" else ShownColumn(heading, "deg", "0.0")),), kind
    shown = display(kind, units)
    return (ShownColumn(heading, "" if shown.label == "-" else shown.label, shown.number_format),), shown


def _cells(cell: Cell, kind: Display | str, units: str) -> tuple[ShownCell, ...]:
    if isinstance(kind, Display):
        return (_number(cell, kind.size),)
    if kind == "own":
        return _own(cell, units)
    if cell is None:
        return (None,)
    if kind == "result":
        return (cell if isinstance(cell, str) else MET[bool(cell)],)
    if kind == "combination" and isinstance(cell, int):
        return (cell + 1 if cell >= 0 else NOTHING,)
    if kind == "pitch" and isinstance(cell, float):
        return (f"{12 * cell:.4g}/12" if units == "US" else math.degrees(math.atan(cell)),)
    return (cell if isinstance(cell, int | float) else str(cell),)


def _number(cell: Cell, size: float) -> ShownCell:
    if isinstance(cell, int | float):
        return cell / size if math.isfinite(cell) else "beyond range"
    return None if cell is None else str(cell)


def _own(cell: Cell, units: str) -> tuple[ShownCell, ShownCell]:
    if not isinstance(cell, Measure):
        return (None if cell is None else str(cell), None)
    shown = display(cell.kind, units)
    value = _number(cell.value, shown.size)
    return (float(f"{value:.5g}") if isinstance(value, int | float) else value, None if shown.label == "-" else shown.label)


def frame(grid: Grid, units: str = "SI") -> "pd.DataFrame":
    """The grid as a data frame in "SI", "US" or "metric" units, which stand in the column names."""
    import pandas as pd

    shown = shown_grid(grid, units)
    return pd.DataFrame([list(row) for row in shown.rows], columns=[c.label for c in shown.columns])


def formatted(value: ShownCell, number_format: str) -> str:
    """Text of a shown cell under a spreadsheet number format, for the terminal.

    >>> formatted(1234.5, "#,##0.0"), formatted(None, "0"), formatted(0.526, "General")
    ('1,234.5', '', '0.526')
    """
    if value is None:
        return ""
    if isinstance(value, str):
        return value
    if number_format in ("", "General"):
        return f"{value:.5g}"
    decimals = len(number_format.partition(".")[2])
    return f"{value:{',' if ',' in number_format else ''}.{decimals}f}"


def texts(shown: ShownGrid) -> Iterator[list[str]]:
    """Rows of a shown grid as text."""
    formats = [c.number_format for c in shown.columns]
    for row in shown.rows:
        yield [formatted(cell, f) for cell, f in zip(row, formats, strict=True)]
