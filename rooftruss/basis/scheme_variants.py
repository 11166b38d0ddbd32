"""Schemes shown by themselves: which keys of a site change one, and whether a job has the keys it asks for."""

import tomllib
from pathlib import Path

from rooftruss.basis.job import Job
from rooftruss.basis.jobkeys import form_for, grade_family
from rooftruss.basis.kinds import Quantity
from rooftruss.basis.schemes import Scheme, load_scheme
from rooftruss.basis.tables import data_folder
from rooftruss.errors import JobError
from rooftruss.units import shown

Variants = dict[str, tuple[str, ...]]


def variants_of(scheme: Scheme, name: str, base_folder: Path = Path()) -> Variants:
    """Keys of [site] that change a scheme, each with the values that do: {"altitude": ("over 1000 m",), ...}.

    `name` and `base_folder` are those that `load_scheme` found the scheme by; it has read the file and told mistakes.
    """
    own = name.lower().endswith(".toml")
    path = base_folder / name if own else data_folder("tables") / "schemes" / f"{name}.toml"
    found: Variants = {}
    for variant in tomllib.loads(path.read_text("utf-8")).get("variants", ()):
        key = str(variant["key"])
        words = _over(scheme, key, variant["over"]) if "over" in variant else str(variant["equals"])
        found[key] = tuple(dict.fromkeys((*found.get(key, ()), words)))
    return found


def _over(scheme: Scheme, key: str, limit: float) -> str:
    """Limit of a number in the metric unit of its key; the number alone where no job has that key."""
    known = form_for(scheme.load_standard, scheme.timber_standard)["site"].get(key)
    if known is not None and isinstance(known.kind, Quantity) and known.kind.shows:
        return f"over {shown(limit, known.kind.shows, 'metric')}"
    return f"over {limit:g}"


def require_like(job: Job, scheme: Scheme) -> None:
    """Raise JobError for a job to other standards than the scheme's: its keys and grades would not do."""
    own = load_scheme(job.scheme, job.folder, job.site)
    if grade_family(own.timber_standard) != grade_family(scheme.timber_standard):
        raise JobError(
            f"{job.source} is a job to {own.load_standard}; for the scheme {scheme.name} give --job a job to "
            f"{scheme.load_standard}"
        )
