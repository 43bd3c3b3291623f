"""The units and language a person chose to see; nothing inside the planner depends on them."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from planner.case.section import Section


class Display(Section):
    """How numbers are shown."""

    pressure: Literal["kPa", "mmHg"] = "kPa"
    altitude: Literal["ft", "m"] = "ft"
    gauge: Literal["bar", "psi"] = "bar"
    paper: Literal["A4", "Letter"] = "A4"
    locale: str = Field("en_GB", pattern="^[a-z]{2}_[A-Z]{2}$")
