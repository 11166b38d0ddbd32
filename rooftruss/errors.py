"""The tree of errors a user can cause. Each message says what is wrong, where, and what to do."""

from collections.abc import Iterable
from difflib import get_close_matches


class RooftrussError(Exception):
    """Base of every error whose message is written for the estimator."""


class JobError(RooftrussError, ValueError):
    """The job file (or a value given on the command line) is wrong."""


class TableError(RooftrussError, ValueError):
    """A file of tables/ is malformed or lacks a row that was asked for."""


class OutOfScopeError(RooftrussError, ValueError):
    """A published rule does not cover the input; the message names the clause."""


class UnstableTrussError(RooftrussError, ArithmeticError):
    """The truss is a mechanism; the message names a joint and a direction."""


class OutputError(RooftrussError, OSError):
    """A result could not be written where it was asked for."""


def nearest(name: str, known: Iterable[str]) -> str:
    """Sentence that names the nearest known word, or lists the known ones.

    >>> nearest("pich", ["pitch", "span"])
    "did you mean 'pitch'?"
    """
    names = list(known)
    lowered = {n.lower(): n for n in names}
    close = get_close_matches(name.lower(), list(lowered), n=1, cutoff=0.6)
    if close:
        return f"did you mean {lowered[close[0]]!r}?"
    return "allowed: " + ", ".join(repr(n) for n in names)
