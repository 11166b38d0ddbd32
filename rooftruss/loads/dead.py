"""Dead load: roof and ceiling as given, self-weight of the chosen timber; the most and the least that can be there."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from rooftruss.loads.roof import ActionCase, SurfaceLoad

Array = NDArray[np.float64]
ROOF = ("left tail", "left slope", "right slope", "right tail")


def dead_cases(roof: Array, roof_least: Array, ceiling: Array, ceiling_least: Array) -> list[ActionCase]:
    """Dead load cases (action D) of area loads [Pa] (...,), all on the slope length of the chord they act on.

    Pattern "most" is for combinations in which dead load adds, "least" for those in which it resists uplift, "both"
    for what is the same in either. Least dead load is a choice of the estimator, not of a standard.
    """
    cases = _pair("dead, top chord", "top", ROOF, roof, roof_least)
    cases += _pair("dead, bottom chord", "bottom", ("ceiling",), ceiling, ceiling_least)
    own = SurfaceLoad(surface="self-weight", kind="slope", pressure=np.asarray(1.0))
    return [*cases, ActionCase(name="self-weight", short="self", action="D", pattern="both", loads=(own,))]


def _pair(name: str, short: str, surfaces: Sequence[str], most: Array, least: Array) -> list[ActionCase]:
    same = np.array_equal(most, least)
    cases = [_case(name, short, "both" if same else "most", surfaces, most)]
    if not same:
        cases.append(_case(f"least {name}", f"least {short}", "least", surfaces, least))
    return [case for case in cases if np.any(case.loads[0].pressure)]


def _case(name: str, short: str, pattern: str, surfaces: Sequence[str], pressure: Array) -> ActionCase:
    loads = tuple(SurfaceLoad(surface=s, kind="slope", pressure=np.asarray(pressure, float)) for s in surfaces)
    return ActionCase(name=name, short=short, action="D", pattern=pattern, loads=loads)
