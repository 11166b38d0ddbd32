"""Measures speed and memory, each against something else timed in the same run.

    python -m tests.benchmark.speed [--trusses 10000] [--only start batch obvious growth memory]

Prints one table; exit code 1 when a limit is missed. One thread, unless a row says otherwise.
"""

import argparse
import os
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path

import numpy as np

from rooftruss.analysis.frame import stiffness_matrix
from rooftruss.basis.job import Job, TrussSpec
from rooftruss.design.batch import Sizes, check_many
from rooftruss.design.family import family_of
from rooftruss.design.stages import combinations_of, run
from tests.benchmark import obvious
from tests.benchmark.trusses import DEMO_JOBS, SIZES, choice, finks, house, single_run
from tests.en_jobs import EN_SIZES, barn

ONE_THREAD = dict.fromkeys(("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"), "1")
LIBRARIES = "import numpy, scipy.linalg, pandas, openpyxl, pint"
START_LIMIT = 2.0  # quote of a demo job over importing the libraries
SOLVE_LIMIT = 30.0  # the whole way over numpy.linalg.solve alone
OBVIOUS_LIMIT = 100.0  # times faster than the obvious program
MEMORY_LIMIT = 600.0  # MB for 10 000 trusses
GROWTH_LIMIT = 1.5  # from an eighth of the trusses to all, per truss; likewise per combination
DOUBLE_LIMIT = 1.25  # peak memory of twice as many trusses
AT_A_TIME = 250  # trusses whose stiffness matrices are made together


@dataclass(frozen=True)
class Line:
    """One row of the table; `limit` is a text such as "< 2", met or not."""

    what: str
    value: str
    limit: str = ""
    met: bool = True


def seconds(work: Callable[[], object], times: int = 3) -> float:
    """Shortest of several runs: whatever else the machine does only adds time."""
    found = []
    for _ in range(times):
        start = time.perf_counter()
        work()
        found.append(time.perf_counter() - start)
    return min(found)


def check(job: Job, specs: Sequence[TrussSpec], threads: int = 1, sizes: Sizes = SIZES) -> float:
    """Seconds to analyse and check trusses."""
    if threads == 1:
        return seconds(lambda: check_many(job, specs, [sizes]))
    with ThreadPoolExecutor(threads) as executor:
        return seconds(lambda: check_many(job, specs, [sizes], executor=executor))


def start() -> Iterator[Line]:
    """`rooftruss quote` on each demo job beside importing the libraries it stands on, taken in turns."""
    with tempfile.TemporaryDirectory() as folder:
        quote = [sys.executable, "-m", "rooftruss", "quote"]
        commands = {p.stem: [*quote, str(p), "-o", str(Path(folder) / f"{p.stem}.xlsx")] for p in DEMO_JOBS}
        commands["libraries"] = [sys.executable, "-c", LIBRARIES]
        took: dict[str, list[float]] = {name: [] for name in commands}
        for _ in range(6):
            for name, command in commands.items():
                before = time.perf_counter()
                subprocess.run(command, check=True, capture_output=True)
                took[name].append(time.perf_counter() - before)
    median = {name: statistics.median(values[1:]) for name, values in took.items()}  # the first filled the disk cache
    base = median.pop("libraries")
    yield Line(f"python -c '{LIBRARIES}'", f"{base:.2f} s")
    for name, value in median.items():
        ratio = value / base
        yield Line(f"quote {name}: {value:.2f} s", f"{ratio:.2f} x", f"< {START_LIMIT:g}", ratio < START_LIMIT)


def stack(job: Job, specs: Sequence[TrussSpec], sizes: Sizes) -> tuple[np.ndarray, int]:
    """Stiffness matrices of trusses (truss, free, free) and the number of load cases."""
    parts, cases = [], 0
    for first in range(0, len(specs), AT_A_TIME):
        some = specs[first : first + AT_A_TIME]
        done = run(family_of(job, some), choice(len(some), sizes))
        parts.append(stiffness_matrix(done.truss, done.stiffness_axial, done.stiffness_bending))
        cases = len(done.cases.heads)
    return np.concatenate(parts), cases


def batch(count: int) -> Iterator[Line]:
    """Geometry, cases, combinations, envelope and checks of many trusses beside solving their equations alone."""
    for job, sizes in ((house(), SIZES), (barn(), EN_SIZES)):
        specs = finks(count, job)
        check_many(job, specs[:300], [sizes])  # fills the caches of tables and names
        matrices, cases = stack(job, specs, sizes)
        right = np.random.default_rng(2).normal(size=(*matrices.shape[:2], cases))
        bare = seconds(partial(np.linalg.solve, matrices, right))
        whole = check(job, specs, sizes=sizes)
        number = int(combinations_of(job, specs[0]).strength.sum())
        size = f"{matrices.shape[1]} unknowns, {cases} cases"
        yield Line(f"numpy.linalg.solve of {count} trusses, {size}", f"{bare / count * 1e6:.1f} us each")
        each = f"{whole / count * 1e6:.1f} us each"
        yield Line(f"the same trusses checked by {job.scheme}, {number} combinations", each)
        ratio = whole / bare
        yield Line("checked over solved", f"{ratio:.1f} x", f"< {SOLVE_LIMIT:g}", ratio < SOLVE_LIMIT)
        yield Line("per combination and truss", f"{whole / count / number * 1e6:.2f} us")
    specs = finks(count)
    one, two = check(house(), specs), check(house(), specs, threads=2)
    yield Line(f"checked with two threads on {os.cpu_count()} processors", f"{one / two:.2f} x as fast")


