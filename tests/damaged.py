"""More than sixty damaged copies of a right job file, with a part of the message that each must cause."""

from tests.jobs import JOB

NARROW = """\
span = "12 ft"
pitch = "6/12"
spacing = "24 in"
overhang = "6 ft"
bearing = "3 ft"
"""

# name, text of JOB that is replaced, its replacement, part of the message
EDITS = (
    ("no_unit", '"115 mph"', '"115"', "[site] wind_speed: '115' has no unit; write for example '115 mph'"),
    ("bare_number", 'span = "28 ft"', "span = 28", "[[truss]] T1 span: 28 has no unit; write for example '28 ft'"),
    ("bare_float", '"40 psf"', "40.5", "[site] ground_snow: 40.5 has no unit; write for example '40.5 psf'"),
    ("wrong_dimension", '"40 psf"', '"40 ft"', "[site] ground_snow: '40 ft' is not in a unit that fits"),
    ("mass_for_force", '"250 lbf"', '"250 lb"', "[loads] point 1 force: '250 lb' is not in a unit that fits"),
    ("unknown_unit", '"24 in"', '"24 inchez"', "[[truss]] T1 spacing: '24 inchez' is not in a unit that fits"),
    ("not_a_number", '"28 ft"', '"nan ft"', "[[truss]] T1 span: 'nan ft' is not a quantity"),
    ("infinite", '"28 ft"', '"inf ft"', "[[truss]] T1 span: 'inf ft' is not a quantity"),
    ("overflowing", '"28 ft"', '"1e999 ft"', "[[truss]] T1 span: '1e999 ft' is not"),
    ("huge_span", '"28 ft"', '"1000000000 ft"', "span: '1000000000 ft' is not plausible; allowed: 3.28 ft to 131 ft"),
    ("tiny_span", '"28 ft"', '"28 in"', "[[truss]] T1 span: '28 in' is not plausible"),
    ("negative_load", '"10 psf"\nroof_dead_l', '"-10 psf"\nroof_dead_l', "[loads] roof_dead: '-10 psf' is negative"),
    ("negative_span", '"28 ft"', '"-28 ft"', "[[truss]] T1 span: '-28 ft' is negative"),
    ("two_numbers", '"28 ft"', '"28 30 ft"', "[[truss]] T1 span: '28 30 ft' is not a quantity"),
    ("decimal_comma", '"3.5 in"', '"3,5 in"', "bearing: '3,5 in' is not a quantity; write a decimal with a point"),
    ("arithmetic", '"28 ft"', '"9**9**9 ft"', "[[truss]] T1 span: '9**9**9 ft' is not a quantity"),
    ("long_quantity", '"28 ft"', '"' + "2" * 5000 + ' ft"', "is not a quantity"),
    ("empty_quantity", '"28 ft"', '""', "[[truss]] T1 span: '' is not a quantity"),
    ("pitch_number", '"6/12"', "6", "[[truss]] T1 pitch: 6 is not a pitch; write rise over run such as '6/12'"),
    ("pitch_text", '"6/12"', '"6"', "[[truss]] T1 pitch: '6' is not a pitch"),
    ("pitch_over_nothing", '"6/12"', '"6/0"', "[[truss]] T1 pitch: '6/0' is not a pitch; the run"),
    ("pitch_steep", '"6/12"', '"80 deg"', "pitch: '80 deg' is not plausible; allowed: 0.5/12 to 24/12"),
    ("pitch_upright", '"6/12"', '"90 deg"', "[[truss]] T1 pitch: '90 deg' is not a pitch"),
    ("unknown_key", "overhang =", "overhnag =", "[[truss]] T1: there is no key 'overhnag'; did you mean 'overhang'?"),
    ("unknown_site_key", "\nexposure =", "\nexposre =", "[site]: there is no key 'exposre'; did you mean 'exposure'?"),
    ("unknown_load_key", "roof_live", "roof_life", "[loads]: there is no key 'roof_life'; did you mean 'roof_live'?"),
    ("unknown_table", "[loads]", "[load]", "[load]: there is no such table; did you mean 'loads'?"),
    ("unknown_top_key", "[job]", '"a\\nb" = 1\n[job]', "[a\\nb]: there is no such table; allowed: 'job', 'standard'"),
    ("unknown_scheme", "22-asd", "21-asd", "[standard] scheme: there is no scheme 'asce7-21-asd'; did you mean"),
    ("scheme_number", '"asce7-22-asd"', "7", "[standard] scheme: 7 is not text; write it in quotes"),
    (
        "other_edition",
        "22-asd",
        "16-asd",
        "[site] winter_wind_parameter: belongs to ASCE 7-22, this job's scheme to ASCE 7-16",
    ),
    ("missing_site_key", 'exposure = "C"\n', "", "[site] exposure: is missing"),
    ("missing_w2", "winter_wind_parameter = 0.45\n", "", "[site] winter_wind_parameter: is missing"),
    (
        "missing_r_value",
        '"ventilated attic"',
        '"unventilated"',
        "roof_r_value: is missing (needed with thermal = 'unventilated'",
    ),
    ("missing_load", 'ceiling_live = "10 psf"\n', "", "[loads] ceiling_live: is missing"),
    ("missing_mark", 'mark = "T1"\n', "", "[[truss]] number 1 mark: is missing"),
    ("missing_restraint", ', restraint = "sheathed"', "", "[timber] top_chord.restraint: is missing"),
    ("missing_units", 'units = "US"\n', "", "[job] units: is missing"),
    ("no_truss", JOB[JOB.index("[[truss]]") :], "", "[[truss]]: there is none"),
    ("single_brackets", "[[truss]]", "[truss]", "[[truss]]: is not a list of tables; write [[truss]]"),
    ("twin_marks", "[[truss]]", '[[truss]]\nmark = "t1"\n[[truss]]', "T1 mark: truss 1 has it already"),
    ("mark_with_slash", '"T1"', '"T/1"', "[[truss]] T/1 mark: 'T/1' does not fit; a mark begins with"),
    ("wrong_choice", '"II"', '"V"', "[site] risk_category: 'V' is not a choice here; did you mean 'IV'?"),
    ("choice_as_number", '"II"', "2", "[site] risk_category: 2 is not a choice here; write 'I' or 'II'"),
    (
        "flag_as_text",
        'moisture = "dry"',
        'incised = "no"',
        "[timber] incised: 'no' is not a choice here; write true or false",
    ),
    ("fraction_quantity", "= 18", "= 18.5", "[[truss]] T1 quantity: 18.5 is not a whole number"),
    ("no_trusses_of_mark", "= 18", "= 0", "[[truss]] T1 quantity: 0 is not plausible; allowed: 1 to 10000"),
    ("number_nan", "= 0.45", "= nan", "[site] winter_wind_parameter: nan is not plausible; allowed: 0 to 1"),
    (
        "unknown_grade",
        '"SPF Stud"',
        '"SPF Stdu"',
        "[timber] web.grades: grade 'SPF Stdu' is not in tables/grades; did you mean",
    ),
    ("unknown_size", '["2x4"] }', '["2x44"] }', "[timber] web.sizes: section '2x44' is not in tables/sections"),
    ("empty_list", '["SPF Stud"]', "[]", "[timber] web.grades: the list has 0 names"),
    ("list_as_text", '["SPF Stud"]', '"SPF Stud"', "[timber] web.grades: 'SPF Stud' is not a list"),
    ("group_as_text", '{ grades = ["SPF Stud"], sizes = ["2x4"] }', '"2x4"', "[timber] web: '2x4' is not a table"),
    (
        "wrong_restraint",
        '"sheathed"',
        '"glued"',
        "[timber] top_chord.restraint: 'glued' is not a restraint; write 'sheathed'",
    ),
    (
        "long_bearing",
        JOB[JOB.index("span =") :],
        NARROW,
        "[[truss]] T1 bearing: must be shorter than a quarter of the span",
    ),
    ("long_overhang", JOB[JOB.index("span =") :], NARROW, "[[truss]] T1 overhang: must be shorter than half the span"),
    ("least_over_dead", '"6 psf"', '"60 psf"', "[[truss]] T1 roof_dead_least: is more than roof_dead"),
    ("point_beyond", '"12 ft"', '"29 ft"', "[[truss]] T1 point 1 position: lies beyond the span"),
    ("line_break", '"Demo client"', '"Demo\\nclient"', "[job] client: 'Demo\\nclient' holds a line break"),
    ("long_title", "Alder Row", "Alder " * 50, "[job] title: 'Alder Alder"),
    ("table_for_text", '"Demo client"', "{ name = 1 }", "[job] client: a table is not text"),
    ("toml_error", 'title = "Alder', "title = Alder", "is not valid TOML"),
    ("key_twice", 'units = "US"', 'units = "US"\nunits = "US"', "is not valid TOML"),
)
BYTES = (
    ("empty", b"", "is empty"),
    ("blank", b" \n\t\n", "is empty"),
    ("binary", bytes(range(128, 256)) * 20, "is not UTF-8 text (line 1)"),
    ("zero_bytes", JOB.encode().replace(b"[site]", b"\0[site]"), "holds zero bytes"),
    ("utf_16", JOB.encode("utf-16"), "is not UTF-8 text"),
    ("latin_1", JOB.replace("Alder", "Allée").encode("latin-1"), "is not UTF-8 text (line 2)"),
    ("excel", b"PK\x03\x04" + bytes(100), "is an Excel or zip file"),
    ("cut_short", JOB.encode()[:700], ""),
    ("prose", b"Please quote eighteen trusses, 28 ft span.\n", "is not valid TOML"),
    ("deep", b"a = " + b"[" * 100_000, "brackets are nested too deeply"),
    ("long_integer", JOB.replace("= 18", "= " + "9" * 5000).encode(), "is not valid TOML"),
    ("long_hexadecimal", JOB.replace("= 18", "= 0x" + "f" * 9000).encode(), "quantity: a very long number"),
    ("too_large", JOB.encode() + b"#" * 1_000_001, "is too large; a job file has at most 1,000,000 bytes"),
)


def edited(old: str, new: str) -> str:
    """JOB with its first `old` replaced."""
    assert old in JOB, f"{old!r} is no part of the job"
    return JOB.replace(old, new, 1)


def damages() -> list[tuple[str, bytes, str]]:
    """(name, content, part of the message) of every damaged file."""
    return [(name, edited(old, new).encode(), part) for name, old, new, part in EDITS] + list(BYTES)


def damaged_jobs() -> list[tuple[str, bytes]]:
    """(name, content) of every damaged file."""
    return [(name, content) for name, content, _ in damages()]
