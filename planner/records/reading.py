"""Reads and writes case files; a faulty file gives one sentence a fault: where, what is allowed, what was given."""

from __future__ import annotations

import contextlib
import json
import math
import os
from pathlib import Path
from typing import Any

from pydantic import ValidationError
from pydantic_core import ErrorDetails

from planner.case import FORMAT, VERSION, Case
from planner.errors import PlannerError

MAX_BYTES = 5_000_000
MAX_DEPTH = 40
_SHOWN_FAULTS = 20
_SHOWN_CHARACTERS = 60


class CaseFileError(PlannerError):
    """A file that is not a case this version reads; `faults` holds one sentence for each fault."""

    def __init__(self, faults: tuple[str, ...]) -> None:
        super().__init__("\n".join(faults))
        self.faults = faults


def read_case(content: bytes | str) -> Case:
    """The case in a file's content. Raises CaseFileError with a sentence for each fault; nothing is repaired."""
    table = read_json_object(content)
    if table.get("format") != FORMAT:
        raise CaseFileError((f"This is not a case file: its format is {shown(table.get('format'))}, not {FORMAT!r}.",))
    version = table.get("version")
    if not isinstance(version, int) or isinstance(version, bool) or not 1 <= version <= VERSION:
        raise CaseFileError(
            (f"This program reads case files of version {VERSION}; this one has version {shown(version)}.",)
        )
    try:
        return Case.model_validate_json(json.dumps(table))
    except ValidationError as error:
        details = error.errors(include_url=False)
        faults = [fault_sentence(one) for one in details[:_SHOWN_FAULTS]]
        if len(details) > _SHOWN_FAULTS:
            faults.append(f"There are {len(details) - _SHOWN_FAULTS} more faults.")
        raise CaseFileError(tuple(faults)) from None


def write_case(case: Case) -> str:
    """The case as the text of a case file; read_case gives it back unchanged."""
    return case.model_dump_json(indent=1) + "\n"


def content_of(path: Path) -> bytes:
    """The content of a file, up to just more than is read of one. Raises OSError, or CaseFileError for no plain file.

    A device or a pipe is refused: it may never end.
    """
    if path.exists() and not path.is_file():
        raise CaseFileError((f"{shown(path.name)} is not a file.",))
    with path.open("rb") as file:
        return file.read(MAX_BYTES + 1)


def read_json_object(content: bytes | str) -> dict[str, Any]:
    """A JSON object without duplicate keys, endless numbers or hostile depth. Raises CaseFileError."""
    raw = content.encode() if isinstance(content, str) else content
    if len(raw) > MAX_BYTES:
        raise CaseFileError((f"The file has too many bytes; at most {MAX_BYTES:,} are read.",))
    try:
        text = raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise CaseFileError((f"The file is not UTF-8 text: byte {error.start} cannot be read.",)) from None
    if _depth(text) > MAX_DEPTH:
        raise CaseFileError((f"The file is nested more than {MAX_DEPTH} levels deep.",))
    try:
        table = json.loads(
            text, object_pairs_hook=_without_duplicates, parse_constant=_refuse_constant, parse_float=_finite
        )
    except json.JSONDecodeError as error:
        raise CaseFileError(
            (f"The file is not JSON: line {error.lineno}, column {error.colno}: {error.msg}.",)
        ) from None
    except ValueError as error:
        raise CaseFileError((str(error),)) from None
    if not isinstance(table, dict):
        raise CaseFileError(("The file holds no case: an object in braces is expected.",))
    return table


def fault_sentence(detail: ErrorDetails) -> str:
    """A fault of a value as a sentence: where, what is allowed and what was given."""
    where = ".".join(_step(step) for step in detail["loc"]) or "the case"
    message = detail["msg"].removeprefix("Value error, ")
    if detail["type"] in ("value_error", "missing", "extra_forbidden"):
        return f"{where}: {message}."
    return f"{where}: {message}; {shown(detail['input'])} was given."


def shown(value: Any) -> str:
    """What was given, as it may be printed anywhere: quoted, unprintable letters escaped, cut where long."""
    text = repr(value)
    return text if len(text) <= _SHOWN_CHARACTERS else text[:_SHOWN_CHARACTERS] + "…"


def write_atomically(path: Path, content: bytes) -> None:
    """Replace a file so that a crash leaves the old content or the new one, never a mix. Raises OSError."""
    temporary = path.with_name(f".{path.name}.{os.getpid()}.tmp")
    try:
        with open(temporary, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        os.replace(temporary, path)
    except BaseException:
        with contextlib.suppress(OSError):
            temporary.unlink()
        raise
    if os.name == "posix":
        folder = os.open(path.parent, os.O_RDONLY)
        try:
            os.fsync(folder)
        finally:
            os.close(folder)


def _step(step: int | str) -> str:
    if isinstance(step, int):
        return str(step + 1)
    return step if step.isprintable() else shown(step)


def _without_duplicates(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    table: dict[str, Any] = {}
    for key, value in pairs:
        if key in table:
            raise ValueError(
                f"The key {shown(key)} stands twice in the same object; which one is meant cannot be known."
            )
        table[key] = value
    return table


def _refuse_constant(name: str) -> float:
    raise ValueError(f"{name} is not a number that can be measured; leave out what is not known or write null.")


def _finite(text: str) -> float:
    value = float(text)
    if math.isinf(value):
        raise ValueError(f"The number {shown(text)} is too large.")
    return value


def _depth(text: str) -> int:
    """Deepest nesting of brackets outside strings."""
    deepest = level = 0
    inside_string = escaped = False
    for letter in text:
        if inside_string:
            if escaped:
                escaped = False
            elif letter == "\\":
                escaped = True
            elif letter == '"':
                inside_string = False
        elif letter == '"':
            inside_string = True
        elif letter in "[{":
            level += 1
            deepest = max(deepest, level)
        elif letter in "]}":
            level -= 1
    return deepest
