"""Reads the lists of tables inside a job: point loads, cases, joints, members and bearings, grades."""

from collections.abc import Iterator, Mapping
from typing import Any

from rooftruss.basis.grades import Grade, grades, user_grade
from rooftruss.basis.job import CaseLoad, CustomSpec, OwnCase, PointLoad
from rooftruss.basis.jobkeys import Form, Keys
from rooftruss.basis.schemes import Scheme
from rooftruss.basis.tablereader import Given, TableReader
from rooftruss.basis.written import told
from rooftruss.errors import JobError, nearest

MOST_ROWS = 300
CUSTOM = ("node", "member", "support")  # keys of [[truss]] that hold the rows of a custom truss
DEAD_PATTERNS = ("most", "least", "both")
Values = dict[str, Any]


def read_rows(reader: TableReader, keys: Keys, given: Given, name: str, heading: str) -> Iterator[tuple[str, Values]]:
    """(place, values) of each right row of a list of tables; mistakes have been noted.

    heading says how the list is written: "[[loads.point]], in two brackets, over each load".
    """
    head = f"{given.place} {name}".strip()
    if not isinstance(given.value, list | tuple):
        reader.problem(head, f"is not a list of tables; write {heading}")
        return
    if len(given.value) > MOST_ROWS:
        reader.problem(head, f"has {len(given.value)} rows; at most {MOST_ROWS} fit")
        return
    for number, item in enumerate(given.value, 1):
        place = f"{head} {number}"
        before = reader.mistakes
        values = reader.read(keys, reader.table(item, place), place)
        if reader.mistakes == before:
            yield place, values


def read_points(reader: TableReader, form: Form, given: Given) -> tuple[PointLoad, ...]:
    """Rows of [[loads.point]]."""
    heading = "[[loads.point]], in two brackets, over each load"
    rows = read_rows(reader, form["point"], given, "point", heading)
    return tuple(PointLoad(**{**values, "note": values["note"] or ""}) for _, values in rows)


def read_cases(reader: TableReader, form: Form, given: Given, scheme: Scheme) -> tuple[OwnCase, ...]:
    """Rows of [[loads.case]] with the lists of loads and points that each holds."""
    head = f"{given.place} case"
    if not isinstance(given.value, list | tuple):
        reader.problem(head, "is not a list of tables; write [[loads.case]], in two brackets, over each case")
        return ()
    found: dict[str, OwnCase] = {}
    for number, item in enumerate(given.value[:MOST_ROWS], 1):
        place = f"{head} {number}"
        case = _case(reader, form, reader.table(item, place), place, scheme)
        if case is not None and found.setdefault(case.name.casefold(), case) is not case:
            reader.problem(f"{place} name", f"{told(case.name)} is taken; write another")
    return tuple(found.values())


def _case(reader: TableReader, form: Form, given: dict[str, Given], place: str, scheme: Scheme) -> OwnCase | None:
    before = reader.mistakes
    lists = {name: given.pop(name) for name in ("loads", "points") if name in given}
    values = reader.read(form["case"], given, place)
    if reader.mistakes > before:
        return None
    with reader.at(f"{place} pattern"):
        pattern = _pattern(values, scheme)
    rows = {
        name: list(read_rows(reader, form[keys], Given(place, lists[name].value), name, f"{name} = [{{ ... }}, ...]"))
        for name, keys in (("loads", "case_load"), ("points", "case_point"))
        if name in lists
    }
    loads = [_case_load(reader, row, where) for where, row in rows.get("loads", [])]
    points = [PointLoad(action=values["action"], note="", **row) for _, row in rows.get("points", [])]
    if reader.mistakes > before:
        return None
    if not loads and not points:
        reader.problem(place, "holds no load; give it loads = [...] or points = [...]")
        return None
    return OwnCase(
        name=values["name"], action=values["action"], pattern=pattern, loads=tuple(loads), points=tuple(points)
    )


