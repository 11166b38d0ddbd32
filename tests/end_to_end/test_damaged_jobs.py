"""Damaged job files: every one is refused with words, none with a fault of the program."""

import tomllib
from contextlib import suppress
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from rooftruss.basis.jobform import job_from_mapping, read_job
from rooftruss.errors import JobError, RooftrussError
from tests.damaged import damaged_jobs, damages
from tests.jobs import JOB

DAMAGES = damages()


def test_there_are_sixty_of_them_with_names_of_their_own():
    assert len(damaged_jobs()) >= 60
    assert len({name for name, _ in damaged_jobs()}) == len(damaged_jobs())


@pytest.mark.parametrize(("name", "content", "part"), DAMAGES, ids=[name for name, _, _ in DAMAGES])
def test_a_damaged_job_is_refused_in_words(tmp_path, name, content, part):
    path = tmp_path / f"{name}.toml"
    path.write_bytes(content)
    with pytest.raises(JobError) as error:
        read_job(path)
    lines = str(error.value).splitlines()
    assert part in str(error.value)
    assert 1 <= len(lines) <= 11
    assert all(line.startswith(f"{name}.toml") and len(line) < 400 for line in lines)


def test_the_undamaged_job_is_read(tmp_path):
    path = tmp_path / "demo.toml"
    path.write_text(JOB, "utf-8")
    assert read_job(path).trusses[0].mark == "T1"


VALUES = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=12) | st.dates(),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=8), inner, max_size=3),
    max_leaves=6,
)
PLACES = [(table, key) for table, keys in tomllib.loads(JOB).items() if isinstance(keys, dict) for key in keys]
PLACES += [("truss", key) for key in tomllib.loads(JOB)["truss"][0]]


def refusal(data: dict) -> str:
    """Message that a job is refused with; a stand-in for it when the job is right."""
    try:
        job_from_mapping(data, "demo.toml", Path())
    except RooftrussError as error:
        return str(error)
    return "demo.toml [right]"


@given(st.sampled_from(PLACES), VALUES)
def test_any_value_in_any_place_is_read_or_refused_in_words(place, value):
    table, key = place
    data = tomllib.loads(JOB)
    (data["truss"][0] if table == "truss" else data[table])[key] = value
    assert refusal(data).startswith("demo.toml [")


@given(st.integers(0, len(JOB) - 1), st.integers(0, 60), st.text(max_size=4))
def test_any_slip_of_the_pen_is_read_or_refused_in_words(start, length, typed):
    text = JOB[:start] + typed + JOB[start + length :]
    with suppress(tomllib.TOMLDecodeError):
        assert refusal(tomllib.loads(text)).startswith("demo.toml [")
