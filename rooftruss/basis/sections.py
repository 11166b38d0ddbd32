"""Sawn sections: dressed sizes by the name a yard uses. Every file of tables/sections/ is read."""

from dataclasses import dataclass
from functools import cache
from typing import cast

from rooftruss.basis.tables import data_folder, read_table
from rooftruss.errors import JobError, TableError, nearest


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """One piece of timber, rectangular: breadth across the plane of the truss, depth in it [m]."""

    name: str
    breadth: float
    depth: float
    source: str


def sections(system: str | None = None) -> tuple[Section, ...]:
    """Sections of a `system` of sizes ("US", "metric"), or of all, smallest area first."""
    found = [section for kind, section in _catalogue().values() if system in (None, kind)]
    return tuple(sorted(found, key=lambda s: (s.breadth * s.depth, s.name)))


def find_section(name: str) -> Section:
    """The section called `name`.

    Raises JobError with the nearest known name.

    >>> round(find_section("2x4").depth, 4)
    0.0889
    """
    known = _catalogue()
    if name not in known:
        raise JobError(f"section {name!r} is not in tables/sections; {nearest(name, known)}")
    return known[name][1]


@cache
def _catalogue() -> dict[str, tuple[str, Section]]:
    """Section name -> (system, section). Raises TableError where two files use one name."""
    found: dict[str, tuple[str, Section]] = {}
    for path in sorted((data_folder("tables") / "sections").glob("*.csv")):
        for row in read_table(f"sections/{path.stem}").rows:
            name, breadth, depth = str(row["name"]), cast("float", row["breadth"]), cast("float", row["depth"])
            if name in found:
                raise TableError(f"{path.name}: section {name!r} is already in another row; give it another name")
            if not (0 < breadth < 1 and 0 < depth < 2):
                raise TableError(
                    f"{path.name}: section {name!r} has breadth {breadth} m, depth {depth} m; check its units"
                )
            section = Section(name=name, breadth=breadth, depth=depth, source=str(row["source"]))
            found[name] = (str(row["system"]), section)
    return found
