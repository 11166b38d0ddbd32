"""Jobs to the Eurocodes for tests of the stages, varied by `replace`."""

from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

from rooftruss.basis.job import Job, TrussSpec
from rooftruss.basis.jobform import read_job

DEMO_JOBS = Path(__file__).parents[1] / "demo_jobs"
BARN = DEMO_JOBS / "birch_lane_barn.toml"
EN_SIZES = {"top chord": ("45x145", "C24"), "bottom chord": ("45x120", "C24"), "web": ("45x95", "C24")}


@cache
def barn() -> Job:
    """The demo barn, by scheme en1990-6.10."""
    return read_job(BARN)


def barn_at(scheme: str = "en1990-6.10", **site: object) -> Job:
    """The barn under another scheme or at a site with other values [SI]."""
    return replace(barn(), scheme=scheme, site={**barn().site, **site})


def en_spec(**changes: Any) -> TrussSpec:
    """The truss of the barn with some of its values changed [m, Pa]; it has as long pieces as it needs."""
    found = barn().trusses[0]
    return replace(found, **{"timber": replace(found.timber, longest_stock=30.0), **changes})
