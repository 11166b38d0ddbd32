"""Messages about a job in metric units: examples and limits in its units; its country; its scheme."""

import re
import tomllib
from dataclasses import replace
from pathlib import Path

import pytest

from rooftruss.basis.jobcountry import OTHER_NAMES
from rooftruss.basis.jobform import job_from_mapping
from rooftruss.basis.jobkeys import form_for
from rooftruss.basis.kinds import Pitch, Quantity, RestraintKind
from rooftruss.basis.tables import read_table
from rooftruss.basis.written import quantity
from rooftruss.errors import JobError
from rooftruss.shapes.forming import layout_of
from rooftruss.units import SYSTEMS, both, shown
from tests.en_jobs import BARN, en_spec
from tests.jobs import JOB

EN = form_for("EN 1991", "EN 1995-1-1")
US_UNITS = r"\b(ft|psf|psi|plf|lbf|lb|pcf|mph)\b|\d in\b"
NO_UNIT, NO_QUANTITY = "has no unit; write for example", "is not a quantity; write for example"


def message(base: Path | str = BARN, /, **changes: object) -> str:
    """What a job with keys of its tables changed is refused with; None takes a key out."""
    data = tomllib.loads(base if isinstance(base, str) else base.read_text("utf-8"))
    for table, keys in changes.items():
        held = data["truss"][0] if table == "truss" else data[table]
        held |= keys
        for key in [k for k, v in keys.items() if v is None]:
            del held[key]
    with pytest.raises(JobError) as error:
        job_from_mapping(data, "demo.toml", Path())
    return str(error.value)


@pytest.mark.parametrize(
    ("table", "key", "value", "text"),
    [
        ("truss", "span", "9600", f"'9600' {NO_UNIT} '9600 mm'"),
        ("truss", "span", 9600, f"9600 {NO_UNIT} '9600 mm'"),
        ("truss", "span", "9.6", f"'9.6' {NO_UNIT} '9.6 m'"),
        ("truss", "span", "long", f"'long' {NO_QUANTITY} '9.6 m'"),
        (
            "truss",
            "span",
            "9,6 m",
            "'9,6 m' is not a quantity; write a decimal with a point, no commas, for example '9.6 m'",
        ),
        ("truss", "spacing", 600, f"600 {NO_UNIT} '600 mm'"),
        ("truss", "spacing", 0.6, f"0.6 {NO_UNIT} '0.6 m'"),
        ("truss", "overhang", "0.45", f"'0.45' {NO_UNIT} '0.45 m'"),
        ("truss", "bearing", "100", f"'100' {NO_UNIT} '100 mm'"),
        ("site", "altitude", 350, f"350 {NO_UNIT} '350 m'"),
        ("site", "ground_snow", 1.5, f"1.5 {NO_UNIT} '1.5 kN/m2'"),
        ("site", "ground_snow", "1500", f"'1500' {NO_UNIT} '1500 N/m2'"),
        ("site", "ground_snow", "1.5 kN", "'1.5 kN' is not in a unit that fits; write for example '1.5 kN/m2'"),
        ("site", "basic_wind_velocity", "26", f"'26' {NO_UNIT} '26 m/s'"),
        ("site", "basic_wind_velocity", "100", f"'100' {NO_UNIT} '100 km/h'"),
        ("loads", "maintenance_load", 1, f"1 {NO_UNIT} '1 kN'"),
        ("loads", "maintenance_load", 1000, f"1000 {NO_UNIT} '1000 N'"),
        ("deflection", "horizontal", 20, f"20 {NO_UNIT} '20 mm'"),
        ("chord", "restraint", "glued", "a spacing such as '600 mm'"),
        ("chord", "restraint", "2", f"'2' {NO_UNIT} '2 m'"),
        ("chord", "sizes", "45x95", 'write for example ["35x60", "38x63"]'),
        ("truss", "pitch", "80 deg", "'80 deg' is not plausible; allowed: 2.4 deg to 63 deg (0.5/12 to 24/12)"),
        ("truss", "pitch", 27, "27 is not a pitch; write degrees such as '26.5 deg', or '50 %', or rise over run"),
        ("truss", "bottom_pitch", "70 deg", "allowed: 0 deg to 56 deg (0/12 to 18/12)"),
        ("grade", "E_0_mean", 11000, f"11000 {NO_UNIT} '11000 N/mm2'"),
        ("grade", "E_0_mean", 11, f"11 {NO_UNIT} '11 kN/mm2'"),
        ("grade", "f_m_k", "24", f"'24' {NO_UNIT} '24 N/mm2'"),
    ],
)
def test_the_example_has_the_likeliest_metric_unit(table, key, value, text):
    with pytest.raises(JobError) as error:
        EN[table][key].kind.read(value, "metric")
    assert text in str(error.value)


MEASURED = [
    (t, k) for t, keys in EN.items() for k in keys.values() if isinstance(k.kind, Quantity | Pitch | RestraintKind)
]


@pytest.mark.parametrize(("table", "key"), MEASURED, ids=lambda v: v if isinstance(v, str) else v.name)
@pytest.mark.parametrize("value", ["12", 12, "x", "9 spans", "1e30 m", True])
def test_no_metric_message_speaks_of_feet_and_what_it_proposes_can_be_read(table, key, value):
    with pytest.raises(JobError) as error:
        key.kind.read(value, "metric")
    assert not re.search(US_UNITS, str(error.value))
    example = re.search(r"(?:for example|such as) '([^']+)'", str(error.value))
    if example and isinstance(key.kind, Quantity):
        assert isinstance(quantity(example[1], key.kind.unit), float)


