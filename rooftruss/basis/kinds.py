"""Kinds of values a job file may hold. Each reads one written value or raises a JobError without a place."""

import math
import re
import unicodedata
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Protocol

from rooftruss.basis import written
from rooftruss.basis.job import Restraint
from rooftruss.errors import JobError, nearest
from rooftruss.units import METRIC_ROOM_FOR, SYSTEMS, shown

SI_UNIT = {
    "length": "m",
    "size": "m",
    "pressure": "Pa",
    "speed": "m/s",
    "force": "N",
    "line load": "N/m",
    "stress": "Pa",
    "density": "kg/m^3",
    "area": "m^2",
}
RESISTANCE = "m^2*K/W"
LONGEST_TEXT = 200
LONGEST_LIST = 100


class Kind(Protocol):
    """Reads one value; `system` ("US" or "metric") only decides on the units of a message."""

    def read(self, value: object, system: str) -> Any:
        """The value in SI. Raises JobError without a place."""
        ...


@dataclass(frozen=True, slots=True, kw_only=True)
class Text:
    """A line of text, free of control characters; `pattern` may restrict it further, `rule` says how in words."""

    longest: int = LONGEST_TEXT
    may_be_empty: bool = False
    pattern: str = ""
    rule: str = ""

    def read(self, value: object, system: str) -> str:
        """The text without outer blanks."""
        if not isinstance(value, str):
            raise JobError(f"{written.told(value)} is not text; write it in quotes")
        text = value.strip()
        if any(unicodedata.category(c) in ("Cc", "Cf", "Cs", "Zl", "Zp") for c in text):
            raise JobError(f"{written.told(value)} holds a line break or another control character; take it out")
        if not text and not self.may_be_empty:
            raise JobError("the text is empty; fill it in")
        if len(text) > self.longest:
            raise JobError(f"{written.told(text)} has {len(text)} characters; at most {self.longest} fit")
        if self.pattern and not re.fullmatch(self.pattern, text):
            raise JobError(f"{written.told(text)} does not fit; {self.rule}")
        return text


@dataclass(frozen=True, slots=True, kw_only=True)
class Choice:
    """One of a few words (or true, false, whole numbers)."""

    choices: tuple[str | bool | int, ...]

    def read(self, value: object, system: str) -> str | bool | int:
        """The choice itself."""
        for choice in self.choices:
            if type(value) is type(choice) and value == choice:
                return choice
        words = [c for c in self.choices if isinstance(c, str)]
        if isinstance(value, str) and len(words) == len(self.choices):
            raise JobError(f"{written.told(value)} is not a choice here; {nearest(value[:LONGEST_TEXT], words)}")
        raise JobError(f"{written.told(value)} is not a choice here; write {' or '.join(map(_in_file, self.choices))}")


@dataclass(frozen=True, slots=True, kw_only=True)
class Quantity:
    """A quantity with its unit. `shows` is the kind of display; the limits are sanity limits as written in the form."""

    shows: str
    unit: str
    limits: tuple[str, str]

    def read(self, value: object, system: str) -> float:
        """The SI value."""
        try:
            number = written.quantity(value, self.unit)
        except JobError:  # once more for its message: a right value needs no example
            number = written.quantity(value, self.unit, self.example(value, system))
        least, most = self._limits()
        if least >= 0 and number < 0:
            raise JobError(f"{written.told(value)} is negative; {self.range(system)}")
        if not least - 1e-9 <= number <= most * (1 + 1e-9):
            raise JobError(f"{written.told(value)} is not plausible; {self.range(system)}")
        return number

    def range(self, system: str) -> str:
        """Sentence part that gives the limits in the job's units."""
        if self.shows not in SYSTEMS[system] or self.shows == "area":  # areas are shown in the unit of a section
            return "allowed: {} to {}".format(*self.limits)
        least, most = (shown(limit, self.shows, system, 3) for limit in self._limits())
        return f"allowed: {least} to {most}"

    def example(self, value: object = "", system: str = "US") -> str:
        """What a message shows as an example: with the likeliest unit of the system; "" where `written` has its own."""
        examples = METRIC_ROOM_FOR.get(self.shows or self.unit, ())
        if system == "US" or not examples:
            return ""
        return written.likeliest(value, self.unit, examples, self._limits())

    def _limits(self) -> tuple[float, float]:
        least, most = (written.quantity(limit, self.unit) for limit in self.limits)
        return least, most


