"""Command line: arguments, exit codes, and nothing else. Data go to stdout, all else to stderr.

Exit code 0: done; 1: done, and some truss does not meet a check; 2: the input is wrong.
"""

import argparse
import gc
import sys
from collections.abc import Callable, Sequence
from io import TextIOWrapper
from pathlib import Path
from typing import TYPE_CHECKING, NoReturn

from rooftruss import __version__
from rooftruss.errors import JobError, OutputError, RooftrussError, nearest

if TYPE_CHECKING:
    from rooftruss.basis.job import Job
    from rooftruss.design.design import Design
    from rooftruss.output.schedule import Grid
    from rooftruss.run import Result

DONE, NOT_MET, WRONG_INPUT = 0, 1, 2
FEW_COLLECTIONS = 200_000  # a workbook is many objects and no cycles: looking for those takes a twentieth of a quote
LIKE_KEYS = (  # options of `size` that stand for keys of [[truss]]: key, example
    ("shape", "fink"),
    ("span", '"28 ft"'),
    ("pitch", "6/12"),
    ("spacing", '"24 in"'),
    ("overhang", '"16 in"'),
    ("bearing", '"3.5 in"'),
    ("heel_height", '"10 in"'),
    ("bottom_pitch", "3/12"),
    ("panels", "6"),
    ("plies", "2"),
    ("quantity", "12"),
)


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command. Returns the exit code; every foreseeable mistake is one message on stderr."""
    for stream in (sys.stdout, sys.stderr):  # a console of few letters shows a '?' for the others
        if isinstance(stream, TextIOWrapper):
            stream.reconfigure(errors="replace")
    parser = _parser()
    given = parser.parse_args(arguments)
    try:
        code = int(given.run(given))
        sys.stdout.flush()
        return code
    except RooftrussError as error:
        print(error, file=sys.stderr)
        return WRONG_INPUT
    except BrokenPipeError:  # the reader of stdout (head, less) has gone
        sys.stderr.close()
        return DONE
    except OSError as error:  # RooftrussError and BrokenPipeError are caught above: what is left is stdout
        print(f"the output cannot be written: {error.strerror or error}", file=sys.stderr)
        sys.stdout = None  # nothing more is flushed at exit
        return WRONG_INPUT
    except KeyboardInterrupt:
        print("stopped", file=sys.stderr)
        return WRONG_INPUT


class _Parser(argparse.ArgumentParser):
    """Arguments with messages in our manner: an unknown command names the nearest."""

    def error(self, message: str) -> NoReturn:
        if "invalid choice" in message and self.prog == "rooftruss":
            word = message.split("'")[1]
            message = f"there is no command {word!r}; {nearest(word, COMMANDS)}"
        self.exit(WRONG_INPUT, f"{self.prog}: {message}\n{self.format_usage()}")


def _parser() -> argparse.ArgumentParser:
    parser = _Parser(prog="rooftruss", description="Roof trusses from an enquiry to a quote workbook.")
    parser.add_argument("--version", action="version", version=f"rooftruss {__version__}")
    commands = parser.add_subparsers(dest="command", required=True, metavar="command", parser_class=_Parser)
    for name, (text, add, run) in COMMANDS.items():
        command = commands.add_parser(name, help=text, description=text)
        add(command)
        command.set_defaults(run=run)
    return parser


def _job_argument(command: argparse.ArgumentParser) -> None:
    command.add_argument("job", type=Path, help="job file (TOML)")


def _quote_arguments(command: argparse.ArgumentParser) -> None:
    _job_argument(command)
    command.add_argument(
        "-o", "--output", type=Path, help="workbook to write; default: the job's name with .xlsx, here"
    )
    command.add_argument(
        "--pin-jointed", action="store_true", help="add sheets with the pin-jointed forces beside the frame's, per case"
    )


def _quote(given: argparse.Namespace) -> int:
    gc.set_threshold(FEW_COLLECTIONS)
    from rooftruss.output.terminal import print_cautions, print_quote, progress
    from rooftruss.output.workbook.book import write_workbook
    from rooftruss.run import run_file

    path = given.output or Path(given.job.name).with_suffix(".xlsx")
    if path.suffix.lower() != ".xlsx":
        raise OutputError(f"{path}: a workbook needs a name that ends in .xlsx")
    if path.exists() and path.resolve() == given.job.resolve():
        raise OutputError(f"{path} is the job file itself; give the workbook another name")
    result = run_file(given.job, progress)
    write_workbook(result.job, result.designs, path, pin_jointed=given.pin_jointed)
    print_quote(result.job, result.designs)
    print(f"written: {path}", file=sys.stderr)
    print_cautions()
    return DONE if result.passes else NOT_MET


def _size_arguments(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--like", required=True, type=Path, metavar="JOB", help="job file for everything not given here"
    )
    command.add_argument("--mark", help="truss of the job to start from; default: the first")
    for key, example in LIKE_KEYS:
        command.add_argument(
            f"--{key.replace('_', '-')}", dest=key, metavar=example.strip('"'), help=f"for example {example}"
        )


def _size(given: argparse.Namespace) -> int:
    from rooftruss.basis.jobform import read_job, with_overrides
    from rooftruss.output.terminal import print_cautions, print_design
    from rooftruss.run import run_job

    changes = {key: getattr(given, key) for key, _ in LIKE_KEYS}
    job = with_overrides(read_job(given.like), given.mark, changes)
    result = run_job(job)
    for design in result.designs:
        print_design(job, design)
    print_cautions()
    return DONE if result.passes else NOT_MET


def _compare_arguments(command: argparse.ArgumentParser) -> None:
    _job_argument(command)
    command.add_argument("--mark", help="truss whose roof is compared; default: the first")


def _compare(given: argparse.Namespace) -> int:
    from rooftruss.basis.jobform import read_job, with_overrides
    from rooftruss.design.compare import compare_shapes
    from rooftruss.output.terminal import print_cautions, print_comparison

    job = with_overrides(read_job(given.job), given.mark, {})
    rows = compare_shapes(job, job.trusses[0])
    print_comparison(job, rows)
    print_cautions()
    return DONE if any(row.design and row.design.passes for row in rows) else NOT_MET


def _envelope_arguments(command: argparse.ArgumentParser) -> None:
    _job_argument(command)
    command.add_argument("--json", metavar="FILE", help="result file to write ('-' is stdout), in place of the tables")


def _envelope(given: argparse.Namespace) -> int:
    from rooftruss.output.numbering import numbering_of
    from rooftruss.output.terminal import print_cautions, print_envelope, progress
    from rooftruss.run import run_file

    if given.json is not None and given.json != "-":
        _refuse_job_file(Path(given.json), given.job)
    result = run_file(given.job, progress)
    if given.json is not None:
        from rooftruss.output.result import write_result

        write_result(result.job, result.designs, given.json)
    else:
        for design in result.designs:
            print_envelope(result.job, design, numbering_of(result.designs))
    print_cautions()
    return DONE if result.passes else NOT_MET


def _refuse_job_file(path: Path, job: Path) -> None:
    """A result file must not take the place of a job file."""
    if not path.name:
        raise OutputError("--json needs the name of a file, or '-' for stdout")
    if path.suffix.lower() == ".toml" or (path.exists() and path.resolve() == job.resolve()):
        raise OutputError(f"{path} is the name of a job file; give the result file another, such as {path.stem}.json")


def _explain_arguments(command: argparse.ArgumentParser) -> None:
    _job_argument(command)
    command.add_argument("mark", help="truss, for example T1")
    command.add_argument(
        "member",
        help="'top 1', 'bearing A', 'deflection at B', 'deflection at top 1', or a load case such as 'snow, balanced'",
    )
    command.add_argument(
        "--combination", metavar="N", help="number or name of a combination; default: the governing one"
    )


def _explain(given: argparse.Namespace) -> int:
    from rooftruss.output.explain_grids import explanation
    from rooftruss.output.numbering import numbering_of
    from rooftruss.output.terminal import print_cautions, print_grid

    result, design = _design(given.job, given.mark)
    heading, grid = explanation(design, given.member, numbering_of(result.designs), given.combination)
    print(heading)
    print_grid(grid, result.job.units)
    print_cautions()
    return DONE


def _inspect_arguments(command: argparse.ArgumentParser) -> None:
    _job_argument(command)
    command.add_argument("mark", help="truss, for example T1")


def _inspect(given: argparse.Namespace) -> int:
    from rooftruss.design.idle import idle_summary
    from rooftruss.output.inspect_grids import inspection_grids
    from rooftruss.output.terminal import print_cautions, print_grid

    result, design = _design(given.job, given.mark)
    if not design.run.triangulated:
        print(f"{design.spec.mark}: stands by its stiff chords only; with pinned joints it is a mechanism, so members")
        print("without force cannot be found by looking at its joints")
        return DONE
    print(f"{design.spec.mark} {design.spec.shape}: members without force, by inspection of the pin-jointed truss")
    for heading, grid in inspection_grids(design, idle_summary(design)):
        print(f"\n{heading}")
        print_grid(grid, result.job.units)
    print_cautions()
    return DONE


def _design(path: Path, mark: str) -> "tuple[Result, Design]":
    """The results of a job and the design of one truss of it. The whole job is run, for the numbers of combinations."""
    from rooftruss.basis.jobform import read_job
    from rooftruss.run import run_job

    job = read_job(path)
    marks = [spec.mark for spec in job.trusses]
    if mark not in marks:
        raise JobError(f"{job.source}: there is no truss {mark!r}; {nearest(mark, marks)}")
    result = run_job(job)
    return result, result.designs[marks.index(mark)]


def _no_arguments(command: argparse.ArgumentParser) -> None:
    pass


def _shapes(given: argparse.Namespace) -> int:
    from rooftruss.output.catalogue_grids import shapes_grid

    return _print(shapes_grid())


def _schemes_arguments(command: argparse.ArgumentParser) -> None:
    command.add_argument("name", nargs="?", help="one scheme, to see its combinations")
    command.add_argument(
        "--job",
        type=Path,
        help="job file: show the factors as on its site, and count the combinations the scheme makes for each truss",
    )


def _schemes(given: argparse.Namespace) -> int:
    from rooftruss.basis.jobform import read_job
    from rooftruss.basis.scheme_variants import require_like, variants_of
    from rooftruss.basis.schemes import load_scheme
    from rooftruss.output.catalogue_grids import legend_grid, scheme_grid, schemes_grid, variants_text
    from rooftruss.output.terminal import print_text

    if given.name is None:
        return _print(schemes_grid())
    job, folder = (read_job(given.job), given.job.parent) if given.job else (None, Path())
    scheme = load_scheme(given.name, folder, job.site if job else None)
    if job:
        require_like(job, scheme)
    _print(scheme_grid(scheme))
    _print(legend_grid(scheme))
    if job:
        return _count_combinations(job, given.name)
    if text := variants_text(variants_of(scheme, given.name)):
        print_text(text)
    return DONE


def _count_combinations(job: "Job", scheme: str) -> int:
    from dataclasses import replace

    from rooftruss.design.stages import combinations_of

    job = replace(job, scheme=scheme)
    for spec in job.trusses:
        made = combinations_of(job, spec)
        strength = int(made.strength.sum())
        print(f"{job.source} {spec.mark}: {strength} strength and {len(made.names) - strength} deflection combinations")
    return DONE


def _grades_arguments(command: argparse.ArgumentParser) -> None:
    command.add_argument("words", nargs="*", help="only grades whose name or species holds these words")
    _units_argument(command)


def _units_argument(command: argparse.ArgumentParser) -> None:
    command.add_argument("--units", choices=("US", "metric"), help="units of the values; default: those of the table")


def _grades(given: argparse.Namespace) -> int:
    from rooftruss.basis.grades import grades
    from rooftruss.output.catalogue_grids import grades_grid

    words = [w.lower() for w in given.words]
    found = [g for g in grades() if all(w in f"{g.name} {g.species} {g.family}".lower() for w in words)]
    if not found:
        raise JobError(f"no grade holds {' '.join(given.words)!r}; `rooftruss grades` lists them all")
    for family in dict.fromkeys(g.family for g in found):
        system = "US" if family == "NDS" else "metric"
        _print(grades_grid([g for g in found if g.family == family]), given.units or system)
    return DONE


def _sections(given: argparse.Namespace) -> int:
    from rooftruss.basis.sections import sections
    from rooftruss.output.catalogue_grids import sections_grid

    for system in ("US", "metric"):
        _print(sections_grid(system, sections(system)), given.units or system)
    return DONE


def _print(grid: "Grid", units: str = "US") -> int:
    from rooftruss.output.terminal import print_grid

    print_grid(grid, units)
    return DONE


def _new_arguments(command: argparse.ArgumentParser) -> None:
    command.add_argument("file", type=Path, help="job form to write (.toml); an existing file is left as it is")
    command.add_argument(
        "--scheme",
        metavar="NAME",
        help="scheme (or path of a scheme file, from the folder of the form) it is for; default: asce7-22-asd",
    )


def _new(given: argparse.Namespace) -> int:
    from rooftruss.basis.newjob import USUAL_SCHEME, new_job_text

    if given.file.suffix.lower() != ".toml":
        raise OutputError(f"{given.file}: a job form needs a name that ends in .toml")
    text = new_job_text(given.scheme or USUAL_SCHEME, given.file.parent)
    try:
        with given.file.open("x", encoding="utf-8") as file:
            file.write(text)
    except FileExistsError:
        raise OutputError(f"{given.file} exists already; choose another name") from None
    except OSError as error:
        raise OutputError(f"{given.file} cannot be written: {error.strerror}") from None
    print(f"written: {given.file}; fill it in, then: rooftruss quote {given.file}", file=sys.stderr)
    return DONE


Command = tuple[str, Callable[[argparse.ArgumentParser], None], Callable[[argparse.Namespace], int]]
COMMANDS: dict[str, Command] = {
    "quote": ("size every truss of a job and write the workbook", _quote_arguments, _quote),
    "size": ("size one truss, everything not given taken from a job", _size_arguments, _size),
    "compare": ("every shape of the catalogue for one roof", _compare_arguments, _compare),
    "envelope": ("governing effects of every member, or the result file", _envelope_arguments, _envelope),
    "explain": (
        "the check of one member, bearing or deflection, or a load case, clause by clause",
        _explain_arguments,
        _explain,
    ),
    "inspect": ("zero-force members of a truss, case by case", _inspect_arguments, _inspect),
    "shapes": ("the shapes of the catalogue", _no_arguments, _shapes),
    "schemes": ("the combination schemes, or the combinations of one", _schemes_arguments, _schemes),
    "grades": ("the grades and their reference values", _grades_arguments, _grades),
    "sections": ("the sections and their properties", _units_argument, _sections),
    "new": ("a fresh job form", _new_arguments, _new),
}
