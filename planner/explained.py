"""What an explanation of one number consists of."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date

ACTIVITY_WORDS = {"rest": "at rest", "walking": "walking", "asleep": "asleep"}


@dataclass(frozen=True)
class Named:
    """A value with its name and, where it was measured or decided on a day, that day. The value carries its unit."""

    name: str
    value: str
    taken_on: date | None = None

    @property
    def text(self) -> str:
        """Name, value and day in one line."""
        day = f" ({self.taken_on.day} {self.taken_on:%b %Y})" if self.taken_on is not None else ""
        return f"{self.name[:1].upper()}{self.name[1:]}: {self.value}{day}"


@dataclass(frozen=True)
class Explanation:
    """How one number was worked out, in words and in the units chosen to be shown."""

    title: str
    result: str
    formula: str
    inputs: tuple[Named, ...]
    source: str
    valid: str  # the range in which the formula may be used
    made_from: str = ""  # the people it was made from
    remarks: tuple[str, ...] = ()
    otherwise: tuple[Named, ...] = ()  # what another method would give
    otherwise_note: str = ""
