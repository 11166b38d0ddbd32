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

# Scheme, site and loads of a job file, for those that tests put together as text
BASIS = """\
[standard]
scheme = "asce7-22-asd"

[site]
risk_category = "II"
ground_snow = "40 psf"
winter_wind_parameter = 0.45
snow_exposure = "partially exposed"
thermal = "ventilated attic"
roof_surface = "rough"
wind_speed = "115 mph"
exposure = "C"
enclosure = "enclosed"
mean_roof_height = "16 ft"
building_length = "60 ft"

[loads]
roof_dead = "10 psf"
roof_dead_least = "6 psf"
ceiling_dead = "7 psf"
roof_live = "20 psf"
ceiling_live = "10 psf"
"""
JOB = f"""\
[job]
title = "Alder Row machine shed"
client = "Demo client"
number = "Q-0001"
units = "US"

{BASIS}
[[loads.point]]
action = "D"
chord = "bottom"
position = "12 ft"
force = "250 lbf"
note = "air handler"

[timber]
top_chord = {{ grades = ["SPF No.1/No.2", "SPF SS"], sizes = ["2x4", "2x6", "2x8"], restraint = "sheathed" }}
bottom_chord = {{ grades = ["SPF No.1/No.2"], sizes = ["2x4", "2x6"], restraint = "120 in" }}
web = {{ grades = ["SPF Stud"], sizes = ["2x4"] }}
moisture = "dry"
longest_stock = "20 ft"

[[truss]]
mark = "T1"
shape = "fink"
quantity = 18
span = "28 ft"
pitch = "6/12"
spacing = "24 in"
overhang = "16 in"
bearing = "3.5 in"
"""


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
