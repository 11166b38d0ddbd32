"""The units module: exact definitions, the door from text to SI, and what is shown."""

import math

import pytest

from rooftruss import units
from rooftruss.errors import JobError
from rooftruss.units import Display, factor, magnitude, shown


@pytest.mark.parametrize(
    ("constant", "value", "source"),
    [
        (units.INCH, 0.0254, "international inch, exact (1959)"),
        (units.FOOT, 0.3048, "international foot, exact (1959)"),
        (units.POUND, 0.45359237, "international pound, exact (1959)"),
        (units.GRAVITY, 9.80665, "standard gravity, exact (CGPM 1901)"),
        (units.POUND_FORCE, 4.4482216152605, "pound times standard gravity"),
        (units.PSI, 6894.757293168, "lbf/in2, NIST SP 811 table B.8: 6.894757 E+03"),
        (units.PSF, 47.88025898034, "lbf/ft2, NIST SP 811 table B.8: 4.788026 E+01"),
        (units.PLF, 14.5939029372, "lbf/ft, NIST SP 811 table B.8: 1.459390 E+01"),
        (units.PCF, 16.01846337396, "lb/ft3, NIST SP 811 table B.8: 1.601846 E+01"),
        (units.MILE_PER_HOUR, 0.44704, "exact: 1609.344 m in 3600 s"),
    ],
)
def test_constants_are_the_published_ones(constant, value, source):
    assert constant == pytest.approx(value, rel=1e-12), source


@pytest.mark.parametrize(
    ("text", "unit", "value"),
    [
        ("28 ft", "m", 28 * 0.3048),
        ("3.5 in", "m", 0.0889),
        ("40 psf", "Pa", 40 * 47.88025898034),
        ("1.5 kN/m^2", "Pa", 1500.0),
        ("115 mph", "m/s", 115 * 0.44704),
        ("250 lbf", "N", 250 * 4.4482216152605),
        ("50 plf", "N/m", 50 * 14.5939029372),
        ("35 pcf", "kg/m^3", 35 * 16.01846337396),
        ("180 deg", "rad", math.pi),
        ("30 ft^2*hour*delta_degF/Btu", "m^2*K/W", 30 * 0.17611015908),  # NIST SP 811 table B.8: 1.761102 E-01
    ],
)
def test_magnitude_in_si(text, unit, value):
    assert magnitude(text, unit) == pytest.approx(value, rel=1e-9)


@pytest.mark.parametrize(
    ("given", "unit", "message"),
    [
        ("115", "m/s", "'115' has no unit; write for example '115 mph'"),
        (28, "m", "28 has no unit; write a quantity in quotes, for example '28 ft'"),
        ("40 ft", "Pa", "'40 ft' is not in a unit that fits; write for example '20 psf'"),
        ("long", "m", "'long' is not a quantity; write for example '28 ft'"),
        (True, "m", "True is not a quantity; write for example '28 ft'"),
        (None, "m", "None is not a quantity; write for example '28 ft'"),
        ("1e999 ft", "m", "'1e999 ft' is not a finite quantity; write for example '28 ft'"),
        ("nan ft", "m", "'nan ft' is not"),
    ],
)
def test_magnitude_says_what_to_write(given, unit, message):
    with pytest.raises(JobError) as error:
        magnitude(given, unit)
    assert str(error.value).startswith(message)


def test_a_long_text_is_cut_in_the_message():
    with pytest.raises(JobError, match="too long for a quantity") as error:
        magnitude("1" * 5000 + " ft", "m")
    assert len(str(error.value)) < 120


@pytest.mark.parametrize(
    ("unit", "value"), [("-", 1.0), ("", 1.0), ("psi", 6894.757293168), ("kN/m^2", 1000.0), ("in", 0.0254)]
)
def test_factor_of_a_table_column(unit, value):
    assert factor(unit) == pytest.approx(value, rel=1e-12)


def test_both_systems_show_the_same_kinds():
    assert units.US.keys() == units.METRIC.keys()


@pytest.mark.parametrize(
    ("value", "kind", "system", "text"),
    [
        (40 * units.PSF, "pressure", "US", "40 psf"),
        (1915.21, "pressure", "metric", "1.915 kN/m2"),
        (28 * units.FOOT, "length", "US", "28 ft"),
        (8.5344, "length", "metric", "8.534 m"),
        (123456.0, "force", "US", "27754 lbf"),
        (0.5, "ratio", "US", "0.5"),
        (0.0, "length", "US", "0 ft"),
    ],
)
def test_shown_in_the_units_of_the_job(value, kind, system, text):
    assert shown(value, kind, system) == text


def test_display_divides_by_its_unit():
    assert Display("in", units.INCH, "0.00").of(0.0889) == pytest.approx(3.5)
