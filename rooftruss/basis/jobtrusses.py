"""Reads the [[truss]] tables of a job with the keys of [loads] and [timber] that each overrides."""

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from rooftruss.basis.grades import Grade
from rooftruss.basis.job import GroupTimber, LoadSpec, TimberSpec, TrussSpec
from rooftruss.basis.jobattic import ATTIC, attic_options, check_attic
from rooftruss.basis.jobkeys import Form, Key, Keys
from rooftruss.basis.jobrows import CUSTOM, read_cases, read_custom, read_points
from rooftruss.basis.kinds import Choice
from rooftruss.basis.schemes import Scheme
from rooftruss.basis.tablereader import Entries, Given, TableReader, entries
from rooftruss.basis.written import told

MOST_TRUSSES = 500
CUSTOM_SHAPE = "custom"
OF_THE_CATALOGUE = ("heel_height", "panels", "bottom_pitch")  # keys of [[truss]] that shape one of the catalogue
GROUPS = {"top_chord": "chord", "bottom_chord": "chord", "web": "web"}  # key of [timber] -> table of the form
_ANY = Key(name="", kind=Choice(choices=()), help="")  # stands for a key whose value is read elsewhere


@dataclass(frozen=True, slots=True)
class TrussReader:
    """Reads each [[truss]] with the keys of [loads] and [timber] that it overrides."""

    reader: TableReader
    form: Form
    loads: Entries  # as given in [loads]
    timber: Entries
    scheme: Scheme
    options: Mapping[str, object]  # of the scheme, in force for the job
    chosen: Collection[str]  # those of them that [standard] gives
    grades: tuple[Grade, ...]  # of the job's own

    def trusses(self, given: object) -> tuple[TrussSpec, ...]:
        """All trusses, or those that are right; mistakes have been noted."""
        self._check_common()
        if given is None or given == []:
            self.reader.problem("[[truss]]", "there is none; add one, with its mark, shape, span, pitch and spacing")
            return ()
        if not isinstance(given, list | tuple) or not all(isinstance(t, Mapping) for t in given):
            self.reader.problem("[[truss]]", "is not a list of tables; write [[truss]], in two brackets, over each one")
            return ()
        if len(given) > MOST_TRUSSES:
            self.reader.problem("[[truss]]", f"there are {len(given)}; a job has at most {MOST_TRUSSES}")
            return ()
        self._refuse_twins(given)
        read = [self._truss(table, _place(table, number)) for number, table in enumerate(given, 1)]
        return tuple(truss for truss in read if truss is not None)

    def _check_common(self) -> None:
        """Read what [loads] and [timber] give, so that a value every truss overrides is checked too."""
        self.reader.refuse_unknown(self._load_keys(), self.loads)
        self.reader.refuse_unknown(self._timber_keys(), self.timber)
        for keys, given in ((self.form["loads"], self.loads), (self.form["timber"], self.timber)):
            for name, value in given.items():
                if name in keys:
                    self.reader.value(keys[name], value)

    def _load_keys(self) -> Keys:
        return {**self.form["loads"], "point": _ANY, "case": _ANY}

    def _timber_keys(self) -> Keys:
        return {**self.form["timber"], **dict.fromkeys(GROUPS, _ANY)}

    def _refuse_twins(self, given: Sequence[Mapping[str, object]]) -> None:
        seen: dict[str, int] = {}
        for number, table in enumerate(given, 1):
            mark = table.get("mark")
            first = seen.setdefault(mark.strip().casefold(), number) if isinstance(mark, str) else number
            if first != number:
                self.reader.problem(f"{_place(table, number)} mark", f"truss {first} has it already; write another")

    def _truss(self, table: Mapping[str, object], place: str) -> TrussSpec | None:
        before = self.reader.mistakes
        given = entries(table, place)
        lists = dict.fromkeys(CUSTOM, _ANY)
        own, loads, timber, rows = (
            {name: g for name, g in given.items() if name in keys}
            for keys in (self.form["truss"], self._load_keys(), self._timber_keys(), lists)
        )
        self.reader.refuse_unknown({**self.form["truss"], **self._load_keys(), **self._timber_keys(), **lists}, given)
        values = self.reader.read(self.form["truss"], own, place)
        load_values = self._loads({**self.loads, **loads}, place)
        timber_values = self._timber(timber)
        custom = self._custom(values, rows, place)
        if self.reader.mistakes > before:
            return None
        truss = TrussSpec(**values, loads=load_values, timber=timber_values, custom=custom, units=self.reader.system)
        _check_geometry(self.reader, truss, place)
        return truss

    def _custom(self, values: Mapping[str, Any], rows: Entries, place: str) -> Any:
        """CustomSpec of a truss of that shape, else None; its rows and the keys of the catalogue exclude each other."""
        if values["shape"] != CUSTOM_SHAPE:
            for name, given in rows.items():
                self.reader.problem(f"{given.place} {name}", f"belongs to a truss with shape = {CUSTOM_SHAPE!r}")
            return None
        for name in OF_THE_CATALOGUE:
            if values[name] is not None:
                self.reader.problem(f"{place} {name}", "is fixed by the joints of a custom truss; leave it out")
        return read_custom(self.reader, self.form, rows, place)

    def _loads(self, given: Entries, place: str) -> Any:
        """LoadSpec, or None after a mistake."""
        before = self.reader.mistakes
        known = {name: g for name, g in given.items() if name in self.form["loads"]}
        values = self.reader.read(self.form["loads"], known, "[loads]")
        points = read_points(self.reader, self.form, given["point"]) if "point" in given else ()
        cases = read_cases(self.reader, self.form, given["case"], self.scheme) if "case" in given else ()
        if self.reader.mistakes > before:
            return None
        check_attic(self.reader, values, place)
        values |= {"attic": values.get(ATTIC) or "", "attic_storage_live": values.get("attic_storage_live") or 0.0}
        options = attic_options(self.reader, values[ATTIC], self.scheme, self.options, self.chosen, place)
        return LoadSpec(**values, points=points, cases=cases, scheme_options=options)

    def _timber(self, override: Entries) -> Any:
        """TimberSpec, or None after a mistake."""
        before = self.reader.mistakes
        plain = {name: g for name, g in {**self.timber, **override}.items() if name in self.form["timber"]}
        values = self.reader.read(self.form["timber"], plain, "[timber]")
        groups = {name.replace("_", " "): self._group(name, override.get(name)) for name in GROUPS}
        if self.reader.mistakes > before:
            return None
        stock = values.pop("longest_stock")
        return TimberSpec(groups=groups, longest_stock=stock, options=values, own_grades=self.grades)

    def _group(self, name: str, override: Given | None) -> Any:
        """GroupTimber of "top_chord" and so on, or None after a mistake; an override changes single keys of it."""
        before = self.reader.mistakes
        keys = self.form[GROUPS[name]]
        given: dict[str, Given] = {}
        for part in (self.timber.get(name), override):
            if part is not None and isinstance(part.value, Mapping):
                given |= entries(part.value, part.place)
            elif part is not None:
                example = f"{name} = {{ grades = [...], sizes = [...], restraint = ... }}"
                self.reader.problem(f"{part.place} {name}", f"{told(part.value)} is not a table; write {example}")
        if not given and self.reader.mistakes == before:
            self.reader.problem(f"[timber] {name}", "is missing; write its grades, sizes and restraint")
        if not given:
            return None
        values = self.reader.read(keys, given, "[timber]", f"{name}.")
        return GroupTimber(**values) if self.reader.mistakes == before else None


