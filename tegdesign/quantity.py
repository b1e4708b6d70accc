"""Text with units to SI numbers and back: the only user of the units library."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from tegdesign.errors import InputError

if TYPE_CHECKING:
    import pint
    from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
    from pydantic.json_schema import JsonSchemaValue
    from pydantic_core import CoreSchema

_NUMBER = re.compile(r"\s*([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?|[+-]?(?:nan|inf(?:inity)?))\s*(.*?)\s*$", re.I)
_POWER = re.compile(r"(?<=[A-Za-zµμΩ])(-?\d)(?![\d.])")


@lru_cache(maxsize=1)
def _registry() -> pint.UnitRegistry[float]:
    import pint

    return pint.UnitRegistry(autoconvert_offset_to_baseunit=True)


@lru_cache(maxsize=256)
def conversion(unit: str, target: str, difference: bool = False) -> tuple[float, float]:
    """Return ``(factor, offset)`` with ``SI value = factor * number + offset``.

    Parameters
    ----------
    unit : str
        Unit as a person writes it, for example ``W/m2/K``, ``mohm cm``, ``degC``.
    target : str
        SI unit wanted, for example ``W/m^2/K``.
    difference : bool
        The number is a temperature difference, so ``degC`` counts as ``K``.

    Raises
    ------
    InputError
        When the unit is unknown or has another dimension.
    """
    direct = _direct(unit, target, difference)
    if direct is not None:
        return direct
    import pint

    text = _POWER.sub(r"**\1", unit.replace("·", "*").replace("%", "percent"))
    if difference:
        text = re.sub(r"\bdeg(C|F)\b|°(C|F)", lambda m: f"delta_deg{m[1] or m[2]}", text)
    registry = _registry()
    try:
        zero = registry.Quantity(0.0, text or "dimensionless").to(target).magnitude
        one = registry.Quantity(1.0, text or "dimensionless").to(target).magnitude
    except pint.DimensionalityError as error:
        raise InputError(f"unit '{unit}' has the wrong dimension, expected one like '{target}'") from error
    except Exception as error:  # the units library raises many kinds for unreadable text
        raise InputError(f"unit '{unit}' is not a known unit, expected one like '{target}'") from error
    return _clean(one - zero if zero else one), float(zero)


_PREFIXES = {"": 1.0, "n": 1e-9, "u": 1e-6, "m": 1e-3, "k": 1e3, "M": 1e6, "G": 1e9}
_ELECTRONVOLT = 1.602176634e-19  # J, exact by the definition of the SI
_COMMON = {  # units that files of computed materials are full of
    ("eV", "J"): _ELECTRONVOLT,
    ("meV/K", "J/K"): _ELECTRONVOLT * 1e-3,
    ("1/cm^3", "1/m^3"): 1e6,
    ("nm^3", "m^3"): 1e-27,
    ("cm^2/V/s", "m^2/V/s"): 1e-4,
}


def _direct(unit: str, target: str, difference: bool) -> tuple[float, float] | None:
    """Return the conversion of the target, of its first unit with an SI prefix, of degC and a few more; else None.

    These need no library, and loading its list of units takes a third of the time of a whole job; the tests hold
    them against it.
    """
    if target == "K" and unit == "degC":
        return 1.0, 0.0 if difference else 273.15
    if (unit, target) in _COMMON:
        return _COMMON[unit, target], 0.0
    asked, wanted = (_POWER.sub(r"^\1", text).replace("**", "^").replace(" ", "") for text in (unit, target))
    prefix = asked.removesuffix(wanted)
    if prefix + wanted != asked or prefix not in _PREFIXES:
        return None
    if prefix and (target.startswith("kg") or not re.match(r"[A-Za-z]+(/|$)", target)):  # not mkg, and cm^2 is squared
        return None
    return _PREFIXES[prefix], 0.0


def _clean(factor: float) -> float:
    """Remove the last-digit noise of chained conversions (1e-05000000000000001 -> 1e-05)."""
    short = float(f"{factor:.12g}")
    return short if abs(short - factor) < 1e-14 * abs(factor) else float(factor)


def parse(text: object, target: str, difference: bool = False) -> float:
    """Return the SI value of a text such as ``"280 degC"``; a bare number only where no unit is needed.

    Raises
    ------
    InputError
        Missing unit, unknown unit, wrong dimension, or a number that is not finite.
    """
    if isinstance(text, bool) or not isinstance(text, (int, float, str)):
        raise InputError(f"expected a number with a unit like '1 {target}', got {text!r}")
    if isinstance(text, (int, float)):
        if target != "":
            raise InputError(f"{text!r} has no unit; write it as text with one, like \"{text} {target}\"")
        number, unit = float(text), ""
    else:
        match = _NUMBER.match(text)
        if match is None:
            raise InputError(f"'{text}' is not a number with a unit like '1 {target}'")
        number, unit = float(match[1]), match[2]
        if unit == "" and target != "":
            raise InputError(f"'{text}' has no unit; write one, like '{text.strip()} {target}'")
    if not math.isfinite(number):
        raise InputError(f"{text!r} is not a finite number")
    if unit == target:
        return number
    factor, offset = conversion(unit, target, difference)
    return number / round(1 / factor) if _is_inverse(factor) and not offset else factor * number + offset


def _is_inverse(factor: float) -> bool:
    """Tell whether dividing by a whole number is the more exact way (1.4 mm -> 0.0014 m)."""
    return 0 < factor < 1 and abs(1 / factor - round(1 / factor)) < 1e-9 * (1 / factor)


def write(value: float, target: str, shown: str | None = None, difference: bool = False) -> str:
    """Return a text that ``parse`` turns back into exactly ``value``, in the unit ``shown`` where that is exact."""
    for unit in (shown or target, target):
        factor, offset = conversion(unit, target, difference)
        number = (value - offset) / factor
        for digits in (6, 9, 12, 15, 17):
            text = f"{number:.{digits}g} {unit}".strip()
            if parse(text, target, difference) == value:
                return text
    return f"{value!r} {target}".strip()


@dataclass(frozen=True)
class Measure:
    """Mark of a typed field: the SI unit it is kept in and the unit people like to see.

    ``Annotated[float, Measure("m", "mm")]`` reads ``"1.4 mm"``, keeps ``0.0014``, writes ``"1.4 mm"`` back.
    """

    unit: str
    shown: str | None = None
    difference: bool = False

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        """Parse before the range checks of the field, write back with the unit."""
        from pydantic_core import PydanticCustomError, core_schema

        def read(value: object) -> float:
            if isinstance(value, SI):
                return float(value)
            try:
                return parse(value, self.unit, self.difference)
            except InputError as error:
                raise PydanticCustomError("quantity", "{reason}", {"reason": str(error)}) from error

        return core_schema.no_info_before_validator_function(
            read,
            handler(source),
            serialization=core_schema.plain_serializer_function_ser_schema(
                lambda value: write(value, self.unit, self.shown, self.difference) if self.unit else value
            ),
        )

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> JsonSchemaValue:
        """Describe the field for editors: a text with a unit."""
        if self.unit == "":
            return {"type": "number"}
        return {"type": "string", "description": f"number with a unit, for example '1 {self.shown or self.unit}'"}


class SI(float):
    """A number that is already in the SI unit of its field, for building typed models inside the program."""
