"""Check values of the Eurocodes (tests/published/check_values_en.json): which test has which, and how they compare."""

import json
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import pytest

Entry = Mapping[str, Any]
FILE = Path(__file__).parent / "published" / "check_values_en.json"
LIST: list[Entry] = json.loads(FILE.read_text(encoding="utf-8"))
ENTRIES: dict[str, Entry] = {entry["id"]: entry for entry in LIST}
CLAIMED: list[str] = []  # ids in the order in which tests ask for them


def checks(*ids: str) -> pytest.MarkDecorator:
    """The test below runs once for each of these entries, as its argument `entry`, and is the only one that does."""
    CLAIMED.extend(ids)
    return pytest.mark.parametrize("entry", [pytest.param(ENTRIES[key], id=key) for key in ids])


def meet(entry: Entry, found: Mapping[str, object], *, unknown: Sequence[str] = ()) -> None:
    """Every expected value of an entry, within its own tolerance. `unknown`: values that the program has no use for."""
    expected = {key: value for key, value in entry["expected"].items() if key not in unknown}
    assert len(expected) + len(unknown) == len(entry["expected"])
    _meet(expected, found, entry["tolerance"], entry["id"])


def _meet(expected: Any, found: Any, tolerance: Mapping[str, float], place: str) -> None:
    if isinstance(expected, Mapping):
        assert found.keys() == expected.keys(), place
        for key, value in expected.items():
            _meet(value, found[key], tolerance, f"{place} {key}")
    elif isinstance(expected, list):
        assert len(found) == len(expected), place
        for k, value in enumerate(expected):
            _meet(value, found[k], tolerance, f"{place} {k}")
    elif expected is None or isinstance(expected, str):
        assert found == expected, place
    else:
        assert float(found) == pytest.approx(expected, **tolerance), place