def _pattern(values: Values, scheme: Scheme) -> str:
    """Pattern of a case as the combinations know it; dead load acts in every one of them, most of it where it adds."""
    action, given = values["action"], values["pattern"]
    if action == "D":
        known: tuple[str, ...] = DEAD_PATTERNS
    else:
        listed = (*scheme.companion_patterns, *scheme.alone_patterns)
        known = tuple(dict.fromkeys(p for name, patterns in listed if name == action for p in patterns))
        if values["joins"] and given:
            raise JobError("a case that joins every other case of its action has no pattern; leave one of the two out")
    if given and given not in known:
        hint = nearest(given, known) if known else f"the scheme {scheme.name} has none for {action}; leave it out"
        raise JobError(f"{told(given)} is not a pattern here; {hint}")
    if action == "D":
        return given or "most"
    return "with" if values["joins"] else given or ""


def _case_load(reader: TableReader, row: Values, place: str) -> CaseLoad:
    members, surface = row["members"] or (), row["surface"] or ""
    if bool(members) == bool(surface):
        reader.problem(place, "give either members or a surface" + (", not both" if members else ""))
    if (row["pressure"] is None) == (row["line"] is None):
        reader.problem(place, "give either a pressure or a line load" + (", not both" if row["line"] else ""))
    if row["from"] is not None and row["to"] is not None and row["from"] >= row["to"]:
        reader.problem(place, "from must be left of to")
    return CaseLoad(
        members=members,
        surface=surface,
        kind=row["kind"],
        pressure=row["pressure"],
        line=row["line"],
        x_from=row["from"],
        x_to=row["to"],
    )


def read_custom(reader: TableReader, form: Form, given: Mapping[str, Given], place: str) -> CustomSpec | None:
    """Joints, members and bearings of a truss of shape "custom"; None after a mistake."""
    before = reader.mistakes
    rows: dict[str, list[Values]] = {}
    for name in CUSTOM:
        heading = f"[[truss.{name}]], in two brackets, over each one"
        if name not in given:
            reader.problem(f"{place} {name}", f"there is none; a custom truss is given by rows of {heading}")
            continue
        rows[name] = [values for _, values in read_rows(reader, form[name], given[name], name, heading)]
    if reader.mistakes > before:
        return None
    if any(row["pinned"] is None for row in rows["member"]):
        reader.assume(
            f"{place} member", "of members whose pinned ends are not given, webs are pinned at both and chords at none"
        )
    return CustomSpec(
        nodes=tuple((row["name"], row["x"], row["y"]) for row in rows["node"]),
        members=tuple(_member(row) for row in rows["member"]),
        supports=tuple((row["node"], row["horizontal"], row["vertical"], row["bearing"]) for row in rows["support"]),
    )


def _member(row: Values) -> tuple[str | None, str, str, str, str, bool, bool]:
    role = row["role"]
    group = row["group"] or ("top chord" if role == "tail" else role)
    pinned = row["pinned"]
    if pinned is None:
        pinned = ("start", "end") if role == "web" else ()
    return row["name"], role, row["start"], row["end"], group, "start" in pinned, "end" in pinned


def read_grades(reader: TableReader, form: Form, given: object, family: str) -> dict[str, Grade]:
    """Grades of the job's own by name; [[grade]] holds a row for each."""
    if given is None:
        return {}
    found: dict[str, Grade] = {}
    known = {grade.name.casefold() for grade in grades()}
    rows = read_rows(reader, form["grade"], Given("", given), "[[grade]]", "[[grade]], in two brackets, over each one")
    for place, values in rows:
        if values["name"].casefold() in {*known, *map(str.casefold, found)}:
            reader.problem(f"{place} name", f"{told(values['name'])} is the name of another grade; write another")
            continue
        with reader.at(place):
            grade = user_grade({"family": family, **{k: v for k, v in values.items() if v is not None}})
            found[grade.name] = grade
    return found
