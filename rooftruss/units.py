"""Units. The only module that imports pint; everything inside the package is SI (m, N, Pa, kg, rad)."""

from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING, Any

from rooftruss.errors import JobError

if TYPE_CHECKING:
    import pint

# Exact by definition (international yard and pound, standard gravity); the formula modules convert with them.
INCH = 0.0254
FOOT = 0.3048
POUND = 0.45359237
GRAVITY = 9.80665
POUND_FORCE = POUND * GRAVITY
PSI = POUND_FORCE / INCH**2
PSF = POUND_FORCE / FOOT**2
PLF = POUND_FORCE / FOOT
PCF = POUND / FOOT**3  # mass density
MILE_PER_HOUR = 1609.344 / 3600.0

ROOM_FOR = {  # dimension asked for -> example that a message can show
    "m": "28 ft",
    "Pa": "20 psf",
    "m/s": "115 mph",
    "N": "250 lbf",
    "N/m": "50 lbf/ft",
    "rad": "26.57 deg",
    "kg/m^3": "35 lb/ft^3",
    "m^2*K/W": "30 ft^2*hour*delta_degF/Btu",
}
METRIC_ROOM_FOR = {  # kind of display, or dimension -> examples in metric units, the likeliest first
    "length": ("9.6 m", "9600 mm"),
    "size": ("600 mm", "20 mm", "0.6 m"),
    "pressure": ("1.5 kN/m2", "1500 N/m2"),
    "speed": ("26 m/s", "94 km/h"),
    "force": ("1.5 kN", "1500 N"),
    "line load": ("1.5 kN/m", "1500 N/m"),
    "stress": ("24 N/mm2", "11 kN/mm2"),
    "density": ("420 kg/m3", "1.25 kg/m3"),
    "area": ("10 m2", "5400 mm2"),
    "m^2*K/W": ("5.3 m^2*K/W",),
}


@cache
def registry() -> "pint.UnitRegistry[Any]":
    """The one pint registry, made on first use (it costs a fifth of a second)."""
    import pint

    ureg: pint.UnitRegistry[Any] = pint.UnitRegistry(autoconvert_offset_to_baseunit=True)
    ureg.define("psf = pound_force / foot ** 2")
    ureg.define("plf = pound_force / foot")
    ureg.define("pcf = pound / foot ** 3")
    return ureg


def magnitude(text: object, unit: str) -> float:
    """Value in the SI `unit` of a quantity as the user writes it, such as ``"28 ft"``.

    Raises JobError without a place; the caller puts file and key in front.

    >>> round(magnitude("40 psf", "Pa"), 2)
    1915.21
    """
    example = ROOM_FOR.get(unit, unit)
    if isinstance(text, bool) or not isinstance(text, int | float | str):
        raise JobError(f"{text!r} is not a quantity; write for example '{example}'")
    if isinstance(text, int | float):
        unit_text = example.split(" ", 1)[1]
        raise JobError(f"{text!r} has no unit; write a quantity in quotes, for example '{text} {unit_text}'")
    return _parsed(text, unit, example)


@cache
def _parsed(text: str, unit: str, example: str) -> float:
    import pint

    if len(text) > 60:
        raise JobError(f"{text[:40]!r}... is too long for a quantity; write for example '{example}'")
    try:
        quantity: Any = registry().Quantity(text)
        if quantity.unitless and unit != "rad":
            raise JobError(f"{text!r} has no unit; write for example '{example}'")
        value = float(quantity.to(unit).magnitude)
    except pint.DimensionalityError:
        raise JobError(f"{text!r} is not in a unit that fits; write for example '{example}'") from None
    except JobError:
        raise
    except Exception:  # pint raises many kinds (tokens, syntax, overflow) on text that is no quantity
        raise JobError(f"{text!r} is not a quantity; write for example '{example}'") from None
    if not abs(value) < float("inf"):
        raise JobError(f"{text!r} is not a finite quantity; write for example '{example}'")
    return value


