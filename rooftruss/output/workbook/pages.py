"""The sheets of the quote workbook, each written by one function."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

from rooftruss.basis.job import Job
from rooftruss.design.design import Design
from rooftruss.output.cautions import SHORT_CAUTIONS
from rooftruss.output.job_grids import (
    Shared,
    assumptions_grid,
    cautions_grid,
    combinations_grid,
    quote_grid,
    sharing_cases,
    sharing_combinations,
    values_grid,
)
from rooftruss.output.picture import picture
from rooftruss.output.schedule import Grid, shown_grid
from rooftruss.output.truss_grids import (
    deflections_grid,
    idle_members,
    loading_grid,
    members_grid,
    named_combinations_grid,
    reactions_grid,
    surfaces_grid,
)
from rooftruss.output.workbook.chart import PointSheet, elevation, frame_of
from rooftruss.output.workbook.sheet import Page, for_print
from rooftruss.units import shown

if TYPE_CHECKING:
    from openpyxl.worksheet.worksheet import Worksheet

QUOTE_WIDTHS = (8, 6, 11, 7.5, 7, 8, 7, 15, 15, 15, 8, 8, 9, 9, 9, 9, 7, 14)
TRUSS_WIDTHS = (12, 13, 10, 17, 9, 9, 6, 9, 6, 9, 6, 9, 6, 7, 6, 9, 33, 13, 9)
REACTION_SLOTS = (1, 2, 5, 6, 7, 8, 9, 10, 11, 14, 15, 16, 17)
DEFLECTION_SLOTS = (1, 2, 6, 8, 14, 15, 16, 17)
LOADING_SLOTS = (1, 2, 5, 6, 8, 10, 12, 14, 18)
NAMED_SLOTS = (1, 2, 12, 17)
TALLEST_DRAWING = 9.5  # cm, so that drawing and members stand on one page
ROW_HEIGHT = 15 / 72 * 2.54  # cm, of a row as the spreadsheet makes it


def quote_page(page: Page, job: Job, designs: Sequence[Design]) -> None:
    """The summary: who and what, one row per truss, what is not met, cautions."""
    page.widths(QUOTE_WIDTHS)
    page.line(job.title or "Roof trusses", "title", 24)
    page.line("   ".join(t for t in (job.client and f"Client: {job.client}", job.number and f"Job: {job.number}") if t), "strong")
    scheme = designs[0].run.family.scheme if designs else None
    if scheme:
        page.line(f"{scheme.title}. Loads: {scheme.load_standard}. Timber: {scheme.timber_standard}.", "note")
    page.row += 1
    grid = quote_grid(designs)
    page.grid(grid, title="", wrap=(7, 8, 9, 17))
    page.row -= 1
    _totals(page, grid)
    failed = [(d.spec.mark, text) for d in designs for text in d.failures]
    if failed:
        page.line("Not met", "section", 18)
        for mark, text in failed[:12]:
            page.paragraph(f"{mark}: {text}", len(QUOTE_WIDTHS), 170, "strong")
        if len(failed) > 12:
            page.line(f"and {len(failed) - 12} more, on the sheets of the trusses", "note")
        page.row += 1
    page.line("Before you use this quote", "section", 18)
    for text in SHORT_CAUTIONS:
        page.line(text, "strong")
    for_print(page.sheet, job, landscape=True, freeze="B7")


def _totals(page: Page, grid: Grid) -> None:
    """Sums of quantity, timber and weight over the job."""
    whole = shown_grid(grid, page.units)
    for k, column in enumerate(whole.columns):
        if k in (1, 11, 13):
            page.put(k + 1, sum(float(row[k] or 0) for row in whole.rows), "total", column.number_format, "right")
        else:
            page.put(k + 1, "All" if k == 0 else None, "total")
    page.row += 2


def truss_page(page: Page, points: PointSheet, job: Job, design: Design) -> None:
    """Everything about one truss: elevation, members, reactions, deflections, loading, combinations named."""
    page.widths(TRUSS_WIDTHS)
    page.line(f"Truss {design.spec.mark}", "title", 24)
    page.line(_facts(job, design), "strong")
    page.line(_result(design), "strong" if design.passes else "fail")
    _drawing(page, points, design)
    page.grid(members_grid(design, idle_members(design)))
    page.grid(reactions_grid(design), REACTION_SLOTS)
    _break_before(page)
    page.grid(deflections_grid(design), DEFLECTION_SLOTS)
    page.grid(loading_grid(design), LOADING_SLOTS)
    page.grid(named_combinations_grid(design), NAMED_SLOTS)
    page.row -= 1
    page.line("Tension, bending with the lower edge in tension, and movement up or right are positive. Comb. is the number on the sheet Combinations.")
    for_print(page.sheet, job, landscape=True, repeat="1:2", freeze="B3")


def _facts(job: Job, design: Design) -> str:
    spec = design.spec
    parts = [
        f"{spec.quantity} off",
        spec.shape,
        f"span {shown(spec.span, 'length', job.units)}",
        f"pitch {12 * spec.pitch:.4g}/12",
        f"spacing {shown(spec.spacing, 'size', job.units)}",
        f"overhang {shown(spec.overhang, 'size', job.units)}",
        f"bearing {shown(spec.bearing, 'size', job.units)}",
    ]
    if spec.heel_height is not None:
        parts.append(f"heel height {shown(spec.heel_height, 'size', job.units)}")
    if spec.plies > 1:
        parts.append(f"{spec.plies} plies")
    return "   ".join(parts)


def _result(design: Design) -> str:
    worst = f"largest ratio {float(design.outcome.worst):.2f}"
    if design.passes:
        return f"All checks met, {worst}."
    return "; ".join((f"NOT met, {worst}", *design.notes, *design.failures[:2]))


def _drawing(page: Page, points: PointSheet, design: Design) -> None:
    drawn = picture(design)
    frame = frame_of(drawn, _centimetres(TRUSS_WIDTHS), TALLEST_DRAWING)
    points.page.line(f"Truss {design.spec.mark}", "section", 18)
    chart = elevation(drawn, points, frame)
    page.sheet.add_chart(chart, f"A{page.row}")
    page.row += int(frame.height / ROW_HEIGHT) + 2


def _centimetres(widths: Sequence[float]) -> float:
    """Width of columns on screen: 7 pixels a character and 5 of margin, 96 pixels an inch."""
    return sum(7 * w + 5 for w in widths) / 96 * 2.54


def _break_before(page: Page) -> None:
    from openpyxl.worksheet.pagebreak import Break

    page.sheet.row_breaks.append(Break(id=page.row - 1))


def combinations_page(page: Page, job: Job, designs: Sequence[Design]) -> None:
    """All combinations, once for the trusses that share them."""
    page.line("Combinations", "title", 24)
    page.line("Cases are the numbers on the sheet Cases; a factor multiplies all cases beside it. Cases of one action exclude each other.")
    groups = sharing_combinations(designs)
    actions = 0
    for group in groups:
        grid = combinations_grid(group.first.run.combinations, group.first.run.cases.heads)
        page.grid(grid, title=_heading(group, groups, "Combinations"))
        actions = max(actions, sum(c.heading.endswith("factor") for c in grid.columns))
        timed = any(c.heading == "Time effect" for c in grid.columns)
    page.widths((5, 13, 56, 20, 14, *((8,) if groups and timed else ()), *(7.5, 9) * actions))
    for_print(page.sheet, job, landscape=True, repeat="4:5" if len(groups) == 1 else "", freeze="A6" if len(groups) == 1 else "A3")


def _heading(group: Shared, groups: Sequence[Shared], what: str) -> str:
    return f"{what} of all trusses" if len(groups) == 1 else f"{what} of {group.marks}"


def cases_page(page: Page, job: Job, designs: Sequence[Design]) -> None:
    """All load cases: the loads on the surfaces, and the values they come from with their clauses."""
    page.widths((7, 40, 20, 34, 12, 16, 12))
    page.line("Cases", "title", 24)
    page.line("x runs from the middle of the left bearing. Pressures are before any factor.")
    groups = sharing_cases(designs)
    for group in groups:
        page.grid(surfaces_grid(group.first), title=_heading(group, groups, "Loads on the surfaces"))
        values = values_grid(group.first)
        if values.rows:
            page.grid(values, (1, 2, 3, 5, 6, 4), title=_heading(group, groups, "Values behind them"))
    for_print(page.sheet, job, landscape=False, repeat="1:2", freeze="A3")


def words_page(page: Page, job: Job, grid: Grid, first: float) -> None:
    """A sheet of sentences: assumptions or cautions."""
    page.widths((first, 100 - first))
    page.line(grid.title, "title", 24)
    page.row += 1
    start = page.row
    page.grid(grid, title="", wrap=(0, 1))
    for k, row in enumerate(grid.rows):
        lines = max(-(-len(str(row[1])) // int(98 - first)), -(-len(str(row[0])) // int(first)))
        page.sheet.row_dimensions[start + 2 + k].height = 13.5 * lines + 3
    for_print(page.sheet, job, landscape=False, repeat=f"{start}:{start + 1}", freeze=f"A{start + 2}")


def assumptions_page(page: Page, job: Job, designs: Sequence[Design]) -> None:
    """What the job left open and what was taken for it; the model."""
    words_page(page, job, assumptions_grid(job, designs), 24)


def cautions_page(page: Page, job: Job) -> None:
    """The cautions in full."""
    words_page(page, job, cautions_grid(), 6)


def points_page(sheet: "Worksheet", job: Job) -> None:
    """Print settings of the sheet that holds the points of the drawings."""
    for_print(sheet, job, landscape=False)
