"""The fresh job form: one of tables/jobform/new_job_*.toml, made to fit a scheme.

A form holds an invented example under a scheme of its own and serves every scheme whose job has the same keys. A line
``#@ SCHEME: key = value`` in it takes the place of the line of that key where the form is written for that scheme.
"""

import json
import re
import tomllib
from collections.abc import Iterable, Iterator
from pathlib import Path

from rooftruss.basis.jobkeys import form_for
from rooftruss.basis.schemes import Scheme, load_scheme
from rooftruss.basis.tables import data_folder
from rooftruss.errors import JobError

USUAL_SCHEME = "asce7-22-asd"
COMMENTS_AT = 40  # column of the comments in a form
OWN_LINE = re.compile(r"#@ (\S+): (.*)")
TABLE_LINE = re.compile(r"\[(\w+)\]")
KEY_LINE = re.compile(r"(?:# )?(\w+) = ")


def new_job_text(scheme: str = USUAL_SCHEME, folder: Path = Path()) -> str:
    """Commented job file with an invented example in it, for a scheme: what `rooftruss new` writes.

    scheme is a name or, looked for from `folder`, the path of a scheme file, as in `load_scheme`. Raises JobError where
    there is no such scheme, or no form for the standards it rests on.
    """
    asked = load_scheme(scheme, folder)
    unknown = _keys_of_others(asked)
    kept = [line for table, line in _by_table(_form_serving(asked)) if (table, _key(line)) not in unknown]
    return "\n".join(_named(line, scheme) for line in _own_lines(kept, scheme)) + "\n"


def _form_serving(asked: Scheme) -> str:
    """The form whose example is under a scheme with the same keys."""
    for path in sorted((data_folder("tables") / "jobform").glob("new_job_*.toml")):
        text = path.read_text("utf-8")
        if _keys(load_scheme(tomllib.loads(text)["standard"]["scheme"])) == _keys(asked):
            return text
    raise JobError(
        f"scheme {asked.name}: there is no job form for {asked.load_standard} with {asked.timber_standard}; "
        "write one under a scheme that `rooftruss schemes` lists, and change its keys"
    )


def usual_units(scheme: Scheme) -> str:
    """Units ("US" or "metric") that the form for a scheme shows results in. Raises JobError where there is no form."""
    return str(tomllib.loads(_form_serving(scheme))["job"]["units"])


def _keys(scheme: Scheme) -> set[tuple[str, str]]:
    """Table and name of every key that a job under this scheme may have, whatever the edition of the standard."""
    form = form_for(scheme.load_standard, scheme.timber_standard)
    return {(table, name) for table, keys in form.items() for name in keys}


def _keys_of_others(scheme: Scheme) -> set[tuple[str, str]]:
    """Table and name of keys that its form may hold and this scheme does not know: of other editions or schemes."""
    form = form_for(scheme.load_standard, scheme.timber_standard)
    editions = {
        (table, name)
        for table, keys in form.items()
        for name, key in keys.items()
        if key.only and scheme.load_standard not in key.only
    }
    return editions | {("standard", name) for name in form["option"].keys() - dict(scheme.options).keys()}


def _by_table(form: str) -> Iterator[tuple[str, str]]:
    """Every line of a form with the table of the job file that it stands in."""
    table = ""
    for line in form.splitlines():
        found = TABLE_LINE.match(line)
        table = found[1] if found else table
        yield table, line


def _own_lines(lines: Iterable[str], scheme: str) -> Iterator[str]:
    """Lines of a form with those of this scheme in the place of the usual ones, and those of others left out."""
    pairs = [(line, OWN_LINE.fullmatch(line)) for line in lines]
    own = {_key(found[2]) for _, found in pairs if found and found[1] == scheme}
    for line, found in pairs:
        if found and found[1] == scheme:
            yield found[2]
        elif not found and (_key(line) == "" or _key(line) not in own):
            yield line


def _key(line: str) -> str:
    """Key that a line of a form gives a value, in use or not; "" for any other line."""
    found = KEY_LINE.match(line)
    return found[1] if found else ""


def _named(line: str, scheme: str) -> str:
    """The line of the scheme with its name in it; any other line as it is."""
    if _key(line) != "scheme":
        return line
    comment = line[line.index("#") :]
    return f"scheme = {json.dumps(scheme, ensure_ascii=False)} ".ljust(COMMENTS_AT) + comment
