"""Sections on how far a design is from failing: break-evens, narrow windows, what would mend a limit that is missed."""

from __future__ import annotations

import math
from collections.abc import Iterator
from itertools import groupby

from tegdesign.design.brief import Limits
from tegdesign.design.margin_result import BreakEven, End, Mend, Window
from tegdesign.design.rating import Rating
from tegdesign.design.wording import amount, celsius, kelvin, millimetres, number, percent
from tegdesign.sheet.section import Section, section, table, words

SHOWN = {"kg/s": (1e3, "g/s")}  # unit -> factor and unit that people like to see
POWER = "required power"
GIVEN = (POWER, "required efficiency")  # requirements are missed, limits are broken
NAMES = {"temperature difference": "source above sink"}


def break_even(rating: Rating) -> Section | None:
    """Give for each state where its power is just met; of all else the state that is nearest to failing."""
    told: list[BreakEven] = []
    least: dict[tuple[str, str], BreakEven] = {}
    for b in rating.margins.break_even:
        if b.purpose == POWER:
            told.append(b)
        elif b.reached and ((b.key, b.purpose) not in least or b.room < least[b.key, b.purpose].room):
            least[b.key, b.purpose] = b
    told = [*told, *least.values()]
    if not told:
        return None
    rows = [
        (b.limit if b.reached else b.purpose, b.limit_state if b.reached else b.state,
         NAMES.get(b.quantity, b.quantity), _value(b, b.now),
         _place(b), percent(b.room) if b.reached else "-")
        for b in told
    ]  # fmt: skip
    ends = [
        f"{b.purpose} ({b.state}), {b.quantity}: not just met within what was looked at, which ends at "
        f"{_value(b, b.value)}" + (f" by the {_named(b.limit, b.limit_state)}." if b.limit else ".")
        for b in told
        if not b.reached
    ]
    return section(
        "Break-even",
        table(("just met", "state", "varied alone", "now", "at", "room"), rows, (0, 1, 2)),
        words(
            "Each varied with the rest as it is; coefficients stay when a flow is varied. Power: every state that must "
            "give it; else the state that is nearest to a limit, open circuit included.",
            *ends,
        ),
    )


def _value(b: BreakEven, value: float) -> str:
    return quantity(value, b.unit, temperature=b.key == "source_temperature_K")


def _place(b: BreakEven) -> str:
    """Return the break-even in words, with the temperature of the source beside a difference."""
    if not b.reached:
        return "not reached"
    source = b.source_temperature_K
    beside = f" ({celsius(source)})" if source is not None and b.key != "source_temperature_K" else ""
    return f"{b.sense} {_value(b, b.value)}{beside}"


def quantity(value: float, unit: str, temperature: bool = False) -> str:
    """Return a value of a variable in words; ``temperature`` where kelvins are no difference."""
    if unit == "K":
        return celsius(value) if temperature else kelvin(value)
    if unit == "m":
        return millimetres(value)
    if unit == "1":
        return f"{value:.0f}" if abs(value - round(value)) < 1e-9 else number(value, 3)
    factor, shown = SHOWN.get(unit, (1.0, unit))
    return amount(value * factor, shown)


def windows(rating: Rating) -> Section | None:
    """Tell the windows that are narrow, with what bounds them."""
    narrow = [w for w in rating.margins.windows if w.narrow]
    return section("Narrow windows", words(*(window_words(w) for w in narrow))) if narrow else None


def window_words(w: Window) -> str:
    """Return a window with its two limits in words."""
    low, high, now = _bound("least", w.low.value, w.unit), _bound("most", w.high.value, w.unit), quantity(w.now, w.unit)
    span = f"only {now}" if low == high == now else f"{low} to {high} (now {now})"
    return f"{w.variable} {span}: below it {_broken(w.low)}, above it {_broken(w.high)}."


def _bound(sense: str, value: float, unit: str) -> str:
    """Return a bound in words; counts are whole, rounded to the side that holds."""
    if unit == "1":
        value = float(math.ceil(value - 1e-6) if sense == "least" else math.floor(value + 1e-6))
    return quantity(value, unit)


def _broken(end: End) -> str:
    if not end.state:
        return end.limit
    return f"{_named(end.limit, end.state)} is {'missed' if end.limit in GIVEN else 'broken'}"


def _named(limit: str, state: str) -> str:
    return f"{limit} ({state})"


def mending(rating: Rating, limits: Limits | None = None) -> Iterator[str]:
    """Yield for each limit that is missed the variables that would mend it, and the nearest limit that excludes it.

    With the limits of a brief it is told where a value lies outside of them.
    """
    if rating.met:
        return
    found = sorted(rating.margins.mends, key=lambda m: m.limit)
    named = {m.limit for m in found}
    for _, group in groupby(found, key=lambda m: m.limit):
        mends = list(group)
        for m in mends:
            if m.against is None:
                held = f"{_named(m.limit, m.state)}: held with {_need(m)} (now {quantity(m.now, m.unit)})"
                yield f"{held}{_beyond(rating, m, limits)}{_still(m)}."
        excluded = [m for m in mends if m.against is not None]
        if excluded:
            yield _exclusion(rating, min(excluded, key=_conflict), limits)
    for limit in dict.fromkeys(c.name for c in rating.failed if c.name not in named):
        yield f"{limit}: no single dimension of the design mends it within the range looked at."


def _still(m: Mend) -> str:
    return f"; {', '.join(m.still_missed)} stays missed" if m.still_missed else ""


def _need(m: Mend) -> str:
    return f"{m.variable} at {m.sense} {_bound(m.sense, m.value, m.unit)}"


def _conflict(m: Mend) -> float:
    """Return by which factor two needs miss each other."""
    assert m.against is not None
    ratio = m.value / m.against.value
    return max(ratio, 1 / ratio)


def _exclusion(rating: Rating, m: Mend, limits: Limits | None) -> str:
    assert m.against is not None
    other = "least" if m.sense == "most" else "most"
    return (
        f"{_named(m.limit, m.state)} needs {_need(m)}, but {_named(m.against.limit, m.against.state)} needs at {other} "
        f"{_bound(other, m.against.value, m.unit)}: they exclude each other (now {quantity(m.now, m.unit)})"
        f"{_beyond(rating, m, limits)}."
    )


def _beyond(rating: Rating, m: Mend, limits: Limits | None) -> str:
    """Say that a value lies outside the limits of the brief."""
    if limits is None:
        return ""
    g, most = rating.design.module, float(limits.modules)
    spans: dict[str, tuple[float, float]] = {
        "leg_length_m": limits.leg_length,
        "leg_side_n_at_same_fill_m": limits.leg_side,
        "couples": limits.couples,
        "modules_in_series": (1.0, most // g.modules_in_parallel),
        "modules_in_parallel": (1.0, most // g.modules_in_series),
    }
    low, high = spans[m.key]
    if low <= m.value <= high:
        return ""
    allowed = quantity(low, m.unit) if low == high else f"{quantity(low, m.unit)} to {quantity(high, m.unit)}"
    return f"; the brief allows {allowed}"
