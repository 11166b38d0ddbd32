"""What a Eurocode job prints beside its numbers: assumptions for keys left out, what changes a scheme, case names."""

import openpyxl
import pytest

from rooftruss.basis.jobform import read_job
from rooftruss.basis.scheme_variants import require_like, variants_of
from rooftruss.basis.schemes import load_scheme
from rooftruss.cli import main
from rooftruss.errors import JobError
from rooftruss.output.catalogue_grids import variants_text
from rooftruss.output.job_grids import assumptions_grid
from rooftruss.run import run_file
from tests.en_jobs import BARN
from tests.jobs import HOUSE


def barn_with(tmp_path, *changes):
    """The barn's job file with texts of it replaced."""
    text = BARN.read_text("utf-8")
    for old, new in changes:
        assert old in text
        text = text.replace(old, new, 1)
    path = tmp_path / "barn.toml"
    path.write_text(text, "utf-8")
    return path


SITE = ("[site]\n", '[site]\nexceptional_snow = "3 kPa"\nwind_loaded_area = "12 m^2"\n')
LIMIT = ("[[truss]]", '[deflection]\nhorizontal = "20 mm"\n\n[[truss]]')


def assumed(path):
    return {a.place: a.text for a in read_job(path).assumptions}


@pytest.mark.parametrize(
    ("place", "words"),
    [
        ("[site] exceptional_snow", ("no exceptional snow load", "s_Ad", "EN 1991-1-3, 4.3")),
        ("[site] wind_loaded_area", ("roof area of one truss", "EN 1991-1-4, 7.2.1")),
        ("[deflection] horizontal", ("31.75 mm", "1.25 in", "EN 1995-1-1 gives no limit", "[deflection] horizontal")),
    ],
)
def test_what_stands_for_a_key_left_out_is_printed(tmp_path, place, words):
    without, given = assumed(BARN), assumed(barn_with(tmp_path, SITE, LIMIT))
    assert all(word in without[place] for word in words)
    assert place not in given


def test_the_sheet_assumptions_holds_them(tmp_path):
    result = run_file(BARN)
    printed = dict(assumptions_grid(result.job, result.designs).rows)
    for place in ("[site] exceptional_snow", "[site] wind_loaded_area", "[deflection] horizontal"):
        assert any(place in about for about in printed), place
    given = run_file(barn_with(tmp_path, SITE))
    printed = dict(assumptions_grid(given.job, given.designs).rows)
    assert printed["[site] exceptional_snow"] == "as the job gives it: 3 kN/m2"


def test_jobs_to_the_nds_keep_their_own_words():
    assert "published practice for plated trusses" in assumed(HOUSE)["[deflection] horizontal"]


# --- schemes -----------------------------------------------------------------------------------------------------


def test_a_scheme_without_a_site_says_which_keys_change_it(capsys):
    assert main(["schemes", "en1990-6.10"]) == 0
    line = next(line for line in capsys.readouterr().out.splitlines() if line.startswith("Factors"))
    for words in ("altitude (over 1000 m)", "(germany)", "loft (storage)", "consequence_class (CC1 or CC3)"):
        assert words in line
    assert main(["schemes", "asce7-22-asd"]) == 0
    assert "Factors" not in capsys.readouterr().out


@pytest.mark.parametrize("name", ["en1990-6.10", "en1990-6.10ab", "en1990-finland"])
def test_each_key_named_does_change_the_scheme(name):
    usual = load_scheme(name)
    values = {"over 1000 m": 1000.1, "over 2.75 kN/m2": 2751.0}
    found = variants_of(usual, name)
    assert found
    for key, words in found.items():
        for word in words:
            assert load_scheme(name, site={key: values.get(word, word)}) != usual, (key, word)


OWN = """
title = "Own"
load_standard = "EN 1991"
timber_standard = "EN 1995-1-1"
source = "own"
durations = [{ name = "permanent", actions = ["D"] }, { name = "short-term", actions = ["S"] }]

[values]
g = 1.5

[[variants]]
key = "own_key"
over = 2.0
values = { g = 1.7 }

[[strength]]
clause = "own"
expression = "D + g S"
"""


def test_the_variants_of_a_scheme_of_ones_own(tmp_path):
    (tmp_path / "own.toml").write_text(OWN, "utf-8")
    scheme = load_scheme("own.toml", tmp_path)
    assert variants_of(scheme, "own.toml", tmp_path) == {"own_key": ("over 2",)}
    assert variants_text({}) == ""


def test_a_scheme_with_a_job_is_shown_as_on_its_site(tmp_path, capsys):
    path = barn_with(tmp_path, ('altitude = "350 m"', 'altitude = "1200 m"'))
    assert main(["schemes", "en1990-6.10", "--job", str(path)]) == 0
    out = capsys.readouterr().out
    assert "1.35G + 1.5W + 1.05S" in out  # EN 1990, Table A1.1: psi_0 of snow is 0.7 above 1000 m
    assert "Factors" not in out
    assert "B1:" in out


def test_a_job_to_other_standards_is_refused(capsys):
    with pytest.raises(JobError, match=r"birch_lane_barn\.toml is a job to EN 1991; .* a job to ASCE 7-22"):
        require_like(read_job(BARN), load_scheme("asce7-22-asd"))
    assert main(["schemes", "en1990-6.10", "--job", str(HOUSE)]) == 2
    shown = capsys.readouterr()
    assert "is a job to ASCE 7-22; for the scheme en1990-6.10 give --job a job to EN 1991" in shown.err
    assert shown.out == ""


# --- workbook ----------------------------------------------------------------------------------------------------

NOTE = "water tank of 300 l on bearers over three trusses near the ridge of the barn"
NAME = "snow that slid from the upper roof, 2026"
LOADS = f"""
[[loads.point]]
action = "D"
chord = "bottom"
position = "4 m"
force = "400 N"
note = "{NOTE}"

[[loads.case]]
name = "{NAME}"
action = "S"
loads = [{{ surface = "left slope", kind = "plan", pressure = "0.9 kPa" }}]

[[truss]]"""


def test_names_of_cases_are_whole_on_their_sheet(tmp_path):
    """Texts in Arial 9 take 5 pixels a letter at most on the average of such words, a column 7 a character."""
    path, book = barn_with(tmp_path, ("\n[[truss]]", LOADS)), tmp_path / "barn.xlsx"
    assert main(["quote", str(path), "-o", str(book)]) in (0, 1)
    sheet = openpyxl.load_workbook(book)["Cases"]
    names = [cell.value for cell in sheet["B"] if cell.value]
    assert NAME in names
    assert max(map(len, names)) > 45
    checked = 0
    for letter in "BC":
        room = 7 * sheet.column_dimensions[letter].width
        for cell in sheet[letter][4:]:
            lines = -(-5 * len(cell.value or "") // int(room))
            height = sheet.row_dimensions[cell.row].height or 12.75
            assert lines <= 1 or (cell.alignment.wrap_text and height >= 12.75 * lines), cell.value
            checked += lines > 1
    assert checked == 2  # the note of the tank, with its force and with its place
