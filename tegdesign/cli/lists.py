"""Lists of numbers with units, as options give them."""

from __future__ import annotations

from tegdesign.errors import InputError


def parts(option: str, text: str | None) -> list[str]:
    """Return the places of a list parted by commas; none of them may be empty."""
    found = [part.strip() for part in text.split(",")] if text is not None else []
    if any(not part for part in found):
        raise InputError(f"{option}: list '{text}' has an empty place; write values with units, parted by commas")
    return found


def value(option: str, part: str, unit: str, mend: str = "") -> float:
    """Return the SI value of one place, with the option in the error."""
    from tegdesign.quantity import parse

    try:
        return parse(part, unit)
    except InputError as error:
        raise InputError(f"{option}: {error}{mend}") from error


def temperatures(option: str, text: str | None) -> list[float]:
    """Return a list of temperatures [K]."""
    listed = parts(option, text)
    values = [value(option, part, "K") for part in listed]
    for part, t in zip(listed, values, strict=True):
        if not 0 < t < 4000:
            raise InputError(f"{option}: '{part}' is {t:g} K, outside 0 K..4000 K; mend it")
    return values


def counts(option: str, text: str | None) -> list[int]:
    """Return a list of whole numbers, "3, 7"."""
    listed = parts(option, text)
    for part in listed:
        if not part.isdecimal():
            raise InputError(f"{option}: '{part}' is no whole number; count from 1, \"3, 7\" for example")
    return [int(part) for part in listed]
