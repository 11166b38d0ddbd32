"""Reads the files of tables/: text with a header row, a units row and a source on every row.

Tables are found beside this package in a checkout or an editable install, and inside it in a wheel.
"""

import csv
import math
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path

from rooftruss.errors import TableError, nearest
from rooftruss.units import factor

PACKAGE = Path(__file__).resolve().parent.parent
Cell = float | str


def data_folder(name: str) -> Path:
    """Folder `name` ("tables" or "demo_jobs") of this installation.

    Raises TableError when neither place holds it.
    """
    for place in (PACKAGE / name, PACKAGE.parent / name):
        if place.is_dir():
            return place
    raise TableError(f"the folder {name}/ is missing beside {PACKAGE}; install rooftruss again")


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """One file: columns converted to SI by the units row; text columns have the unit "text"."""

    path: Path
    columns: tuple[str, ...]
    units: Mapping[str, str]
    rows: tuple[Mapping[str, Cell], ...]

    def where(self, **cells: Cell) -> Mapping[str, Cell]:
        """The one row whose cells equal those given. Raises TableError when there is none or more than one."""
        found = [row for row in self.rows if all(row[k] == v for k, v in cells.items())]
        if len(found) == 1:
            return found[0]
        asked = ", ".join(f"{k} = {v!r}" for k, v in cells.items())
        raise TableError(f"{self.path.name}: {len(found)} rows with {asked}, one was expected")

    def column(self, name: str) -> list[Cell]:
        """Cells of one column, top to bottom."""
        return [row[name] for row in self.rows]

    def find(self, key: str, value: str) -> Mapping[str, Cell]:
        """Like `where` for a name that a user typed: the error names the nearest known one."""
        known = [str(cell) for cell in self.column(key)]
        if value not in known:
            raise TableError(f"{value!r} is not in {self.path.name}; {nearest(value, known)}")
        return self.where(**{key: value})


@cache
def read_table(name: str) -> Table:
    """Table tables/`name`.csv, for example ``read_table("snow/exposure_asce7-22")``.

    Lines that start with "#" are notes. An empty cell in a column with a unit is NaN (the source has no value there).
    Raises TableError with file and line for anything malformed.
    """
    path = data_folder("tables") / f"{name}.csv"
    if not path.is_file():
        folder = path.parent
        known = sorted(p.stem for p in folder.glob("*.csv")) if folder.is_dir() else []
        raise TableError(f"there is no table {name}.csv; {nearest(path.stem, known)}")
    lines = [
        (n, t) for n, t in enumerate(path.read_text("utf-8").splitlines(), 1) if t.strip() and not t.startswith("#")
    ]
    records = list(csv.reader(text for _, text in lines))
    columns, units = records[0], records[1]
    if len(units) != len(columns) or "source" not in columns:
        raise TableError(f"{path.name}: the first two rows must be column names (with 'source') and their units")
    rows = [_row(path, line, columns, units, cells) for (line, _), cells in zip(lines[2:], records[2:], strict=True)]
    return Table(path=path, columns=tuple(columns), units=dict(zip(columns, units, strict=True)), rows=tuple(rows))


def _row(path: Path, line: int, columns: list[str], units: list[str], cells: list[str]) -> dict[str, Cell]:
    if len(cells) != len(columns):
        raise TableError(f"{path.name} line {line}: {len(cells)} cells, {len(columns)} columns")
    row: dict[str, Cell] = {}
    for column, unit, cell in zip(columns, units, cells, strict=True):
        if unit == "text" or column == "source":
            row[column] = cell.strip()
            continue
        try:
            row[column] = float(cell) * factor(unit) if cell.strip() else math.nan
        except ValueError:
            raise TableError(f"{path.name} line {line}: {column} {cell!r} is not a number") from None
    return row


@cache
def read_settings(name: str) -> Mapping[str, object]:
    """TOML file tables/`name`.toml as a mapping."""
    path = data_folder("tables") / f"{name}.toml"
    try:
        return tomllib.loads(path.read_text("utf-8"))
    except (OSError, tomllib.TOMLDecodeError) as error:
        raise TableError(f"{path.name}: {error}") from None
