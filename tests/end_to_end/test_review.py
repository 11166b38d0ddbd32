"""What a review with fresh eyes found; each of these was wrong once."""

import os

import numpy as np
import openpyxl
import pytest

from rooftruss.basis.jobform import read_job
from rooftruss.cli import main
from rooftruss.errors import JobError
from rooftruss.run import run_file
from tests.end_to_end.demo import HOUSE, changed_house, designed


def test_a_result_file_never_takes_the_place_of_a_job_file(tmp_path, capsys):
    job = changed_house(tmp_path / "job.toml")
    before = job.read_bytes()
    for name in (job, tmp_path / "other.toml", ""):
        assert main(["envelope", str(job), "--json", str(name)]) == 2
    assert "give the result file another" in capsys.readouterr().err
    assert job.read_bytes() == before
    assert [p.name for p in tmp_path.iterdir()] == ["job.toml"]


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="no named pipes here")
def test_a_pipe_is_not_replaced_by_a_file(tmp_path, capsys):
    os.mkfifo(tmp_path / "pipe.json")
    assert main(["envelope", str(HOUSE), "--json", str(tmp_path / "pipe.json")]) == 2
    assert "is not an ordinary file" in capsys.readouterr().err
    assert not (tmp_path / "pipe.json").is_file()


def test_a_heel_post_presses_on_the_bottom_chord_where_it_is_narrower_than_the_bearing(tmp_path):
    """Statics: all of the reaction goes through the post; NDS 3.10.2 over the 3.5 in of a 2x4 post, not the bearing."""
    wide = (
        ('bearing = "3.5 in"', 'bearing = "7.25 in"'),
        ('spacing = "24 in"', 'spacing = "24 in"\nheel_height = "16 in"'),
    )
    design = run_file(changed_house(tmp_path / "job.toml", *wide)).designs[0]
    post = design.sizes["web"].section
    reaction = float(design.outcome.reactions.down.value[0])
    stress = reaction / (post.depth * design.sizes["bottom chord"].section.breadth)
    reference = float(design.run.members.properties["Fc_perp"][design.run.members.names.index("bottom 1")])
    assert float(design.outcome.bearing.value[0]) == pytest.approx(stress / reference)


def test_a_truss_narrower_than_the_building_takes_the_buildings_width(tmp_path):
    """ASCE 7, Fig. 27.3-1: L is the plan dimension of the building, not the span of one truss."""
    tall = ('mean_roof_height = "16 ft"', 'mean_roof_height = "58 ft"')
    with pytest.raises(Exception, match="give \\[site\\] building_width"):
        run_file(changed_house(tmp_path / "narrow.toml", tall))
    width = ('building_length = "60 ft"', 'building_length = "60 ft"\nbuilding_width = "40 ft"')
    design = run_file(changed_house(tmp_path / "wide.toml", tall, width)).designs[2]
    head = next(h for h in design.run.cases.heads if h.name.startswith("wind from left, first"))
    ratio = next(v for v in head.values if v.symbol == "h/L")
    assert float(np.asarray(ratio.value)) == pytest.approx(58 / 40)


def test_a_point_load_cannot_hold_the_roof_down_in_the_wind(tmp_path):
    with pytest.raises(JobError, match="action: 'W'"):
        read_job(changed_house(tmp_path / "job.toml", ('action = "D"', 'action = "W"')))


def test_the_workbook_says_what_the_job_gave(tmp_path):
    path = tmp_path / "q.xlsx"
    assert main(["quote", str(HOUSE), "-o", str(path)]) == 0
    said = [
        (str(row[0]), str(row[1])) for row in openpyxl.load_workbook(path)["Assumptions"].iter_rows(values_only=True)
    ]
    text = "\n".join(f"{place}: {what}" for place, what in said)
    for words in (
        "ground_snow: as the job gives it: 40 psf",
        "wind_speed: as the job gives it: 115 mph",
        "as the job gives it: partially exposed",
        "top chord sheathed, bottom chord sheathed, web midpoint",
        "longest stock 20 ft",
        "bottom chord pitch 3/12",
    ):
        assert words in text


def test_a_heel_too_low_for_some_sizes_says_how_many(tmp_path):
    low = ('spacing = "24 in"', 'spacing = "24 in"\nheel_height = "7 in"')
    text = HOUSE.read_text("utf-8")
    first = text.index("[[truss]]", text.index('mark = "T1"'))
    path = tmp_path / "job.toml"
    path.write_text(text[:first].replace(*low), "utf-8")
    (design,) = run_file(path).designs
    assert any("the raised heel is too low for" in note for note in design.notes)


def test_large_numbers_are_written_out(capsys):
    assert main(["explain", str(HOUSE), "T1", "top 1"]) == 0
    assert "510,000" in capsys.readouterr().out
    assert designed(HOUSE).passes


def test_the_edition_of_the_timber_standard_is_a_choice(tmp_path, capsys):
    path = changed_house(
        tmp_path / "job.toml", ('scheme = "asce7-22-asd"', 'scheme = "asce7-22-asd"\ntimber_edition = "2024"')
    )
    design = run_file(path).designs[0]
    assert design.run.family.timber.name == "NDS 2024 ASD"
    assert main(["explain", str(path), "T1", "top 1"]) == 0
    assert "NDS 2024 eq. 3.7-1" in capsys.readouterr().out


def test_a_building_lower_than_its_roof_is_refused(tmp_path, capsys):
    job = tmp_path / "low.toml"
    text = (HOUSE.parent / "birch_lane_barn.toml").read_text("utf-8")
    job.write_text(text.replace('building_height = "6 m"', 'building_height = "2 m"'), "utf-8")
    assert main(["quote", str(job), "-o", str(tmp_path / "q.xlsx")]) == 2
    assert "building_height is less than the rise of the roof" in capsys.readouterr().err


def test_no_ceiling_hangs_under_a_tail(tmp_path):
    """IBC Table 1604.3: 180/180/120 where no ceiling hangs, whatever the ceiling of the room inside."""
    plaster = ("[timber]\ntop_chord", '[deflection]\nceiling = "plaster"\n\n[timber]\ntop_chord')
    found = run_file(changed_house(tmp_path / "job.toml", plaster)).designs[0].outcome.deflection
    limits = {p.name: float(w) for p, w in zip(found.places, found.limit, strict=True)}
    overhang = (16 + 1.75) * 0.0254
    assert 2 * overhang / limits["H"] in [pytest.approx(n) for n in (120, 180)]
    assert (28 * 12 - 3.5) * 0.0254 / limits["mid top 1" if "mid top 1" in limits else "top 1"] in [
        pytest.approx(n) for n in (240, 360)
    ]
