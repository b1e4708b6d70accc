"""Typed files: a model reads them, and what is wrong is told with its line in words of ours."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal, TypeVar

from tegdesign.document.disk import read_text
from tegdesign.document.toml import Path_, first_line, line_numbers, parse_toml
from tegdesign.errors import InputError, closest

if TYPE_CHECKING:
    from pydantic import BaseModel, ValidationError

    Model = TypeVar("Model", bound=BaseModel)

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


def validate(data: Mapping[str, Any], text: str, model: type[Model]) -> tuple[Model | None, list[Finding]]:
    """Return the typed model and no findings, or None and all findings sorted by line."""
    from pydantic import ValidationError

    try:
        return model.model_validate(data), []
    except ValidationError as error:
        return None, sorted(_findings(error, data, text, model), key=lambda finding: finding.line)


def given(
    value: Model | str | os.PathLike[str], model: type[Model], read: Callable[[str | os.PathLike[str]], Model]
) -> Model:
    """Return a typed model given as one, or as the path of its file.

    Raises
    ------
    InputError
        It is neither, or the file cannot be used.
    """
    if isinstance(value, model):
        return value
    if not isinstance(value, (str, os.PathLike)):
        raise InputError(f"expected a {model.__name__} or the path of one, got {type(value).__name__}")
    return read(value)


def load(
    path: str | os.PathLike[str], model: type[Model], strangers: Mapping[str, str] | None = None
) -> Model:
    """Return the typed model in a file.

    ``strangers`` maps keys that only files of another sort have to the words that say what such a file is.

    Raises
    ------
    InputError
        The file cannot be used; the message gives file, line and the first thing wrong.
    """
    text = read_text(path)
    data = parse_toml(text, str(path))
    for key, what in (strangers or {}).items():
        if key in data:
            raise InputError(f"{path}:{line_numbers(text).get((key,), 1)}: '{key}' tells that this is {what}")
    read, findings = validate(data, text, model)
    if read is None:
        raise InputError(message(path, findings))
    return read


def message(path: str | os.PathLike[str], findings: list[Finding]) -> str:
    """Return the first finding with file and line, and how many more there are."""
    # a mistyped key is also a missing one; the mistyped one is what the user wants to hear of
    first = next((finding for finding in findings if finding.what != MISSING), findings[0])
    more = f" (and {len(findings) - 1} more)" if len(findings) > 1 else ""
    return f"{path}:{first.line}: {first.text}{more}"


def _findings(
    error: ValidationError, data: Mapping[str, Any], text: str, model: type[BaseModel]
) -> Iterator[Finding]:
    lines = line_numbers(text)
    problems = error.errors(include_url=False)
    for problem in problems:
        full: Path_ = tuple(problem["loc"])
        if problem["type"] == "too_short" and any(p["loc"][: len(full)] == full != p["loc"] for p in problems):
            continue  # only because the items themselves are wrong
        location = _written(full, data)
        line = next((lines[location[:k]] for k in range(len(location), 0, -1) if location[:k] in lines), 1)
        context = problem.get("ctx", {})
        if "findings" in context:  # a field that looks inside its own text, lines counted from its start
            first = first_line(text, line)
            for inner in context["findings"]:
                yield Finding(
                    first + inner.line, inner.severity, inner.what, inner.value, inner.limit, inner.mend
                )
            continue
        if problem["type"] == "union_tag_invalid":
            line = lines.get((*location, "kind"), line)
        yield _worded(problem, ".".join(str(part) for part in location), line, model, full)


def _written(location: Path_, data: Any) -> Path_:
    """Return a location without the kinds that the typed model puts between the keys of the file."""
    kept: list[str | int] = []
    parts = list(location)
    while parts and not isinstance(data, (str, int, float)):  # a bare value has nothing inside
        if kept and isinstance(data, Mapping) and parts[0] == data.get("kind"):
            parts.pop(0)
        if parts:
            kept.append(parts[0])
            known = isinstance(data, (Mapping, list)) and (isinstance(data, list) or parts[0] in data)
            data = data[parts[0]] if known else None
            parts.pop(0)
    return tuple(kept)


def _worded(
    problem: Mapping[str, Any], name: str, line: int, model: type[BaseModel], location: Path_
) -> Finding:
    kind, context, value = problem["type"], problem.get("ctx", {}), problem["input"]
    if kind == "extra_forbidden":
        near = closest(str(location[-1]), _keys(model, location[:-1]))
        return Finding(line, "error", "unknown key", name, mend=near.removeprefix("; "))
    if kind == "missing":
        return Finding(line, "error", MISSING, name, mend="add it")
    if kind == "union_tag_not_found":
        return Finding(line, "error", MISSING, f"{name}.kind", mend=f"add one of {_kinds(model, location)}")
    if kind == "union_tag_invalid":
        known = f"one of {_kinds(model, location)}"
        return Finding(line, "error", f"{name}.kind", repr(context["tag"]), known)
    if kind == "quantity":
        return Finding(line, "error", f"{name}: {context['reason']}")
    if kind == "literal_error":
        return Finding(line, "error", name, repr(value), f"one of {context['expected']}")
    limits = {"greater_than": ("above", "gt"), "greater_than_equal": ("at least", "ge")}
    limits |= {"less_than": ("below", "lt"), "less_than_equal": ("at most", "le")}
    if kind in limits:
        words, key = limits[kind]
        limit = f"{words} {context[key]:g} {_unit(model, location)}".strip()
        return Finding(line, "error", name, str(value), limit)
    reason = str(context.get("reason") or context.get("error") or problem["msg"])
    label = f"{name}: " if name else ""
    shown = "" if isinstance(value, Mapping) else repr(value)[:80]
    return Finding(line, "error", f"{label}{reason[:1].lower()}{reason[1:]}", shown)


def _models(model: type[BaseModel], path: Path_) -> list[type[BaseModel]]:
    """Return the models at a path, looking through Optional, list and union; a kind picks one of a union."""
    from typing import get_args

    from pydantic import BaseModel

    names = [part for part in path if isinstance(part, str)]
    if not names:
        return [model]
    field = model.model_fields.get(names[0])
    queue: list[Any] = [field.annotation] if field else []
    found: list[type[BaseModel]] = []
    while queue:
        part = queue.pop(0)
        if isinstance(part, type) and issubclass(part, BaseModel):
            rest, kind = names[1:], _kind(part)
            if not rest or kind is None or kind == rest[0]:
                found += _models(part, tuple(rest[1:] if rest and kind is not None else rest))
        queue.extend(get_args(part))
    return found


def _keys(model: type[BaseModel], path: Path_) -> list[str]:
    """Return the keys that may stand at a path."""
    return [name for found in _models(model, path) for name in found.model_fields]


def _kinds(model: type[BaseModel], path: Path_) -> str:
    """Return the kinds that a table may be of."""
    return ", ".join(repr(_kind(found)) for found in _models(model, path))


def _kind(model: type[BaseModel]) -> str | None:
    """Return the word that tells a model from others of a union, None if it needs none."""
    from typing import get_args

    field = model.model_fields.get("kind")
    return None if field is None else next(iter(get_args(field.annotation)), None)


def _unit(model: type[BaseModel], path: Path_) -> str:
    """Return the unit in which the limits of a field are counted, or nothing."""
    from typing import get_args

    from tegdesign.quantity import Measure

    names = [part for part in path if isinstance(part, str)]
    for found in _models(model, tuple(names[:-1])):
        field = found.model_fields.get(names[-1])
        queue: list[Any] = [*field.metadata, field.annotation] if field else []
        while queue:
            part = queue.pop(0)
            if isinstance(part, Measure):
                return part.unit
            queue.extend(getattr(part, "__metadata__", ()))
            queue.extend(get_args(part))
    return ""
