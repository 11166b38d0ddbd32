"""The job form: a right file becomes the right SI values and assumptions."""

import copy
import tomllib
from pathlib import Path

import pytest

from rooftruss.basis.job import Assumption, Job, PointLoad, Restraint
from rooftruss.basis.jobform import job_from_mapping, read_job, with_overrides
from rooftruss.basis.jobkeys import common_form, form_for
from rooftruss.basis.tablereader import TableReader, entries
from rooftruss.basis.tables import data_folder, read_settings, read_table
from rooftruss.errors import JobError, TableError
from tests.jobs import JOB

FOOT, INCH, PSF, POUND_FORCE, MPH = 0.3048, 0.0254, 47.88025898033584, 4.4482216152605, 0.44704


def tables() -> dict:
    return tomllib.loads(JOB)


def job(**changes) -> Job:
    """The right job with whole tables replaced or keys of a table added: job(site={"exposure": "B"})."""
    data = tables()
    for table, keys in changes.items():
        if table == "truss":
            data["truss"] = [data["truss"][0] | one for one in keys]
        else:
            data[table] = data.get(table, {}) | keys
    return job_from_mapping(data, "demo.toml", Path())


def message(**changes) -> str:
    with pytest.raises(JobError) as error:
        job(**changes)
    return str(error.value)


def texts(made: Job) -> dict[str, str]:
    return {a.place: a.text for a in made.assumptions}


def test_the_example_in_si(tmp_path):
    path = tmp_path / "demo.toml"
    path.write_text("﻿" + JOB, "utf-8")  # with a byte order mark, as some editors write it
    made = read_job(path)
    assert (made.source, made.folder, made.units, made.scheme) == ("demo.toml", tmp_path, "US", "asce7-22-asd")
    assert (made.title, made.client, made.number) == ("Alder Row machine shed", "Demo client", "Q-0001")
    assert made.site["ground_snow"] == pytest.approx(40 * PSF)
    assert made.site["wind_speed"] == pytest.approx(115 * MPH)
    assert made.site["mean_roof_height"] == pytest.approx(16 * FOOT)
    assert made.site["winter_wind_parameter"] == 0.45
    assert made.site["exposure"] == "C"
    assert (made.site["topographic_factor"], made.site["ground_elevation"], made.site["roof_r_value"]) == (
        1.0,
        0.0,
        None,
    )
    assert made.limits.ceiling == "non-plaster"
    assert made.limits.horizontal == pytest.approx(1.25 * INCH)


def test_the_truss_of_the_example_in_si():
    (truss,) = job().trusses
    assert (truss.mark, truss.shape, truss.quantity, truss.plies) == ("T1", "fink", 18, 1)
    assert truss.span == pytest.approx(28 * FOOT)
    assert truss.pitch == 0.5
    assert truss.spacing == pytest.approx(24 * INCH)
    assert truss.overhang == pytest.approx(16 * INCH)
    assert truss.bearing == pytest.approx(3.5 * INCH)
    assert (truss.heel_height, truss.panels, truss.bottom_pitch) == (None, None, None)
    loads = truss.loads
    assert [loads.roof_dead, loads.roof_dead_least, loads.ceiling_dead, loads.ceiling_dead_least] == pytest.approx(
        [10 * PSF, 6 * PSF, 7 * PSF, 7 * PSF]
    )
    assert [loads.roof_live, loads.ceiling_live] == pytest.approx([20 * PSF, 10 * PSF])
    force = pytest.approx(250 * POUND_FORCE)
    assert loads.points == (
        PointLoad(action="D", chord="bottom", position=pytest.approx(12 * FOOT), force=force, note="air handler"),
    )


def test_the_timber_of_the_example():
    timber = job().trusses[0].timber
    assert list(timber.groups) == ["top chord", "bottom chord", "web"]
    assert timber.groups["top chord"].grades == ("SPF No.1/No.2", "SPF SS")
    assert timber.groups["top chord"].sizes == ("2x4", "2x6", "2x8")
    assert timber.groups["top chord"].restraint == Restraint(kind="sheathed")
    assert timber.groups["bottom chord"].restraint == Restraint(kind="spacing", spacing=pytest.approx(120 * INCH))
    assert timber.groups["web"].restraint == Restraint(kind="none")
    assert timber.longest_stock == pytest.approx(20 * FOOT)
    assert dict(timber.options) == {
        "moisture": "dry",
        "temperature": "normal",
        "incised": False,
        "repetitive": "auto",
        "buckling_stiffness": False,
        "net_section": 1.0,
    }


