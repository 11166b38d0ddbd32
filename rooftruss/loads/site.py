"""Reads the site keys of a load standard: each missing or impossible value is told with the clause that asks for it."""

from collections.abc import Iterable

from rooftruss.errors import JobError, nearest
from rooftruss.loads.roof import Site


def number(site: Site, key: str, clause: str) -> float:
    """Site value [SI] that `clause` asks for. Raises JobError when it is missing, no number, or negative."""
    value = optional_number(site, key)
    if value is None:
        raise JobError(f"[site] {key} is missing; {clause} asks for it")
    if value < 0.0:
        raise JobError(f"[site] {key}: {value:g} is negative")
    return value


def optional_number(site: Site, key: str) -> float | None:
    """Site value [SI], or None when the job does not give it."""
    value = site.get(key)
    if value is None:
        return None
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise JobError(f"[site] {key}: {value!r} is not a number")
    return float(value)


def word(site: Site, key: str, allowed: Iterable[str], clause: str) -> str:
    """Site value that is one of the `allowed` words. Raises JobError when it is missing or another one."""
    value = site.get(key)
    known = list(allowed)
    if value is None:
        raise JobError(f"[site] {key} is missing; {clause} asks for it: {nearest('', known)}")
    if value not in known:
        raise JobError(f"[site] {key}: {value!r} is not in {clause}; {nearest(str(value), known)}")
    return str(value)
