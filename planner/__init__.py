"""Front door of the planner: a Case goes in, a Plan comes out.

The names below are loaded when they are first used, so that a screen can show its first frame before the core is there.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from planner.case import Case
    from planner.planning import StageMemory, plan
    from planner.results import Plan

__all__ = ["Case", "Plan", "StageMemory", "plan"]

_WHERE = {
    "Case": "planner.case",
    "Plan": "planner.results",
    "StageMemory": "planner.planning",
    "plan": "planner.planning",
}


def __getattr__(name: str) -> Any:
    if name not in _WHERE:
        raise AttributeError(f"module 'planner' has no attribute {name!r}")
    value = getattr(import_module(_WHERE[name]), name)
    globals()[name] = value
    return value
