"""Any job can be shown in either system of units: the same designs, and the same values behind every cell."""

import math

import pytest

from tests.end_to_end.demo import DEMO_JOBS
from tests.end_to_end.test_workbook import Quote

SHEETS = (  # first heading of each grid of a truss, and of the first page
    ("Quote", "Truss"),
    (None, "Member"),
    (None, "Panel point"),
    (None, "Place"),
)


SHOWN = [path for path in DEMO_JOBS if path.stem in ("alder_row_house", "birch_lane_barn")]  # one of each family


@pytest.fixture(scope="module", params=SHOWN, ids=lambda p: p.stem)
def shown(request, tmp_path_factory) -> tuple[Quote, Quote]:
    """Quotes of a demo job as it is, and in the other units."""
    folder = tmp_path_factory.mktemp("units")
    text = request.param.read_text("utf-8")
    here = "US" if 'units = "US"' in text else "metric"
    other = folder / f"{request.param.stem}_other.toml"
    changed = text.replace(f'units = "{here}"', f'units = "{"metric" if here == "US" else "US"}"')
    assert changed != text
    other.write_text(changed, "utf-8")
    return Quote(request.param, folder / "own.xlsx"), Quote(other, folder / "other.xlsx")


def test_the_designs_are_the_same(shown):
    for one, other in zip(*(quote.result.designs for quote in shown), strict=True):
        assert one.sizes == other.sizes
        assert float(one.outcome.worst) == pytest.approx(float(other.outcome.worst), rel=1e-12)
        assert one.passes == other.passes


def test_every_number_is_the_same_in_both(shown):
    """Read back to SI by the units that stand below the headings."""
    marks = [d.spec.mark for d in shown[0].result.designs]
    compared = 0
    for sheet, first in SHEETS:
        for name in [sheet] if sheet else marks:
            rows, others = (quote.grid(name, first) for quote in shown)
            for row, other in zip(rows, others, strict=True):
                assert row.keys() == other.keys()
                for heading, value in row.items():
                    if heading == "Pitch":
                        assert rise(value) == pytest.approx(rise(other[heading]), abs=5e-4)  # 12.34/12
                    elif isinstance(value, int | float):
                        assert value == pytest.approx(other[heading], rel=1e-9, abs=1e-9), (name, heading)
                        compared += 1
                    else:
                        assert value == other[heading], (name, heading)
    assert compared > 100 * len(marks)


def rise(pitch: object) -> float | None:
    """Rise over run of a pitch as shown: 6/12, or an angle [rad]; None in the row of sums."""
    if pitch is None:
        return None
    return float(pitch.removesuffix("/12")) / 12 if isinstance(pitch, str) else math.tan(float(pitch))


def test_load_cases_are_the_same_in_both(shown):
    """Every value of the sheet Cases by the unit that stands in its row, four digits each."""
    sizes = {"psf": 47.880258980, "ft": 0.3048, "lbf": 4.4482216153, "mph": 0.44704, "lb": 0.45359237, "in2": 0.0254**2}
    sizes |= {"lbf/ft": 4.4482216153 / 0.3048, "kN/m2": 1e3, "kN": 1e3, "mm2": 1e-6, "kN/m": 1e3}
    sizes |= {"lb/ft3": 0.45359237 / 0.3048**3, "kg/m3": 1.0}
    sizes |= {"ft2": 0.3048**2, "m2": 1.0}
    sizes |= {"m": 1.0, "kg": 1.0, "m/s": 1.0, "in": 0.0254, "mm": 1e-3, "-": 1.0}
    tables = [list(quote.book["Cases"].iter_rows(values_only=True)) for quote in shown]
    compared = 0
    for row, other in zip(*tables, strict=True):
        assert row[:3] == other[:3]
        for one, two in zip(row[4:-1], other[4:-1], strict=True):
            if isinstance(one, int | float):
                a, b = one * sizes[str(row[3] or "-")], two * sizes[str(other[3] or "-")]
                assert a == pytest.approx(b, rel=2e-3, abs=1e-6), row
                compared += 1
    assert compared > 20