@cache
def factor(unit: str) -> float:
    """SI value of one `unit` of a table's units row ("-" is 1).

    >>> round(factor("psi"), 3)
    6894.757
    """
    if unit in ("-", ""):
        return 1.0
    return float(registry().Quantity(1.0, unit).to_base_units().magnitude)


@dataclass(frozen=True, slots=True)
class Display:
    """How one kind of quantity is shown: unit label, SI size of the unit, spreadsheet number format."""

    label: str
    size: float
    number_format: str

    def of(self, value: float) -> float:
        """`value` (SI) in this unit."""
        return value / self.size


US = {
    "length": Display("ft", FOOT, "0.00"),
    "size": Display("in", INCH, "0.00"),
    "area": Display("in2", INCH**2, "0.00"),
    "roof area": Display("ft2", FOOT**2, "0.0"),
    "inertia": Display("in4", INCH**4, "0.00"),
    "section modulus": Display("in3", INCH**3, "0.00"),
    "force": Display("lbf", POUND_FORCE, "#,##0"),
    "moment": Display("lbf ft", POUND_FORCE * FOOT, "#,##0"),
    "line load": Display("lbf/ft", PLF, "0.0"),
    "pressure": Display("psf", PSF, "0.00"),
    "stress": Display("psi", PSI, "#,##0"),
    "speed": Display("mph", MILE_PER_HOUR, "0"),
    "volume": Display("ft3", FOOT**3, "0.00"),
    "mass": Display("lb", POUND, "#,##0.0"),
    "density": Display("lb/ft3", PCF, "0.0"),
    "deflection": Display("in", INCH, "0.000"),
    "angle": Display("deg", 0.017453292519943295, "0.00"),
    "ratio": Display("-", 1.0, "0.00"),
    "factor": Display("-", 1.0, "0.000"),
}
METRIC = {
    "length": Display("m", 1.0, "0.000"),
    "size": Display("mm", 1e-3, "0"),
    "area": Display("mm2", 1e-6, "#,##0"),
    "roof area": Display("m2", 1.0, "0.00"),
    "inertia": Display("mm4", 1e-12, "#,##0"),
    "section modulus": Display("mm3", 1e-9, "#,##0"),
    "force": Display("kN", 1e3, "0.00"),
    "moment": Display("kN m", 1e3, "0.000"),
    "line load": Display("kN/m", 1e3, "0.000"),
    "pressure": Display("kN/m2", 1e3, "0.000"),
    "stress": Display("N/mm2", 1e6, "0.00"),
    "speed": Display("m/s", 1.0, "0.0"),
    "volume": Display("m3", 1.0, "0.0000"),
    "mass": Display("kg", 1.0, "#,##0.0"),
    "density": Display("kg/m3", 1.0, "0"),
    "deflection": Display("mm", 1e-3, "0.0"),
    "angle": Display("deg", 0.017453292519943295, "0.00"),
    "ratio": Display("-", 1.0, "0.00"),
    "factor": Display("-", 1.0, "0.000"),
}
SYSTEMS = {"US": US, "metric": METRIC}


def both(value: float, kind: str, system: str = "US") -> str:
    """Text of an SI value in US and metric units, those of the job first where the message knows them.

    >>> both(0.3048, "size"), both(0.3048, "size", "metric")
    ('12 in (305 mm)', '304.8 mm (12 in)')
    """
    other = "metric" if system == "US" else "US"
    return f"{shown(value, kind, system)} ({shown(value, kind, other, 3)})"


def shown(value: float, kind: str, system: str, digits: int = 4) -> str:
    """Text of an SI value in the job's units.

    >>> shown(1915.21, "pressure", "US")
    '40 psf'
    """
    display = SYSTEMS[system][kind]
    number = f"{display.of(value) + 0.0:.{digits}g}"  # no "-0"
    if "e" in number and 1e-4 < abs(display.of(value)) < 1e9:
        number = f"{display.of(value):.0f}"
    return number if display.label == "-" else f"{number} {display.label}"
