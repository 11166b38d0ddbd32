"""A small job of three trusses for the tests of the outputs: one that passes, one that cannot, one scissor."""

import tomllib
from functools import cache
from pathlib import Path
from typing import Any

from rooftruss.basis.job import Job
from rooftruss.basis.jobform import job_from_mapping
from rooftruss.design.design import Design
from rooftruss.design.sizing import size_truss
from tests.jobs import BASIS

TEXT = f"""\
[job]
title = "=1+1 & more"
client = "@client"
number = "Q-7"
units = "UNITS"
{BASIS}[timber]
top_chord = {{ grades = ["SPF No.1/No.2"], sizes = ["2x4", "2x6"], restraint = "sheathed" }}
bottom_chord = {{ grades = ["SPF No.1/No.2"], sizes = ["2x6"], restraint = "6 ft" }}
web = {{ grades = ["SPF Stud"], sizes = ["2x4"], restraint = "midpoint" }}
longest_stock = "20 ft"
moisture = "dry"
[[truss]]
mark = "T1"
shape = "fink"
quantity = 18
span = "28 ft"
pitch = "6/12"
spacing = "24 in"
overhang = "16 in"
bearing = "3.5 in"
[[truss]]
mark = "T2"
shape = "howe"
quantity = 2
span = "40 ft"
pitch = "5/12"
spacing = "48 in"
bearing = "3.5 in"
[[truss]]
mark = "T3"
shape = "scissor"
quantity = 3
span = "22 ft"
pitch = "8/12"
spacing = "24 in"
overhang = "12 in"
bearing = "3.5 in"
"""


def mapping(units: str = "US") -> dict[str, Any]:
    """The job as a file gives it, with a point load on T1 and T3."""
    data = tomllib.loads(TEXT.replace("UNITS", units))
    data["loads"]["point"] = [
        {"action": "D", "chord": "bottom", "position": "9 ft", "force": "120 lbf", "note": "air handler"}
    ]
    return data


@cache
def job_and_designs(units: str = "US") -> tuple[Job, tuple[Design, ...]]:
    """The job and its designs; T2 fails for want of larger sizes."""
    job = job_from_mapping(mapping(units), "outputs.toml", Path())
    return job, tuple(size_truss(job, spec) for spec in job.trusses)
