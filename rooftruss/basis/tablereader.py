"""Reads tables of a job file against their keys; gathers every mistake and every assumption on the way."""

from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, field
from typing import Any

from rooftruss.basis.job import Assumption
from rooftruss.basis.jobkeys import Key, Keys
from rooftruss.basis.written import told
from rooftruss.errors import JobError, RooftrussError, nearest

MOST_LINES = 10


@dataclass(frozen=True, slots=True)
class Given:
    """A value as given, and the table it was given in: "[loads]" or "[[truss]] T1"."""

    place: str
    value: object


Entries = Mapping[str, Given]


def entries(table: Mapping[str, object], place: str) -> dict[str, Given]:
    """The keys of one table with their place, so that a merge with another table keeps each origin."""
    return {str(name): Given(place, value) for name, value in table.items()}


@dataclass(slots=True)
class TableReader:
    """Values of one job file, its mistakes and assumptions as they turn up (kept in order, each once)."""

    source: str
    system: str  # "US" or "metric"
    standard: str = ""  # load standard, for keys that belong to one edition and for the words of assumptions
    problems: dict[str, None] = field(default_factory=dict)
    mistakes: int = 0  # counts repetitions too: whoever sees it grow has not read everything
    assumptions: dict[Assumption, None] = field(default_factory=dict)

    def problem(self, place: str, message: str) -> None:
        """Note one mistake; place "" where the message begins with it."""
        self.mistakes += 1
        self.problems[f"{self.source} {place}: {message}" if place else f"{self.source} {message}"] = None

    @contextmanager
    def at(self, place: str) -> Iterator[None]:
        """Note an error raised inside as a mistake at a place."""
        try:
            yield
        except RooftrussError as error:
            self.problem(place, str(error))

    def failure(self) -> JobError:
        """One error with a line for each mistake, ten at most."""
        lines = list(self.problems)
        if len(lines) > MOST_LINES:
            lines[MOST_LINES:] = [f"{self.source}: {len(lines) - MOST_LINES} more mistakes follow"]
        return JobError("\n".join(lines))

    def table(self, value: object, place: str) -> dict[str, Given]:
        """Entries of a value that must be a table; none, and a mistake, when it is not."""
        if isinstance(value, Mapping):
            return entries(value, place)
        self.problem(place, f"{told(value)} stands where a table of keys is expected")
        return {}

    def read(self, keys: Keys, given: Entries, place: str, prefix: str = "") -> dict[str, Any]:
        """Value of every key in SI, defaults filled in; `place` is where a missing key belongs.

        A key that is wrong or missing is a mistake and its value None.
        """
        self.refuse_unknown(keys, given, prefix)
        values: dict[str, Any] = {}
        for key in keys.values():
            if self.standard and key.only and self.standard not in key.only:
                if key.name in given:
                    self.problem(f"{given[key.name].place} {prefix}{key.name}", self._foreign(key))
            elif key.name in given:
                values[key.name] = self.value(key, given[key.name], prefix)
            else:
                values[key.name] = self._default(key, values, f"{place} {prefix}{key.name}")
        return values

    def value(self, key: Key, given: Given, prefix: str = "") -> Any:
        """One given value in SI, or None and a mistake."""
        with self.at(f"{given.place} {prefix}{key.name}"):
            return key.kind.read(given.value, self.system)
        return None

    def refuse_unknown(self, keys: Keys, given: Entries, prefix: str = "") -> None:
        """Note every key that is not in the form."""
        for name, where in given.items():
            if name not in keys:
                self.problem(where.place, f"there is no key {told(prefix + name)}; {nearest(name[:100], keys)}")

    def _default(self, key: Key, values: Mapping[str, Any], place: str) -> Any:
        if key.same_as:
            self.assume(place, key.assumption)
            return values.get(key.same_as)
        if key.idle_without and values.get(key.idle_without) == 0.0:
            return None
        if key.needed_without and values.get(key.needed_without) is not None:
            return None
        if key.needed_with and not _hold(values, key.needed_with):
            return self._absent(key, values, place)
        if key.default is not None:
            default = key.default[self.system]
            self.assume(place, key.assumption.replace("{default}", str(default)))
            return key.kind.read(default, self.system)
        if key.optional:
            return self._absent(key, values, place)
        self.problem(place, f"is missing ({self._wanted(key)})")
        return None

    def _absent(self, key: Key, values: Mapping[str, Any], place: str) -> None:
        """Note what it means that an optional key was left out, where the form says so."""
        under = not key.absent_under or self.standard in key.absent_under
        if key.absent and under and _hold(values, key.absent_with or {}):
            self.assume(place, key.absent)

    def assume(self, place: str, text: str) -> None:
        """Note what stands for a value that was left out."""
        self.assumptions[Assumption(place=place, text=text.replace("{standard}", self.standard))] = None

    def _wanted(self, key: Key) -> str:
        because = "".join(f"needed with {other} = {word!r}; " for other, word in (key.needed_with or {}).items())
        choices = ", ".join(told(choice) for choice in getattr(key.kind, "choices", ()))
        return because + key.help + (f"; {choices}" if choices else "")

    def _foreign(self, key: Key) -> str:
        return f"belongs to {' and '.join(key.only)}, this job's scheme to {self.standard}; take the line out"


def _hold(values: Mapping[str, Any], words: Mapping[str, str]) -> bool:
    """Whether keys hold the words that are asked for."""
    return all(values.get(key) == word for key, word in words.items())
