"""The demo jobs, run once for all end-to-end tests, and commands run in this process."""

from functools import cache
from pathlib import Path

from rooftruss.run import Result, run_file

REPOSITORY = Path(__file__).parents[2]
DEMO_JOBS = sorted((REPOSITORY / "demo_jobs").glob("*.toml"))
HOUSE = REPOSITORY / "demo_jobs" / "alder_row_house.toml"


@cache
def designed(path: Path) -> Result:
    """Designs of a job file."""
    return run_file(path)


def changed_house(path: Path, *changes: tuple[str, str]) -> Path:
    """A copy of the house at `path`, every text replaced wherever it stands."""
    text = HOUSE.read_text("utf-8")
    for old, new in changes:
        assert old in text, f"{old!r} is no part of the job"
        text = text.replace(old, new)
    path.write_text(text, "utf-8")
    return path
