"""Grids: what workbook, terminal and data frames show, as frozen tables of SI values, and how they are shown."""

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from rooftruss.units import SYSTEMS, Display

if TYPE_CHECKING:
    import pandas as pd

SI_LABELS = {  # units of a frame that asks for "SI"
    "length": "m",
    "size": "m",
    "area": "m2",
    "roof area": "m2",
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
BEYOND = "beyond range"  # shown for a value that is not finite
NOTHING = "-"  # shown where no combination gives an effect


@dataclass(frozen=True, slots=True)
class Measure:
    """A value with its own kind, for a column whose rows differ in unit; a "unit" column beside it names the unit."""

    value: float
    kind: str


Cell = float | int | str | bool | Measure | None


@dataclass(frozen=True, slots=True)
class Column:
    """One column of a grid.

    kind: a key of units.US (an SI value), or "text", "count" (whole number), "combination" (its number from 1, 0 where
    nothing acts), "pitch" (rise over run), "result" (whether the limit is met), "measure" (a Measure), "unit" (a kind
    or a Measure), "own" (a Measure, shown as two columns: value and unit).
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
    """The grid in the units "US", "metric" or "SI".

    >>> grid = Grid("", (Column("Span", "length"), Column("Pitch", "pitch")), ((8.5344, 0.5),))
    >>> shown_grid(grid, "US").rows
    ((28.0, '6/12'),)
    """
    places = [(at, part) for at, column in enumerate(grid.columns) for part in _parts(column)]
    columns = tuple(_column(column, units) for _, column in places)
    turn = [(at, _turned(column.kind, units)) for at, column in places]
    rows = tuple(tuple(f(row[at]) for at, f in turn) for row in grid.rows)
    return ShownGrid(grid.title, columns, rows)


def _parts(column: Column) -> tuple[Column, ...]:
    """The columns that stand for a column."""
    return (Column(column.heading, "measure"), Column("unit", "unit")) if column.kind == "own" else (column,)


def display(kind: str, units: str) -> Display:
    """How one kind of quantity is shown in "US", "metric" or "SI"."""
    if units == "SI":
        return Display(SI_LABELS[kind], 1.0, "General")
    return SYSTEMS[units][kind]


def _column(column: Column, units: str) -> ShownColumn:
    heading, kind = column.heading, column.kind
    if kind in ("text", "result", "unit") or (kind == "pitch" and units == "US"):
        return ShownColumn(heading, "", "")
    if kind in ("count", "combination"):
        return ShownColumn(heading, "", "0")
    if kind == "measure":
        return ShownColumn(heading, "", "General")
    if kind == "pitch":
        return ShownColumn(heading, "deg", "0.0")
    shown = display(kind, units)
    return ShownColumn(heading, "" if shown.label == "-" else shown.label, shown.number_format)


def _turned(kind: str, units: str) -> Callable[[Cell], ShownCell]:
    """What turns the cells of a column of this kind into shown ones."""
    special: dict[str, Callable[[Cell], ShownCell]] = {
        "text": lambda cell: None if cell is None else str(cell),
        "count": lambda cell: cell if isinstance(cell, int) else None,
        "combination": lambda cell: cell if isinstance(cell, int) and cell > 0 else NOTHING if cell == 0 else None,
        "result": lambda cell: MET[cell] if isinstance(cell, bool) else None,
        "pitch": lambda cell: _pitch(cell, units) if isinstance(cell, float) else None,
        "measure": lambda cell: _measure(cell, units) if isinstance(cell, Measure) else None,
        "unit": lambda cell: _unit(cell.kind if isinstance(cell, Measure) else str(cell), units) if cell else None,
    }
    if kind in special:
        return special[kind]
    shown = display(kind, units)
    return lambda cell: _number(cell, shown) if isinstance(cell, int | float) else None


def _number(value: float, shown: Display) -> ShownCell:
    return unsigned_zero(value / shown.size, shown.number_format) if math.isfinite(value) else BEYOND


def _decimals(number_format: str) -> int:
    return len(number_format.partition(".")[2])


def unsigned_zero(value: float, number_format: str) -> float:
    """The value; 0 in the place of a negative one that the format shows as nothing but zeros.

    >>> unsigned_zero(-0.0, "General"), unsigned_zero(-0.004, "0.00"), unsigned_zero(-0.006, "0.00")
    (0.0, 0.0, -0.006)
    """
    fixed = number_format not in ("", "General")
    return 0.0 if value <= 0 and fixed and round(value, _decimals(number_format)) == 0 else value + 0.0


def _pitch(rise_over_run: float, units: str) -> ShownCell:
    return f"{12 * rise_over_run:.4g}/12" if units == "US" else math.degrees(math.atan(rise_over_run))


def _measure(cell: Measure, units: str) -> ShownCell:
    value = _number(cell.value, Display("", display(cell.kind, units).size, "General"))
    return float(f"{value:.4g}") if isinstance(value, int | float) else value


def _unit(kind: str, units: str) -> str | None:
    label = display(kind, units).label
    return None if label == "-" else label


def frame(grid: Grid, units: str = "SI") -> "pd.DataFrame":
    """The grid as a data frame in "SI", "US" or "metric" units, which stand in the column names."""
    import pandas as pd

    shown = shown_grid(grid, units)
    return pd.DataFrame([list(row) for row in shown.rows], columns=[c.label for c in shown.columns])


def formatted(value: ShownCell, number_format: str) -> str:
    """Text of a shown cell under a spreadsheet number format, for the terminal.

    >>> formatted(1234.5, "#,##0.0"), formatted(None, "0"), formatted(0.526, "General"), formatted(510000.0, "")
    ('1,234.5', '', '0.526', '510,000')
    """
    if value is None:
        return ""
    if isinstance(value, str):
        return value
    value = unsigned_zero(value, number_format)
    if number_format in ("", "General"):
        return f"{value:,.0f}" if abs(value) >= 1e5 else f"{value:.5g}"
    return f"{value:{',' if ',' in number_format else ''}.{_decimals(number_format)}f}"


def texts(shown: ShownGrid) -> Iterator[list[str]]:
    """Rows of a shown grid as text."""
    formats = [c.number_format for c in shown.columns]
    for row in shown.rows:
        yield [formatted(cell, f) for cell, f in zip(row, formats, strict=True)]
