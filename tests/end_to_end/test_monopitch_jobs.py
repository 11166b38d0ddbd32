"""A job with a monopitch truss given joint by joint, from the file to the workbook and to its explanations."""

import pytest
from openpyxl import load_workbook

from rooftruss.cli import main
from rooftruss.output.result import truss_record
from rooftruss.run import run_file
from tests.end_to_end.recompute import recompute
from tests.monopitch import custom_monopitch, monopitch_job

SCHEMES = ("en1990-6.10", "en1990-6.10ab")


@pytest.fixture(scope="module")
def path(tmp_path_factory):
    high = ('altitude = "350 m"', 'altitude = "950 m"')
    return monopitch_job(tmp_path_factory.mktemp("job") / "lean_to.toml", custom_monopitch(), high)


@pytest.fixture
def explained(path, capsys):
    """Text of `rooftruss explain` of a case."""

    def command(case):
        assert main(["explain", str(path), "C1", case]) == 0
        return " ".join(capsys.readouterr().out.split())

    return command


@pytest.mark.parametrize("scheme", SCHEMES)
def test_a_monopitch_quotes_to_a_workbook(path, tmp_path, scheme):
    job = tmp_path / "job.toml"
    job.write_text(path.read_text("utf-8").replace('"en1990-6.10"', f'"{scheme}"'), "utf-8")
    assert main(["quote", str(job), "-o", str(tmp_path / "quote.xlsx")]) == 0
    book = load_workbook(tmp_path / "quote.xlsx")
    cells = [str(cell) for row in book["Cases"].iter_rows(values_only=True) for cell in row if cell is not None]
    for text in (
        "snow, undrifted or drifted",
        "snow, undrifted or drifted, hanging over the low eave",
        "wind from the left onto the low eave, suction, c_pi +0.2",
        "wind from the right onto the high eave, c_pi -0.3",
        "wind along the eaves, zone F, c_pi +0.2",
        "EN 1991-1-4, Table 7.3a",
        "load on whole roof",
    ):
        assert text in cells
    assert not any("ridge" in cell or "less on the" in cell for cell in cells)


def test_an_independent_frame_has_the_same_reactions(path):
    (made,) = run_file(path).designs
    record = truss_record(made)
    again = recompute(record)
    for c, case in enumerate(record["cases"]):
        told = record["effects"][case["name"]]["reactions"]
        for node, found in again.reactions.items():
            assert told[node] == pytest.approx(list(found[c]), rel=1e-4, abs=1e-3)


def test_snow_is_explained(explained):
    text = explained("snow, undrifted or drifted")
    assert "action S: snow, undrifted or drifted, unfactored" in text
    assert "mu_1 0.8 EN 1991-1-3, Table 5.2" in text
    assert "s 1.2 kN/m2 EN 1991-1-3, eq. (5.1) and 5.3.2(3)" in text
    # 0.8 x 1.5 kN/m2 on 6.9 m of plan, 0.6 m apart
    assert "sum F_y -4.968 kN" in text


def test_wind_is_explained(explained):
    text = explained("wind from the right onto the high eave, c_pi +0.2")
    assert "c_pe, F -2.61 EN 1991-1-4, Table 7.3a" in text  # -2.8 + 0.3 log10(4.286), by hand
    assert "c_pe, windward wall 0.8 EN 1991-1-4, 7.2.1(3) and Table 7.1" in text
    along = explained("wind along the eaves, zone F, c_pi -0.3")
    assert [along.index(f"c_pe, {zone}") for zone in ("F_low", "G", "F_up")] == sorted(
        along.index(f"c_pe, {zone}") for zone in ("F_low", "G", "F_up")
    )
    assert "EN 1991-1-4, Tables 7.2 and 7.3b" in along
