"""The kit in words."""

from __future__ import annotations

from planner.papers.desk import Desk


def concentrator_text(desk: Desk) -> str:
    return ""


def batteries_text(desk: Desk) -> str:
    return ""


def cylinders_text(desk: Desk) -> str:
    return ""


def turn_back_rows(desk: Desk) -> list[tuple[str, str]]:
    return []


def write_items(flow, desk):
    pass


def write_endurance(flow, desk):
    pass
