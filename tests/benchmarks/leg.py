"""Speed of the leg solver beside scipy and beside the bare interpolation of the properties; one thread.

python tests/benchmarks/leg.py [--quick]
"""

from __future__ import annotations

import os

os.environ["OMP_NUM_THREADS"] = os.environ["OPENBLAS_NUM_THREADS"] = "1"  # before numpy is imported

import argparse
import importlib.util
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT))

from scipy.interpolate import PchipInterpolator, PPoly  # noqa: E402

from tegdesign.leg.exact import solve_leg  # noqa: E402
from tegdesign.leg.panels import prepare  # noqa: E402
from tegdesign.material import library  # noqa: E402
from tegdesign.material.curve import Array  # noqa: E402
from tegdesign.material.material import Material  # noqa: E402

# tables of 5, 12 and 12 points, and one computed from bands
MATERIALS = ("bismuth-telluride-p-sb1.54", "skutterudite-n", "silicon-germanium-n", "lead-telluride-p-bands")
POINTS, TOLERANCE = 3, 2e-5


def reference_module() -> Any:
    """Return tests/leg/reference.py as a module."""
    spec = importlib.util.spec_from_file_location("leg_reference", ROOT / "tests" / "leg" / "reference.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    return module


def seconds(job: Callable[[], object], repeats: int) -> float:
    """Return the shortest CPU time of a job; on a shared machine the others measure the neighbours."""
    times = []
    for _ in range(repeats):
        start = time.process_time()
        job()
        times.append(time.process_time() - start)
    return min(times)


def random_legs(material: Material, size: int) -> tuple[Array, Array, Array]:
    """Return ends anywhere in the range at least a quarter of it apart, and 10 % to 70 % of short-circuit current."""
    rng = np.random.default_rng(1)
    first, last = material.range
    difference = (last - first) * (0.25 + 0.75 * rng.random(size))
    cold = first + (last - first - difference) * rng.random(size)
    rest = solve_leg(material, cold + difference, cold, 0.0)
    return cold + difference, cold, (0.1 + 0.6 * rng.random(size)) * rest.voltage / rest.resistance


def one_material(name: str, size: int, repeats: int, bvp_legs: int, reference: Any) -> list[str]:
    """Return the row of the table for one material."""
    material = library.find(name)
    hot, cold, j = random_legs(material, size)
    fine = solve_leg(material, hot, cold, j, points=8, tolerance=1e-13)
    ours = solve_leg(material, hot, cold, j, points=POINTS, tolerance=TOLERANCE)
    error = np.max(np.abs(ours.power / fine.power - 1))
    batch = size / seconds(lambda: solve_leg(material, hot, cold, j, points=POINTS, tolerance=TOLERANCE), repeats)
    default = size / seconds(lambda: solve_leg(material, hot, cold, j), repeats)

    # scipy asked for no more than it takes to be as accurate
    picked = np.linspace(0, size - 1, bvp_legs).astype(int)
    for tolerance in (1e-3, 1e-4, 1e-5, 1e-6):
        trials = ((60, tolerance), (60, tolerance / 10))
        start = time.process_time()
        found = [reference.solve(material, hot[k], cold[k], j[k], trials=trials).power for k in picked]
        scipy_rate = bvp_legs / (time.process_time() - start)
        scipy_error = np.max(np.abs(np.array(found) / fine.power[picked] - 1))
        if scipy_error < 1e-6:
            break

    # the three properties at as many nodes as a leg has on average, nothing else
    curves = (material.seebeck_coefficient, material.resistivity, material.thermal_conductivity)
    edges = prepare(material, POINTS).edges
    pieces = edges.searchsorted(hot) - edges.searchsorted(cold) + 1
    nodes = round(POINTS * float(np.mean(pieces)))
    t = np.ascontiguousarray((cold + (hot - cold) * (np.arange(nodes)[:, None] + 0.5) / nodes).T)
    table = PPoly(np.stack([c.coefficients[::-1] for c in curves], axis=-1), curves[0].temperature)
    separate = [PchipInterpolator(c.temperature, c.value) for c in curves]
    chunks = np.array_split(t, max(1, size // 500))
    poly = size / seconds(lambda: [table(chunk) for chunk in chunks], repeats)
    pchip = size / seconds(lambda: [[f(chunk) for f in separate] for chunk in chunks], repeats)
    return [
        name,
        str(curves[0].temperature.size),
        f"{batch / 1e3:.0f}",
        f"{error:.0e}",
        f"{default / 1e3:.0f}",
        f"{scipy_rate:.0f}",
        f"{scipy_error:.0e}",
        f"{batch / scipy_rate:.0f}",
        str(nodes),
        f"{poly / 1e3:.0f}",
        f"{poly / batch:.1f}",
        f"{pchip / 1e3:.0f}",
        f"{pchip / batch:.1f}",
    ]


def small_batches(name: str, repeats: int) -> list[list[str]]:
    """Return milliseconds a call for few legs, as a search of designs asks for them."""
    material = library.find(name)
    rows = []
    for size in (1, 10, 30, 100, 300):
        hot, cold, j = random_legs(material, size)
        plain = seconds(lambda h=hot, c=cold, i=j: solve_leg(material, h, c, i), repeats)
        slopes = seconds(lambda h=hot, c=cold, i=j: solve_leg(material, h, c, i, slopes=True), repeats)
        rows.append([str(size), f"{plain * 1e3:.2f}", f"{slopes * 1e3:.2f}"])
    return rows


def show(head: list[str], rows: list[list[str]]) -> None:
    """Print a table with aligned columns."""
    width = [max(len(r[k]) for r in [head, *rows]) for k in range(len(head))]
    for row in [head, *rows]:
        print(
            "  ".join(cell.rjust(w) if k else cell.ljust(w) for k, (cell, w) in enumerate(zip(row, width, strict=True)))
        )


def main() -> None:
    """Print both tables."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--quick", action="store_true", help="few legs, one repeat: only to see that it runs")
    quick = parser.parse_args().quick
    size, repeats, bvp_legs = (600, 1, 2) if quick else (20000, 15, 30)
    reference = reference_module()
    print(f"{size} random legs, {POINTS} points a panel, tolerance {TOLERANCE:g}; default = 4 points, 1e-11")
    head = "material,points,klegs/s,power error,default klegs/s,scipy legs/s,its error,ratio,nodes"
    head += ",PPoly klegs/s,over ours,Pchip klegs/s,over ours"
    show(head.split(","), [one_material(n, size, repeats, bvp_legs, reference) for n in MATERIALS])
    print(f"\nms a call, default accuracy, {MATERIALS[-1]}")
    show(["legs", "plain", "with slopes"], small_batches(MATERIALS[-1], 1 if quick else 200))


if __name__ == "__main__":
    main()
