"""Values as an estimator writes them: what is read, what is refused, and that writing and reading agree."""

import math
from contextlib import suppress

import pytest
from hypothesis import given
from hypothesis import strategies as st

from rooftruss.basis.written import pitch, quantity, told
from rooftruss.errors import JobError

FOOT, INCH, PSF, MPH = 0.3048, 0.0254, 47.88025898033584, 0.44704


@pytest.mark.parametrize(
    ("text", "unit", "value"),
    [
        ("28 ft", "m", 28 * FOOT),
        ("28ft", "m", 28 * FOOT),
        (" 28 ft ", "m", 28 * FOOT),
        ("28 ft 6 in", "m", 28.5 * FOOT),
        ("28'-6\"", "m", 28.5 * FOOT),
        ("28' 6 1/2\"", "m", 28 * FOOT + 6.5 * INCH),
        ("28'", "m", 28 * FOOT),
        ('3.5"', "m", 3.5 * INCH),
        ("3 1/2 in", "m", 3.5 * INCH),
        ("3-1/2 in", "m", 3.5 * INCH),
        ("1/2 in", "m", 0.5 * INCH),
        (".5 in", "m", 0.5 * INCH),
        ("8534 mm", "m", 8.534),
        ("1e1 ft", "m", 10 * FOOT),
        ("-282 ft", "m", -282 * FOOT),
        ("40 psf", "Pa", 40 * PSF),
        ("40 lbf/ft^2", "Pa", 40 * PSF),
        ("40 lbf/ft**2", "Pa", 40 * PSF),
        ("1.5 kN/m2", "Pa", 1500.0),
        ("1.5 kN/m²", "Pa", 1500.0),
        ("1.5 kN m^-2", "Pa", 1500.0),
        ("115 mph", "m/s", 115 * MPH),
        ("26 m/s", "m/s", 26.0),
        ("250 lbf", "N", 250 * 4.4482216152605),
        ("R-30", "m^2*K/W", 30 * 0.17611015908),  # ft2 h degF / Btu, NIST SP 811: 1.761102 E-01
        ("5.3 m^2*K/W", "m^2*K/W", 5.3),
    ],
)
def test_quantities_that_are_read(text, unit, value):
    assert quantity(text, unit) == pytest.approx(value, rel=1e-9)


def test_a_conversion_leaves_no_rounding():
    assert quantity("3.5 in", "m") == 0.0889
    assert quantity("28 ft", "m") == 8.5344


@pytest.mark.parametrize(
    ("given_value", "message"),
    [
        ("28", "'28' has no unit; write for example '28 ft'"),
        ("1/2", "'1/2' has no unit; write for example '1/2 ft'"),
        (28, "28 has no unit; write for example '28 ft'"),
        (28.5, "28.5 has no unit; write for example '28.5 ft'"),
        (math.nan, "nan has no unit; write for example '28 ft'"),
        (10**400, "a very long number has no unit; write for example '28 ft'"),
        (True, "true is not a quantity; write for example '28 ft'"),
        ([1], "a list is not a quantity; write for example '28 ft'"),
        ({}, "a table is not a quantity; write for example '28 ft'"),
        (None, "the NoneType None is not a quantity; write for example '28 ft'"),
        ("", "'' is not a quantity; write for example '28 ft'"),
        ("ft", "'ft' is not a quantity; write for example '28 ft'"),
        ("28 ft + 3 m", "'28 ft + 3 m' is not a quantity; write for example '28 ft'"),
        ("28 ft 6", "'28 ft 6' is not a quantity; write for example '28 ft'"),
        ("10 20 ft", "'10 20 ft' is not a quantity; write for example '28 ft'"),
        ("1,200 ft", "'1,200 ft' is not a quantity; write a decimal with a point, no commas, for example '28 ft'"),
        ("28 psf", "'28 psf' is not in a unit that fits; write for example '28 ft'"),
        ("28 fet", "'28 fet' is not in a unit that fits; write for example '28 ft'"),
        ("1/0 ft", "'1/0 ft' is not in a unit that fits; write for example '28 ft'"),
        ("R-30", "'R-30' is not a quantity; write for example '28 ft'"),
    ],
)
def test_quantities_that_are_refused(given_value, message):
    with pytest.raises(JobError) as error:
        quantity(given_value, "m")
    assert str(error.value) == message


@pytest.mark.parametrize(
    ("text", "ratio"),
    [
        ("6/12", 0.5),
        ("6:12", 0.5),
        (" 6.5 / 12 ", 6.5 / 12),
        ("1/3", 1 / 3),
        ("45 deg", 1.0),
        ("30°", math.sqrt(1 / 3)),
        ("26.57 degrees", math.tan(26.57 * math.pi / 180)),
        ("50 %", 0.5),
        ("0/12", 0.0),
    ],
)
def test_pitches_that_are_read(text, ratio):
    assert pitch(text) == pytest.approx(ratio, rel=1e-12)


@pytest.mark.parametrize(
    "given_value", ["6", "", "6/12/3", "steep", "0.5 rad", "6 in", 6, 0.5, True, None, "6/" + "9" * 80]
)
def test_pitches_that_are_refused(given_value):
    with pytest.raises(
        JobError, match=r"is not a pitch; write rise over run such as '6/12', or '26\.57 deg', or '50 %'"
    ):
        pitch(given_value)


@pytest.mark.parametrize(
    ("text", "reason"), [("6/0", "must be more than 0"), ("6/-12", "more than 0"), ("90 deg", "up to 90")]
)
def test_pitches_without_a_meaning(text, reason):
    with pytest.raises(JobError, match=reason):
        pitch(text)


def test_told_is_short():
    assert told("x" * 1000) == repr("x" * 37 + "...")
    assert told(16**9000) == "a very long number"


UNITS = st.sampled_from(
    [
        ("ft", "m", FOOT),
        ("in", "m", INCH),
        ("mm", "m", 1e-3),
        ("psf", "Pa", PSF),
        ("kPa", "Pa", 1e3),
        ("mph", "m/s", MPH),
    ]
)


@given(st.floats(0, 1e6, allow_nan=False), UNITS, st.sampled_from(["{} {}", "{}{}", " {}  {} "]))
def test_written_quantities_come_back(number, unit, form):
    name, si, size = unit
    text = form.format(f"{number:.6g}", name)
    assert quantity(text, si) == pytest.approx(float(f"{number:.6g}") * size, rel=1e-9)


@given(
    st.integers(0, 200),
    st.integers(0, 11),
    st.integers(1, 15),
    st.sampled_from(["{} ft {} {}/16 in", "{}'-{} {}/16\""]),
)
def test_feet_and_inches_come_back(feet, inches, sixteenths, form):
    metres = (12 * feet + inches + sixteenths / 16) * INCH
    assert quantity(form.format(feet, inches, sixteenths), "m") == pytest.approx(metres, rel=1e-9)


@given(st.floats(0.01, 89.0))
def test_a_pitch_in_degrees_is_the_same_over_a_run(degrees):
    ratio = math.tan(math.radians(float(f"{degrees:.6f}")))
    assert pitch(f"{degrees:.6f} deg") == pytest.approx(ratio, rel=1e-9)
    assert pitch(f"{12 * ratio:.12f}/12") == pytest.approx(ratio, rel=1e-7)


@given(st.text(max_size=80))
def test_any_text_is_read_or_refused_in_words(text):
    for read in (pitch, lambda value: quantity(value, "m")):
        with suppress(JobError):
            assert isinstance(read(text), float)
