"""Every command as a user gives it: what it prints, what it writes, its exit code."""

import json
import os
import re
import subprocess
import sys
from pathlib import Path

import pytest

from rooftruss import __version__
from rooftruss.basis.schemes import schemes
from rooftruss.cli import COMMANDS, main
from rooftruss.output.explain_grids import explanation
from rooftruss.output.numbering import numbering_of
from rooftruss.output.schedule import Measure
from rooftruss.shapes.webbing import SHAPES
from tests.damaged import damages
from tests.end_to_end.demo import DEMO_JOBS, HOUSE, REPOSITORY, changed_house, designed

every_demo = pytest.mark.parametrize("path", DEMO_JOBS, ids=lambda path: path.stem)


@pytest.fixture
def run(capsys):
    """Runs a command; returns exit code, stdout and stderr."""

    def command(*words: object) -> tuple[int, str, str]:
        try:
            code = main([str(word) for word in words])
        except SystemExit as stop:
            code = stop.code
        out, err = capsys.readouterr()
        return code, out, err

    return command


def last_number(text: str, row: str) -> float:
    """Number in the last line that begins with the word `row`."""
    line = [line for line in text.splitlines() if line.startswith(row)][-1]
    return float(line[len(row) :].split()[0])


@every_demo
def test_quote_writes_a_workbook_and_one_row_per_truss(path, tmp_path, run):
    code, out, err = run("quote", path, "-o", tmp_path / "quote.xlsx")
    designs = designed(path).designs
    assert code == 0
    assert (tmp_path / "quote.xlsx").stat().st_size > 5000
    assert str(tmp_path / "quote.xlsx") in err
    assert "licensed engineer" in err
    for design in designs:
        row = next(line for line in out.splitlines() if line.startswith(f"{design.spec.mark} "))
        assert f" {design.spec.quantity} " in row
        assert f"{float(design.outcome.worst):.2f}" in row
        assert all(option.grade.name in row for option in design.sizes.values())


def test_quote_names_the_workbook_after_the_job_and_puts_it_here(tmp_path, monkeypatch, run):
    monkeypatch.chdir(tmp_path)
    assert run("quote", HOUSE)[0] == 0
    assert [path.name for path in tmp_path.iterdir()] == ["alder_row_house.xlsx"]


def test_a_quote_of_the_same_job_is_the_same_file(tmp_path, run):
    for name in ("one.xlsx", "two.xlsx"):
        run("quote", HOUSE, "-o", tmp_path / name)
    assert (tmp_path / "one.xlsx").read_bytes() == (tmp_path / "two.xlsx").read_bytes()


def test_a_truss_without_a_passing_size_gives_exit_code_1_and_says_what_failed(tmp_path, run):
    small = ('sizes = ["2x4", "2x6", "2x8"]', 'sizes = ["2x3"]')
    job = changed_house(tmp_path / "small.toml", small)
    code, out, _ = run("quote", job, "-o", tmp_path / "small.xlsx")
    assert code == 1
    assert (tmp_path / "small.xlsx").exists()
    assert re.search(r"^T1 NOT met: top \d \(2x3 SPF .*\): \d+\.\d\d in ", out, re.MULTILINE)
    assert "none of the" in out
    for words in (("envelope", job), ("size", "--like", job)):
        assert run(*words)[0] == 1


@pytest.mark.parametrize(
    ("words", "part"),
    [
        (("quote", "absent.toml"), "there is no such file"),
        (("quote", HOUSE, "-o", "quote.txt"), "ends in .xlsx"),
        (("explain", HOUSE, "T9", "top 1"), "there is no truss 'T9'; allowed: 'T1', 'T2', 'T3'"),
        (
            ("explain", HOUSE, "T3", "topp 1"),
            "has no member, bearing, deflection or load case 'topp 1'; did you mean 'top 1'?",
        ),
        (("explain", HOUSE, "T3", "bearing Z"), "no bearing at 'Z'"),
        (("explain", HOUSE, "T3", "top 1", "--combination", "9999"), "no strength combination '9999'"),
        (("size", "--like", HOUSE, "--span", "28"), "span: '28' has no unit"),
        (("size", "--like", HOUSE, "--shape", "finck"), "did you mean 'fink'?"),
        (("size", "--like", HOUSE, "--mark", "T9"), "there is no truss 'T9'"),
        (("schemes", "asce7-22"), "asce7-22-asd"),
        (("grades", "no such timber"), "no grade holds 'no such timber'"),
        (("quoet", HOUSE), "there is no command 'quoet'; did you mean 'quote'?"),
        (("quote",), "job"),
        ((), "command"),
    ],
)
def test_wrong_input_gives_exit_code_2_and_words(words, part, tmp_path, monkeypatch, run):
    monkeypatch.chdir(tmp_path)
    code, out, err = run(*words)
    assert code == 2
    assert out == ""
    assert part in err
    assert "Traceback" not in err
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(("name", "content", "part"), damages(), ids=[name for name, _, _ in damages()])
def test_a_damaged_job_is_one_message_and_no_file(name, content, part, tmp_path, run):
    job = tmp_path / f"{name}.toml"
    job.write_bytes(content)
    code, out, err = run("quote", job, "-o", tmp_path / "quote.xlsx")
    assert code == 2
    assert out == ""
    assert part in err
    assert "Traceback" not in err
    assert all(line.startswith(f"{name}.toml") for line in err.splitlines())
    assert list(tmp_path.iterdir()) == [job]


