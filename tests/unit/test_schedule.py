import io
import math
from dataclasses import replace
from itertools import pairwise

import pytest

from rooftruss.loads.roof import Value
from rooftruss.output.case_grids import cases_grids
from rooftruss.output.cautions import CAUTIONS, SHORT_CAUTIONS
from rooftruss.output.job_grids import (
    assumptions_grid,
    combinations_grid,
    comparison_grid,
    comparison_notes,
    quote_grid,
)
from rooftruss.output.numbering import numbering_of
from rooftruss.output.picture import picture
from rooftruss.output.schedule import BEYOND, Column, Grid, Measure, formatted, frame, shown_grid, texts
from rooftruss.output.terminal import plain_lines, print_envelope, print_grid, wants_plain
from rooftruss.output.truss_grids import (
    deflections_grid,
    loading_grid,
    members_grid,
    named_combinations_grid,
    reactions_grid,
    sizes_grid,
)
from tests.unit.output_jobs import job_and_designs


def rows_of(grid: Grid, units: str = "US") -> list[dict[str, object]]:
    shown = shown_grid(grid, units)
    return [dict(zip([c.heading for c in shown.columns], row, strict=True)) for row in shown.rows]


def test_every_kind_is_shown_in_the_units_asked_for():
    grid = Grid(
        "All",
        (
            Column("Length", "length"),
            Column("Pitch", "pitch"),
            Column("Comb.", "combination"),
            Column("Result", "result"),
            Column("Value", "own"),
        ),
        ((3.048, 0.5, 7, True, Measure(47.88025898, "pressure")), (math.inf, None, 0, False, None)),
    )
    us, metric, si = (shown_grid(grid, units) for units in ("US", "metric", "SI"))
    assert us.rows[0] == (pytest.approx(10.0), "6/12", 7, "met", pytest.approx(1.0), "psf")
    assert metric.rows[0][1] == pytest.approx(26.565, abs=1e-3)
    assert metric.rows[0][4:] == (pytest.approx(0.04788), "kN/m2")
    assert si.rows[0][0] == 3.048
    assert us.rows[1] == (BEYOND, None, "-", "NOT met", None, None)
    assert [c.label for c in us.columns] == ["Length [ft]", "Pitch", "Comb.", "Result", "Value", "unit"]
    assert [c.label for c in si.columns][:2] == ["Length [m]", "Pitch [deg]"]


@pytest.mark.parametrize("units", ["US", "metric"])
@pytest.mark.parametrize("kind", ["force", "moment", "stress", "deflection", "length", "ratio", "volume", "angle"])
def test_no_number_is_shown_as_minus_nothing(kind, units):
    grid = Grid("", (Column("Value", kind), Column("Own", "own")), tuple((v, Measure(v, kind)) for v in (-0.0, -1e-14)))
    shown = shown_grid(grid, units)
    decimals = shown.columns[0].number_format.partition(".")[2]
    for cells, row in zip(texts(shown), shown.rows, strict=True):
        assert cells[0] == ("0." + decimals if decimals else "0")
        assert math.copysign(1.0, row[0]) == 1.0  # a spreadsheet shows the sign of what it rounds to nothing
    assert next(texts(shown))[1] == "0"
    large = shown_grid(Grid("", (Column("Value", kind),), ((-1e6,),)), units)
    assert next(texts(large))[0].startswith("-")


def test_a_negative_number_keeps_what_its_format_shows():
    # 1 lbf is 4.4482216152605 N
    rows = shown_grid(Grid("", (Column("Force", "force"),), ((-4.448 * 0.4,), (-4.448 * 0.6,))), "US").rows
    assert rows == ((0.0,), (pytest.approx(-0.6, rel=1e-3),))
    assert [formatted(v, "0.00") for v in (-0.004, -0.006)] == ["0.00", "-0.01"]


def test_frame_has_units_in_its_headings():
    _, designs = job_and_designs()
    data = frame(quote_grid(designs), "SI")
    assert list(data["Truss"]) == ["T1", "T2", "T3"]
    assert data["Span [m]"][0] == pytest.approx(28 * 0.3048)
    assert data["Weight in all [kg]"][0] == pytest.approx(18 * data["Weight each [kg]"][0])
    assert frame(quote_grid(designs), "US")["Span [ft]"][0] == pytest.approx(28.0)


def test_quote_says_in_words_what_is_not_met():
    _, designs = job_and_designs()
    results = [row["Result"] for row in rows_of(quote_grid(designs))]
    assert results == ["all checks met", "NOT met, see its sheet", "all checks met"]


