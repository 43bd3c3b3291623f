"""The record's kit."""

from __future__ import annotations

from planner.papers.desk import Desk
from planner.papers.flow import Flow


def write_kit(flow: Flow, desk: Desk) -> None:
    """What is carried."""
    flow.heading(desk.say("record.kit"))
