"""The quote workbook, read back from the file: numbers, text, print settings, drawing."""

import itertools
import math
import re
import zipfile
from pathlib import Path

import numpy as np
import pytest
from openpyxl import load_workbook
from openpyxl.utils import get_column_letter

from rooftruss.cli import main
from rooftruss.design.design import Design
from rooftruss.design.serviceability import unlimited
from rooftruss.output.workbook.letters import column_pixels, lines_of, text_width
from rooftruss.run import Result
from tests.end_to_end.demo import DEMO_JOBS, changed_house, designed

# SI sizes of the units that a sheet may name: international foot and pound, standard gravity
UNITS = {
    "ft": 0.3048,
    "in": 0.0254,
    "ft3": 0.3048**3,
    "lb": 0.45359237,
    "lbf": 0.45359237 * 9.80665,
    "lbf ft": 0.45359237 * 9.80665 * 0.3048,
    "psf": 0.45359237 * 9.80665 / 0.3048**2,
    "m": 1.0,
    "mm": 1e-3,
    "m3": 1.0,
    "kg": 1.0,
    "kN": 1e3,
    "kN m": 1e3,
    "kN/m2": 1e3,
    "deg": math.pi / 180,
}
COLUMNS = range(1, 40)
LETTER, A4 = 1, 9  # paper sizes as the file format numbers them
ALWAYS = ("Combinations", "Cases", "Geometry", "Assumptions", "Cautions")
Row = dict[str, object]


class Quote:
    """A job, its designs and its workbook as read back."""

    def __init__(self, job: Path, file: Path) -> None:
        assert main(["quote", str(job), "-o", str(file)]) == 0
        self.file = file
        self.result: Result = designed(job)
        self.book = load_workbook(file)
        self.numbers = {row["No."]: row for row in self.grid("Combinations", "No.")}

    def grid(self, sheet: str, first: str) -> list[Row]:
        """Rows of the grid whose first heading is `first`: by heading, numbers in SI; "Comb." follows its number.

        A heading "Comb." is kept under the name of the heading before it with " by" behind.
        """
        rows = list(self.book[sheet].iter_rows(values_only=True))
        at = next(k for k, row in enumerate(rows) if row[0] == first)
        headings, before = {}, ""
        for column, heading in enumerate(rows[at]):
            if heading is not None:
                before, headings[column] = heading, f"{before} by" if heading == "Comb." and before else heading
        under = rows[at + 1]
        units = under if under[0] is None and any(under) else (None,) * len(under)
        out = []
        for row in rows[at + (2 if any(units) else 1) :]:
            if row[0] is None:
                break
            out.append({name: _si(row[column], units[column]) for column, name in headings.items()})
        return out

    def named(self, number: object) -> str:
        """Name of the combination with a number; a dash where there is none."""
        return "-" if number == "-" else str(self.numbers[number]["Combination"])


def _si(value: object, unit: object) -> object:
    return value * UNITS[str(unit)] if unit and isinstance(value, int | float) else value


@pytest.fixture(scope="module", params=[*DEMO_JOBS, "metric"], ids=lambda p: getattr(p, "stem", p))
def quote(request, tmp_path_factory) -> Quote:
    folder = tmp_path_factory.mktemp("quote")
    job = request.param
    if job == "metric":
        job = changed_house(folder / "metric.toml", ('units = "US"', 'units = "metric"'))
    return Quote(job, folder / "quote.xlsx")


def cut_off(sheet) -> list[str]:
    """Texts that are wider than their cell and the free ones to the right of it, or have more lines than their row."""
    merged = {cell for part in sheet.merged_cells.ranges for row in sheet[part.coord] for cell in row}
    pixels = [0.0, *(column_pixels(sheet.column_dimensions[get_column_letter(k)].width) for k in COLUMNS)]
    found = []
    for row in sheet.iter_rows():
        for cell in row:
            if not isinstance(cell.value, str) or cell in merged or cell.alignment.horizontal == "right":
                continue
            own = pixels[cell.column] - (9 if cell.alignment.indent else 0)  # an indent is 9 pixels
            width = text_width(cell.value, cell.font.sz) * (1.08 if cell.font.b else 1.0)
            if cell.alignment.wrap_text:
                height = sheet.row_dimensions[cell.row].height or 12.75
                fits = lines_of(cell.value, own) * 1.15 * cell.font.sz <= height + 2
            else:
                free = itertools.takewhile(lambda other: other.value is None, row[cell.column :])
                fits = width + 4 <= own + sum(pixels[other.column] for other in free)
            if not fits:
                found.append(f"{cell.coordinate} {cell.value}")
    return found