@pytest.mark.parametrize(("table", "key"), MEASURED, ids=lambda v: v if isinstance(v, str) else v.name)
def test_an_example_that_answers_no_number_is_within_the_limits(table, key):
    if isinstance(key.kind, Quantity):
        assert key.kind.read(key.kind.example("x", "metric"), "metric") is not None


@pytest.mark.parametrize("key", ["pitch", "bottom_pitch"])
def test_the_degrees_shown_as_limits_are_allowed(key):
    kind = EN["truss"][key].kind
    for degrees in re.findall(r"[\d.]+ deg", kind.range("metric")):
        kind.read(degrees, "metric")


@pytest.mark.parametrize("units", [None, "SI"])
def test_a_job_without_units_of_its_own_is_answered_in_those_of_its_scheme(units):
    text = message(job={"units": units}, site={"ground_snow": "1.5"})
    assert "demo.toml [site] ground_snow: '1.5' has no unit; write for example '1.5 kN/m2'" in text.splitlines()
    us = message(JOB, job={"units": units}, site={"ground_snow": "40"})
    assert "demo.toml [site] ground_snow: '40' has no unit; write for example '40 psf'" in us.splitlines()


def test_an_american_job_in_metric_units_is_answered_in_those():
    text = message(JOB, job={"units": "metric"}, truss={"span": 8500}, loads={"attic": "none"})
    assert "demo.toml [[truss]] T1 span: 8500 has no unit; write for example '8500 mm'" in text.splitlines()
    attic = message(JOB, job={"units": "metric"}, loads={"attic": "none"})
    assert attic == 'demo.toml [[truss]] T1 attic: is "none", so ceiling_live must be "0 kN/m2"'


# --- the country of a site ------------------------------------------------------------------------------------------

CHOICES = {str(row["choice"]): str(row["refusal"]) for row in read_table("loads/national_choices_en1991").rows}
REFUSED = {choice: reason for choice, reason in CHOICES.items() if reason}


@pytest.mark.parametrize("country", REFUSED)
def test_a_country_that_is_not_covered_is_refused_with_its_reason(country):
    for given in (country, country.upper(), *OTHER_NAMES[country]):
        text = message(site={"national_choices": given})
        assert text.startswith(f"demo.toml [site] national_choices: {given!r}")
        assert f"is not covered: {REFUSED[country]}; covered are 'recommended', 'germany', 'france'" in text
        assert country in text.casefold()
        assert "[[truss]]" not in text


def test_the_british_annexes_are_named():
    # National annexes to BS EN 1991-1-4 and BS EN 1991-1-3, as tables/loads says
    assert "(united kingdom) is not covered: the UK annexes replace the roof pressure" in message(
        site={"national_choices": "U.K."}
    )


@pytest.mark.parametrize(
    ("given", "hint"),
    [
        ("France", "did you mean 'france'?"),
        ("FR", "did you mean 'france'?"),
        ("Deutschland", "did you mean 'germany'?"),
        ("germani", "did you mean 'germany'?"),
        ("united kingdm", "did you mean 'united kingdom'?"),
        ("spain", "allowed: 'recommended', 'germany', 'france', 'finland'"),
    ],
)
def test_a_name_that_is_not_known_gets_a_hint(given, hint):
    assert (
        message(site={"national_choices": given})
        == f"demo.toml [site] national_choices: {given!r} is not known; {hint}"
    )


@pytest.mark.parametrize(
    ("scheme", "country", "served"),
    [("en1990-6.10", "finland", "recommended, germany, france"), ("en1990-finland", "germany", "finland")],
)
def test_a_scheme_of_another_country_is_refused_at_the_site(scheme, country, served):
    assert message(standard={"scheme": scheme}, site={"national_choices": country}) == (
        f"demo.toml [site] national_choices: the scheme {scheme}.toml is not that of {country!r}; it serves {served}: "
        "write one of these, or take another scheme"
    )


def test_every_other_name_belongs_to_a_choice():
    names = [name for others in OTHER_NAMES.values() for name in others]
    assert set(OTHER_NAMES) <= set(CHOICES)
    assert len(set(names)) == len(names)
    assert not set(names) & set(CHOICES)


# --- others ---------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "hint"),
    [
        ("en1990-6.1", "did you mean 'en1990-6.10'? Or write the path of a .toml file"),
        ("zz", "'en1990-finland', or the path of a .toml file"),
    ],
)
def test_an_unknown_scheme(name, hint):
    assert message(standard={"scheme": name}).endswith(hint)


def test_a_piece_that_is_too_long_is_told_in_the_units_of_the_job():
    spec = en_spec()
    timber = replace(spec.timber, longest_stock=1.5)
    assert spec.units == "metric"
    with pytest.raises(JobError) as error:
        layout_of(replace(spec, timber=timber))
    assert re.match(
        r"longest_stock: 1\.5 m \(4\.92 ft\), but a chord piece between panel points is [\d.]+ m \([\d.]+ ft\) long",
        str(error.value),
    )
    with pytest.raises(JobError, match=r"longest_stock: 4\.921 ft \(1\.5 m\), but a chord piece between .* ft \("):
        layout_of(replace(spec, timber=timber, units="US"))


def test_both_systems_stand_side_by_side():
    # 1 in = 25.4 mm, 1 ft = 0.3048 m exactly
    assert both(0.254, "size", "metric") == "254 mm (10 in)"
    assert both(0.254, "size") == "10 in (254 mm)"


@pytest.mark.parametrize("system", SYSTEMS)
def test_nothing_is_shown_as_minus_nothing(system):
    assert shown(-0.0, "force", system).startswith("0 ")
