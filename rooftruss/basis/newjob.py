"""The fresh job form."""

from rooftruss.basis.tables import data_folder


def new_job_text() -> str:
    """Commented job file with an invented example in it: what `rooftruss new` writes."""
    return (data_folder("tables") / "jobform" / "new_job.toml").read_text("utf-8")