@pytest.mark.parametrize("command", [("envelope",), ("compare",), ("size", "--like"), ("explain",)])
def test_every_command_that_reads_a_job_refuses_a_damaged_one(command, tmp_path, run):
    job = changed_house(tmp_path / "job.toml", ('"115 mph"', '"115"'))
    more = ("T1", "top 1") if command == ("explain",) else ()
    code, out, err = run(*command, job, *more)
    assert (code, out) == (2, "")
    assert err == "job.toml [site] wind_speed: '115' has no unit; write for example '115 mph'\n"


def test_what_fails_only_in_the_design_names_file_and_truss(tmp_path, run):
    """A heel with no room for its post passes the reader: it depends on the chord sizes."""
    job = changed_house(tmp_path / "job.toml", ('mark = "T3"', 'mark = "T3"\nheel_height = "4 in"'))
    code, _, err = run("quote", job, "-o", tmp_path / "quote.xlsx")
    assert code == 2
    assert err.startswith("job.toml [[truss]] T3 heel_height: ")
    assert not (tmp_path / "quote.xlsx").exists()


def test_envelope_prints_every_member_and_its_governing_numbers(run):
    code, out, _ = run("envelope", HOUSE)
    assert code == 0
    for design in designed(HOUSE).designs:
        assert f"Truss {design.spec.mark}" in out
        for k, name in enumerate(design.run.members.names):
            assert re.search(rf"^{name} .*{design.outcome.utilisation.value[k]:.2f}", out, re.MULTILINE), name


def test_the_result_file_goes_to_stdout_or_to_a_file(tmp_path, run):
    code, out, err = run("envelope", HOUSE, "--json", "-")
    assert code == 0
    assert json.loads(out)["program"] == {"name": "rooftruss", "version": __version__}
    assert "licensed engineer" in err
    assert run("envelope", HOUSE, "--json", tmp_path / "result.json")[:2] == (0, "")
    assert (tmp_path / "result.json").read_text("utf-8") == out


def test_explain_ends_with_the_utilisation_of_the_schedule(run):
    design = designed(HOUSE).designs[-1]
    for k, name in enumerate(design.run.members.names):
        code, out, _ = run("explain", HOUSE, design.spec.mark, name)
        assert code == 0
        assert out.splitlines()[0].startswith(f"{design.spec.mark} {name}, ")
        assert last_number(out, "utilisation") == pytest.approx(design.outcome.utilisation.value[k], rel=1e-3)
    for k, support in enumerate(design.run.family.topology.supports):
        node = design.run.family.topology.nodes[support.node]
        _, out, _ = run("explain", HOUSE, design.spec.mark, f"bearing {node}")
        assert last_number(out, "utilisation") == pytest.approx(design.outcome.bearing.value[k], rel=1e-3)


def test_explain_takes_any_combination_by_number_or_name(run):
    design = designed(HOUSE).designs[-1]
    name = design.run.combinations.names[1]
    for word in ("2", name):
        _, out, _ = run("explain", HOUSE, design.spec.mark, "top 1", "--combination", word)
        assert f"combination 2 ({design.run.combinations.clauses[1]}): {name}" in out.splitlines()[0]
        expected = design.run.checks.utilisation[1, design.run.members.names.index("top 1")]
        assert last_number(out, "utilisation") == pytest.approx(expected, rel=1e-3)


