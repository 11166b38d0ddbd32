import os
import zipfile
from dataclasses import replace

import openpyxl
import pytest

from rooftruss.errors import OutputError
from rooftruss.output.workbook.book import write_workbook
from rooftruss.output.workbook.chart import frame_of
from rooftruss.output.workbook.sheet import running, sheet_name
from tests.unit.output_jobs import job_and_designs

SHEETS = ["Quote", "T1", "T2", "T3", "Combinations", "Cases", "Geometry", "Assumptions", "Cautions"]


@pytest.fixture(scope="module")
def book(tmp_path_factory):
    path = tmp_path_factory.mktemp("book") / "quote.xlsx"
    write_workbook(*job_and_designs(), path)
    return openpyxl.load_workbook(path)


def texts(sheet):
    return [str(cell.value) for row in sheet.iter_rows() for cell in row if cell.value is not None]


def table(sheet, title):
    """Rows of the grid under a section title, as lists of cells, headings left out."""
    start = next(cell.row for cell in sheet["A"] if cell.value == title)
    units = sheet.cell(start + 2, 1).font.size == 8
    rows = []
    for row in sheet.iter_rows(min_row=start + (3 if units else 2)):
        if row[0].value is None:
            break
        rows.append(list(row))
    return rows


def test_sheets(book):
    assert book.sheetnames == SHEETS


def test_no_cell_is_a_formula_and_user_text_is_kept(book):
    for sheet in book:
        assert all(cell.data_type != "f" for row in sheet.iter_rows() for cell in row)
    title = book["Quote"]["A1"]
    assert title.value == "=1+1 & more"
    assert title.quotePrefix


def test_members_are_those_of_the_design_in_the_units_of_the_job(book):
    _, designs = job_and_designs()
    for design in designs:
        rows = table(book[design.spec.mark], "Members")
        assert [r[0].value for r in rows] == list(design.run.members.names)
        for k, row in enumerate(rows):
            assert row[4].value == pytest.approx(float(design.run.truss.length[k]) / 0.3048)
            assert row[5].value == pytest.approx(float(design.outcome.envelope.tension.value[k]) / 4.4482216152605)
            assert row[13].value == pytest.approx(float(design.outcome.utilisation.value[k]))


def test_what_is_not_met_says_so_in_words_bold_and_filled(book):
    rows = table(book["T2"], "Members")
    failed = [r for r in rows if r[13].value > 1]
    assert failed
    for row in rows:
        over = row[13].value > 1 + 1e-9
        assert row[15].value == ("NOT met" if over else "met")
        assert row[15].font.bold is over
        assert (row[15].fill.patternType == "solid") is over
    assert "NOT met, see its sheet" in texts(book["Quote"])
    assert any(t.startswith("T2: none of the") for t in texts(book["Quote"]))


def test_totals_of_the_quote(book):
    sheet = book["Quote"]
    total = next(row for row in sheet.iter_rows() if row[0].value == "All")
    rows = list(sheet.iter_rows(min_row=7, max_row=9))
    for column in (1, 11, 13):
        assert total[column].value == pytest.approx(sum(r[column].value for r in rows))
    assert total[1].value == 18 + 2 + 3


def test_every_sheet_is_ready_to_print(book):
    for sheet in book:
        assert int(sheet.page_setup.paperSize) == int(sheet.PAPERSIZE_LETTER)
        assert sheet.sheet_properties.pageSetUpPr.fitToPage
        assert (sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight) == (1, 0)
        assert sheet.freeze_panes
        assert "Q-7" in sheet.oddHeader.left.text
        assert sheet.oddFooter.right.text == "Page &P of &N"
        assert sheet.print_area
    for name in SHEETS[1:]:
        assert book[name].print_title_rows, name


def test_a_metric_job_is_printed_on_a4_in_metric_units(tmp_path):
    job, designs = job_and_designs("metric")
    write_workbook(job, designs[:1], tmp_path / "m.xlsx")
    sheet = openpyxl.load_workbook(tmp_path / "m.xlsx")["Quote"]
    assert int(sheet.page_setup.paperSize) == int(sheet.PAPERSIZE_A4)
    assert sheet["D7"].value == pytest.approx(28 * 0.3048)
    assert sheet["D6"].value == "m"


def test_cautions_and_assumptions_are_in_the_book(book):
    job, _ = job_and_designs()
    assert any("licensed engineer" in t for t in texts(book["Quote"]))
    assert any("Connections are not designed" in t for t in texts(book["Cautions"]))
    assert {a.text for a in job.assumptions} <= set(texts(book["Assumptions"]))
    everything = " ".join(t for sheet in book for t in texts(sheet)).lower()
    assert "approved" not in everything
    assert " safe " not in everything


