"""One sweep over every table: it parses, and every row names a known source."""

import pytest

from rooftruss.basis.tables import data_folder, read_settings, read_table

TABLES = data_folder("tables")
NAMES = sorted(path.relative_to(TABLES).with_suffix("").as_posix() for path in TABLES.rglob("*.csv"))


@pytest.mark.parametrize("name", NAMES)
def test_every_row_names_a_known_source(name):
    table = read_table(name)
    known = read_settings("sources")
    assert table.columns[-1] == "source"
    assert table.rows
    for line, row in enumerate(table.rows, start=1):
        words = str(row["source"]).split()
        assert words, f"{name} row {line} has no source"
        assert words[0] in known, f"{name} row {line}: {words[0]!r} is not a key of sources.toml"


@pytest.mark.parametrize("name", NAMES)
def test_no_row_stands_twice(name):
    rows = [tuple(str(cell) for cell in row.values()) for row in read_table(name).rows]
    assert len(rows) == len(set(rows))


def test_every_source_says_what_it_is():
    for key, source in read_settings("sources").items():
        assert isinstance(source, dict), key
        assert {"title", "edition", "confidence"} <= source.keys(), key


def test_the_sweep_finds_the_tables():
    assert {"sections/dressed_lumber_us", "timber/nds_format_2018"} <= set(NAMES)
