"""Quantities, pitches and other values as an estimator writes them, read strictly.

The grammar is narrower than pint's on purpose: pint reads "3 1/2 in" as 3 x 1/2 = 1.5 in and "3,5 m" as 35 m.
"""

import math
import re
from collections.abc import Sequence
from fractions import Fraction

from rooftruss.errors import JobError
from rooftruss.units import ROOM_FOR, magnitude

LONGEST = 60  # characters of a quantity
_DECIMAL = r"[-+]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][-+]?[0-9]{1,3})?"
_FRACTION = r"(?:[0-9]{1,6}[ -])?[0-9]{1,6}/[0-9]{1,6}"
_NUMBER = rf"(?:{_FRACTION}|{_DECIMAL})"
_WORD = r"[^\W\d]+(?:(?:\^|\*\*)?-?[1-4]|[²³])?"
_UNIT = rf"(?:{_WORD}(?:\s*[*/· ]\s*{_WORD})*|['\"′″])"
_ONE = re.compile(rf"({_NUMBER})\s*({_UNIT})")
_FEET_AND_INCHES = re.compile(rf"([0-9]+)\s*(?:ft|['′])[\s-]*({_NUMBER})\s*(?:in|[\"″])")
_PITCH = re.compile(rf"({_DECIMAL})\s*(?:[/:]\s*({_DECIMAL})|(deg|degrees|°)|(%))")
_R_VALUE = re.compile(rf"[Rr]-?({_DECIMAL})")
_PITCH_EXAMPLES = {
    "US": "rise over run such as '6/12', or '26.57 deg', or '50 %'",
    "metric": "degrees such as '26.5 deg', or '50 %', or rise over run such as '6/12'",
}
_SIGNS = {"'": "ft", "′": "ft", '"': "in", "″": "in"}


