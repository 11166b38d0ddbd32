"""The fresh job form of every scheme: an invented example that is right as it stands and with every line in use."""

import tomllib
from pathlib import Path

import pytest

from rooftruss.basis.jobform import job_from_mapping
from rooftruss.basis.jobkeys import form_for
from rooftruss.basis.newjob import new_job_text
from rooftruss.basis.schemes import load_scheme, schemes
from rooftruss.basis.tables import data_folder
from rooftruss.errors import JobError
from rooftruss.run import run_job

every_scheme = pytest.mark.parametrize("scheme", schemes())


def made_from(text: str):
    return job_from_mapping(tomllib.loads(text), "new.toml", Path())


def in_use(text: str) -> dict:
    """Content of a form with every line that is commented out taken into use."""
    lines = [
        line[2:] if line.startswith(("# [[", "# ")) and "=" in line.split("#")[1] else line
        for line in text.splitlines()
    ]
    text = "\n".join(lines)
    for head in ("[[loads.point]] ", "[[loads.case]] ", "[[grade]] "):
        text = text.replace(f"# {head}", head)
    return tomllib.loads(text)


@every_scheme
def test_the_fresh_form_is_a_right_job_that_says_it_is_invented(scheme):
    text = new_job_text(scheme)
    made = made_from(text)
    assert "invented example" in text
    assert [t.mark for t in made.trusses] == ["T1"]
    assert made.scheme == scheme
    assert made.units == ("metric" if scheme.startswith("en") else "US")
    assert run_job(made).passes


@every_scheme
def test_the_fresh_form_is_right_with_every_line_in_use(scheme):
    data = in_use(new_job_text(scheme))
    asked = load_scheme(scheme)
    form = form_for(asked.load_standard, asked.timber_standard)
    known = {name for name, key in form["site"].items() if not key.only or asked.load_standard in key.only}
    assert known == data["site"].keys()
    assert dict(asked.options).keys() | {"scheme"} == data["standard"].keys()
    assert form["loads"].keys() | {"point", "case"} == data["loads"].keys()
    assert form["point"].keys() == data["loads"]["point"][0].keys()
    assert form["case"].keys() | {"loads", "points"} == data["loads"]["case"][0].keys()
    assert form["grade"].keys() == data["grade"][0].keys()
    assert form["timber"].keys() <= data["timber"].keys()
    assert form["deflection"].keys() == data["deflection"].keys()
    assert form["truss"].keys() <= data["truss"][0].keys()
    job_from_mapping(data, "new.toml", Path())


def test_no_scheme_named_is_allowable_stress_design_of_the_newer_edition():
    assert new_job_text() == new_job_text("asce7-22-asd")


@every_scheme
def test_a_form_holds_no_line_of_another_scheme(scheme):
    assert "#@" not in new_job_text(scheme)


def test_the_site_of_a_form_is_one_that_the_scheme_serves():
    assert "winter_wind_parameter" in new_job_text("asce7-22-lrfd")
    assert "winter_wind_parameter" not in new_job_text("asce7-16-lrfd")
    assert made_from(new_job_text("en1990-6.10")).site["national_choices"] == "recommended"
    finnish = made_from(new_job_text("en1990-finland")).site
    assert (finnish["national_choices"], finnish["peak_velocity_pressure"]) == ("finland", 600.0)


def test_the_form_of_a_scheme_file(tmp_path):
    """It is looked for from the folder of the form, and named in it as the user named it."""
    own = (data_folder("tables") / "schemes" / "asce7-16-asd.toml").read_text("utf-8")
    (tmp_path / "county.toml").write_text(own, "utf-8")
    text = new_job_text("./county.toml", tmp_path)
    assert text == new_job_text("asce7-16-asd").replace('"asce7-16-asd"  ', '"./county.toml" ')
    assert job_from_mapping(tomllib.loads(text), "new.toml", tmp_path).scheme == "./county.toml"


def test_no_form_serves_a_pair_of_standards_that_none_was_written_for(tmp_path):
    own = (data_folder("tables") / "schemes" / "asce7-16-asd.toml").read_text("utf-8")
    (tmp_path / "odd.toml").write_text(own.replace("NDS 2018 ASD", "EN 1995-1-1"), "utf-8")
    with pytest.raises(JobError, match=r"^scheme odd: there is no job form for ASCE 7-16 with EN 1995-1-1; write one"):
        new_job_text("odd.toml", tmp_path)
