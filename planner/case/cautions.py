"""Answers about conditions that forbid, delay or need advice before travel, with their dates."""

from __future__ import annotations

from datetime import date

from pydantic import Field

from planner.case.section import Section


class CautionAnswer(Section):
    """One condition of the cautions profile: present or not, when, and what was said about it."""

    condition_id: str = Field(max_length=60, description="The condition's id in the cautions profile")
    present: bool | None = Field(None, description="None: not known, and asked for")
    happened_on: date | None = Field(None, strict=False, description="Event, operation, or proof of resolution")
    note: str = Field("", max_length=200)


class Cautions(Section):
    """All answers. A condition without an answer is not known."""

    answers: tuple[CautionAnswer, ...] = Field((), max_length=100, strict=False)
