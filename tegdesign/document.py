"""Typed TOML files: read with findings that know their line, written whole or not at all."""

from __future__ import annotations

import os
import re
import tempfile
import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal, TypeVar

from tegdesign.errors import InputError, closest

if TYPE_CHECKING:
    from pydantic import BaseModel, ValidationError

    Model = TypeVar("Model", bound=BaseModel)

Path_ = tuple[str | int, ...]
MISSING = "missing key"


@dataclass(frozen=True)
class Finding:
    """One thing wrong or doubtful in a file: where, what, which value, which limit, how to mend it."""

    line: int
    severity: Literal["error", "warning"]
    what: str
    value: str = ""
    limit: str = ""
    mend: str = ""

    @property
    def text(self) -> str:
        """The finding in one sentence without file and line."""
        parts = self.what + (f": {self.value}" if self.value else "")
        parts += f" (limit: {self.limit})" if self.limit else ""
        return parts + (f"; {self.mend}" if self.mend else "")


def read_text(path: str | os.PathLike[str]) -> str:
    """Return the text of a UTF-8 file.

    Raises
    ------
    InputError
        The file is missing, may not be read, is a folder, or is not text.
    """
    try:
        text = Path(path).read_text(encoding="utf-8")
    except FileNotFoundError as error:
        raise InputError(f"{path}: no such file") from error
    except IsADirectoryError as error:
        raise InputError(f"{path}: is a folder, expected a file") from error
    except UnicodeDecodeError as error:
        raise InputError(f"{path}: is not a UTF-8 text file (byte {error.start})") from error
    except OSError as error:
        raise InputError(f"{path}: cannot be read ({error.strerror})") from error
    if "\0" in text:
        raise InputError(f"{path}: is not a text file (byte {text.index(chr(0))} is zero)")
    return text


def write_whole(path: str | os.PathLike[str], content: str | bytes) -> None:
    """Write a file beside its target and move it there, so that nobody ever sees half of it.

    Raises
    ------
    InputError
        The folder is missing or may not be written to.
    """
    target = Path(path)
    data = content.encode() if isinstance(content, str) else content
    temporary = ""
    try:
        if target.is_dir():
            raise InputError(f"{path}: is a folder, expected a file to write")
        if target.exists() and not target.is_file():  # a pipe or /dev/stdout cannot be replaced
            target.write_bytes(data)
            return
        target = target.resolve()
        handle, temporary = tempfile.mkstemp(dir=target.parent, prefix=f".{target.name}.")
        with os.fdopen(handle, "wb") as stream:
            stream.write(data)
        umask = os.umask(0)
        os.umask(umask)
        os.chmod(temporary, target.stat().st_mode & 0o777 if target.exists() else 0o666 & ~umask)
        os.replace(temporary, target)
    except OSError as error:
        if temporary:
            Path(temporary).unlink(missing_ok=True)
        raise InputError(f"{path}: cannot be written ({error.strerror})") from error


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


def validate(data: Mapping[str, Any], text: str, model: type[Model]) -> tuple[Model | None, list[Finding]]:
    """Return the typed model and no findings, or None and all findings sorted by line."""
    from pydantic import ValidationError

    try:
        return model.model_validate(data), []
    except ValidationError as error:
        return None, sorted(_findings(error, text, model), key=lambda finding: finding.line)


def load(path: str | os.PathLike[str], model: type[Model]) -> Model:
    """Return the typed model in a file.

    Raises
    ------
    InputError
        The file cannot be used; the message gives file, line and the first thing wrong.
    """
    text = read_text(path)
    read, findings = validate(parse_toml(text, str(path)), text, model)
    if read is None:
        raise InputError(message(path, findings))
    return read


def message(path: str | os.PathLike[str], findings: list[Finding]) -> str:
    """Return the first finding with file and line, and how many more there are."""
    # a mistyped key is also a missing one; the mistyped one is what the user wants to hear of
    first = next((finding for finding in findings if finding.what != MISSING), findings[0])
    more = f" (and {len(findings) - 1} more)" if len(findings) > 1 else ""
    return f"{path}:{first.line}: {first.text}{more}"


def _findings(error: ValidationError, text: str, model: type[BaseModel]) -> Iterator[Finding]:
    lines = line_numbers(text)
    for problem in error.errors(include_url=False):
        location: Path_ = tuple(problem["loc"])
        line = next((lines[location[:k]] for k in range(len(location), 0, -1) if location[:k] in lines), 1)
        context = problem.get("ctx", {})
        if "findings" in context:  # a field that looks inside its own text, lines counted from its start
            first = first_line(text, line)
            for inner in context["findings"]:
                yield Finding(
                    first + inner.line, inner.severity, inner.what, inner.value, inner.limit, inner.mend
                )
            continue
        yield _worded(problem, ".".join(str(part) for part in location), line, model, location)


def first_line(text: str, line: int) -> int:
    """Return the line on which the content of the text value begins whose key stands on ``line``."""
    return line + text.splitlines()[line - 1].rstrip().endswith(('"""', "'''"))


def _worded(
    problem: Mapping[str, Any], name: str, line: int, model: type[BaseModel], location: Path_
) -> Finding:
    kind, context, value = problem["type"], problem.get("ctx", {}), problem["input"]
    if kind == "extra_forbidden":
        near = closest(str(location[-1]), _keys(model, location[:-1]))
        return Finding(line, "error", "unknown key", name, mend=near.removeprefix("; "))
    if kind == "missing":
        return Finding(line, "error", MISSING, name, mend="add it")
    if kind == "quantity":
        return Finding(line, "error", f"{name}: {context['reason']}")
    if kind == "literal_error":
        return Finding(line, "error", name, repr(value), f"one of {context['expected']}")
    limits = {"greater_than": ("above", "gt"), "greater_than_equal": ("at least", "ge")}
    limits |= {"less_than": ("below", "lt"), "less_than_equal": ("at most", "le")}
    if kind in limits:
        words, key = limits[kind]
        return Finding(line, "error", name, str(value), f"{words} {context[key]:g}")
    reason = str(context.get("reason") or context.get("error") or problem["msg"])
    label = f"{name}: " if name else ""
    shown = "" if isinstance(value, Mapping) else repr(value)[:80]
    return Finding(line, "error", f"{label}{reason[:1].lower()}{reason[1:]}", shown)


def _keys(model: type[BaseModel], path: Path_) -> list[str]:
    """Return the keys a model allows at a path, looking through Optional, list and union annotations."""
    from typing import get_args

    from pydantic import BaseModel

    names = [part for part in path if isinstance(part, str)]
    if not names:
        return list(model.model_fields)
    field = model.model_fields.get(names[0])
    queue: list[Any] = [field.annotation] if field else []
    keys: list[str] = []
    while queue:
        kind = queue.pop()
        if isinstance(kind, type) and issubclass(kind, BaseModel):
            keys += _keys(kind, tuple(names[1:]))
        queue.extend(get_args(kind))
    return keys


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
