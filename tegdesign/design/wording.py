"""Numbers in words: the digits, prefixes and temperature scales of every text that leaves the program."""

from __future__ import annotations

import math

PREFIXES = ((1e6, "M"), (1e3, "k"), (1.0, ""), (1e-3, "m"), (1e-6, "u"), (1e-9, "n"), (1e-12, "p"))
PREFIXED = ("W", "V", "A", "ohm")
ZERO_CELSIUS = 273.15


def number(value: float, digits: int = 4) -> str:
    """Return a number with so many significant digits, without exponent between 1e-4 and 1e7."""
    if not math.isfinite(value):
        return "-" if math.isnan(value) else "unlimited" if value > 0 else "-unlimited"
    text = f"{value:#.{digits}g}".removesuffix(".")
    if "e" in text:
        text = f"{value:.0f}" if 1 <= abs(value) < 1e7 else f"{value:.{digits}g}"
    return text if float(text) else "0"


def amount(value: float | None, unit: str, digits: int = 4) -> str:
    """Return a number with its unit; W, V, A and ohm take a prefix, ``1`` is no unit, None is ``-``."""
    if value is None or math.isnan(value):
        return "-"
    if unit not in PREFIXED or not math.isfinite(value) or abs(value) < 1e-12:
        shown = number(value if unit not in PREFIXED or abs(value) >= 1e-12 else 0.0, digits)
        return shown if unit == "1" else f"{shown} {unit}"
    size = abs(float(f"{value:.{digits}g}"))  # 999.96 W is 1.000 kW
    factor, prefix = next((pair for pair in PREFIXES if size >= pair[0]), PREFIXES[-1])
    return f"{number(value / factor, digits)} {prefix}{unit}"


def kelvin(temperature: float) -> str:
    """Return a temperature or a difference [K] as text."""
    return f"{temperature + 0.0:.1f} K" if abs(temperature) >= 0.05 else "0.0 K"


def celsius(temperature: float) -> str:
    """Return a temperature [K] as text in degC."""
    shown = round(temperature - ZERO_CELSIUS, 1)
    return f"{shown + 0.0:.1f} degC"


def both(temperature: float) -> str:
    """Return a temperature [K] as text in degC and K."""
    return f"{celsius(temperature)} ({kelvin(temperature)})"


def percent(share: float | None, digits: int = 1) -> str:
    """Return a share as text in percent, None as ``-``."""
    if share is None:
        return "-"
    text = f"{100 * share:.{digits}f}"
    return f"{text if float(text) else text.removeprefix('-')} %"


def millimetres(length: float) -> str:
    """Return a length [m] as text in mm."""
    return f"{1e3 * length:.4g} mm"
