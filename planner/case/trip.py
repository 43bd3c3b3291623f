"""The journey from door to door, as ordered parts."""

from __future__ import annotations

from datetime import datetime
from typing import Annotated, Literal

from pydantic import Field, model_validator

from planner.case.section import Section

PartKind = Literal["home", "wait", "road", "rail", "ship", "walk", "flight", "layover", "stay"]
Source = Literal["cylinder", "concentrator", "liquid", "airline", "stationary"]
Activity = Literal["rest", "walking", "asleep"]
Elevation = Annotated[float, Field(ge=-430.0, le=8850.0)]


class ActivityShares(Section):
    """How the time of a part is spent; the shares add up to 1."""

    rest: float = Field(1.0, ge=0.0, le=1.0)
    walking: float = Field(0.0, ge=0.0, le=1.0)
    asleep: float = Field(0.0, ge=0.0, le=1.0)

    @model_validator(mode="after")
    def _add_up(self) -> ActivityShares:
        total = self.rest + self.walking + self.asleep
        if abs(total - 1.0) > 0.001:
            raise ValueError(f"shares of rest, walking and sleep must add up to 1; they add up to {total:g}")
        return self


class ProfilePoint(Section):
    """A point of a road's or railway's altitude profile."""

    at_min: float = Field(ge=0.0)
    elevation_m: Elevation


class Late(Section):
    """The user's own chance of being late, where the default is not wanted."""

    chance: float | None = Field(None, ge=0.0, le=1.0)
    typical_min: float | None = Field(None, ge=0.0, le=2880.0, description="Median lateness when late")


class Part(Section):
    """One part of the trip.

    Ground parts run from start_elevation_m (None: where the last part ended) over highest_m to end_elevation_m,
    or along profile. A flight goes from origin to destination field elevation under cabin_altitude_m (None: the
    policy's planning value).
    """

    part_id: str = Field(min_length=1, max_length=40)
    kind: PartKind
    name: str = Field("", max_length=80)
    duration_min: float = Field(gt=0.0, le=60 * 24 * 60, description="Planned minutes; a flight is gate to gate")
    origin_place_id: str | None = Field(None, max_length=40, description="Airport id of the places profile")
    destination_place_id: str | None = Field(None, max_length=40)
    start_elevation_m: Elevation | None = None
    highest_m: Elevation | None = Field(None, description="Top of a pass on the way")
    end_elevation_m: Elevation | None = None
    profile: tuple[ProfilePoint, ...] = Field((), max_length=2000, strict=False)
    cabin_altitude_m: float | None = Field(None, ge=0.0, le=4600.0, description="Planning cabin pressure altitude")
    zone_at_end: str | None = Field(None, max_length=60, description="IANA time zone where the part ends")
    shares: ActivityShares = ActivityShares()
    sources: tuple[Source, ...] = Field((), strict=False, description="Oxygen sources allowed here")
    power: Literal["none", "mains", "vehicle"] | None = Field(None, description="None: not known, planned as none")
    refill: bool = Field(False, description="Cylinders can be refilled or swapped at the start of this part")
    delivery: bool = Field(False, description="Equipment is delivered at the start of this part")
    airline_flows_l_min: tuple[float, ...] = Field(
        (), max_length=6, strict=False, description="What the carrier offers"
    )
    carry_limit_kg: float | None = Field(None, gt=0.0, le=200.0)
    equipment_c: float | None = Field(
        None, ge=-20.0, le=60.0, description="Temperature of cylinders and batteries in this part"
    )
    late: Late = Late()

    @model_validator(mode="after")
    def _a_flight_is_under_100_hours(self) -> Part:
        if self.kind == "flight" and self.duration_min > 30 * 60:
            raise ValueError(f"a flight lasts at most 30 h; {self.duration_min / 60:g} h was given")
        if self.kind != "flight" and self.cabin_altitude_m is not None:
            raise ValueError("a cabin altitude belongs to a flight only")
        return self

    @model_validator(mode="after")
    def _a_profile_goes_on_in_time(self) -> Part:
        times = [point.at_min for point in self.profile]
        if times and (len(times) < 2 or times != sorted(times) or times[-1] <= 0.0):
            raise ValueError("an altitude profile needs two points or more with times that go on, the last above 0 min")
        return self


class Trip(Section):
    """Ordered parts; each starts when the one before ends."""

    departs_at: datetime | None = Field(None, strict=False, description="Local time at the start; no offset")
    departure_zone: str | None = Field(None, max_length=60, description="IANA time zone at the start")
    home_elevation_m: Elevation | None = None
    parts: tuple[Part, ...] = Field((), max_length=60, strict=False)

    @model_validator(mode="after")
    def _ids_are_unique(self) -> Trip:
        seen: set[str] = set()
        for part in self.parts:
            if part.part_id in seen:
                raise ValueError(f"two parts share the id {part.part_id!r}; each part needs its own")
            seen.add(part.part_id)
        if self.departs_at is not None and self.departs_at.tzinfo is not None:
            raise ValueError("departs_at is local time without an offset; departure_zone names the zone")
        return self
