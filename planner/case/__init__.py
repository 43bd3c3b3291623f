"""The input, one module a section."""

from planner.case.case import FORMAT, VERSION, Case

__all__ = ["FORMAT", "VERSION", "Case"]
