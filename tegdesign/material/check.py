"""What is wrong or doubtful in a material file, all at once and by line."""

from __future__ import annotations

import os
import re
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from tegdesign import document
from tegdesign.document import Finding
from tegdesign.errors import InputError
from tegdesign.material import file
from tegdesign.material.curve import Array, Curve
from tegdesign.material.lorenz import lorenz_rule
from tegdesign.material.material import Material

HIGHEST_FIGURE_OF_MERIT = 3.0
FEWEST_POINTS = 4
# How far off the line through its neighbours a point may lie (as a share, or in the logarithm), how many
# times that may exceed the same measure of the rest, and how many times wider than the median of the others
# an interval may be: common practice, no source. Ends are judged mildly, since their line is extended.
OFF_LINE = 0.15
OFF_REST = 4.0
OFF_LINE_AT_END = 0.5
OFF_REST_AT_END = 8.0
WIDE = 2.5


def check(path: str | os.PathLike[str]) -> list[Finding]:
    """Return all findings about a material file, sorted by line; an error among them means it cannot be used.

    A file that cannot be read, is not TOML or has errors is looked at no further than that.
    """
    try:
        content, findings, text = file.validate(path)
    except InputError as error:
        match = re.match(r"(?::(\d+))?: ", str(error).removeprefix(str(path)))
        reason = str(error).removeprefix(str(path))[match.end() if match else 0 :]
        return [Finding(int(match[1] or 1) if match else 1, "error", reason)]
    if content is None:
        return findings
    lines = document.line_numbers(text)
    first = document.first_line(text, lines.get(("points",), 1))
    places = {name: [first + line for line in offsets] for name, offsets in content.point_lines().items()}
    material = content.to_material(str(path))
    found = [
        *_about_words(material, lines),
        *_about_points(material, places),
        *_about_physics(material, places),
    ]
    return sorted(found, key=lambda finding: finding.line)


def _warning(line: int, what: str, value: str = "", limit: str = "", mend: str = "") -> Finding:
    return Finding(line, "warning", what, value, limit, mend)


def _about_words(material: Material, lines: dict[document.Path_, int]) -> Iterator[Finding]:
    if not material.source and not material.doi:
        yield _warning(lines.get(("source",), 1), "no source", mend="give source.citation or source.doi")
    if Path(material.path).stem != material.name:
        yield _warning(
            lines.get(("name",), 1), "file and material have different names", material.name,
            Path(material.path).stem, "rename one of them, or the library will not find it",
        )  # fmt: skip


@dataclass(frozen=True)
class _Property:
    name: str
    curve: Curve
    show: str
    unit: float


def _properties(material: Material) -> tuple[_Property, ...]:
    return (
        _Property("seebeck_coefficient", material.seebeck_coefficient, "uV/K", 1e-6),
        _Property("resistivity", material.resistivity, "ohm m", 1.0),
        _Property("thermal_conductivity", material.thermal_conductivity, "W/m/K", 1.0),
    )


def _about_points(material: Material, places: dict[str, list[int]]) -> Iterator[Finding]:
    for prop in _properties(material):
        if prop.name not in places:
            continue
        place, t = places[prop.name], prop.curve.temperature
        if t.size < FEWEST_POINTS:
            yield _warning(place[0], f"few points of {prop.name}", str(t.size), f"at least {FEWEST_POINTS}")
        for k in _outliers(prop):
            got = f"{prop.curve.value[k] / prop.unit:.4g} {prop.show} at {t[k]:.6g} K"
            yield _warning(
                place[k], f"{prop.name} far off its neighbours", got, mend="compare with the source"
            )
    yield from _gaps(material, places)


def _gaps(material: Material, places: dict[str, list[int]]) -> Iterator[Finding]:
    """Yield the wide intervals, once where several properties share one."""
    found: dict[tuple[int, str, str], list[str]] = {}
    for prop in _properties(material):
        t = prop.curve.temperature
        step = np.diff(t)
        if prop.name not in places or step.size < 3:
            continue
        for k in range(step.size):
            others = float(np.median(np.delete(step, k)))
            if step[k] > WIDE * others:
                got = f"{step[k]:.4g} K from {t[k]:.6g} K to {t[k + 1]:.6g} K"
                limit = f"{WIDE:g} times the median of the others, {others:.4g} K"
                found.setdefault((places[prop.name][k + 1], got, limit), []).append(prop.name)
    for (line, got, limit), names in found.items():
        yield _warning(line, f"gap in {', '.join(names)}", got, limit, "add points if there are any")


def _outliers(prop: _Property) -> list[int]:
    """Return the points far off the line through their neighbours, without which all the rest is smooth."""
    t, y = prop.curve.temperature, prop.curve.value
    if t.size < FEWEST_POINTS:
        return []
    # a slip is a share of S, which may change sign, but a factor of the other two
    y = y / np.median(np.abs(y)) if prop.name == "seebeck_coefficient" else np.log(y)
    found = []
    for k in range(t.size):
        end = k in (0, t.size - 1)
        near = [k - 1, k + 1] if not end else [1, 2] if k == 0 else [k - 1, k - 2]
        if end and abs(t[k] - t[near[0]]) > WIDE * abs(t[near[0]] - t[near[1]]):
            continue  # too far away to know where the line would lead
        off = abs(_off_line(t, y, k, *near))
        rest_t, rest_y = np.delete(t, k), np.delete(y, k)
        rest = max(abs(_off_line(rest_t, rest_y, j, j - 1, j + 1)) for j in range(1, rest_t.size - 1))
        smallest, ratio = (OFF_LINE_AT_END, OFF_REST_AT_END) if end else (OFF_LINE, OFF_REST)
        if off > max(smallest, ratio * rest):
            found.append(k)
    return found


def _off_line(t: Array, y: Array, k: int, i: int, j: int) -> float:
    return float(y[k] - y[i] - (y[j] - y[i]) * (t[k] - t[i]) / (t[j] - t[i]))


def _about_physics(material: Material, places: dict[str, list[int]]) -> Iterator[Finding]:
    sign = -1.0 if material.polarity == "n" else 1.0
    s = material.seebeck_coefficient
    for k in np.flatnonzero(sign * s.value < 0):
        yield _warning(
            _line(places, "seebeck_coefficient", int(k)), "seebeck_coefficient of the other sign",
            f"{s.value[k] * 1e6:.4g} uV/K at {s.temperature[k]:.6g} K", f"polarity {material.polarity}",
        )  # fmt: skip
    first, last = material.range
    kappa = material.thermal_conductivity
    for k in np.flatnonzero((kappa.temperature >= first) & (kappa.temperature <= last)):
        t = kappa.temperature[k]
        electronic = float(lorenz_rule(s(t)) * t / material.resistivity(t))
        line = _line(places, "thermal_conductivity", int(k))
        if kappa.value[k] < electronic:
            yield _warning(
                line, "thermal_conductivity below what the electrons carry (Wiedemann-Franz)",
                f"{kappa.value[k]:.4g} W/m/K at {t:.6g} K",
                f"{electronic:.4g} W/m/K by the Lorenz number of Kim et al. 2015, doi 10.1063/1.4908244",
                "check the units of the three columns",
            )  # fmt: skip
        merit = float(material.figure_of_merit(t))
        if merit > HIGHEST_FIGURE_OF_MERIT:
            got = f"zT {merit:.3g} at {t:.6g} K"
            yield _warning(
                line, "figure of merit too good", got, f"{HIGHEST_FIGURE_OF_MERIT:g}", "check the units"
            )


def _line(places: dict[str, list[int]], name: str, k: int) -> int:
    return places[name][k] if name in places else 1