def test_chart_draws_the_truss_with_names_to_scale(tmp_path):
    job, designs = job_and_designs()
    write_workbook(job, designs[:1], tmp_path / "one.xlsx")
    with zipfile.ZipFile(tmp_path / "one.xlsx") as archive:
        charts = [n for n in archive.namelist() if n.startswith("xl/charts/chart")]
        text = archive.read(charts[0]).decode()
    assert len(charts) == 1
    for name in (*designs[0].run.members.names, *designs[0].run.family.topology.nodes):
        assert f">{name}</a:t>" in text or f">{name}</t>" in text, name
    assert "'Geometry'!" in text


def test_drawing_has_one_scale():
    from rooftruss.output.picture import picture

    _, designs = job_and_designs()
    for design in designs:
        drawn = picture(design)
        left, bottom, right, top = drawn.box
        for width, tallest in ((30.0, 8.0), (12.0, 40.0)):
            frame = frame_of(drawn, width, tallest)
            assert frame.drawing_width / (right - left) == pytest.approx(frame.drawing_height / (top - bottom))
            assert frame.drawing_width < width
            assert frame.height <= tallest + 1e-9


def test_same_job_same_bytes(tmp_path):
    job, designs = job_and_designs()
    for name in ("a.xlsx", "b.xlsx"):
        write_workbook(job, designs, tmp_path / name)
    assert (tmp_path / "a.xlsx").read_bytes() == (tmp_path / "b.xlsx").read_bytes()


def test_an_existing_file_is_kept_when_writing_fails(tmp_path, monkeypatch):
    path = tmp_path / "quote.xlsx"
    path.write_text("old")

    def full(*_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("openpyxl.writer.excel.ExcelWriter.save", full)
    with pytest.raises(OutputError, match=r"quote\.xlsx cannot be written: No space left on device"):
        write_workbook(*job_and_designs(), path)
    assert path.read_text() == "old"
    assert os.listdir(tmp_path) == ["quote.xlsx"], "no half-written file is left"


def test_permission_missing_folder_and_folder_are_explained(tmp_path, monkeypatch):
    job, designs = job_and_designs()
    with pytest.raises(OutputError, match=r"there is no folder .*gone; make it first"):
        write_workbook(job, designs, tmp_path / "gone" / "q.xlsx")
    (tmp_path / "d.xlsx").mkdir()
    with pytest.raises(OutputError, match=r"d\.xlsx is a folder; give the name of a file in it"):
        write_workbook(job, designs, tmp_path / "d.xlsx")

    def refused(*_):
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr("os.replace", refused)
    with pytest.raises(OutputError, match="If it is open in a spreadsheet program, close it there"):
        write_workbook(job, designs, tmp_path / "q.xlsx")
    assert sorted(os.listdir(tmp_path)) == ["d.xlsx"]


@pytest.mark.parametrize("mark", ["=cmd|'/c'!A1", "T1", "t1", "Cases", "a" * 60, "History", "[x]:*?/\\", "'", "+1"])
def test_any_mark_gives_a_sheet_that_opens(tmp_path, mark):
    job, designs = job_and_designs()
    odd = replace(designs[2], spec=replace(designs[2].spec, mark=mark))
    first = designs[0] if mark != "T1" else designs[1]
    write_workbook(replace(job, title="bad\x01\ttext", client="-2+3"), (first, odd), tmp_path / "odd.xlsx")
    book = openpyxl.load_workbook(tmp_path / "odd.xlsx")
    assert len({n.casefold() for n in book.sheetnames}) == len(book.sheetnames) == 8
    assert all(0 < len(n) <= 31 for n in book.sheetnames)
    assert all(cell.data_type != "f" for sheet in book for row in sheet.iter_rows() for cell in row)
    assert book["Quote"]["A1"].value == "bad\ttext"


def test_sheet_names_and_running_text():
    assert sheet_name("a" * 40, ["a" * 31]) == "a" * 27 + " (2)"
    assert running("A & B\nC" + "x" * 200).startswith("A && B C")
    assert len(running("x" * 200)) == 90


def test_the_pitch_of_a_truss_is_written_in_the_manner_of_its_units(book, tmp_path):
    """8/12 is 33.69 deg, 4/12 is 18.43 deg."""
    job, designs = job_and_designs("metric")
    sloping = replace(designs[2], spec=replace(designs[2].spec, bottom_pitch=4 / 12))
    write_workbook(job, [sloping], tmp_path / "m.xlsx")
    metric = openpyxl.load_workbook(tmp_path / "m.xlsx")
    assert "   pitch 8/12   spacing" in book["T3"]["A2"].value
    assert "   pitch 33.69 deg   bottom pitch 18.43 deg   spacing" in metric["T3"]["A2"].value


def test_names_of_service_combinations_have_empty_columns_beside_them(book):
    """So that no long one is cut off: up to the result there is nothing on their right."""
    for row in table(book["T1"], "Deflections"):
        filled = [cell.column for cell in row if cell.value is not None]
        name = next(cell for cell in row if ": " in str(cell.value))
        assert filled[-2:] == [name.column, 17]
        assert row[16].value in ("met", "NOT met")
        assert 17 - name.column >= 8
