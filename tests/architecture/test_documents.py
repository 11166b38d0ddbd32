"""README and DEVELOPERS say what is so."""

import re
import tomllib
from pathlib import Path

import pytest

from rooftruss import __version__
from rooftruss.cli import COMMANDS

REPOSITORY = Path(__file__).parents[2]
README = (REPOSITORY / "README.md").read_text("utf-8")
DEVELOPERS = (REPOSITORY / "DEVELOPERS.md").read_text("utf-8")


def test_the_newest_entry_of_the_changelog_is_this_version():
    entries = re.findall(r"^### (\d+\.\d+\.\d+)$", DEVELOPERS, re.MULTILINE)
    assert entries[0] == __version__


def test_the_readme_has_exactly_two_commands_and_their_windows_form():
    (block,) = re.findall(r"```sh\n(.*?)```", README, re.DOTALL)
    (windows,) = re.findall(r"```powershell\n(.*?)```", README, re.DOTALL)
    assert len(block.splitlines()) == len(windows.splitlines()) == 2


def test_every_command_is_in_the_readme():
    for name in COMMANDS:
        assert re.search(rf"\b{name}\b", README), name


def test_the_python_of_the_readme_runs(monkeypatch, capsys):
    (code,) = re.findall(r"```python\n(.*?)```", README, re.DOTALL)
    monkeypatch.chdir(REPOSITORY)
    exec(compile(code, "README.md", "exec"), {})
    out = capsys.readouterr().out
    assert "governing" in out
    assert "utilisation" in out


@pytest.mark.parametrize("library", ["rich", "hypothesis", "sympy", "defusedxml"])
def test_every_further_library_has_its_sentence(library):
    assert library in DEVELOPERS


def test_every_library_of_the_package_is_declared():
    declared = tomllib.loads((REPOSITORY / "pyproject.toml").read_text("utf-8"))["project"]["dependencies"]
    names = {re.split(r"[<>=]", line)[0] for line in declared}
    assert names == {"numpy", "scipy", "pandas", "openpyxl", "pint", "rich"}
