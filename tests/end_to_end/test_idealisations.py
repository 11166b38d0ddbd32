"""Pin-jointed truss beside the frame, idle members, and load cases explained."""

import json

import numpy as np
import openpyxl
import pytest

from rooftruss.cli import main
from rooftruss.design.idealisations import idealisations
from rooftruss.design.idle import idle_members, idle_summary
from tests.end_to_end.demo import REPOSITORY, designed

SHED = REPOSITORY / "demo_jobs" / "gull_point_machine_shed.toml"
HOUSE = REPOSITORY / "demo_jobs" / "alder_row_house.toml"


def test_pin_jointed_fink_under_plan_load_has_the_coefficients_of_statics():
    # Method of sections, through the ridge: the moment of the span there over the rise; the tails relieve it.
    design = designed(HOUSE).designs[0]
    run = design.run
    case = run.cases.names.index("snow, balanced")
    found = idealisations(design).pin_jointed[case]
    names = run.members.names
    w = -sum(
        float((run.cases.x1 - run.cases.x0)[s] * run.cases.q[case, s, 1])
        for s, k in enumerate(run.cases.member_of)
        if names[k].startswith("top")
    )
    span, rise = float(run.family.size.bearing_span), float(run.family.size.pitch * run.family.size.bearing_span / 2)
    tail = float(run.family.size.tail)
    over = w / span * tail**2 / 2  # the tails' moment about each heel relieves the span
    assert found[names.index("bottom 2")] * rise == pytest.approx(w * span / 8 - over, rel=1e-9)


def test_bending_is_what_pins_leave_out():
    design = designed(HOUSE).designs[0]
    found = idealisations(design)
    webs = [k for k, role in enumerate(design.run.members.roles) if role == "web"]
    chords = [k for k, role in enumerate(design.run.members.roles) if role == "top chord"]
    case = design.run.cases.names.index("snow, balanced")
    assert np.abs(found.moment[case, webs]).max() < 1e-6
    assert np.abs(found.moment[case, chords]).min() > 10.0
    assert found.frame[case] == pytest.approx(found.pin_jointed[case], rel=0.5, abs=200.0)


def test_verticals_by_the_heel_of_a_howe_work_for_the_ceiling_only():
    found = idle_summary(designed(SHED).designs[0])
    roof = next(c for c, name in enumerate(designed(SHED).designs[0].run.cases.names) if name == "snow, balanced")
    assert {"web 1", "web 9"} <= set(found.by_case[roof].zero)
    assert idle_members(designed(SHED).designs[0]) == frozenset()  # lights hang on the bottom chord


def test_the_result_file_and_the_workbook_hold_both(tmp_path):
    file, book = tmp_path / "r.json", tmp_path / "q.xlsx"
    assert main(["envelope", str(SHED), "--json", str(file)]) == 0
    truss = json.loads(file.read_text())["trusses"][0]
    assert truss["pin_jointed"].keys() == truss["effects"].keys()
    assert main(["quote", str(SHED), "--pin-jointed", "-o", str(book)]) == 0
    sheet = openpyxl.load_workbook(book)["M1 pin-jointed"]
    cases, members = len(truss["cases"]), len(truss["members"])
    rows = [row for row in sheet.iter_rows(min_row=6, values_only=True) if row[2]]
    assert len(rows) == cases * members
    first = truss["pin_jointed"][truss["cases"][0]["name"]]["top 1"] / 4.4482216152605
    assert rows[0][3] == pytest.approx(first)


def test_a_load_case_is_explained_by_its_name(capsys):
    assert main(["explain", str(HOUSE), "T1", "Snow, Unbalanced, wind from left"]) == 0
    out = capsys.readouterr().out
    assert "surcharge width" in out
    assert "ASCE 7-22, eq. 7.6-1" in out
    assert "top 3, from its start 0 ft to" in out