def test_members_carry_the_extremes_of_the_envelope_and_their_combinations():
    _, designs = job_and_designs()
    design, numbering = designs[0], numbering_of(designs)
    lines = {line.number: line.name for line in numbering.lines}
    peak = design.outcome.envelope.compression
    for k, row in enumerate(rows_of(members_grid(design, numbering, {"web 1"}), "SI")):
        assert row["Member"] == design.run.members.names[k]
        assert row["Compression"] == float(peak.value[k])
        assert row["Zero-force member"] == ("yes" if row["Member"] == "web 1" else None)
    compressed = shown_grid(members_grid(design, numbering), "SI").rows[0]
    assert lines[compressed[8]] == design.combination(int(peak.combination[0]))


def test_numbers_are_shared_between_trusses():
    _, designs = job_and_designs()
    numbering = numbering_of(designs)
    assert [line.number for line in numbering.lines] == list(range(1, len(numbering.lines) + 1))
    kinds = [line.kind != "" for line in numbering.lines]
    assert kinds == sorted(kinds), "strength combinations come first"
    for design in designs:
        own = numbering.combinations_of(design)
        names = [numbering.lines[n - 1].name for n in own]
        assert names == list(design.run.combinations.names)
    assert len(numbering.lines) < sum(len(d.run.combinations.names) for d in designs)
    names = {name for d in designs for name in d.run.cases.names}
    assert set(numbering.cases) == names
    assert sorted(numbering.cases.values()) == list(range(1, len(names) + 1))


def test_combinations_list_factors_and_cases():
    _, designs = job_and_designs()
    numbering = numbering_of(designs)
    rows = rows_of(combinations_grid(numbering, designs))
    design = designs[0]
    made, names = design.run.combinations, design.run.cases.names
    for k, number in enumerate(numbering.combinations_of(design)):
        found: dict[int, float] = {}
        for action in ("D", "L", "Lr", "S", "W"):
            for case in str(rows[number - 1][f"{action} cases"] or "").replace(" ", "").split(","):
                if case:
                    found[int(case)] = rows[number - 1][f"{action} factor"]
        assert found == {numbering.cases[n]: pytest.approx(f) for n, f in zip(names, made.factors[k], strict=True) if f}


def test_cases_list_every_value_once_for_each_truss():
    _, designs = job_and_designs()
    (grid,) = cases_grids(designs, numbering_of(designs))
    shown = rows_of(grid, "SI")
    known = {(r["Quantity"], r["T1"]) for r in shown}
    for head in designs[0].run.cases.heads:
        for value in head.values:
            assert any(q == value.symbol and v == float(f"{float(value.value):.4g}") for q, v in known), value
    ground = [r for r in shown if r["Quantity"] == "p_g"]
    assert len(ground) == 1, "what all snow cases share is listed once"
    assert ground[0]["T1"] == pytest.approx(1915.0, rel=1e-3)
    forces = [r for r in shown if r["Quantity"] == "air handler, force"]
    assert forces[0]["T1"] == pytest.approx(120 * 4.4482216, rel=1e-3)


def test_a_case_value_that_differs_between_trusses_is_not_merged():
    _, designs = job_and_designs()
    run = designs[0].run
    heads = tuple(
        replace(h, values=(Value(symbol="Z", value=7.0, kind="factor", clause="none"),)) for h in run.cases.heads
    )
    other = replace(
        designs[0], spec=replace(designs[0].spec, mark="T9"), run=replace(run, cases=replace(run.cases, heads=heads))
    )
    (grid,) = cases_grids([designs[0], other], numbering_of([designs[0], other]))
    odd = [r for r in rows_of(grid, "SI") if r["Quantity"] == "Z"]
    assert odd
    assert all(r["T1"] is None and r["T9"] == 7.0 for r in odd)


def test_loading_totals_balance_the_reactions():
    _, designs = job_and_designs()
    for design in designs:
        found = {row["Load case"]: row for row in rows_of(loading_grid(design, numbering_of([design])), "SI")}
        rows = [found[name] for name in design.run.cases.names]
        up = design.run.solution.reactions.sum(axis=-2)
        largest = max(abs(up).max(), 1.0)
        for row, reaction in zip(rows, up, strict=True):
            assert row["Total down"] == pytest.approx(reaction[1], abs=1e-6 * largest)
            assert row["Total right"] == pytest.approx(-reaction[0], abs=1e-6 * largest)


