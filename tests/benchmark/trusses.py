"""The trusses that are timed: Fink trusses of the demo house in many spans and pitches."""

from dataclasses import replace
from functools import cache
from pathlib import Path

import numpy as np

from rooftruss.basis.grades import find_grade
from rooftruss.basis.job import Job, TrussSpec
from rooftruss.basis.jobform import read_job
from rooftruss.basis.sections import find_section
from rooftruss.design.batch import Sizes
from rooftruss.design.family import Choice, Option, family_of, unbatched
from rooftruss.design.stages import Run, run

DEMO_JOBS = sorted((Path(__file__).parents[2] / "demo_jobs").glob("*.toml"))
SIZES: Sizes = {
    "top chord": ("2x6", "SPF No.1/No.2"),
    "bottom chord": ("2x6", "SPF SS"),
    "web": ("2x4", "SPF Stud"),
}


@cache
def house() -> Job:
    """The demo house, by scheme asce7-22-asd."""
    return read_job(next(path for path in DEMO_JOBS if path.stem == "alder_row_house"))


def finks(count: int, job: Job | None = None) -> list[TrussSpec]:
    """Trusses of one layout, like the first of `job` (the house); every one has a span and a pitch of its own."""
    first = (job or house()).trusses[0]
    plain = replace(first, loads=replace(first.loads, points=()))
    rng = np.random.default_rng(1)
    sizes = zip(rng.uniform(7.0, 8.6, count), rng.uniform(0.3, 0.55, count), strict=True)
    return [replace(plain, mark=f"B{k}", span=float(s), pitch=float(p)) for k, (s, p) in enumerate(sizes)]


def choice(count: int | None = None, sizes: Sizes = SIZES) -> Choice:
    """The sizes of these trusses for a batch of `count`, or for one truss without batch axes."""
    options = {g: (Option(find_section(size), find_grade(grade)),) for g, (size, grade) in sizes.items()}
    return Choice(options=options, index={g: np.zeros(() if count is None else count, dtype=np.intp) for g in SIZES})


def single_run(number: int) -> Run:
    """All stages of one of the trusses."""
    return run(unbatched(family_of(house(), [finks(number + 1)[number]])), choice())