def test_every_default_is_an_assumption_with_its_clause_or_practice():
    found = texts(job())
    assert found["[site] topographic_factor"] == (
        "topographic factor K_zt = 1.0: no hill, ridge or escarpment at the site (ASCE 7-22, 26.8)"
    )
    assert found["[timber] temperature"] == "timber not above 100 F for any sustained time (NDS 2.3.3)"
    assert found["[timber] web.restraint"] == "webs are held sideways at their ends only"
    assert found["[loads] ceiling_dead_least"].endswith("taken equal to ceiling_dead")
    assert "balanced patterns" in found["[standard] companion_snow"]
    assert set(found) == {
        "[standard] companion_snow",
        "[standard] timber_edition",
        "[standard] ceiling_live",
        "[site] topographic_factor",
        "[site] ground_elevation",
        "[loads] ceiling_dead_least",
        "[loads] maintenance_load",
        "[loads] ceiling_point_load",
        "[loads] attic",
        "[timber] temperature",
        "[timber] incised",
        "[timber] repetitive",
        "[timber] buckling_stiffness",
        "[timber] net_section",
        "[timber] web.restraint",
        "[deflection] ceiling",
        "[deflection] horizontal",
        "[[truss]] T1 plies",
    }


def test_a_given_value_is_no_assumption():
    made = job(site={"topographic_factor": 1.2}, timber={"repetitive": False}, truss=[{"plies": 2}])
    assert made.site["topographic_factor"] == 1.2
    assert made.trusses[0].timber.options["repetitive"] is False
    assert not {"[site] topographic_factor", "[timber] repetitive", "[[truss]] T1 plies"} & texts(made).keys()


def test_defaults_of_a_truss_go_by_the_units_of_the_job():
    data = tables()
    del data["truss"][0]["bearing"], data["timber"]["longest_stock"]
    us = job_from_mapping(data, "demo.toml", Path())
    data["job"]["units"] = "metric"
    metric = job_from_mapping(data, "demo.toml", Path())
    assert us.trusses[0].bearing == pytest.approx(3.5 * INCH)
    assert us.trusses[0].timber.longest_stock == pytest.approx(20 * FOOT)
    assert Assumption(place="[[truss]] T1 bearing", text="each bearing 3.5 in long") in us.assumptions
    assert (metric.trusses[0].bearing, metric.trusses[0].timber.longest_stock) == (0.09, 6.0)
    assert Assumption(place="[timber] longest_stock", text="longest piece of timber 6 m") in metric.assumptions


def test_a_truss_overrides_loads_and_timber():
    one, two = job(
        truss=[
            {},
            {
                "mark": "T2",
                "roof_dead": "15 psf",
                "moisture": "wet",
                "top_chord": {"sizes": ["2x6"]},
                "point": [{"action": "L", "chord": "top", "position": "3 ft", "force": "300 lbf"}],
            },
        ]
    ).trusses
    assert [one.loads.roof_dead, two.loads.roof_dead] == pytest.approx([10 * PSF, 15 * PSF])
    assert two.loads.roof_dead_least == pytest.approx(6 * PSF)
    assert two.loads.roof_live == one.loads.roof_live
    assert (one.timber.options["moisture"], two.timber.options["moisture"]) == ("dry", "wet")
    assert two.timber.groups["top chord"].sizes == ("2x6",)
    assert two.timber.groups["top chord"].grades == one.timber.groups["top chord"].grades
    assert [(p.action, p.note) for p in two.loads.points] == [("L", "")]
    assert [p.note for p in one.loads.points] == ["air handler"]


def test_least_dead_load_follows_an_overridden_dead_load():
    data = tables()
    del data["loads"]["roof_dead_least"]
    data["truss"][0]["roof_dead"] = "15 psf"
    assert job_from_mapping(data, "demo.toml", Path()).trusses[0].loads.roof_dead_least == pytest.approx(15 * PSF)


def test_a_site_without_snow_needs_no_snow_keys():
    data = tables()
    data["site"]["ground_snow"] = "0 psf"
    for key in ("winter_wind_parameter", "snow_exposure", "thermal", "roof_surface"):
        del data["site"][key]
    made = job_from_mapping(data, "demo.toml", Path())
    assert made.site["ground_snow"] == 0.0
    assert made.site["thermal"] is None


def test_an_earlier_edition_has_no_winter_wind_parameter():
    data = tables()
    data["standard"]["scheme"] = "asce7-16-lrfd"
    del data["site"]["winter_wind_parameter"]
    made = job_from_mapping(data, "demo.toml", Path())
    assert "winter_wind_parameter" not in made.site
    assert "ASCE 7-16" in texts(made)["[site] topographic_factor"]