def told(value: object) -> str:
    """What the user gave, short enough for a message.

    >>> told("28"), told(True), told([1, 2]), told(28)
    ("'28'", 'true', 'a list', '28')
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return repr(value if len(value) <= 40 else value[:37] + "...")
    if isinstance(value, int):
        return str(value) if abs(value) < 10**15 else "a very long number"
    if isinstance(value, float):
        return repr(value)
    if isinstance(value, list | tuple):
        return "a list"
    return "a table" if isinstance(value, dict) else f"the {type(value).__name__} {value}"


def quantity(value: object, unit: str, example: str = "") -> float:
    """Value in the SI `unit` of a written quantity: "28 ft", "28 ft 6 in", "28'-6\\"", "3 1/2 in", "1.5 kN/m2", "R-30".

    example: what a message shows, in the units of the job; left out: one in US units.
    Raises JobError (without a place) for a bare number, an unknown unit, a unit that does not fit, or anything else.

    >>> round(quantity("3 1/2 in", "m"), 4), round(quantity("28 ft 6 in", "m"), 4), quantity("1.5 kN/m2", "Pa")
    (0.0889, 8.6868, 1500.0)
    """
    example = example or ROOM_FOR.get(unit, f"10 {unit}")
    if isinstance(value, bool) or not isinstance(value, int | float | str):
        raise JobError(f"{told(value)} is not a quantity; write for example '{example}'")
    text = str(value).strip() if isinstance(value, str) else ""
    if bare(value):
        raise JobError(f"{told(value)} has no unit; write for example '{_with_unit(value, example)}'")
    parts = _parts(text, unit) if len(text) <= LONGEST else []
    if not parts:
        hint = "write a decimal with a point, no commas, " if "," in text else "write "
        raise JobError(f"{told(value)} is not a quantity; {hint}for example '{example}'")
    try:
        total = math.fsum(_number(number) * magnitude(f"1 {_spelt(name)}", unit) for number, name in parts)
        return float(f"{total:.14g}")  # drops the rounding of the conversion: 3.5 in is 0.0889 m
    except JobError:
        raise JobError(f"{told(value)} is not in a unit that fits; write for example '{example}'") from None


def bare(value: object) -> bool:
    """Whether the value is a number without a unit, typed as text or not.

    >>> bare("9600"), bare(9.6), bare("9600 mm"), bare(True)
    (True, True, False, False)
    """
    if isinstance(value, str):
        return re.fullmatch(_NUMBER, value.strip()) is not None
    return isinstance(value, int | float) and not isinstance(value, bool)


def likeliest(value: object, unit: str, examples: Sequence[str], limits: tuple[float, float]) -> str:
    """The example to show for a value: the first within the limits [SI]; for a bare number the one whose unit, the
    largest that does, brings the number within them.

    >>> [likeliest(value, "m", ("8 m", "8000 mm"), (1.0, 40.0)) for value in ("9600", 9.6, "9,6")]
    ['8000 mm', '8 m', '8 m']
    """

    def fits(text: str) -> bool:
        try:
            return limits[0] <= quantity(text, unit) <= limits[1]
        except JobError:
            return False

    def unit_size(text: str) -> float:
        return quantity(_with_unit(1, text), unit)

    usual = next(filter(fits, examples), examples[0])
    if not bare(value):
        return usual
    units = sorted(examples, key=unit_size, reverse=True)
    return next((e for e in units if fits(_with_unit(value, e))), usual)


def pitch(value: object, system: str = "US") -> float:
    """Rise over run of a written pitch: "6/12", "6:12", "26.57 deg" or "50 %"; `system` decides on the example shown.

    >>> pitch("6/12"), round(pitch("45 deg"), 9), pitch("50 %")
    (0.5, 1.0, 0.5)
    """
    found = _PITCH.fullmatch(value.strip()) if isinstance(value, str) and len(value) <= LONGEST else None
    if found is None:
        raise JobError(f"{told(value)} is not a pitch; write {_PITCH_EXAMPLES[system]}")
    rise, run, degrees, _ = found.groups()
    if degrees:
        if not abs(float(rise)) < 90:
            raise JobError(f"{told(value)} is not a pitch; degrees go up to 90, and rise over run is written '6/12'")
        return math.tan(math.radians(float(rise)))
    if run is not None and not float(run) > 0:
        raise JobError(f"{told(value)} is not a pitch; the run after the stroke must be more than 0, as in '6/12'")
    return float(rise) / (float(run) if run is not None else 100.0)


def _with_unit(value: object, example: str) -> str:
    number, _, unit = example.partition(" ")
    given = value.strip() if isinstance(value, str) else told(value)
    plausible = len(given) <= 12 and all(c in "0123456789./ -" for c in given)
    return f"{given if plausible else number} {unit}"


def _parts(text: str, unit: str) -> list[tuple[str, str]]:
    """(number, unit) pairs whose sum the text means; none when it cannot be read."""
    resistance = _R_VALUE.fullmatch(text)
    if resistance and unit == "m^2*K/W":  # an R-value in the United States is in ft2 h degF / Btu
        return [(resistance[1], "ft^2*hour*delta_degF/Btu")]
    both = _FEET_AND_INCHES.fullmatch(text)
    if both:
        return [(both[1], "ft"), (both[2], "in")]
    one = _ONE.fullmatch(text)
    return [(one[1], one[2])] if one else []


def _number(text: str) -> float:
    if "/" not in text:
        return float(text)
    whole, _, fraction = text.replace("-", " ").rpartition(" ")
    top, bottom = (int(part) for part in fraction.split("/"))
    if bottom == 0:
        raise JobError("a fraction over 0")
    return float(int(whole or 0) + Fraction(top, bottom))


def _spelt(unit: str) -> str:
    """Unit text as pint reads it: "kN/m2" and "kN/m²" become "kN/m^2"."""
    unit = _SIGNS.get(unit, unit).replace("**", "^").replace("·", "*").replace("²", "^2").replace("³", "^3")
    return re.sub(r"(?<=[^\W\d])(?=[1-4])", "^", unit)
