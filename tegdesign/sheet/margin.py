"""Sections on how far a design is from failing: break-evens, narrow windows, what would mend a limit that is missed."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import groupby

from tegdesign.design.brief import Limits
from tegdesign.design.margin_result import BreakEven, End, Mend, Window
from tegdesign.design.rating import Rating
from tegdesign.design.wording import amount, celsius, kelvin, millimetres, number, percent
from tegdesign.sheet.section import Section, section, table, words

SHOWN = {"kg/s": (1e3, "g/s")}  # unit -> factor and unit that people like to see
POWER = "required power"


def break_even(rating: Rating) -> Section | None:
    """Give for each state the source at which its power is just met; of all else the state that is nearest to failing."""
    told, least = [], {}
    for b in rating.margins.break_even:
        if b.purpose == POWER:
            told.append(b)
        elif b.reached and ((b.key, b.purpose) not in least or b.room < least[b.key, b.purpose].room):
            least[b.key, b.purpose] = b
    told = [*told, *least.values()]
    if not told:
        return None
    rows = [(b.quantity, b.state, _value(b, b.now), *_found(b), percent(b.room) if b.reached else "-") for b in told]
    heads = ("varied alone", "state", "now", "just met at", "limit", "room")
    said = "The rest as it is: coefficients stay when a flow is varied. Power: every state that must give it; else the "
    return section(
        "Break-even", table(heads, rows, (0, 1, 4)), words(f"{said}state that is nearest to a limit, its open circuit included.")
    )  # fmt: skip


def _value(b: BreakEven, value: float) -> str:
    return quantity(value, b.unit, temperature=b.key == "source_temperature_K")


def _found(b: BreakEven) -> tuple[str, str]:
    """Return the break-even and its limit in words."""
    value = _value(b, b.value)
    limit = f"{b.limit} ({b.limit_state})" if b.limit else "none so far"
    if not b.reached:
        return f"{'below' if b.value < b.now else 'above'} {value}", f"search ends: {limit}" if b.limit else limit
    with_source = b.unit == "K" and b.key != "source_temperature_K" and b.source_temperature_K is not None
    beside = f", source {celsius(b.source_temperature_K)}" if with_source and b.source_temperature_K else ""
    return f"{b.sense} {value}{beside}", limit


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
    low, high, now = (quantity(v, w.unit) for v in (w.low.value, w.high.value, w.now))
    return f"{w.variable} {low} to {high} (now {now}): below it {_broken(w.low)}, above it {_broken(w.high)}."


def _broken(end: End) -> str:
    if not end.state:
        return end.limit
    return f"{_named(end.limit, end.state)} is {'missed' if end.limit.startswith('required') else 'broken'}"


def _named(limit: str, state: str) -> str:
    return f"{limit} ({state})"


def mending(rating: Rating, limits: Limits | None = None) -> Iterator[str]:
    """Yield for each limit that is missed the variables that would mend it, else the two limits that exclude each other.

    With the limits of a brief it is told where a value lies outside of them.
    """
    if rating.met:
        return
    found = sorted(rating.margins.mends, key=lambda m: m.limit)
    named = {m.limit for m in found}
    for _, group in groupby(found, key=lambda m: m.limit):
        mends = list(group)
        free = [m for m in mends if m.against is None]
        if free:
            for m in free:
                yield f"{_named(m.limit, m.state)}: held with {_need(m)} (now {quantity(m.now, m.unit)}){_beyond(m, limits)}."
            continue
        yield _exclusion(min(mends, key=_conflict), limits)
    for limit in dict.fromkeys(c.name for c in rating.failed if c.name not in named):
        yield f"{limit}: no single dimension of the design mends it within the range looked at."


def _need(m: Mend) -> str:
    return f"{m.variable} at {m.sense} {quantity(m.value, m.unit)}"


def _conflict(m: Mend) -> float:
    """Return by which factor two needs miss each other."""
    assert m.against is not None
    ratio = m.value / m.against.value
    return max(ratio, 1 / ratio)


def _exclusion(m: Mend, limits: Limits | None) -> str:
    assert m.against is not None
    other = "least" if m.sense == "most" else "most"
    return (
        f"{_named(m.limit, m.state)} needs {_need(m)}, but {_named(m.against.limit, m.against.state)} needs at {other} "
        f"{quantity(m.against.value, m.unit)}: they exclude each other (now {quantity(m.now, m.unit)})"
        f"{_beyond(m, limits)}."
    )


def _beyond(m: Mend, limits: Limits | None) -> str:
    """Say that a value lies outside the limits of the brief."""
    if limits is None:
        return ""
    most = float(limits.modules)
    spans: dict[str, tuple[float, float]] = {
        "leg_length_m": limits.leg_length,
        "leg_side_n_at_same_fill_m": limits.leg_side,
        "couples": limits.couples,
        "modules_in_series": (1.0, most),
        "modules_in_parallel": (1.0, most),
    }
    low, high = spans[m.key]
    if low <= m.value <= high:
        return ""
    return f"; outside the {quantity(low, m.unit)} to {quantity(high, m.unit)} of the brief"
