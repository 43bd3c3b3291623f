"""What every paper needs at hand: the case, its plan, the texts and the units, and the words for their parts."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from planner.case import Case
from planner.case.trip import Part
from planner.charts.layout import Drawing
from planner.delivery.devices import Device, load_devices
from planner.papers.flow import Flow
from planner.papers.sheet import DIGEST_LETTERS, Frame, Paper, framed, inside, portrait
from planner.texts import Quantities, Texts

if TYPE_CHECKING:
    from planner.results import Plan


@dataclass(frozen=True, eq=False)
class Desk:
    """A case with its plan, ready to be put into words."""

    case: Case
    plan: Plan
    texts: Texts
    quantities: Quantities
    devices: Mapping[str, Device]

    @staticmethod
    def of(case: Case, plan: Plan) -> Desk:
        """Everything in the units and the language of the case."""
        quantities = Quantities.of(case.display)
        return Desk(case, plan, quantities.texts, quantities, load_devices())

    def say(self, key: str, **values: object) -> str:
        """A message of the catalogue."""
        return self.texts.say(key, **values)

    def who(self) -> str:
        """The traveller in as few words as the case gives."""
        patient = self.case.patient
        return patient.initials or patient.reference or self.say("frame.no_name")

    def part(self, part_id: str) -> Part:
        """The trip's part with this id."""
        return next(part for part in self.case.trip.parts if part.part_id == part_id)

    def part_name(self, part_id: str) -> str:
        """A part in the user's words, or its kind."""
        part = self.part(part_id)
        return part.name or self.say(f"words.kind.{part.kind}")

    def activity(self, activity: str) -> str:
        """At rest, walking or asleep."""
        return self.say(f"words.activity.{activity}")

    def device(self, device_id: str | None) -> str:
        """A delivery device by name; one that no profile knows by its id."""
        known = self.devices.get(device_id or "")
        return (known.name[0].lower() + known.name[1:]) if known else device_id or self.quantities.unknown

    def oxygen(self, device_id: str | None, flow_l_min: float | None, setting: float | None) -> str:
        """A flow or a setting with its device: never one without the other."""
        device = self.device(device_id)
        if flow_l_min is not None:
            return self.say("oxygen.flow", flow=self.quantities.flow(flow_l_min), device=device)
        if setting is not None:
            return self.say("oxygen.setting", setting=self.quantities.setting(setting), device=device)
        return self.say("oxygen.none")

    def holds(self) -> str:
        """Until when the clinician says the papers hold."""
        until = self.case.policy.holds_until
        if until is None:
            return self.say("frame.holds_unknown")
        return self.say("frame.holds_until", day=self.texts.day(until))

    def state(self) -> str:
        """The plan's state in words; a confirmation names who and when."""
        key = f"frame.state.{self.plan.state}"
        confirmation = self.case.confirmation
        if self.plan.state == "Confirmed" and confirmation is not None:
            day = self.texts.day(confirmation.confirmed_at)
            return self.say(key, name=confirmation.name, role=confirmation.role, day=day)
        return self.say(key)

    def frame(self, title: str) -> Frame:
        """What stands on every page of a paper with this title."""
        return Frame(
            title=title,
            about=self.who(),
            state=self.state(),
            draft="" if self.plan.state == "Confirmed" else self.say("frame.draft"),
            caution=self.say("frame.caution"),
            version=self.say("frame.version", digest=self.plan.inputs_digest[:DIGEST_LETTERS]),
            page=self.texts.messages["frame.page"],
            language=self.texts.language,
        )

    def upright(self, size: float) -> Flow:
        """A flow over upright pages of the paper size chosen."""
        return Flow(lambda _: inside(portrait(self.case.display.paper)), size)

    def finished(self, flow: Flow, title: str, subject: str) -> Paper:
        """The pages of a flow in their frame; says so where letters could not be printed."""
        if flow.missing:
            flow.paragraph(self.say("frame.letters_missing"), role="muted")
        frame = self.frame(title)
        width, height = portrait(self.case.display.paper)
        count = len(flow.panels)
        pages = tuple(
            Drawing(width, height, (*items, *framed(frame, panel, number, count)))
            for number, (panel, items) in enumerate(flow.panels, start=1)
        )
        return Paper(f"{title}: {self.who()}", frame.language, subject, pages)


def capital(text: str) -> str:
    """The text with its first letter large, for the start of a cell."""
    return text[:1].upper() + text[1:]