def against_obvious(count: int) -> Iterator[Line]:
    """The obvious program on a few trusses; its load cases and combinations are given to it, untimed."""
    few = [single_run(k) for k in range(3)]
    slow = seconds(lambda: [obvious.utilisations(one) for one in few], times=1) / len(few)
    many = finks(max(count // 5, 300))
    fast = check(house(), many) / len(many)
    yield Line("the obvious program", f"{slow * 1e3:.0f} ms each")
    yield Line("this one over it", f"{slow / fast:.0f} x as fast", f"> {OBVIOUS_LIMIT:g}", slow / fast > OBVIOUS_LIMIT)


def growth(count: int) -> Iterator[Line]:
    """Time per truss over the number of trusses, and per combination over the number of combinations."""
    specs = finks(count)
    per_truss = {n: check(house(), specs[:n]) / n for n in (count // 8, count // 4, count // 2, count)}
    for n, value in per_truss.items():
        yield Line(f"{n} trusses", f"{value * 1e6:.1f} us each")
    ratio = per_truss[count] / per_truss[count // 8]
    yield Line("all over an eighth, per truss", f"{ratio:.2f} x", f"< {GROWTH_LIMIT:g}", ratio < GROWTH_LIMIT)
    few = specs[: count // 4]
    per_combination = {}
    for job in with_more_combinations():
        number = len(combinations_of(job, few[0]).names)
        per_combination[number] = check(job, few) / len(few) / number
        yield Line(f"{number} combinations", f"{per_combination[number] * 1e6:.2f} us each and truss")
    ratio = per_combination[max(per_combination)] / per_combination[min(per_combination)]
    yield Line("most over fewest, per combination", f"{ratio:.2f} x", f"< {GROWTH_LIMIT:g}", ratio < GROWTH_LIMIT)


def with_more_combinations() -> Iterator[Job]:
    """The house without wind, as it is, and with every snow pattern beside every other action."""
    yield replace(house(), site={**house().site, "wind_speed": 0.0})
    yield house()
    yield replace(house(), scheme_options={**house().scheme_options, "companion_snow": "any"})


PEAK = """
import pathlib, resource, sys
from rooftruss.design.batch import check_many
from tests.benchmark.trusses import SIZES, finks, house
check_many(house(), finks(int(sys.argv[1])), [SIZES])
status = pathlib.Path("/proc/self/status")  # rusage counts the parent, too, where a process begins as its copy
if status.exists():
    print(next(int(line.split()[1]) / 1e3 for line in status.read_text().splitlines() if line.startswith("VmHWM")))
else:
    print(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / (1e6 if sys.platform == "darwin" else 1e3))
"""


def memory(count: int) -> Iterator[Line]:
    """Largest size of a process that checks trusses, and one that checks twice as many."""
    peaks = []
    for number in (1, count, 2 * count):
        done = subprocess.run([sys.executable, "-c", PEAK, str(number)], check=True, capture_output=True, text=True)
        peaks.append(float(done.stdout))
    one, whole, double = peaks
    yield Line("peak memory with one truss", f"{one:.0f} MB")
    yield Line(f"with {count} trusses", f"{whole:.0f} MB", f"< {MEMORY_LIMIT:g}", whole < MEMORY_LIMIT)
    ratio = double / whole
    yield Line(
        f"with {2 * count} trusses: {double:.0f} MB", f"{ratio:.2f} x", f"< {DOUBLE_LIMIT:g}", ratio < DOUBLE_LIMIT
    )


PARTS: dict[str, Callable[[int], Iterator[Line]]] = {
    "start": lambda count: start(),
    "batch": batch,
    "obvious": against_obvious,
    "growth": growth,
    "memory": memory,
}


def main() -> int:
    """Run the parts asked for and print the table."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--trusses", type=int, default=10_000)
    parser.add_argument("--only", nargs="*", choices=list(PARTS), default=list(PARTS))
    given = parser.parse_args()
    if any(os.environ.get(name) != "1" for name in ONE_THREAD):  # it counts only before numpy is loaded
        return subprocess.call(
            [sys.executable, "-m", "tests.benchmark.speed", *sys.argv[1:]], env=os.environ | ONE_THREAD
        )
    met = True
    for name in given.only:
        print(f"\n{name}")
        for line in PARTS[name](given.trusses):
            result = ("met" if line.met else "NOT met") if line.limit else ""
            print(f"  {line.what:70} {line.value:>18}  {line.limit:8} {result}", flush=True)
            met &= line.met
    return 0 if met else 1


if __name__ == "__main__":
    sys.exit(main())