def test_an_unventilated_roof_gives_its_r_value():
    made = job(site={"thermal": "unventilated", "roof_r_value": "R-30"})
    assert made.site["roof_r_value"] == pytest.approx(30 * 0.17611015908, rel=1e-6)


def test_a_ventilated_attic_without_r_value_counts_as_cold_under_7_16_and_says_so():
    """ASCE 7-16, Table 7.3-2: C_t = 1.1 only over R-25 between attic and heated space; 7-22 has no such limit."""
    data = tables()
    del data["site"]["winter_wind_parameter"]
    data["standard"]["scheme"] = "asce7-16-asd"
    made = job_from_mapping(data, "demo.toml", Path())
    assert texts(made)["[site] roof_r_value"].startswith("ventilated attic counted as cold, with more than R-25")
    data["site"]["roof_r_value"] = "R-38"
    assert "[site] roof_r_value" not in texts(job_from_mapping(data, "demo.toml", Path()))
    assert "[site] roof_r_value" not in texts(job())
    assert "[site] roof_r_value" not in texts(job(site={"thermal": "unheated"}))


def test_scheme_options_are_those_of_the_scheme():
    made = job(standard={"companion_snow": "any"})
    assert made.scheme_options["companion_snow"] == "any"
    assert "[standard] companion_snow" not in texts(made)
    text = message(standard={"companion_snow": "some"})
    assert text.startswith(
        "demo.toml [standard] companion_snow: 'some' is not a choice here; allowed: 'balanced', 'any'"
    )
    assert "there is no key 'companion_snw'; did you mean" in message(standard={"companion_snw": "any"})


def test_a_scheme_file_beside_the_job(tmp_path):
    text = (data_folder("tables") / "schemes" / "asce7-22-asd.toml").read_text("utf-8")
    (tmp_path / "ours.toml").write_text(text, "utf-8")
    (tmp_path / "demo.toml").write_text(JOB.replace("asce7-22-asd", "ours.toml"), "utf-8")
    assert read_job(tmp_path / "demo.toml").scheme == "ours.toml"


def test_several_mistakes_are_told_at_once_and_the_rest_counted():
    text = message(site={"exposure": "E", "wind_speed": 5}, loads={"roof_dead": "3"}, truss=[{"span": 1}])
    assert text.splitlines() == [
        "demo.toml [site] wind_speed: 5 has no unit; write for example '5 mph'",
        "demo.toml [site] exposure: 'E' is not a choice here; allowed: 'B', 'C', 'D'",
        "demo.toml [loads] roof_dead: '3' has no unit; write for example '3 psf'",
        "demo.toml [[truss]] T1 span: 1 has no unit; write for example '1 ft'",
    ]
    many = message(truss=[{"mark": f"T{k}", "span": k} for k in range(15)]).splitlines()
    assert len(many) == 11
    assert many[-1] == "demo.toml: 5 more mistakes follow"


def test_a_mistake_in_a_shared_table_is_told_once():
    text = message(loads={"roof_dead": "3"}, truss=[{}, {"mark": "T2"}, {"mark": "T3", "roof_dead": "9 psf"}])
    assert text == "demo.toml [loads] roof_dead: '3' has no unit; write for example '3 psf'"