def test_no_text_is_cut_off(quote):
    for sheet in quote.book:
        assert cut_off(sheet) == [], sheet.title


def test_sheets(quote):
    marks = [d.spec.mark for d in quote.result.designs]
    assert quote.book.sheetnames == ["Quote", *marks, *ALWAYS]


def governing(design: Design, peak, k: int) -> tuple[float, str]:
    return float(peak.value[k]), design.combination(int(peak.combination[k]))


def test_every_number_of_the_member_schedule(quote):
    for design in quote.result.designs:
        rows = quote.grid(design.spec.mark, "Member")
        assert [row["Member"] for row in rows] == list(design.run.members.names)
        envelope, members = design.outcome.envelope, design.run.family.topology.members
        for k, row in enumerate(rows):
            for heading, peak in (
                ("Tension", envelope.tension),
                ("Compression", envelope.compression),
                ("Bending moment", envelope.moment),
                ("Shear", envelope.shear),
                ("Utilisation", design.outcome.utilisation),
            ):
                value, name = governing(design, peak, k)
                assert row[heading] == pytest.approx(value, rel=1e-9, abs=1e-6), (row["Member"], heading)
                assert quote.named(row[f"{heading} by"]) == name, (row["Member"], heading)
            assert row["Length"] == pytest.approx(float(design.run.truss.length[k]), rel=1e-12)
            assert row["Part"] == members[k].role
            option = design.sizes[members[k].group]
            assert str(row["Size"]).endswith(option.section.name)
            assert row["Grade"] == option.grade.name
            assert row["Result"] == ("met" if design.outcome.utilisation.value[k] <= 1 else "NOT met")


def test_every_reaction_and_bearing(quote):
    for design in quote.result.designs:
        rows = quote.grid(design.spec.mark, "Panel point")
        made, found = design.run.family.topology, design.outcome
        assert [row["Panel point"] for row in rows] == [made.nodes[s.node] for s in made.supports]
        for k, row in enumerate(rows):
            for heading, peak in (
                ("Down", found.reactions.down),
                ("Uplift", found.reactions.uplift),
                ("Sideways", found.reactions.horizontal),
                ("Utilisation", found.bearing),
            ):
                value, name = governing(design, peak, k)
                assert row[heading] == pytest.approx(value, rel=1e-9, abs=1e-6), heading
                assert quote.named(row[f"{heading} by"]) == name, heading


def test_every_deflection(quote):
    for design in quote.result.designs:
        rows, found = quote.grid(design.spec.mark, "Place"), design.outcome.deflection
        others = unlimited(design.run)  # kinds without a limit stand below
        assert len(rows) == len(found.places) + len(others)
        for k, (row, place) in enumerate(zip(rows, found.places, strict=False)):
            assert str(row["Place"]).removeprefix("mid ") == place.name
            assert row["Direction"] == place.direction
            assert row["Deflection"] == pytest.approx(float(found.value[k]), rel=1e-9)
            assert row["Limit"] == pytest.approx(float(found.limit[k]), rel=1e-9)
            assert row["Share of limit"] == pytest.approx(float(found.ratio[k]), rel=1e-9)
            under = design.combination(int(found.combination[k])).removeprefix("deflection, ")
            assert quote.named(row["Share of limit by"]) == under
            assert row["Result"] == "met"
            assert str(row["Limit and loads"]).startswith(f"{found.about(k)}: ")
            ratio = found.rule(k).ratio
            assert (f", l/{ratio:g}: " in str(row["Limit and loads"])) == (place.direction == "vertical")
        for row, largest in zip(rows[len(found.places) :], others, strict=True):
            assert str(row["Place"]).removeprefix("mid ") == largest.place.name
            assert row["Deflection"] == pytest.approx(largest.value, rel=1e-9)
            assert (row["Limit"], row["Share of limit"], row["Result"]) == (None, None, None)
            assert f"{largest.kind.name} " in str(row["Limit and loads"])
            assert ", no limit: " in str(row["Limit and loads"])


