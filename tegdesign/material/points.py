"""The small table of measured points inside a material file: header with units, one row a temperature."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np

from tegdesign.document import Finding
from tegdesign.errors import InputError, closest
from tegdesign.material.curve import Array
from tegdesign.quantity import conversion, parse

_HEAD = re.compile(r"([^\[\]]*?)\s*(?:\[([^\[\]]*)\])?\s*$")

_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?")


@dataclass(frozen=True)
class Column:
    """What a column may hold: SI unit, and the limits beyond which the number is a slip of unit or typing."""

    unit: str
    low: float
    high: float
    shown: str


# Limits of reach, not of quality; common practice, no source. Resistivity spans good metals to poor oxides.
COLUMNS = {
    "temperature": Column("K", 1.0, 3000.0, "1 K to 3000 K"),
    "seebeck_coefficient": Column("V/K", -2e-3, 2e-3, "-2000 uV/K to 2000 uV/K"),
    "resistivity": Column("ohm m", 1e-7, 1e-2, "1e-7 ohm m to 1e-2 ohm m"),
    "conductivity": Column("S/m", 1e2, 1e7, "100 S/m to 1e7 S/m"),
    "thermal_conductivity": Column("W/m/K", 1e-2, 1e3, "0.01 W/m/K to 1000 W/m/K"),
}
MISSING = ("", "-")


@dataclass
class Points:
    """What stands in the table, in SI units, and what is wrong with it.

    ``values`` maps a property to its temperatures [K], its values and the line of each point, counted from
    the first line of the table (0); conductivity has become resistivity there.
    """

    values: dict[str, tuple[Array, Array, list[int]]] = field(default_factory=dict)
    findings: list[Finding] = field(default_factory=list)

    def error(self, line: int, what: str, value: str = "", limit: str = "", mend: str = "") -> None:
        """Note one thing that makes the table unusable."""
        self.findings.append(Finding(line, "error", what, value, limit, mend))


def parse_points(text: str) -> Points:
    """Return the measured points of a table text together with everything wrong in it.

    The first line that is not blank holds the columns, each as ``name [unit]``; then one row a temperature,
    cells parted by commas. A blank cell or ``-`` says: not measured at this temperature.
    """
    points = Points()
    lines = [(k, line) for k, line in enumerate(text.splitlines()) if line.strip()]
    if not lines:
        points.error(0, "the table of points is empty", mend="write a header and one row a temperature")
        return points
    header = _read_header(points, *lines[0])
    if points.findings:
        return points
    rows = [row for k, line in lines[1:] if (row := _read_row(points, header, k, line)) is not None]
    _check_order(points, rows)
    sound = not points.findings
    for name in header:
        if name != "temperature":
            _collect(points, name, rows, sound)
    return points


def _read_header(points: Points, line: int, text: str) -> dict[str, str]:
    """Return the unit of each column, in their order."""
    header: dict[str, str] = {}
    for cell in text.split(","):
        match = _HEAD.match(cell.strip())
        name, unit = (match[1].strip(), match[2]) if match else (cell.strip(), None)
        if name not in COLUMNS:
            near = closest(name, list(COLUMNS)).removeprefix("; ")
            points.error(line, "unknown column", name or "(blank)", mend=near or f"use {', '.join(COLUMNS)}")
        elif name in header:
            points.error(line, "column given twice", name, mend="keep one")
        elif not unit:
            points.error(
                line, "column without unit", name, mend=f"write it like '{name} [{COLUMNS[name].unit}]'"
            )
        else:
            header[name] = unit.strip()
            try:
                conversion(header[name], COLUMNS[name].unit, difference=name != "temperature")
            except InputError as error:
                points.error(line, f"column {name}: {error}")
    if points.findings:
        return header
    for name in ("temperature", "seebeck_coefficient", "thermal_conductivity"):
        if name not in header:
            points.error(line, "missing column", name, mend="add it with its unit")
    both = [name for name in ("resistivity", "conductivity") if name in header]
    if len(both) != 1:
        what = "both resistivity and conductivity given" if both else "missing column"
        points.error(line, what, "" if both else "resistivity or conductivity", mend="give one of the two")
    return header


def _read_row(
    points: Points, header: dict[str, str], line: int, text: str
) -> tuple[int, dict[str, float]] | None:
    cells = [cell.strip() for cell in text.split(",")]
    if len(cells) != len(header):
        points.error(line, "number of cells", str(len(cells)), f"{len(header)} as in the header")
        return None
    row: dict[str, float] = {}
    for (name, unit), cell in zip(header.items(), cells, strict=True):
        if cell in MISSING and name != "temperature":
            continue
        if not _NUMBER.fullmatch(cell):
            points.error(
                line, f"{name} is not a finite number", repr(cell), mend="a blank cell or - says not measured"
            )
            continue
        # parse() rather than factor and offset: it divides where that keeps the last digit (89.8 uV/K)
        value = parse(f"{cell} {unit}", COLUMNS[name].unit, difference=name != "temperature")
        if not COLUMNS[name].low <= value <= COLUMNS[name].high:
            got = f"{value:.6g} {COLUMNS[name].unit}"
            points.error(
                line, f"{name} out of reach", got, COLUMNS[name].shown, "check the unit in the header"
            )
        else:
            row[name] = value
    return (line, row) if "temperature" in row else None


def _check_order(points: Points, rows: list[tuple[int, dict[str, float]]]) -> None:
    for (_, before), (line, row) in pairwise(rows):
        last, now = before["temperature"], row["temperature"]
        if now == last:
            points.error(line, "temperature given twice", f"{now:.6g} K", mend="keep one row a temperature")
        elif now < last:
            points.error(
                line, "temperatures must rise", f"{now:.6g} K", f"above {last:.6g} K", "sort the rows"
            )


def _collect(points: Points, name: str, rows: list[tuple[int, dict[str, float]]], sound: bool) -> None:
    found = [(row["temperature"], row[name], line) for line, row in rows if name in row]
    if len(found) < 2:
        if sound:  # else the points that are wrong are the reason
            points.error(0, f"too few points of {name}", str(len(found)), "at least 2", "add rows")
        return
    temperature, value = np.array([p[0] for p in found]), np.array([p[1] for p in found])
    kept = "resistivity" if name == "conductivity" else name
    points.values[kept] = (temperature, 1.0 / value if kept != name else value, [p[2] for p in found])