@every_demo
def test_every_explanation_of_every_truss_ends_with_the_utilisation_checked(path):
    for design in designed(path).designs:
        for k, name in enumerate(design.run.members.names):
            _, grid = explanation(design, name, numbering_of([design]))
            found = [row[1] for row in grid.rows if row[0] == "utilisation"][-1]
            assert isinstance(found, Measure)
            assert grid.rows[-1][0] == "utilisation"
            assert found.value == pytest.approx(float(design.outcome.utilisation.value[k]), rel=1e-9)


def test_inspect_speaks_of_every_case_and_every_member(run):
    code, out, _ = run("inspect", HOUSE, "T3")
    design = designed(HOUSE).designs[-1]
    assert code == 0
    assert all(name in out for name in design.run.cases.names)
    assert all(name in out for name in design.run.members.names)


def test_compare_lists_every_shape(run):
    code, out, _ = run("compare", HOUSE, "--mark", "T3")
    assert code == 0
    for shape in SHAPES:
        assert re.search(rf"^{shape} .*(all checks met|NOT met|not possible)", out, re.MULTILINE), shape


def test_size_takes_what_is_not_given_from_the_job(run):
    design = designed(HOUSE).designs[2]
    code, out, _ = run("size", "--like", HOUSE, "--mark", "T3")
    assert code == 0
    for group, option in design.sizes.items():
        assert re.search(rf"^T3 +king post +{group} +{option.section.name} +{re.escape(option.grade.name)} ", out, re.M)


def test_size_changes_what_is_given(tmp_path, run):
    """The same as a job file in which those values stand."""
    changes = (('"fink"', '"queen post"'), ('"28 ft"', '"20 ft"'), ('"6/12"', '"5/12"'))
    design = designed(changed_house(tmp_path / "job.toml", *changes)).designs[0]
    code, out, _ = run("size", "--like", HOUSE, "--shape", "queen post", "--span", "20 ft", "--pitch", "5/12")
    assert code == (0 if design.passes else 1)
    for group, option in design.sizes.items():
        assert re.search(rf"^T1 +queen post +{group} +{option.section.name} ", out, re.MULTILINE)
    assert f"{float(design.outcome.volume) / 0.3048**3:.4g} ft3" in out


def test_the_catalogues_print_their_names(run):
    for words, names in (
        (("shapes",), ("king post", "fink", "scissor")),
        (("schemes",), ("asce7-22-asd", "asce7-16-lrfd")),
        (("schemes", "asce7-22-asd"), ("2.4.1, 6a", "0.6D + 0.6W")),
        (("schemes", "en1990-6.10"), ("1.35G + 1.5S", "Q_H     Lr      live load of the roof", "accidental")),
        (("grades", "spf"), ("SPF No.1/No.2", "SPF SS")),
        (("sections",), ("2x4", "2x12")),
    ):
        code, out, err = run(*words)
        assert (code, err) == (0, "")
        assert all(name in out for name in names), words


def test_grades_are_shown_in_the_units_asked_for(run):
    """SPF No.1/No.2: Fb 875 psi (NDS Supplement 2018, Table 4A) is 6.03 N/mm2."""
    for units, value in (("US", "875"), ("metric", "6.03")):
        line = [
            t for t in run("grades", "SPF", "No.1/No.2", "--units", units)[1].splitlines() if t.startswith("SPF No")
        ]
        assert value in line[0].split()


def test_schemes_counts_the_combinations_of_a_job(run):
    code, out, _ = run("schemes", "asce7-22-asd", "--job", HOUSE)
    assert code == 0
    for design in designed(HOUSE).designs:
        count = int(design.run.combinations.strength.sum())
        rest = len(design.run.combinations.names) - count
        assert f"{design.spec.mark}: {count} strength and {rest} deflection combinations" in out


@pytest.mark.parametrize("options", [(), *(("--scheme", name) for name in schemes())], ids=" ".join)
def test_new_writes_a_form_that_quote_accepts_and_keeps_what_is_there(options, tmp_path, run):
    form = tmp_path / "form.toml"
    assert run("new", form, *options)[0] == 0
    before = form.read_bytes()
    code, _, err = run("quote", form, "-o", tmp_path / "quote.xlsx")
    assert code == 0, err
    assert (tmp_path / "quote.xlsx").exists()
    code, _, err = run("new", form, *options)
    assert (code, form.read_bytes()) == (2, before)
    assert "exists already" in err


def test_new_writes_nothing_for_a_scheme_that_does_not_exist(tmp_path, run):
    code, out, err = run("new", tmp_path / "form.toml", "--scheme", "en1990-6.1")
    assert (code, out) == (2, "")
    assert "there is no scheme 'en1990-6.1'; did you mean 'en1990-6.10'" in err
    assert not list(tmp_path.iterdir())


