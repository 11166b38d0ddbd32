"""From a job file to a Job: reads the TOML form, checks every key, converts to SI and notes each assumption."""

from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

from rooftruss.basis.job import Job, LimitSpec
from rooftruss.basis.jobattic import ATTIC, attic_defaults
from rooftruss.basis.jobcountry import COUNTRY, check_country
from rooftruss.basis.jobfile import read_toml
from rooftruss.basis.jobkeys import Key, common_form, form_for, grade_family, with_grades
from rooftruss.basis.jobrows import CUSTOM, read_grades
from rooftruss.basis.jobtrusses import TrussReader
from rooftruss.basis.kinds import Choice, Number
from rooftruss.basis.newjob import usual_units
from rooftruss.basis.schemes import Scheme, load_scheme
from rooftruss.basis.tablereader import Entries, Given, TableReader
from rooftruss.basis.written import told
from rooftruss.errors import JobError, nearest

LISTS = ("grade", "truss")  # written in two brackets
TABLES = ("job", "standard", "site", "loads", "timber", "deflection", *LISTS)


def read_job(path: Path) -> Job:
    """Job of a TOML file. Raises JobError, one line for each mistake, ten at most."""
    return job_from_mapping(read_toml(Path(path)), Path(path).name, Path(path).parent)


def job_from_mapping(data: Mapping[str, object], source: str, folder: Path) -> Job:
    """Job of the tables of a job file, whatever form they came in.

    source is the name that messages give it, folder where paths in it start. Raises JobError like `read_job`.
    """
    reader = TableReader(source=source, system=_system(data))
    given = _tables(reader, data)
    attic = given["loads"].get(ATTIC)
    scheme, standard = _scheme(reader, given["standard"], folder, attic.value if attic else None)
    heading = reader.read(common_form()["job"], given["job"], "[job]")
    if scheme is None:
        raise reader.failure()
    reader.standard = scheme.load_standard
    if heading["units"] is None:
        reader.system = _usual_system(scheme)
    form = form_for(scheme.load_standard, scheme.timber_standard)
    own = read_grades(reader, form, data.get("grade"), grade_family(scheme.timber_standard))
    form = with_grades(form, own)
    site = reader.read(form["site"], given["site"], "[site]")
    _check_site(reader, standard["scheme"], folder, site)
    limits = reader.read(form["deflection"], given["deflection"], "[deflection]")
    trusses = TrussReader(
        reader=reader,
        form=form,
        loads=given["loads"],
        timber=given["timber"],
        scheme=scheme,
        options=standard,
        chosen=given["standard"],
        grades=tuple(own.values()),
    ).trusses(data.get("truss"))
    if reader.problems:
        raise reader.failure()
    return Job(
        source=source,
        title=heading["title"],
        client=heading["client"] or "",
        number=heading["number"] or "",
        units=heading["units"],
        scheme=standard.pop("scheme"),
        scheme_options=standard,
        site=site,
        limits=LimitSpec(**limits),
        trusses=trusses,
        assumptions=tuple(reader.assumptions),
        grades=tuple(own.values()),
        folder=folder,
        given=data,
    )


def with_overrides(job: Job, mark: str | None, changes: Mapping[str, object]) -> Job:
    """Job of one truss: the one of this mark (None: the first) with some keys changed, all else as in `job`.

    changes holds values as a job file writes them, under keys of [[truss]], [loads] or [timber]; None leaves a key as
    it is. A new shape does not keep the panel count, bottom pitch and joints of the old one. Raises JobError.
    """
    marks = [truss.mark for truss in job.trusses]
    if mark is not None and mark not in marks:
        raise JobError(f"{job.source}: there is no truss {mark!r}; {nearest(mark, marks)}")
    listed: Any = job.given["truss"]
    kept = dict(listed[marks.index(mark) if mark is not None else 0])
    new = {name: _number_typed(name, value) for name, value in changes.items() if value is not None}
    if new.get("shape", kept["shape"]) != kept["shape"]:
        kept = {name: value for name, value in kept.items() if name not in ("panels", "bottom_pitch", *CUSTOM)}
    return job_from_mapping({**job.given, "truss": [kept | new]}, job.source, job.folder)


def _number_typed(name: str, value: object) -> object:
    """A whole number that the command line gives as text, as a number."""
    key = common_form()["truss"].get(name)
    counts = key is not None and isinstance(key.kind, Number)
    return int(value) if counts and isinstance(value, str) and value.strip().isdecimal() and len(value) < 10 else value


def _system(data: Mapping[str, object]) -> str:
    """System of units of the job; "US" as long as the file does not say so properly (that is a mistake by itself)."""
    job = data.get("job")
    return "metric" if isinstance(job, Mapping) and job.get("units") == "metric" else "US"


def _usual_system(scheme: Scheme) -> str:
    """Units for the messages about a job that does not give its own: those of the form for its scheme."""
    try:
        return usual_units(scheme)
    except JobError:  # a scheme of the user's own, for standards that no form joins
        return "US"


def _check_site(reader: TableReader, scheme: str, folder: Path, site: Mapping[str, Any]) -> None:
    """Note a country that is not covered, or one that the scheme does not serve."""
    before = reader.mistakes
    with reader.at(f"[site] {COUNTRY}"):
        check_country(site)
    if reader.mistakes == before:
        with reader.at(""):  # the scheme names the key
            load_scheme(scheme, folder, site)


def _tables(reader: TableReader, data: Mapping[str, object]) -> dict[str, dict[str, Given]]:
    """Entries of every table but the lists; a table that is absent has none."""
    for name in data:
        if name not in TABLES:
            reader.problem(f"[{told(name)[1:-1]}]", f"there is no such table; {nearest(name[:100], TABLES)}")
    return {name: reader.table(data.get(name, {}), f"[{name}]") for name in TABLES if name not in LISTS}


def _scheme(reader: TableReader, given: Entries, folder: Path, attic: object) -> tuple[Scheme | None, dict[str, Any]]:
    """The scheme, and the values of [standard]; no scheme when it cannot be found (a mistake has been noted)."""
    keys = common_form()["standard"]
    values = reader.read(keys, {name: g for name, g in given.items() if name in keys}, "[standard]")
    if values["scheme"] is None:
        return None, values
    with reader.at("[standard] scheme"):
        scheme = load_scheme(values["scheme"], folder)
        form_for(scheme.load_standard, scheme.timber_standard)  # raises for a standard without keys
        reader.standard = scheme.load_standard
        defaults = {option: choices[0] for option, choices in scheme.options} | attic_defaults(attic, scheme)
        options = {name: _option_key(name, choices, defaults[name], attic) for name, choices in scheme.options}
        keys = {**keys, **options}
        return scheme, reader.read(keys, given, "[standard]")
    return None, values


def _option_key(name: str, choices: tuple[str, ...], taken: str, attic: object) -> Key:
    """Key of a scheme option: the words of the form, the choices of the scheme, and the one taken by default.

    What is not the default of the scheme itself is that of the attic.
    """
    default = dict.fromkeys(("US", "metric"), taken)
    known = common_form()["option"].get(name)
    if known is None:
        plain = f"option {name} as the scheme has it: {taken}"
        return Key(
            name=name, kind=Choice(choices=choices), help="option of the scheme", default=default, assumption=plain
        )
    words = known.assumption + (f", as for an attic {attic}" if taken != choices[0] else "")
    return replace(known, kind=Choice(choices=choices), default=default, assumption=words)