def test_other_grids_name_only_combinations_that_are_listed():
    _, designs = job_and_designs()
    numbering = numbering_of(designs)
    for design in designs:
        grids = (
            members_grid(design, numbering),
            reactions_grid(design, numbering),
            deflections_grid(design, numbering),
        )
        named = {row[k] for g in grids for k, c in enumerate(g.columns) if c.kind == "combination" for row in g.rows}
        listed = {row[0] for row in named_combinations_grid(design, numbering).rows}
        assert named - {0} == listed


def test_sizes_and_comparison():
    from rooftruss.design.compare import Alternative

    _, designs = job_and_designs()
    sizes = rows_of(sizes_grid(designs))
    assert [(r["Truss"], r["Part"]) for r in sizes][:3] == [("T1", "top chord"), ("T1", "bottom chord"), ("T1", "web")]
    assert any(r["Result"] == "NOT met" for r in sizes if r["Truss"] == "T2")
    rows = [Alternative(shape="fink", design=designs[0]), Alternative(shape="howe", design=None, reason="too steep")]
    shown = rows_of(comparison_grid(rows))
    assert shown[0]["Result"] == "all checks met"
    found = designs[0].outcome.deflection
    sags = [abs(float(v)) for p, v in zip(found.places, found.value, strict=True) if p.name.startswith(("top", "bot"))]
    assert shown[0]["Largest deflection"] >= max(sags) / 0.0254 * (1 - 1e-9)
    assert shown[1]["Result"] == "not possible (1)"
    assert comparison_notes(rows) == ("(1) howe: not possible: too steep",)


def test_assumptions_hold_those_of_the_job_and_of_the_model_once():
    job, designs = job_and_designs()
    texts = [str(row[1]) for row in assumptions_grid(job, designs).rows]
    assert len(texts) == len(set(texts))
    assert {a.text for a in job.assumptions} <= set(texts)
    assert {n for d in designs for n in d.notes} <= set(texts)
    assert any("roller" in t for t in texts)


def test_cautions_say_what_is_not_designed_and_promise_nothing():
    everything = " ".join((*CAUTIONS, *SHORT_CAUTIONS)).lower()
    for word in ("licensed engineer", "building code", "connections", "bracing", "erection", "foundations", "anchors"):
        assert word in everything
    for word in (" safe", "approved", "guarantee"):
        assert word not in everything


def test_picture_holds_every_member_and_panel_point():
    _, designs = job_and_designs()
    for design in designs:
        drawn = picture(design)
        made, xy = design.run.family.topology, design.run.truss.xy
        strokes = {frozenset(pair) for path in drawn.paths for stroke in path.strokes for pair in pairwise(stroke)}
        places = [tuple(map(float, p)) for p in xy]
        for member in made.members:
            assert frozenset((places[member.start], places[member.end])) in strokes
        assert [label.text for label in drawn.member_names] == list(made.names)
        assert [(label.text, label.at) for label in drawn.panel_points] == list(zip(made.nodes, places, strict=True))
        left, bottom, right, top = drawn.box
        points = [p for path in drawn.paths for stroke in path.strokes for p in stroke]
        assert all(left < x < right and bottom < y < top for x, y in points)


def test_terminal_prints_plain_aligned_text(capsys, monkeypatch):
    job, designs = job_and_designs()
    print_envelope(job, designs[0], numbering_of(designs))
    out = capsys.readouterr().out
    assert "\x1b" not in out
    assert "Compression" in out
    assert out.splitlines()[0] == "Truss T1"

    class Screen(io.StringIO):
        def isatty(self):
            return True

    monkeypatch.setenv("TERM", "xterm")
    monkeypatch.delenv("NO_COLOR", raising=False)
    assert not wants_plain(Screen())
    monkeypatch.setenv("NO_COLOR", "1")
    assert wants_plain(Screen())
    lines = plain_lines(shown_grid(sizes_grid(designs), "US"))
    assert len({len(line) for line in lines[1:]}) <= 3


def test_terminal_prints_in_colour_on_a_screen(monkeypatch):
    class Screen(io.StringIO):
        def isatty(self):
            return True

    screen = Screen()
    monkeypatch.setattr("sys.stdout", screen)
    monkeypatch.setenv("TERM", "xterm")
    monkeypatch.setenv("COLUMNS", "200")
    monkeypatch.delenv("NO_COLOR", raising=False)
    print_grid(Grid("Names", (Column("Name"), Column("Result", "result")), (("[bold]T1", False),)), "US")
    assert "[bold]T1" in screen.getvalue(), "text is no markup"
    assert "\x1b[" in screen.getvalue()
