"""Where the stages meet: a job file to designs."""

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from rooftruss.basis.job import Job, TrussSpec
from rooftruss.basis.jobform import read_job
from rooftruss.design.design import Design
from rooftruss.design.sizing import size_truss
from rooftruss.errors import JobError, OutOfScopeError, RooftrussError, UnstableTrussError


@dataclass(frozen=True, kw_only=True)
class Result:
    """A job and the designs of its trusses, in the order of the job file."""

    job: Job
    designs: tuple[Design, ...]

    @property
    def passes(self) -> bool:
        """Whether every truss meets every check and limit."""
        return all(design.passes for design in self.designs)


def run_job(job: Job, progress: Callable[[str], None] | None = None) -> Result:
    """Size and check every truss of a job. `progress` is told the mark of each truss before its turn.

    Raises JobError, OutOfScopeError or UnstableTrussError with the file and mark in front.
    """
    designs = []
    for spec in job.trusses:
        if progress:
            progress(spec.mark)
        designs.append(design_truss(job, spec))
    return Result(job=job, designs=tuple(designs))


def design_truss(job: Job, spec: TrussSpec) -> Design:
    """Size and check one truss; errors name the file and the mark."""
    try:
        return size_truss(job, spec)
    except (JobError, OutOfScopeError, UnstableTrussError) as error:
        raise _placed(error, job, spec) from None


def _placed(error: RooftrussError, job: Job, spec: TrussSpec) -> RooftrussError:
    return type(error)(f"{job.source} [[truss]] {spec.mark} {error}")


def run_file(path: Path, progress: Callable[[str], None] | None = None) -> Result:
    """Read a job file and run it; see `run_job`."""
    return run_job(read_job(path), progress)
