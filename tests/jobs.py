"""A job and its trusses for tests of the stages, varied by `replace` instead of by text."""

from collections.abc import Mapping
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

from rooftruss.basis.job import Job, TrussSpec
from rooftruss.basis.jobform import read_job

HOUSE = Path(__file__).parents[1] / "demo_jobs" / "alder_row_house.toml"
SIZES = {
    "top chord": ("2x6", "SPF No.1/No.2"),
    "bottom chord": ("2x6", "SPF SS"),
    "web": ("2x4", "SPF No.1/No.2"),
}


@cache
def house() -> Job:
    """The demo house."""
    return read_job(HOUSE)


def at_site(**values: object) -> Job:
    """The house at a site with other values [SI]."""
    return replace(house(), site={**house().site, **values})


def calm() -> Job:
    """The house where no wind blows."""
    return at_site(wind_speed=0.0)


def spec(
    mark: str = "T1", *, points: bool = False, loads: Mapping[str, float] | None = None, **changes: Any
) -> TrussSpec:
    """A truss of the house with some of its values changed [m, Pa]; point loads only when asked for."""
    found = next(s for s in house().trusses if s.mark == mark)
    own = replace(found.loads, **({} if points else {"points": ()}), **(loads or {}))
    stock = changes.pop("longest_stock", found.timber.longest_stock)
    return replace(found, loads=own, timber=replace(found.timber, longest_stock=stock), **changes)
