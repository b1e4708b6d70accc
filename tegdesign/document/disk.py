"""Files on disk: read with words for every refusal, written whole or not at all."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from tegdesign.errors import InputError


def read_text(path: str | os.PathLike[str]) -> str:
    """Return the text of a UTF-8 file.

    Raises
    ------
    InputError
        The file is missing, may not be read, is a folder, or is not text.
    """
    try:
        text = Path(path).read_text(encoding="utf-8-sig")
    except FileNotFoundError as error:
        raise InputError(f"{path}: no such file") from error
    except IsADirectoryError as error:
        raise InputError(f"{path}: is a folder, expected a file") from error
    except UnicodeDecodeError as error:
        raise InputError(f"{path}: is not a UTF-8 text file (byte {error.start})") from error
    except (OSError, RuntimeError) as error:
        raise InputError(f"{str(path)[:200]}: cannot be read ({getattr(error, 'strerror', None) or error})") from error
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


def check_place(path: str | os.PathLike[str]) -> None:
    """Refuse a place to which ``write_whole`` could not write, before the work that fills it is done.

    Raises
    ------
    InputError
        The target is a folder, or its folder is missing or may not be written to.
    """
    try:
        folder = Path(path).resolve().parent
        is_folder = Path(path).is_dir()
        Path(path).exists()
    except (OSError, RuntimeError) as error:  # a name too long, a link to itself, a folder that is gone
        reason = getattr(error, "strerror", None) or error
        raise InputError(f"{str(path)[:200]}: cannot be written ({reason})") from error
    if is_folder:
        raise InputError(f"{path}: is a folder, expected a file to write")
    if not folder.is_dir():
        reason = "is no folder" if folder.exists() else "does not exist"
        raise InputError(f"{path}: cannot be written, {folder} {reason}")
    if not os.access(folder, os.W_OK):
        raise InputError(f"{path}: cannot be written, {folder} may not be written to")
