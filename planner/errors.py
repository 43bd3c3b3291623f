"""The one family of errors; each message is a sentence a tired person can act on."""

from __future__ import annotations


class PlannerError(Exception):
    """Something could not be done; str(error) may be shown to a person."""


class InputError(PlannerError):
    """An entry is missing, impossible or outside what a method covers."""

    def __init__(self, field: str, message: str) -> None:
        super().__init__(message)
        self.field = field
        self.message = message


class ProfileError(PlannerError):
    """A data file of the packaged or the service's own profiles cannot be used."""

    def __init__(self, file: str, key: str, message: str) -> None:
        super().__init__(f"{file}, {key}: {message}" if key else f"{file}: {message}")
        self.file = file
        self.key = key
        self.message = message


class StoreError(PlannerError):
    """Kept records could not be read or written; nothing acknowledged was lost."""
