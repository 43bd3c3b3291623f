"""The cases of a batch, one JSON case a line, streamed; and the name under which a line's result is kept."""

from __future__ import annotations

import hashlib
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from importlib import resources
from importlib.resources.abc import Traversable
from pathlib import Path

from planner.catalogue import service_folder
from planner.errors import InputError
from planner.results import Through

MOST_LINE_BYTES = 5_000_000
_BYTE_ORDER_MARK = b"\xef\xbb\xbf"


@dataclass(frozen=True)
class Line:
    """One case: its number in the file from 1, and its text. None: longer than a case may be."""

    number: int
    text: bytes | None

    def name(self, fingerprint: str) -> str:
        """Folder of this line's result: another text, other profiles or another planner give another name."""
        digest = hashlib.sha256(fingerprint.encode() + (self.text or b"")).hexdigest()
        return f"{self.number:06d}-{digest[:16]}"


def read_lines(path: Path) -> Iterator[Line]:
    """The lines with something in them, one at a time. Raises InputError when the file cannot be read."""
    try:
        with path.open("rb") as file:
            number = 0
            while line := file.readline(MOST_LINE_BYTES + 1):
                number += 1
                whole = len(line) <= MOST_LINE_BYTES
                while not line.endswith(b"\n") and len(line) > MOST_LINE_BYTES:
                    line = file.readline(MOST_LINE_BYTES + 1)
                text = line.strip().removeprefix(_BYTE_ORDER_MARK) if whole else None
                if text is None or text:
                    yield Line(number, text)
    except OSError as error:
        raise InputError("cases", f"The file {path} cannot be read: {error.strerror}.") from error


@lru_cache(maxsize=1)
def planner_fingerprint() -> str:
    """A digest of the planner's own modules and profiles: results made by others are made again."""
    digest = hashlib.sha256()
    for package in ("planner", "profiles"):
        _add(digest, resources.files(package), package)
    return digest.hexdigest()


def fingerprint(papers: bool, through: Through = "kit") -> str:
    """What a result depends on beside its case: the planner, all profiles, papers or not, and how far it is planned."""
    digest = hashlib.sha256(planner_fingerprint().encode())
    own = service_folder()
    for path in sorted(own.rglob("*")) if own.is_dir() else []:
        if path.is_file():
            digest.update(path.relative_to(own).as_posix().encode() + b"\0" + path.read_bytes() + b"\0")
    return f"{digest.hexdigest()} papers={papers} through={through}"


def _add(digest: hashlib._Hash, folder: Traversable, name: str) -> None:
    for item in sorted(folder.iterdir(), key=lambda one: one.name):
        if item.is_dir():
            if item.name != "__pycache__":
                _add(digest, item, f"{name}/{item.name}")
        else:
            digest.update(f"{name}/{item.name}".encode() + b"\0" + item.read_bytes() + b"\0")