def test_the_first_page_and_its_sums(quote):
    *rows, total = quote.grid("Quote", "Truss")
    for row, design in zip(rows, quote.result.designs, strict=True):
        outcome, spec = design.outcome, design.spec
        assert (row["Truss"], row["Quantity"], row["Shape"]) == (spec.mark, spec.quantity, spec.shape)
        pitch = row["Pitch"]
        rise = float(pitch.removesuffix("/12")) / 12 if isinstance(pitch, str) else math.tan(float(pitch))
        assert rise == pytest.approx(spec.pitch)
        for heading, value in (
            ("Span", spec.span),
            ("Spacing", spec.spacing),
            ("Overhang", spec.overhang),
            ("Timber each", float(outcome.volume)),
            ("Timber in all", float(outcome.volume) * spec.quantity),
            ("Weight each", float(outcome.mass)),
            ("Weight in all", float(outcome.mass) * spec.quantity),
            ("Most down", float(outcome.reactions.down.value.max())),
            ("Most uplift", float(outcome.reactions.uplift.value.max())),
            ("Worst ratio", float(outcome.worst)),
        ):
            assert row[heading] == pytest.approx(value, rel=1e-9, abs=1e-6), heading
    for heading in ("Quantity", "Timber in all", "Weight in all"):
        assert total[heading] == pytest.approx(sum(row[heading] for row in rows))


def test_every_combination_of_every_truss_with_its_factors(quote):
    cases = numbered_cases(quote)
    for design in quote.result.designs:
        made, names = design.run.combinations, design.run.cases.names
        actions = {h.name: h.action for h in design.run.cases.heads}
        listed = {combination_key(row, cases) for row in quote.numbers.values()}
        for k, name in enumerate(made.names):
            acting = frozenset((actions[names[c]], names[c], float(f)) for c, f in enumerate(made.factors[k]) if f)
            short = name.removeprefix("deflection, ")
            assert (short, made.clauses[k], made.durations[k], acting) in listed, name


def numbered_cases(quote: Quote) -> dict[str, str]:
    """Case names by the number that the sheet Cases gives them."""
    rows = quote.book["Cases"].iter_rows(values_only=True)
    return {str(row[0]): str(row[1]) for row in rows if row[0] is not None and row[1] is not None}


def combination_key(row: Row, cases: dict[str, str]) -> tuple[object, ...]:
    acting = set()
    for heading, value in row.items():
        action = heading.removesuffix(" cases")
        if action == heading or value is None:
            continue
        for part in re.split(r"[;,] ", str(value)):
            number, _, own = part.partition(" x ")
            acting.add((action, cases[number], float(own or row[f"{action} factor"])))
    return row["Combination"], row["Clause"], row["Load duration"], frozenset(acting)


def test_nothing_is_a_formula_or_an_error(quote):
    for sheet in quote.book:
        for row in sheet.iter_rows():
            for cell in row:
                assert cell.data_type not in ("f", "e"), f"{sheet.title}!{cell.coordinate}"
    with zipfile.ZipFile(quote.file) as archive:
        sheets = [name for name in archive.namelist() if name.startswith("xl/worksheets/")]
        assert sheets
        assert not any(b"<f>" in archive.read(name) or b"<f " in archive.read(name) for name in sheets)
        assert not any("vba" in name or "external" in name for name in archive.namelist())


def test_print_settings(quote):
    paper = LETTER if quote.result.job.units == "US" else A4
    for sheet in quote.book:
        setup = sheet.page_setup
        assert int(setup.paperSize) == paper, sheet.title
        upright = sheet.title in ("Geometry", "Assumptions", "Cautions")
        assert setup.orientation == ("portrait" if upright else "landscape"), sheet.title
        assert sheet.sheet_properties.pageSetUpPr.fitToPage, sheet.title
        assert (setup.fitToWidth, setup.fitToHeight) == (1, 0), sheet.title
        assert sheet.freeze_panes is not None, sheet.title
        assert sheet.title == "Quote" or sheet.print_title_rows, sheet.title
        first, last = sheet.print_area.replace("$", "").rpartition("!")[2].split(":")
        assert first == "A1"
        bottom = int(re.sub(r"\D", "", last))
        used = [r for r in range(1, sheet.max_row + 1) if any(c.value is not None for c in sheet[r])]
        assert used[-1] <= bottom, sheet.title
        assert "&P" in sheet.oddFooter.right.text