@pytest.mark.parametrize(
    ("changes", "text"),
    [
        (
            {"truss": [{"bottom_pitch": "7/12"}]},
            "[[truss]] T1 bottom_pitch: must be flatter than the pitch of the top chord",
        ),
        (
            {"truss": [{"heel_height": "0 in"}]},
            "[[truss]] T1 heel_height: '0 in' is not plausible; allowed: 0.984 in to 78.7 in",
        ),
        (
            {"truss": [{"panels": "4"}]},
            "[[truss]] T1 panels: '4' is not a whole number; write one without quotes, allowed: 2 to 40",
        ),
        ({"truss": [{"plies": 5}]}, "[[truss]] T1 plies: 5 is not plausible; allowed: 1 to 4"),
        ({"truss": [{"plies": True}]}, "[[truss]] T1 plies: true is not a whole number"),
        ({"truss": [{"mark": " "}]}, "[[truss]] number 1 mark: the text is empty; fill it in"),
        (
            {"truss": [{"mark": "T" * 30}]},
            "[[truss]] number 1 mark: 'TTTTTTTTTTTTTTTTTTTTTTTTTTTTTT' has 30 characters; at most 20",
        ),
        ({"truss": [{"shape": 5}]}, "[[truss]] T1 shape: 5 is not text; write it in quotes"),
        ({"truss": [{"top_chord": "2x4"}]}, "[[truss]] T1 top_chord: '2x4' is not a table; write top_chord = {"),
        (
            {"truss": [{"web": {"restraint": "sheathed"}}]},
            "web.restraint: 'sheathed' is not a restraint; write 'midpoint'",
        ),
        (
            {"truss": [{"web": {"restraint": "3 km"}}]},
            "web.restraint: '3 km' is not plausible; allowed: 1.97 in to 591 in",
        ),
        ({"truss": [{"web": {"grade": []}}]}, "[[truss]] T1: there is no key 'web.grade'; did you mean 'grades'?"),
        (
            {"truss": [{"web": {"sizes": ["2x4", "2x4"]}}]},
            "[[truss]] T1 web.sizes: '2x4' is in the list twice; name it once",
        ),
        ({"truss": [{"web": {"sizes": [4]}}]}, "[[truss]] T1 web.sizes: 4 is not text; write it in quotes"),
        ({"truss": [{"mark": f"T{k}"} for k in range(501)]}, "[[truss]]: there are 501; a job has at most 500"),
        (
            {"loads": {"point": {"action": "D"}}},
            "[loads] point: is not a list of tables; write [[loads.point]], in two brackets",
        ),
        ({"loads": {"point": [3]}}, "[loads] point 1: 3 stands where a table of keys is expected"),
        ({"loads": {"point": [{"action": "G"}]}}, "[loads] point 1 action: 'G' is not a choice here"),
        (
            {"site": {"ground_snow": "4000 psf"}},
            "[site] ground_snow: '4000 psf' is not plausible; allowed: 0 psf to 522 psf",
        ),
        ({"site": {"roof_r_value": "R-900"}}, "[site] roof_r_value: 'R-900' is not plausible; allowed: R-0 to R-150"),
        (
            {"site": {"topographic_factor": "1"}},
            "[site] topographic_factor: '1' is not a number; write one without quotes",
        ),
        ({"timber": {"service_class": 1}}, "[timber]: there is no key 'service_class'"),
        (
            {"timber": {"repetitive": "yes"}},
            "[timber] repetitive: 'yes' is not a choice here; write 'auto' or true or false",
        ),
        (
            {"deflection": {"ceiling": "plasterd"}},
            "[deflection] ceiling: 'plasterd' is not a choice here; did you mean 'plaster'?",
        ),
        ({"job": {"units": "us"}}, "[job] units: 'us' is not a choice here; did you mean 'US'?"),
        ({"job": {"number": 7}}, "[job] number: 7 is not text; write it in quotes"),
    ],
)
def test_each_mistake_by_its_text(changes, text):
    assert f"demo.toml {text}" in message(**changes) or text in message(**changes)


def test_a_table_of_the_wrong_sort():
    data = tables() | {"site": 5, "job": [1]}
    with pytest.raises(JobError) as error:
        job_from_mapping(data, "demo.toml", Path())
    assert "demo.toml [job]: a list stands where a table of keys is expected" in str(error.value)
    assert "demo.toml [site]: 5 stands where a table of keys is expected" in str(error.value)


def test_an_empty_mapping_asks_for_the_scheme():
    with pytest.raises(JobError, match=r"demo.toml \[standard\] scheme: is missing"):
        job_from_mapping({}, "demo.toml", Path())


def test_missing_groups_are_told():
    data = tables()
    del data["timber"]["web"]
    with pytest.raises(JobError, match=r"\[timber\] web: is missing; write its grades, sizes and restraint"):
        job_from_mapping(data, "demo.toml", Path())


@pytest.mark.parametrize(
    ("name", "text"), [("none.toml", "none.toml: there is no such file"), ("", "is a folder; give the job file in it")]
)
def test_a_path_without_a_job(tmp_path, name, text):
    with pytest.raises(JobError, match=text):
        read_job(tmp_path / name)


# --- a like job -----------------------------------------------------------------------------------------------------


def test_overrides_give_one_truss_like_another():
    base = job(truss=[{"panels": 4, "bottom_pitch": "1/12"}, {"mark": "T2", "spacing": "48 in"}])
    before = copy.deepcopy(base.given)
    like = with_overrides(base, "T2", {"span": "30 ft", "pitch": "26.57 deg", "overhang": None, "roof_dead": "12 psf"})
    (truss,) = like.trusses
    assert truss.mark == "T2"
    assert truss.span == pytest.approx(30 * FOOT)
    assert truss.pitch == pytest.approx(0.5, rel=1e-3)
    assert truss.spacing == pytest.approx(48 * INCH)
    assert truss.overhang == pytest.approx(16 * INCH)
    assert truss.loads.roof_dead == pytest.approx(12 * PSF)
    assert like.site == base.site
    assert with_overrides(base, None, {}).trusses == base.trusses[:1]
    assert base.given == before
    assert with_overrides(like, None, {"span": "31 ft"}).trusses[0].spacing == truss.spacing


