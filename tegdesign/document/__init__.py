"""Typed TOML files: read with findings that know their line, written whole or not at all."""

from tegdesign.document.disk import check_place, read_text, write_whole
from tegdesign.document.toml import Path_, first_line, line_numbers, parse_toml, to_toml
from tegdesign.document.typed import Finding, given, load, message, validate

__all__ = [
    "Finding",
    "Path_",
    "check_place",
    "first_line",
    "given",
    "line_numbers",
    "load",
    "message",
    "parse_toml",
    "read_text",
    "to_toml",
    "validate",
    "write_whole",
]