def _place(table: Mapping[str, object], number: int) -> str:
    mark = table.get("mark")
    named = isinstance(mark, str) and mark.strip().isprintable() and 0 < len(mark.strip()) <= 20
    return f"[[truss]] {str(mark).strip() if named else f'number {number}'}"


def _check_geometry(reader: TableReader, truss: TrussSpec, place: str) -> None:
    """Note what is plausible by itself but not together."""
    if truss.bearing >= truss.span / 4:
        reader.problem(f"{place} bearing", "must be shorter than a quarter of the span")
    if truss.overhang >= truss.span / 2:
        reader.problem(f"{place} overhang", "must be shorter than half the span")
    if truss.bottom_pitch is not None and truss.bottom_pitch >= truss.pitch:
        reader.problem(f"{place} bottom_pitch", "must be flatter than the pitch of the top chord")
    for name in ("roof_dead", "ceiling_dead"):
        if getattr(truss.loads, f"{name}_least") > getattr(truss.loads, name) * (1 + 1e-9):
            reader.problem(f"{place} {name}_least", f"is more than {name}; it is the part that is certain to be there")
    for number, point in enumerate(truss.loads.points, 1):
        if point.position > truss.span:
            reader.problem(f"{place} point {number} position", "lies beyond the span of this truss")
