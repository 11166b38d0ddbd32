"""Grades of timber: reference design values by the name on the grade stamp. Every file of tables/grades/ is read.

A file of grades has the columns name, family, species, then the reference values of that family. Rows with the
same name are one grade whose values go by size: breadth_up_to and depth_up_to say how far each row reaches.
"""

import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import cache

from rooftruss.basis.sections import Section
from rooftruss.basis.tables import Cell, data_folder, read_table
from rooftruss.errors import JobError, OutOfScopeError, nearest

# A dressed size in whole millimetres (38 x 89) is the same size as in inches (1.5 x 3.5).
SAME_SIZE = 0.5e-3


@dataclass(frozen=True, slots=True, kw_only=True)
class Grade:
    """One grade: its rows hold reference values [Pa, kg/m3, -] under the letters of the `family` of standards."""

    name: str
    family: str  # "NDS", "EN": the timber standards that can use it
    species: str
    table: str  # file of tables/grades, or "job file"
    rows: tuple[Mapping[str, Cell], ...]  # narrowest size first

    @property
    def values(self) -> Mapping[str, Cell]:
        """Reference values of the smallest size."""
        return self.rows[0]

    def values_for(self, section: Section) -> Mapping[str, Cell]:
        """Reference values in the size of `section`. Raises OutOfScopeError for a size the grade is not made in."""
        for row in self.rows:
            if reaches(row, "breadth_up_to", section.breadth) and reaches(row, "depth_up_to", section.depth):
                return row
        raise OutOfScopeError(
            f"grade {self.name!r} is not made as large as {section.name}; its values end at "
            f"{_size(self.rows[-1])} ({self.rows[-1]['source']}). Choose another grade or size"
        )


def reaches(row: Mapping[str, Cell], column: str, size: float) -> bool:
    """Whether a row that goes up to a size [m] (no number: any size) covers `size`."""
    limit = row.get(column, math.nan)
    return isinstance(limit, str) or math.isnan(limit) or size <= limit + SAME_SIZE


def grades(family: str | None = None) -> tuple[Grade, ...]:
    """Grades of one family ("NDS", "EN"), or all, in the order of the tables."""
    return tuple(grade for grade in _catalogue().values() if family in (None, grade.family))


def find_grade(name: str) -> Grade:
    """The grade called `name`.

    Raises JobError with the nearest known name.

    >>> find_grade("SPF No.1/No.2").species
    'Spruce-Pine-Fir'
    """
    known = _catalogue()
    if name not in known:
        hint = _nearest_grade(name, known)
        hint = hint if hint.startswith("did you mean") else "`rooftruss grades` lists the known ones"
        raise JobError(f"grade {name!r} is not in tables/grades; {hint}")
    return known[name]


def _nearest_grade(name: str, known: Iterable[str]) -> str:
    """Nearest grade: one that holds every word of `name`, else one of its species, else any."""
    words = name.lower().replace("#", "no.").split()
    species = [k for k in known if words and k.lower().split()[0] == words[0]]
    for alike in ([k for k in species if all(word in k.lower() for word in words[1:])], species):
        if alike:
            return nearest(alike[0] if len(alike) == 1 else name, alike)
    return nearest(name, known)


def user_grade(values: Mapping[str, object]) -> Grade:
    """A grade from the job itself, such as a structural composite: SI numbers under the letters of its family.

    Text keys: name, family; product where the family asks for it (NDS: "structural composite", "sawn visual" ...);
    optional species and size_class (without it no size factor applies). Every other key is a positive number.
    Raises JobError naming the key that is missing or wrong.

    >>> user_grade({"name": "LVL", "family": "NDS", "Fb": 17.9e6}).values["Fb"]
    17900000.0
    """
    row: dict[str, Cell] = {"size_class": "none", "source": "job file"}
    for key, value in values.items():
        if key in ("name", "family", "species", "product", "size_class", "source"):
            row[key] = str(value)
        elif isinstance(value, bool) or not isinstance(value, int | float) or not 0 < value < math.inf:
            raise JobError(f"grade {values.get('name', '?')!r} {key}: {value!r} must be a number above zero")
        else:
            row[key] = float(value)
    for key in ("name", "family"):
        if not row.get(key):
            raise JobError(f"a grade of the job file lacks the key {key!r}")
    name, family, species = str(row["name"]), str(row["family"]), str(row.get("species", "as given"))
    mean, least = row.get("E"), row.get("Emin")
    if isinstance(mean, float) and isinstance(least, float) and least > mean:
        raise JobError(f"grade {name!r} Emin: is more than E; Emin is the lower value, for stability")
    return Grade(name=name, family=family, species=species, table="job file", rows=(row,))


@cache
def _catalogue() -> dict[str, Grade]:
    found: dict[str, Grade] = {}
    for path in sorted((data_folder("tables") / "grades").glob("*.csv")):
        for row in read_table(f"grades/{path.stem}").rows:
            name, family, species = str(row["name"]), str(row["family"]), str(row["species"])
            rows = (*found[name].rows, row) if name in found else (row,)
            found[name] = Grade(name=name, family=family, species=species, table=path.stem, rows=rows)
    return found


def _size(row: Mapping[str, Cell]) -> str:
    ends = [(word, row.get(f"{word}_up_to", math.nan)) for word in ("breadth", "depth")]
    return " and ".join(f"{end * 1e3:.0f} mm {word}" for word, end in ends if isinstance(end, float) and end == end)
