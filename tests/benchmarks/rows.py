"""Speed of rows of modules along a stream, beside as many single modules in one batch; one thread.

python tests/benchmarks/rows.py [--quick]
"""

from __future__ import annotations

import os

os.environ["OMP_NUM_THREADS"] = os.environ["OPENBLAS_NUM_THREADS"] = "1"  # before numpy is imported

import argparse
import sys
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from tegdesign.material.library import find
from tegdesign.module.module import Modules
from tegdesign.system.boundary import Stream
from tegdesign.system.load import Matched
from tegdesign.system.operating_point import operating_point
from tegdesign.system.rows import rows_point

GAS = Stream.model_validate(
    {"inlet_temperature": "560 K", "mass_flow": "80 g/s", "heat_capacity": "1050 J/kg/K",
     "coefficient": "150 W/m2/K", "area_enlargement": 8}
)  # fmt: skip
WATER = Stream.model_validate(
    {"inlet_temperature": "300 K", "mass_flow": "200 g/s", "heat_capacity": "4180 J/kg/K", "coefficient": "2500 W/m2/K"}
)


def modules(size: int) -> Modules:
    """Return bismuth telluride modules of 127 couples that differ in leg length."""
    index = np.zeros(size, dtype=np.intp)
    return Modules(
        [find("bismuth-telluride-n-se0.3"), find("bismuth-telluride-p-sb1.54")], index, index + 1,
        np.linspace(1.2e-3, 2.4e-3, size), 1.5e-3, 1.5e-3, 2.2e-3, 127.0, 2 * 127 * 2.2e-3**2,
        contact_resistivity_n=2e-9, contact_resistivity_p=2e-9, substrate_thickness_hot=0.8e-3,
        substrate_conductivity_hot=24.0, substrate_thickness_cold=0.8e-3, substrate_conductivity_cold=24.0,
        interface_hot=3e-5, interface_cold=3e-5, filler_conductivity=0.026,
    )  # fmt: skip


def seconds(job: Callable[[], object], repeats: int) -> float:
    """Return the shortest CPU time of a job; on a shared machine the others measure the neighbours."""
    times = []
    for _ in range(repeats):
        start = time.process_time()
        job()
        times.append(time.process_time() - start)
    return min(times)


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--quick", action="store_true", help="few rows, one repeat: only to see that it runs")
    quick = parser.parse_args().quick
    rows, repeats = (8, 1) if quick else (64, 5)
    print(f"{rows} rows of a module each, against as many single modules in one batch")
    print("designs  coolant  current     ms  rounds  ms batch  ratio")
    for size in (1, 2) if quick else (1, 30):
        many = modules(size)
        each = many.take(np.repeat(np.arange(size), rows))
        ones = np.ones(each.size)
        laws = GAS.law(each.footprint * ones, ones), WATER.law(each.footprint * ones, ones)
        load = Matched().law(ones, ones)
        batch = seconds(lambda e=each, b=laws, w=load: operating_point(e, *b, w), repeats)  # type: ignore[misc]
        for counter in (False, True):
            for one in (False, True):
                own = load.take(np.arange(size if one else each.size))
                options = {"rows": rows, "counter_current": counter, "one_current": one}

                def job(m=many, w=own, o=options):  # type: ignore[no-untyped-def]
                    return rows_point(m, GAS, WATER, w, **o)

                taken, rounds = seconds(job, repeats), job().iterations
                print(
                    f"{size:7}  {'counter' if counter else 'along':7}  {'one' if one else 'own':7}  {taken * 1e3:5.0f}"
                    f"  {rounds:6}  {batch * 1e3:8.1f}  {taken / batch:5.1f}"
                )


if __name__ == "__main__":
    main()
