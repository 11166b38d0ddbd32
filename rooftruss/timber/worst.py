"""The largest utilisation over the rules of a standard, and which rule it comes from."""

import numpy as np
from numpy.typing import NDArray

from rooftruss.timber.terms import Array


class Worst:
    """The largest utilisation so far and its rule; the first of equal ones stays.

    Rules must be taken in ascending number: the number to keep is then the larger of two, which costs a tenth of a
    masked copy.
    """

    def __init__(self, utilisation: Array, rule: NDArray[np.int8]) -> None:
        self.utilisation, self.rule = utilisation, rule

    def take(self, utilisation: Array, rule: int | NDArray[np.int8]) -> None:
        """Count in the utilisations of one rule; `rule` is its number, or one number per element."""
        more = (utilisation > self.utilisation).view(np.int8)
        np.maximum(self.utilisation, utilisation, out=self.utilisation)
        more *= np.asarray(rule, np.int8)
        np.maximum(self.rule, more, out=self.rule)
