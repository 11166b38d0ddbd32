"""Whatever stands in the lists of a job file, it is read or refused in words."""

import copy
from pathlib import Path

from hypothesis import given, settings
from hypothesis import strategies as st

from rooftruss.basis.jobform import job_from_mapping
from rooftruss.errors import RooftrussError
from tests.custom_jobs import THREE, mapping

CASE = {
    "name": "own",
    "action": "S",
    "pattern": "balanced",
    "loads": [{"surface": "roof", "kind": "plan", "pressure": "1 psf", "from": "1 ft", "to": "2 ft"}],
    "points": [{"chord": "top", "position": "9 ft", "force": "1 lbf"}],
}
GRADE = {"name": "Own", "product": "sawn visual", "G": 0.5, "Fb": "900 psi", "E": "1000 ksi"}
VALUES = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=12) | st.dates(),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=8), inner, max_size=3),
    max_leaves=6,
)


def whole():
    return mapping(truss=copy.deepcopy(THREE), loads={"case": [copy.deepcopy(CASE)]}, grade=[copy.deepcopy(GRADE)])


def places(value, path=()):
    """Paths to every value inside the lists of the job."""
    yield path
    items = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    for key, inner in items:
        yield from places(inner, (*path, key))


def _inner(data, path):
    for key in path:
        data = data[key]
    return data


LISTS = [("truss", 0, "node"), ("truss", 0, "member"), ("truss", 0, "support"), ("loads", "case"), ("grade",)]
PLACES = [(*head, *path) for head in LISTS for path in places(_inner(whole(), head))]


def refusal(data) -> str:
    """Message that a job is refused with; a stand-in for it when the job is right."""
    try:
        job_from_mapping(data, "demo.toml", Path())
    except RooftrussError as error:
        return str(error)
    return "demo.toml [right]"


@settings(deadline=None)  # the first call sets up the units
@given(st.sampled_from(PLACES), VALUES)
def test_any_value_in_any_place_of_a_list_is_read_or_refused_in_words(place, value):
    data = whole()
    _inner(data, place[:-1])[place[-1]] = value
    assert refusal(data).startswith("demo.toml [")
