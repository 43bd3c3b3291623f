"""What a batch says while it runs: how many are done, how fast, how long still, and which line failed and why."""

from __future__ import annotations

import sys
import time
from dataclasses import dataclass
from typing import Protocol, TextIO

BAR_CHARACTERS = 24
SECONDS_BETWEEN = 0.2
SECONDS_BETWEEN_LINES = 10.0  # where the output is a file


@dataclass(frozen=True)
class Progress:
    """Cases of this batch: kept from before, planned now, failed now, and all of them."""

    kept: int
    planned: int
    failed: int
    total: int
    seconds: float

    @property
    def finished(self) -> int:
        """Cases that need no more work in this run."""
        return self.kept + self.planned + self.failed

    @property
    def rate_per_s(self) -> float | None:
        """Cases worked on in a second of this run; None before the first."""
        worked = self.planned + self.failed
        return worked / self.seconds if worked and self.seconds > 0.0 else None

    @property
    def remaining_s(self) -> float | None:
        """Seconds still needed at this rate; None before the first case."""
        return (self.total - self.finished) / self.rate_per_s if self.rate_per_s else None

    def text(self) -> str:
        """The numbers as one line."""
        said = f"{self.finished} of {self.total} cases"
        if self.kept:
            said += f", {self.kept} kept from before"
        if self.failed:
            said += f", {self.failed} failed"
        if self.rate_per_s is not None and self.remaining_s is not None:
            said += f", {self.rate_per_s:.3g} cases/s, {duration_text(self.remaining_s)} left"
        return said


class Reporter(Protocol):
    """Who is told."""

    def progress(self, progress: Progress) -> None:
        """After each case."""

    def sentence(self, text: str) -> None:
        """A failed line, or something to know about the whole batch."""


class StreamReporter:
    """Tells a stream, standard error where none is given: a bar that moves on a terminal, now and then a line else."""

    def __init__(self, stream: TextIO | None = None) -> None:
        self._stream = stream or sys.stderr
        self._moves = self._stream.isatty()
        self._last = -float("inf")
        self._width = 0

    def progress(self, progress: Progress) -> None:
        """Shown at most five times a second on a terminal, every 10 s else, and at the end."""
        now = time.monotonic()
        pause = SECONDS_BETWEEN if self._moves else SECONDS_BETWEEN_LINES
        if progress.finished < progress.total and now - self._last < pause:
            return
        self._last = now
        filled = BAR_CHARACTERS * progress.finished // max(progress.total, 1)
        text = f"[{'#' * filled}{'.' * (BAR_CHARACTERS - filled)}] {progress.text()}"
        end = "\r" if self._moves and progress.finished < progress.total else "\n"
        self._stream.write(text.ljust(self._width if self._moves else 0) + end)
        self._stream.flush()
        self._width = len(text) if end == "\r" else 0

    def sentence(self, text: str) -> None:
        """On a line of its own."""
        self._stream.write(text.ljust(self._width) + "\n")
        self._stream.flush()
        self._width = 0


def duration_text(seconds: float) -> str:
    """A time span in hours and minutes, minutes and seconds, or seconds."""
    whole = max(0, round(seconds))
    if whole < 60:
        return f"{whole} s"
    if whole < 3600:
        return f"{whole // 60} min {whole % 60} s"
    return f"{whole // 3600} h {whole % 3600 // 60} min"