def test_the_repeated_and_the_frozen_rows_hold_the_headings(quote):
    for name, first in (("Combinations", "No."), ("Cases", "Case"), ("Assumptions", "About"), ("Cautions", "No.")):
        sheet = quote.book[name]
        row = next(r for r in range(1, 20) if sheet.cell(r, 1).value == first)
        low, high = (int(n) for n in sheet.print_title_rows.replace("$", "").split(":"))
        assert low <= row <= high, name
        assert sheet[sheet.freeze_panes].row > row, name


def test_the_drawing_is_a_native_chart_of_the_true_geometry(quote):
    with zipfile.ZipFile(quote.file) as archive:
        assert not [name for name in archive.namelist() if name.startswith("xl/media/")]
    points = quote.book["Geometry"]
    unit = UNITS["ft" if quote.result.job.units == "US" else "m"]
    for design in quote.result.designs:
        (chart,) = quote.book[design.spec.mark]._charts
        drawn = set()
        for series in chart.series:
            x, y = (_numbers(points, ref.numRef.f) for ref in (series.xVal, series.yVal))
            assert len(x) == len(y) > 0
            drawn |= {(round(a * unit, 4), round(b * unit, 4)) for a, b in zip(x, y, strict=True)}
        nodes = {(round(float(x), 4), round(float(y), 4)) for x, y in design.run.truss.xy}
        assert all(min(np.hypot(x - a, y - b) for a, b in drawn) < 1e-3 for x, y in nodes), design.spec.mark
        names = {cell.value for row in points.iter_rows() for cell in row}
        assert set(design.run.members.names) <= names


def _numbers(sheet, reference: str) -> list[float]:
    name, _, cells = reference.rpartition("!")
    assert name.strip("'") == sheet.title
    found = [
        cell.value for row in sheet[cells.replace("$", "")] for cell in (row if isinstance(row, tuple) else (row,))
    ]
    assert all(isinstance(value, int | float) for value in found)
    return found


TRICKS = ('=HYPERLINK("a","b")', "+1+1", "-2+3", "@SUM(1)", "=1+1")


def test_text_of_the_user_stays_text(tmp_path):
    title, client, number, note, _ = TRICKS
    job = changed_house(
        tmp_path / "job.toml",
        ('"Alder Row house"', f"'{title}'"),
        ('"Demo client (invented)"', f'"{client}"'),
        ('"Q-0001"', f'"{number}"'),
        ('"air handler"', f'"{note}"'),
    )
    assert main(["quote", str(job), "-o", str(tmp_path / "quote.xlsx")]) == 0
    book = load_workbook(tmp_path / "quote.xlsx")
    cells = [cell for sheet in book for row in sheet.iter_rows() for cell in row if isinstance(cell.value, str)]
    assert all(cell.data_type == "s" for cell in cells)
    (shown,) = [cell for cell in cells if cell.value == title]
    assert shown.quotePrefix  # a spreadsheet that is asked to enter it again keeps it as text, too
    assert any(client in cell.value and number in cell.value for cell in cells)
    assert any(note in cell.value for cell in cells)
    with zipfile.ZipFile(tmp_path / "quote.xlsx") as archive:
        sheets = [archive.read(n) for n in archive.namelist() if n.startswith("xl/worksheets/sheet")]
    assert not any(b"<f>" in sheet or b"<hyperlink" in sheet for sheet in sheets)


def test_cautions_stand_on_the_first_page_and_on_a_sheet_of_their_own(quote):
    first = " ".join(str(v) for row in quote.book["Quote"].iter_rows(values_only=True) for v in row if v)
    own = " ".join(str(v) for row in quote.book["Cautions"].iter_rows(values_only=True) for v in row if v)
    assert "licensed engineer" in first
    for word in ("licensed engineer", "Connections are not designed", "Bracing", "erection"):
        assert word in own
    every = " ".join(str(v) for s in quote.book for r in s.iter_rows(values_only=True) for v in r if isinstance(v, str))
    assert not re.search(r"\b(safe|approved)\b", every, re.IGNORECASE)
