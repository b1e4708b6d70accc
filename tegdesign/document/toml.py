"""TOML texts: parsed with the line of a slip, the line of every key, and written back."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterator, Mapping
from typing import Any

from tegdesign.errors import InputError

Path_ = tuple[str | int, ...]


def parse_toml(text: str, where: str) -> dict[str, Any]:
    """Return the content of a TOML text; ``where`` names the file in the message.

    Raises
    ------
    InputError
        The text is not TOML; the message gives file and line.
    """
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        match = re.search(r"\(at line (\d+), column (\d+)\)", str(error))
        line = match[1] if match else str(text.count("\n") + 1)
        reason = re.sub(r"\s*\(at .*\)$", "", str(error))
        raise InputError(f"{where}:{line}: not valid TOML, {reason[:1].lower()}{reason[1:]}") from error
    except (RecursionError, ValueError) as error:  # brackets or digits by the thousand
        raise InputError(f"{where}: not usable TOML, {error}") from error


_HEADER = re.compile(r"\s*(\[\[?)\s*([^\[\]]+?)\s*\]\]?\s*(?:#.*)?$")
_KEY = re.compile(r"""\s*((?:[\w-]+|"[^"]*"|'[^']*')(?:\s*\.\s*(?:[\w-]+|"[^"]*"|'[^']*'))*)\s*=""")


def line_numbers(text: str) -> dict[Path_, int]:
    """Return the line of each key of a TOML text, by its path such as ``("stage", 0, "leg")``."""
    found: dict[Path_, int] = {}
    counts: dict[Path_, int] = {}
    table: Path_ = ()
    fence = ""
    for number, line in enumerate(text.splitlines(), 1):
        if fence:
            fence = "" if fence in line else fence
            continue
        if header := _HEADER.match(line):
            table = _parts(header[2])
            if header[1] == "[[":
                counts[table] = counts.get(table, -1) + 1
            table = _indexed(table, counts)
            found.setdefault(table, number)
        elif key := _KEY.match(line):
            found.setdefault(table + _parts(key[1]), number)
        fence = next((mark for mark in ('"""', "'''") if line.count(mark) % 2), "")
    return found


def _parts(dotted: str) -> Path_:
    return tuple(part.strip().strip("\"'") for part in dotted.split("."))


def _indexed(table: Path_, counts: Mapping[Path_, int]) -> Path_:
    """Insert the running number behind each name of a table that is repeated."""
    path: list[str | int] = []
    for k, part in enumerate(table):
        path.append(part)
        if table[: k + 1] in counts:
            path.append(counts[table[: k + 1]])
    return tuple(path)


def first_line(text: str, line: int) -> int:
    """Return the line on which the content of the text value begins whose key stands on ``line``."""
    return line + text.splitlines()[line - 1].rstrip().endswith(('"""', "'''"))


def to_toml(data: Mapping[str, Any], width: int = 110) -> str:
    """Return a mapping as TOML that ``tomllib`` reads back unchanged; None values are left out.

    Long single-line texts are folded at blanks, texts of several lines keep their lines.
    """
    return "\n".join(_table(data, (), width)).lstrip("\n") + "\n"


def _table(data: Mapping[str, Any], path: tuple[str, ...], width: int) -> Iterator[str]:
    later: list[tuple[str, Any]] = []
    for key, value in data.items():
        if isinstance(value, Mapping) or (isinstance(value, (list, tuple)) and _all_tables(value)):
            later.append((key, value))
        elif value is not None:
            yield f"{_key(key)} = {_value(value, width, len(key) + 3)}"
    for key, value in later:
        name = ".".join(_key(part) for part in (*path, key))
        for table in [value] if isinstance(value, Mapping) else value:
            yield from ("", f"[{name}]" if isinstance(value, Mapping) else f"[[{name}]]")
            yield from _table(table, (*path, key), width)


def _all_tables(value: list[Any] | tuple[Any, ...]) -> bool:
    return bool(value) and all(isinstance(item, Mapping) for item in value)


def _key(key: str) -> str:
    return key if re.fullmatch(r"[\w-]+", key, re.ASCII) else _text(key)


def _value(value: Any, width: int, used: int) -> str:
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, (int, float)):
        return repr(value)
    if isinstance(value, str):
        return _long_text(value, width, used)
    if isinstance(value, (list, tuple)):
        items = [_value(item, width, 4) for item in value]
        short = f"[{', '.join(items)}]"
        if len(short) + used <= width and "\n" not in short:
            return short
        return "[\n" + "".join(f"    {item},\n" for item in items) + "]"
    raise TypeError(f"cannot write {type(value).__name__} as TOML")


def _text(text: str) -> str:
    import json

    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


def _long_text(text: str, width: int, used: int) -> str:
    if "\n" in text:
        body = "\n".join(_text(line)[1:-1].replace('\\"', '"') for line in text.split("\n"))
        body = body.replace('"""', '""\\"')
        return f'"""\n{body[:-1] + chr(92) + chr(34) if body.endswith(chr(34)) else body}"""'
    import textwrap

    lines = textwrap.wrap(text, width - 2, break_long_words=False, break_on_hyphens=False)
    if len(text) + used <= width or " ".join(lines) != text:
        return _text(text)
    return '"""\\\n' + " \\\n".join(_text(line)[1:-1] for line in lines) + '"""'