def test_help_names_every_command(run):
    code, out, _ = run("--help")
    assert code == 0
    assert all(re.search(rf"^ +{name} ", out, re.MULTILINE) for name in COMMANDS)


def test_nothing_is_called_safe_or_approved(run):
    for words in (("size", "--like", HOUSE), ("envelope", HOUSE), ("compare", HOUSE, "--mark", "T3")):
        _, out, err = run(*words)
        assert not re.search(r"\b(safe|approved)\b", out + err, re.IGNORECASE)


def python(*words: object, cwd: Path, **more: object) -> subprocess.CompletedProcess[str]:
    env = os.environ | {"PYTHONPATH": str(REPOSITORY), "PYTHONWARNINGS": "error"}
    line = [sys.executable, *map(str, words)]
    return subprocess.run(line, cwd=cwd, capture_output=True, text=True, timeout=60, env=env, **more)


def test_as_a_program_of_its_own(tmp_path):
    done = python("-m", "rooftruss", "quote", HOUSE, "-o", "quote.xlsx", cwd=tmp_path)
    assert done.returncode == 0, done.stderr
    assert "all checks met" in done.stdout
    assert (tmp_path / "quote.xlsx").exists()
    done = python("-m", "rooftruss", "quote", "absent.toml", cwd=tmp_path)
    assert (done.returncode, done.stdout) == (2, "")
    assert "there is no such file" in done.stderr


def test_a_reader_that_goes_away_is_no_fault(tmp_path):
    """Like `rooftruss grades | head -1`."""
    code = "import sys, rooftruss.cli; sys.exit(rooftruss.cli.main(['grades']))"
    line = f"'{sys.executable}' -c \"{code}\" | head -1"
    env = os.environ | {"PYTHONPATH": str(REPOSITORY)}
    done = subprocess.run(line, shell=True, cwd=tmp_path, capture_output=True, text=True, timeout=60, env=env)
    assert (done.returncode, done.stderr) == (0, "")
    assert len(done.stdout.splitlines()) == 1


FULL = "import resource, sys; resource.setrlimit(resource.RLIMIT_FSIZE, (4096, 4096)); import rooftruss.cli;"
FULL += "sys.exit(rooftruss.cli.main(sys.argv[1:]))"


@pytest.mark.parametrize("words", [("quote", HOUSE, "-o"), ("envelope", HOUSE, "--json")], ids=lambda w: w[0])
def test_a_file_is_kept_when_the_new_one_cannot_be_completed(words, tmp_path):
    """The process may not write files of more than 4 kB, as on a full disk."""
    pytest.importorskip("resource")
    file = tmp_path / "kept.xlsx"
    file.write_bytes(b"as it was")
    done = python("-B", "-c", FULL, *words, file, cwd=tmp_path)
    assert done.returncode == 2, done.stderr
    assert f"{file} cannot be written" in done.stderr
    assert "Traceback" not in done.stderr
    assert file.read_bytes() == b"as it was"
    assert list(tmp_path.iterdir()) == [file]


def test_a_folder_that_cannot_be_written_to_is_said(tmp_path, monkeypatch, run):
    folder = tmp_path / "locked"
    folder.mkdir()
    folder.chmod(0o555)
    if os.access(folder, os.W_OK):  # an administrator may write everywhere: refuse in the system's place
        open_file = os.open

        def refuse(path, *rest, **more):
            if Path(os.fsdecode(path)).parent == folder:
                raise PermissionError(13, "Permission denied", path)
            return open_file(path, *rest, **more)

        monkeypatch.setattr(os, "open", refuse)
    code, _, err = run("quote", HOUSE, "-o", folder / "quote.xlsx")
    folder.chmod(0o755)
    assert code == 2
    assert f"{folder / 'quote.xlsx'} cannot be written" in err
    assert "another place" in err
    assert list(folder.iterdir()) == []


@pytest.mark.parametrize(("place", "part"), [("none/q.xlsx", "there is no folder"), ("folder.xlsx", "is a folder")])
def test_a_place_that_holds_no_file_is_said(place, part, tmp_path, run):
    (tmp_path / "folder.xlsx").mkdir()
    code, _, err = run("quote", HOUSE, "-o", tmp_path / place)
    assert code == 2
    assert part in err
    assert [path.name for path in tmp_path.iterdir()] == ["folder.xlsx"]
