"""A European job with the simplified analysis of EN 1995-1-1, 5.4.3, from the job file to the workbook."""

import json

import openpyxl
import pytest

from rooftruss.cli import main
from tests.en_jobs import BARN


@pytest.fixture(scope="module")
def job(tmp_path_factory):
    text = BARN.read_text("utf-8")
    key = 'truss_analysis = "simplified"\n'
    assert "[timber]\n" in text
    path = tmp_path_factory.mktemp("simplified") / "barn.toml"
    path.write_text(text.replace("[timber]\n", f"[timber]\n{key}"), "utf-8")
    return path


def test_the_workbook_says_what_analysis_was_made_and_what_joints_have_to_carry(job):
    book = job.with_suffix(".xlsx")
    assert main(["quote", str(job), "-o", str(book)]) == 0
    rows = list(openpyxl.load_workbook(book)["Assumptions"].iter_rows(values_only=True))
    text = "\n".join(str(cell) for row in rows for cell in row if cell)
    assert "simplified analysis (EN 1995-1-1, 5.4.3)" in text
    # 9.2.1(9): 1.0 + 0.1 L kN; 8.4 m out to out of the bearings and two tails of 0.45 m
    assert "F_r,d = 1.93 kN" in text
    assert "forces are those of the frame" not in text


def test_the_result_file_names_the_analysis_and_holds_its_forces(job, capsys):
    assert main(["envelope", str(job), "--json", "-"]) == 0
    truss = json.loads(capsys.readouterr().out)["trusses"][0]
    assert truss["analysis"] == "simplified, EN 1995-1-1, 5.4.3"
    # axial forces under dead load are those of the pin-jointed truss under what its beams press on the joints: the
    # moments of the top chord stand over the panel points, so both members there have the same
    dead = truss["effects"]["dead, top chord"]["members"]
    assert dead["top 1"]["moment"][1] == pytest.approx(dead["top 2"]["moment"][0])
    assert dead["web 1"]["moment"] == pytest.approx([0.0, 0.0], abs=1e-6)


def test_explain_names_the_clauses(job, capsys):
    assert main(["explain", str(job), "B1", "top 1"]) == 0
    shown = capsys.readouterr().out
    assert "9.2.1(5)" in shown


def test_a_scissor_is_refused_by_clause(job, capsys, tmp_path):
    text = job.read_text("utf-8").replace('shape = "fink"', 'shape = "scissor"')
    other = tmp_path / "scissor.toml"
    other.write_text(text, "utf-8")
    assert main(["quote", str(other), "-o", str(other.with_suffix(".xlsx"))]) == 2
    said = " ".join(capsys.readouterr().err.split())
    assert "5.4.3(1)" in said
    assert "truss_analysis" in said
    assert not other.with_suffix(".xlsx").exists()