def test_a_changed_shape_does_not_keep_panels_and_bottom_pitch():
    base = job(truss=[{"panels": 4, "bottom_pitch": "1/12"}])
    same = with_overrides(base, None, {"shape": "fink"}).trusses[0]
    other = with_overrides(base, None, {"shape": "howe"}).trusses[0]
    asked = with_overrides(base, None, {"shape": "howe", "panels": "6"}).trusses[0]
    assert (same.panels, other.panels, other.bottom_pitch, asked.panels) == (4, None, None, 6)


@pytest.mark.parametrize(
    ("mark", "changes", "text"),
    [
        ("T9", {}, "demo.toml: there is no truss 'T9'; allowed: 'T1'"),
        (None, {"span": "28"}, "demo.toml [[truss]] T1 span: '28' has no unit; write for example '28 ft'"),
        (None, {"spam": "28 ft"}, "demo.toml [[truss]] T1: there is no key 'spam'; did you mean 'span'?"),
        (None, {"panels": "six"}, "demo.toml [[truss]] T1 panels: 'six' is not a whole number"),
    ],
)
def test_overrides_that_are_refused(mark, changes, text):
    with pytest.raises(JobError) as error:
        with_overrides(job(), mark, changes)
    assert str(error.value).startswith(text)


# --- the keys -------------------------------------------------------------------------------------------------------


FORMS = [("ASCE 7-22", "NDS 2018 ASD"), ("ASCE 7-16", "NDS 2024 LRFD"), ("EN 1991", "EN 1995-1-1")]
KEYS = [(t, k) for standards in FORMS for t, keys in form_for(*standards).items() for k in keys.values()]


@pytest.mark.parametrize(("table", "key"), KEYS, ids=lambda v: v if isinstance(v, str) else v.name)
def test_every_default_can_be_read_and_is_explained(table, key):
    assert key.help
    stands_for_it = key.default is not None or bool(key.same_as)
    assert bool(key.assumption) == stands_for_it
    sources = read_settings("sources").keys()
    assert not stands_for_it or key.source.split()[0] in sources
    for system, default in (key.default or {}).items():
        assert key.kind.read(default, system) is not None


def test_the_horizontal_limit_is_the_tabulated_practice():
    limit = read_table("timber/deflection_practice").where(quantity="horizontal movement at the roller")["limit"]
    key = common_form()["deflection"]["horizontal"]
    assert key.kind.read(key.default["US"], "US") == pytest.approx(limit)


def test_a_standard_without_keys_is_refused():
    with pytest.raises(TableError, match="no job keys for the load standard 'XY 1'; tables/jobform serves ASCE 7-16"):
        form_for("XY 1", "NDS 2018 ASD")


def test_the_site_of_a_eurocode_job_in_si():
    site = {
        "ground_snow": "1.5 kN/m^2",
        "altitude": "350 m",
        "basic_wind_velocity": "26 m/s",
        "terrain": "II",
        "building_height": "6 m",
        "building_length": "18 m",
    }
    reader = TableReader(source="demo.toml", system="metric", standard="EN 1991")
    values = reader.read(form_for("EN 1991", "EN 1995-1-1")["site"], entries(site, "[site]"), "[site]")
    assert not reader.problems
    assert (values["ground_snow"], values["altitude"], values["basic_wind_velocity"]) == (1500.0, 350.0, 26.0)
    assert (values["exposure_coefficient"], values["thermal_coefficient"], values["air_density"]) == (1.0, 1.0, 1.25)
    assert (values["snow_guards"], values["terrain"], values["national_choices"]) == (False, "II", "recommended")
    assert (values["exceptional_snow"], values["wind_loaded_area"], values["truss_line"]) == (None, None, "both")
    assert (values["c_pi_over"], values["c_pi_under"]) == (0.2, -0.3)
    assert Assumption(
        place="[site] thermal_coefficient", text="thermal coefficient of snow C_t = 1.0 (EN 1991-1-3, 5.2(8))"
    ) in list(reader.assumptions)


def test_a_eurocode_job_must_name_its_service_class():
    reader = TableReader(source="demo.toml", system="metric", standard="EN 1991")
    keys = form_for("EN 1991", "EN 1995-1-1")["timber"]
    assert reader.read(keys, entries({"service_class": 2}, "[timber]"), "[timber]")["service_class"] == 2
    reader.read(keys, {}, "[timber]")
    assert "demo.toml [timber] service_class: is missing" in str(reader.failure())
