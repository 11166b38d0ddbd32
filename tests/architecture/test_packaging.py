"""The three ways to have the program: a wheel, an editable install, a checkout. Each must find its tables and jobs."""

import os
import shutil
import subprocess
import sys
import sysconfig
import venv
import zipfile
from collections.abc import Sequence
from pathlib import Path

import pytest

REPOSITORY = Path(__file__).parents[2]
PARTS = ("pyproject.toml", "README.md", "rooftruss", "tables", "demo_jobs")
HEAVY = ("openpyxl", "pandas", "pint", "rich", "scipy")
WHERE = "import rooftruss; from rooftruss.basis.tables import data_folder as folder;"
WHERE += "print(rooftruss.__file__, folder('tables'), folder('demo_jobs'), sep='\\n')"


def run(words: Sequence[object], folder: Path, **more: str) -> str:
    """Stdout of a command that must succeed."""
    env = {k: v for k, v in os.environ.items() if k not in ("PYTHONPATH", "PYTHONHOME")} | more
    done = subprocess.run([*map(str, words)], cwd=folder, capture_output=True, text=True, timeout=120, env=env)
    assert done.returncode == 0, f"{words}:\n{done.stdout}\n{done.stderr}"
    return done.stdout


@pytest.fixture(scope="module")
def source(tmp_path_factory) -> Path:
    """A copy of what is packaged, so that building leaves nothing in the repository."""
    folder = tmp_path_factory.mktemp("source")
    for name in PARTS:
        part = REPOSITORY / name
        if part.is_dir():
            shutil.copytree(part, folder / name, ignore=shutil.ignore_patterns("__pycache__"))
        else:
            shutil.copy(part, folder / name)
    return folder


@pytest.fixture(scope="module")
def wheel(source, tmp_path_factory) -> Path:
    folder = tmp_path_factory.mktemp("dist")
    run([sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", folder, source], source)
    (found,) = folder.glob("*.whl")
    return found


def environment(folder: Path, *what: object) -> Path:
    """Folder of programs of a new environment with the program installed; its dependencies are this one's."""
    venv.create(folder, with_pip=False, symlinks=os.name != "nt")
    places = sysconfig.get_paths(vars={"base": str(folder), "platbase": str(folder)})
    Path(places["purelib"], "dependencies.pth").write_text(sysconfig.get_paths()["purelib"] + "\n", "utf-8")
    programs = Path(places["scripts"])
    pip = [sys.executable, "-m", "pip", "--python", programs / "python", "install", "--quiet", "--no-index"]
    run([*pip, "--no-deps", "--no-build-isolation", "--ignore-installed", *what], folder)
    return programs


@pytest.fixture(scope="module", params=["wheel", "editable", "checkout"])
def installed(request, source, tmp_path_factory) -> tuple[Path, list[object], dict[str, str], Path]:
    """Folder that holds the data, the command, its environment, and a folder to run it in."""
    away = tmp_path_factory.mktemp("away")
    if request.param == "checkout":
        return REPOSITORY, [sys.executable, "-m", "rooftruss"], {"PYTHONPATH": str(REPOSITORY)}, away
    folder = tmp_path_factory.mktemp(request.param)
    if request.param == "wheel":
        programs = environment(folder, request.getfixturevalue("wheel"))
        return folder, [programs / "rooftruss"], {}, away
    pytest.importorskip("editables", reason="an editable install is built with the package editables")
    programs = environment(folder, "--editable", source)
    return source, [programs / "rooftruss"], {}, away


def python_of(command: Sequence[object]) -> object:
    return command[0] if len(command) > 1 else Path(str(command[0])).with_name("python")


def test_data_are_found_and_the_program_runs_from_any_folder(installed):
    home, command, env, away = installed
    package, tables, jobs = map(Path, run([python_of(command), "-c", WHERE], away, **env).splitlines())
    for place in (package, tables, jobs):
        assert place.is_relative_to(home.resolve()) or place.is_relative_to(home), place
    assert "king post" in run([*command, "shapes"], away, **env)
    out = run([*command, "quote", jobs / "alder_row_house.toml"], away, **env)
    assert out.count("all checks met") == 3
    assert [path.name for path in away.iterdir()] == ["alder_row_house.xlsx"]


def test_the_wheel_holds_the_package_its_data_and_nothing_else(wheel):
    with zipfile.ZipFile(wheel) as archive:
        names = archive.namelist()
    assert {name.split("/")[0].partition("-")[0] for name in names} == {"rooftruss"}
    for folder in ("tables", "demo_jobs"):
        files = [path.relative_to(REPOSITORY) for path in (REPOSITORY / folder).rglob("*") if path.is_file()]
        assert files
        assert {f"rooftruss/{path.as_posix()}" for path in files} <= set(names)
    assert not [name for name in names if "test" in name or name.endswith(".pyc")]


def test_a_catalogue_is_printed_without_the_heavy_packages():
    code = "import sys; from rooftruss.cli import main; code = main(['shapes']);"
    code += f"print(code, sorted(set({HEAVY!r}) & sys.modules.keys()))"
    assert run([sys.executable, "-c", code], REPOSITORY).splitlines()[-1] == "0 []"


def test_the_command_line_is_parsed_before_numbers_are_loaded():
    """A slip in the command, or --help, is answered at once."""
    code = "import sys, rooftruss.cli; print('numpy' in sys.modules)"
    assert run([sys.executable, "-c", code], REPOSITORY).strip() == "False"
