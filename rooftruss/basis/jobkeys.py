"""The keys of a job file, read from tables/jobform: what each may hold, its default and the words printed for it.

A further load or timber standard adds one file there; nothing here asks which standard is in force.
"""

import json
import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from functools import cache, partial
from typing import Any, cast

from rooftruss.basis import grades, sections
from rooftruss.basis.kinds import (
    RESISTANCE,
    SI_UNIT,
    Choice,
    Kind,
    Names,
    Number,
    Pitch,
    Quantity,
    RestraintKind,
    Text,
    Words,
)
from rooftruss.basis.tables import data_folder, read_settings
from rooftruss.errors import JobError, TableError, nearest

FOLDER = "jobform"
Entry = Mapping[str, Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class Key:
    """One key of one table of the job file."""

    name: str
    kind: Kind
    help: str
    default: Mapping[str, object] | None = None  # as written, by system of units; None: see the next two
    same_as: str = ""  # key of the same table whose value stands for this one
    optional: bool = False  # may be left out, and then is None ("" for text)
    assumption: str = ""  # sentence printed when the default is used
    source: str = ""
    only: tuple[str, ...] = ()  # standards that know the key; () is all that the file serves
    needed_with: Mapping[str, str] | None = None  # counts only where another key holds this word
    needed_without: str = ""  # key in whose place this one may stand: one of the two is required
    idle_without: str = ""  # key that makes this one unnecessary when it is zero
    absent: str = ""  # sentence printed when an optional key is left out, where the next two say so
    absent_with: Mapping[str, str] | None = None  # only where another key holds this word
    absent_under: tuple[str, ...] = ()  # only under these standards; () is all that the file serves


Keys = Mapping[str, Key]
Form = Mapping[str, Keys]


@cache
def common_form() -> Form:
    """Keys that every standard shares, by table of the job file; form.toml lists them."""
    return _form("form")


@cache
def form_for(load_standard: str, timber_standard: str) -> Form:
    """All keys of a job under these standards: those of `common_form`, and what each standard adds to its tables.

    Raises TableError for a standard that no file of tables/jobform serves.
    """
    merged = {table: dict(keys) for table, keys in common_form().items()}
    for family, name in (("load", load_standard), ("timber", timber_standard)):
        for table, keys in _form(_file_serving(family, name)).items():
            merged.setdefault(table, {}).update(keys)
    return merged


@cache
def grade_family(timber_standard: str) -> str:
    """Family of grades ("NDS", "EN") that a timber standard uses. Raises TableError like `form_for`."""
    about = cast(Entry, read_settings(f"{FOLDER}/{_file_serving('timber', timber_standard)}")["about"])
    return str(about["family"])


def with_grades(form: Form, own: Mapping[str, grades.Grade]) -> Form:
    """The form of a job that has grades of its own: its lists of grades know them beside those of tables/grades."""

    def widened(key: Key) -> Key:
        kind = cast(Names, key.kind)
        return replace(key, kind=replace(kind, known=partial(_own_or, own, kind.known)))

    groups = {table: {**form[table], "grades": widened(form[table]["grades"])} for table in ("chord", "web")}
    return {**form, **groups}


def _own_or(own: Mapping[str, grades.Grade], other: Callable[[str], object], name: str) -> object:
    hint = nearest(name, own) if own else ""
    if name not in own and hint.startswith("did you mean"):
        raise JobError(f"grade {name!r} is not in tables/grades nor among the [[grade]] of the job; {hint}")
    return own[name] if name in own else other(name)


def _file_serving(family: str, standard: str) -> str:
    """Name of the file of a family ("load" or "timber") whose keys belong to a standard such as "NDS 2018 ASD"."""
    names = sorted(path.stem for path in (data_folder("tables") / FOLDER).glob(f"{family}_*.toml"))
    served: list[str] = []
    for name in names:
        about = cast(Entry, read_settings(f"{FOLDER}/{name}")["about"])
        served += about["serves"]
        if any(re.match(rf"{re.escape(known)}(?!\w)", standard) for known in about["serves"]):
            return name
    raise TableError(f"no job keys for the {family} standard {standard!r}; tables/{FOLDER} serves {', '.join(served)}")


def _form(file: str) -> dict[str, dict[str, Key]]:
    tables = cast(Mapping[str, Mapping[str, Entry]], read_settings(f"{FOLDER}/{file}"))
    return {
        table: {name: _key(f"{file}.toml [{table}.{name}]", name, entry) for name, entry in keys.items()}
        for table, keys in tables.items()
        if table != "about"
    }


def _key(place: str, name: str, entry: Entry) -> Key:
    rest = dict(entry)
    try:
        kind = _KINDS[rest.pop("kind")](rest)
        default = {"US": rest.pop("default")} if "default" in rest else None
        if default is not None:
            default["metric"] = rest.pop("metric_default", default["US"])
        only, under = (tuple(rest.pop(field, ())) for field in ("only", "absent_under"))
        return Key(name=name, kind=kind, default=default, only=only, absent_under=under, **rest)
    except (KeyError, TypeError) as error:
        raise TableError(f"{place}: {error}") from None


def _take(entry: dict[str, Any], *names: str) -> dict[str, Any]:
    """Remove those of `names` that the entry holds; lists become tuples."""
    found = {name: entry.pop(name) for name in names if name in entry}
    return {name: tuple(value) if isinstance(value, list) else value for name, value in found.items()}


def _quantity(shows: str, unit: str) -> Callable[[dict[str, Any]], Kind]:
    return lambda entry: Quantity(shows=shows, unit=unit, **_take(entry, "limits"))


def _names(entry: dict[str, Any]) -> Names:
    catalogue = entry.pop("catalogue")
    if catalogue == "members":  # of a truss; which ones there are is known only when it is made
        return Names(known=str, **_take(entry, "example"))
    if catalogue == "sections":
        metric = json.dumps([section.name for section in sections.sections("metric")[:2]])
        return Names(known=sections.find_section, metric_example=metric, **_take(entry, "example"))
    family, _, _ = catalogue.rpartition(" grades")
    return Names(known=partial(_grade_of, family), **_take(entry, "example"))


def _grade_of(family: str, name: str) -> grades.Grade:
    """Grade of a family of standards. Raises JobError for a grade of another one."""
    grade = grades.find_grade(name)
    if grade.family != family:
        raise JobError(f"{name!r} is a grade to {grade.family}; the scheme of this job checks timber to {family}")
    return grade


_KINDS: dict[str, Callable[[dict[str, Any]], Kind]] = {
    "text": lambda entry: Text(**_take(entry, "longest", "may_be_empty", "pattern", "rule")),
    "choice": lambda entry: Choice(**_take(entry, "choices")),
    "flag": lambda entry: Choice(choices=(True, False)),
    "words": lambda entry: Words(**_take(entry, "choices")),
    "number": lambda entry: Number(**_take(entry, "limits")),
    "whole": lambda entry: Number(whole=True, **_take(entry, "limits")),
    "pitch": lambda entry: Pitch(**_take(entry, "limits")),
    "restraint": lambda entry: RestraintKind(**_take(entry, "words", "limits")),
    "names": _names,
    "thermal resistance": _quantity("", RESISTANCE),
    **{shows: _quantity(shows, unit) for shows, unit in SI_UNIT.items()},
}