@dataclass(frozen=True, slots=True, kw_only=True)
class Pitch:
    """Rise over run, as "6/12", "26.57 deg" or "50 %"."""

    limits: tuple[str, str]

    def read(self, value: object, system: str) -> float:
        """Rise over run."""
        ratio = written.pitch(value, system)
        least, most = map(written.pitch, self.limits)
        if not least - 1e-9 <= ratio <= most + 1e-9:
            raise JobError(f"{written.told(value)} is not plausible; {self.range(system)}")
        return ratio

    def range(self, system: str) -> str:
        """Sentence part that gives the limits: as rise over run, in a metric job in degrees first."""
        over_run = "{} to {}".format(*self.limits)
        if system == "US":
            return f"allowed: {over_run}"
        least, most = (math.degrees(math.atan(written.pitch(limit))) for limit in self.limits)
        return f"allowed: {least:.2g} deg to {most:.2g} deg ({over_run})"


@dataclass(frozen=True, slots=True, kw_only=True)
class Number:
    """A number without a unit."""

    limits: tuple[float, float]
    whole: bool = False

    def read(self, value: object, system: str) -> float | int:
        """The number; an int where whole numbers are asked for."""
        sort = "a whole number" if self.whole else "a number"
        number = value if isinstance(value, int | float) and not isinstance(value, bool) else None
        if number is None or (self.whole and number % 1 != 0):
            raise JobError(f"{written.told(value)} is not {sort}; write one without quotes, {self.range()}")
        if not self.limits[0] <= number <= self.limits[1]:
            raise JobError(f"{written.told(value)} is not plausible; {self.range()}")
        return int(number) if self.whole else float(number)

    def range(self) -> str:
        """Sentence part that gives the limits."""
        return "allowed: {:g} to {:g}".format(*self.limits)


@dataclass(frozen=True, slots=True, kw_only=True)
class Names:
    """A list of names of the catalogue that `known` looks up (it raises for a name it does not hold)."""

    known: Callable[[str], object]
    example: str
    metric_example: str = ""  # for jobs shown in metric units; left out: the same

    def read(self, value: object, system: str) -> tuple[str, ...]:
        """The names, in the order given."""
        example = self.metric_example if system == "metric" and self.metric_example else self.example
        if not isinstance(value, list | tuple):
            raise JobError(f"{written.told(value)} is not a list; write for example {example}")
        if not 1 <= len(value) <= LONGEST_LIST:
            raise JobError(f"the list has {len(value)} names; write 1 to {LONGEST_LIST}, for example {example}")
        names = tuple(Text().read(item, system) for item in value)
        for name in names:
            self.known(name)
        twice = next((name for k, name in enumerate(names) if name in names[:k]), None)
        if twice is not None:
            raise JobError(f"{twice!r} is in the list twice; name it once")
        return names


@dataclass(frozen=True, slots=True, kw_only=True)
class Words:
    """A list of some of a few words, each at most once; it may be empty."""

    choices: tuple[str, ...]

    def read(self, value: object, system: str) -> tuple[str, ...]:
        """The words, in the order of the choices."""
        if not isinstance(value, list | tuple):
            example = ", ".join(map(repr, self.choices))
            raise JobError(f"{written.told(value)} is not a list; write some of [{example}], or []")
        found = [Choice(choices=self.choices).read(word, system) for word in value[: LONGEST_LIST + 1]]
        if len(set(found)) < len(found):
            raise JobError("a word is in the list twice; name it once")
        return tuple(choice for choice in self.choices if choice in found)


@dataclass(frozen=True, slots=True, kw_only=True)
class RestraintKind:
    """Lateral restraint: one of the words, or a spacing such as "24 in"."""

    words: tuple[str, ...]
    limits: tuple[str, str]

    def read(self, value: object, system: str) -> Restraint:
        """The restraint."""
        if isinstance(value, str) and value.strip() in self.words:
            return Restraint(kind=value.strip())
        spacing = Quantity(shows="size", unit="m", limits=self.limits)
        if not isinstance(value, str) or not re.match(r"\s*[-+.]?[0-9]", value):
            allowed = ", ".join(map(repr, self.words))
            example = spacing.example("", system) or "24 in"
            hint = f"write {allowed} or a spacing such as '{example}'"
            raise JobError(f"{written.told(value)} is not a restraint; {hint}")
        return Restraint(kind="spacing", spacing=spacing.read(value, system))


def _in_file(choice: str | bool | int) -> str:
    return repr(choice) if isinstance(choice, str) else written.told(choice)
