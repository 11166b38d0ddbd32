"""Tables on a terminal that is narrower than they are, and the reasons below a comparison."""

import re
from dataclasses import replace

import pytest

from rooftruss.basis.jobform import read_job
from rooftruss.design.compare import Alternative
from rooftruss.design.sizing import size_truss
from rooftruss.output import terminal
from rooftruss.output.job_grids import comparison_grid, comparison_notes, quote_grid
from rooftruss.output.numbering import numbering_of
from rooftruss.output.schedule import Column, Grid, shown_grid, texts
from rooftruss.output.terminal import cut, fitted, print_comparison, print_grid
from rooftruss.output.truss_grids import members_grid
from tests.en_jobs import BARN, en_spec


@pytest.fixture(scope="module")
def job():
    return read_job(BARN)


@pytest.fixture(scope="module")
def rows(job):
    """The barn's Fink, a king post that is too weak, and a shape that cannot be made."""
    designs = [size_truss(job, en_spec(shape=shape, panels=None)) for shape in ("fink", "king post")]
    return [
        *(Alternative(shape=design.spec.shape, design=design) for design in designs),
        Alternative(shape="howe", design=None, reason="longest_stock: 5 m, but a chord piece is 6 m long; allow more"),
    ]


@pytest.fixture(params=[80, 100, 200])
def columns(request, monkeypatch):
    """A terminal of this width."""
    monkeypatch.setattr(terminal, "wants_plain", lambda stream: False)
    monkeypatch.setenv("COLUMNS", str(request.param))
    monkeypatch.setenv("NO_COLOR", "1")
    return request.param


def test_no_number_is_broken_over_two_lines(job, rows, columns, capsys):
    designs = [row.design for row in rows if row.design]
    for grid in (comparison_grid(rows), quote_grid(designs), members_grid(designs[0], numbering_of(designs))):
        print_grid(grid, job.units)
        out = capsys.readouterr().out
        assert max(map(len, out.splitlines())) <= columns
        shown = shown_grid(grid, job.units)
        cells = {
            cell
            for row in texts(shown)
            for cell, column in zip(row, shown.columns, strict=True)
            if column.number_format and cell
        }
        words = set(out.split())
        assert cells <= words, cells - words
        assert set(re.findall(r"[^\W\d_]{3,}", " ".join(c.heading for c in shown.columns))) <= set(
            re.findall(r"\w+", out)
        )


def test_each_part_of_a_cut_table_names_its_rows(job, rows, capsys, monkeypatch):
    monkeypatch.setattr(terminal, "wants_plain", lambda stream: False)
    monkeypatch.setenv("COLUMNS", "80")
    print_grid(comparison_grid(rows), job.units)
    out = capsys.readouterr().out
    heads = [line for line in out.splitlines() if re.match(r" *Shape ", line)]
    assert len(heads) == len([line for line in out.splitlines() if re.match(r" *king post ", line)]) > 1


def test_rows_that_one_column_does_not_tell_apart_keep_two(capsys, monkeypatch):
    monkeypatch.setattr(terminal, "wants_plain", lambda stream: False)
    monkeypatch.setenv("COLUMNS", "40")
    more = tuple(Column(f"long heading {k}") for k in range(4))
    rows = tuple(
        (mark, part, *(f"value{part[-1]}{k}" for k in range(4))) for mark in ("T1", "T2") for part in ("a1", "a2")
    )
    print_grid(Grid("", (Column("Truss"), Column("Part"), *more), rows), "US")
    lines = [line.split() for line in capsys.readouterr().out.splitlines() if "value" in line]
    assert all(line[0] in ("T1", "T2") and line[1] in ("a1", "a2") for line in lines)
    assert len(lines) > len(rows)


@pytest.mark.parametrize("room", range(20, 60))
def test_a_combination_stays_beside_its_value(room):
    parts = cut([8, 9, 5, 9, 5, 9, 5], room, tied={2, 4, 6})
    assert all((k in part) == (k + 1 in part) for part in parts for k in (1, 3, 5))
    assert sorted({k for part in parts for k in part}) == list(range(7))


@pytest.mark.parametrize("room", [5, 20, 30, 50, 80, 300])
def test_columns_that_are_cut_are_all_there_once(room):
    widths = [6, 12, 4, 25, 9, 9, 18]
    parts = cut(widths, room)
    assert [k for part in parts for k in part[1:]] == list(range(1, 7))
    assert all(part[0] == 0 for part in parts)
    for part in parts:
        assert len(part) == 2 or sum(widths[k] + 3 for k in part) < room
        assert sum(fitted([(widths[k], widths[k] + 40) for k in part], room)) >= sum(widths[k] for k in part)


def test_a_shape_that_fails_says_why_in_few_words_and_below_in_full(rows):
    fink, king, howe = rows
    assert fink.shortfall == howe.shortfall == ""
    worst = float(king.design.outcome.worst)
    assert worst > 1
    assert king.shortfall == f"E {worst:.2f} vertical deflection"
    results = [row[-1] for row in comparison_grid(rows).rows]
    assert results == ["all checks met", f"NOT met: {king.shortfall} (1)", "not possible (2)"]
    notes = comparison_notes(rows)
    assert notes[0].startswith(f"(1) king post: NOT met: {king.design.failures[0]}")
    assert notes[1] == f"(2) howe: not possible: {howe.reason}"


def test_a_member_that_fails_names_its_rule(job):
    spec = en_spec(span=9.0, spacing=1.8, bearing=0.6)
    weak = replace(spec.timber.groups["web"], sizes=("35x60",))
    timber = replace(spec.timber, groups={**spec.timber.groups, "web": weak})
    design = size_truss(job, replace(spec, timber=timber))
    run, value = design.run, design.outcome.utilisation.value
    k = int(value.argmax())
    assert float(value[k]) == float(design.outcome.worst) > 1  # a member governs, or the test says nothing
    rule = run.checks.rules[int(design.outcome.rule[k])].name
    found = Alternative(shape="fink", design=design).shortfall
    assert found == f"{run.members.names[k]} {float(value[k]):.2f} {rule}"


def test_a_bearing_that_fails_is_named(job):
    design = size_truss(job, en_spec(bearing=0.03))
    worst = float(design.outcome.bearing.value.max())
    assert worst == float(design.outcome.worst) > 1
    assert Alternative(shape="fink", design=design).shortfall == f"bearing A {worst:.2f} across the grain"


def test_the_reasons_stand_below_the_table(job, rows, columns, capsys):
    print_comparison(job, rows)
    out = capsys.readouterr().out
    table, below = out.split("(1) king post: NOT met", 1)
    assert "(2) howe: not possible" in below
    assert "longest_stock" not in table
    assert max(map(len, below.splitlines())) <= columns
