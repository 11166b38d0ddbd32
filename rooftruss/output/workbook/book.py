"""The quote workbook of a job."""

from collections.abc import Sequence
from pathlib import Path

from rooftruss.basis.job import Job
from rooftruss.design.design import Design
from rooftruss.output.numbering import numbering_of
from rooftruss.output.workbook import pages
from rooftruss.output.workbook.chart import PointSheet
from rooftruss.output.workbook.saving import save
from rooftruss.output.workbook.sheet import Page, for_print, sheet_name
from rooftruss.output.workbook.styles import Looks, plain

FIRST, LAST = ("Quote",), ("Combinations", "Cases", "Geometry", "Assumptions", "Cautions")


def write_workbook(job: Job, designs: Sequence[Design], path: str | Path, *, pin_jointed: bool = False) -> None:
    """Write the quote of a job as an .xlsx file; a file that is there stays unless the new one is whole.

    pin_jointed: also a sheet per truss with the forces of the pin-jointed truss beside the frame's, per case.
    Raises OutputError with the path and what to do.
    """
    from openpyxl import Workbook

    book = Workbook()
    looks = Looks(book)
    book.remove(book.worksheets[0])
    names = [*FIRST, *LAST]
    marks: list[str] = []
    for design in designs:
        marks.append(sheet_name(design.spec.mark, [*names, *marks]))
    pairs = [(m, d) for m, d in zip(marks, designs, strict=True) if pin_jointed and d.run.triangulated]
    pinned = [sheet_name(f"{mark} pin-jointed", [*names, *marks]) for mark, _ in pairs]
    every = (*FIRST, *marks, *pinned, *LAST)
    page = {name: Page(book.create_sheet(name), looks, job.units) for name in every}
    numbering = numbering_of(designs)
    points = PointSheet(page["Geometry"])
    pages.points_page(points.page, job)
    pages.quote_page(page["Quote"], job, designs)
    for mark, design in zip(marks, designs, strict=True):
        pages.truss_page(page[mark], points, job, design, numbering)
    for name, (_, design) in zip(pinned, pairs, strict=True):
        pages.idealisations_page(page[name], job, design, numbering)
    for_print(points.page, job, landscape=False, repeat="1:2", freeze="A3")
    pages.combinations_page(page["Combinations"], job, designs, numbering)
    pages.cases_page(page["Cases"], job, designs, numbering)
    pages.assumptions_page(page["Assumptions"], job, designs)
    pages.cautions_page(page["Cautions"], job)
    book.properties.title, book.properties.creator = plain(job.title), "rooftruss"
    save(book, Path(path))
