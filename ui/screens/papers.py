"""What to hand over: the state of the plan, its confirmation, and the four papers, each with a preview."""

from __future__ import annotations

import subprocess
import sys
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

import platformdirs

from ui.screens.form import today
from ui.screens.screen import Screen
from ui.widgets.buttons import PlainButton, PrimaryButton
from ui.widgets.choices import Choice
from ui.widgets.entries import TextEntry
from ui.widgets.notices import Notice, Section
from ui.widgets.paper import PaperFrame
from ui.widgets.rows import Fold, Side, Stack
from ui.widgets.text import Text, plain

PAPER_WORDS = (
    ("record", "Clinical record"),
    ("carrier", "For the carrier"),
    ("supplier", "For the supplier"),
    ("traveller", "For the traveller"),
)

HALVES = (("", "Whole"), ("left", "Left half"), ("right", "Right half"))
PLACES = (("documents", "Documents"), ("downloads", "Downloads"), ("home", "Home folder"))


class PapersScreen(Screen):
    """State, confirmation, preview, saving."""

    step = "papers"
    question = "What to hand over?"

    def build(self) -> None:
        """The state first, then the papers."""
        self.state = Stack(gap=2)
        by, role = self.session.place.get("decided_by", ""), self.session.place.get("role", "")
        self.by = TextEntry("Prescriber's name", by, longest=80, on_value=lambda v: None)
        self.role = TextEntry("Role", role, longest=60, on_value=lambda v: None)
        self.problem = Text("", tone="stop")
        self.confirm = PrimaryButton("Confirm this plan", self._confirm)
        self.confirmation = Section("Confirmation", note="It holds for these entries only; any change makes it void.")
        for widget in (Side(self.by, self.role), self.problem, self.confirm):
            self.confirmation.add_widget(widget)
        self.holds = self.form.date("policy.holds_until", "The papers hold until")
        self.paper = self.session.place.get("paper", "record")
        self.choice = Choice("Preview", PAPER_WORDS, self.paper, self._choose)
        self.frame = PaperFrame()
        self.preview = self.frame.view
        self.halves = Choice("Pages", HALVES, "", self.frame.show_half)
        self.where = Fold("Save to another folder", str(self.folder), self._fill_folder)
        self.saved = Text("", tone="muted")
        self.confirming, self.there = Stack(), Stack()
        save = PrimaryButton("Save the four papers", self._save)
        opens = PlainButton("Open the folder to print or send", self._open)
        self.papers = Stack(
            self.confirming,
            self.holds,
            self.choice,
            self.halves,
            self.frame,
            self.where,
            save,
            self.saved,
            opens,
            gap=5,
        )
        self.put(self.state, self.there)
        self._laid: Any = None

    def refresh(self) -> None:
        """Show the state and the preview of the plan as it is."""
        plan = self.session.plan
        self.state.clear_widgets()
        self.there.hold(self.papers if plan is not None and plan.parts else None)
        if plan is None:
            self.state.add_widget(Text("The plan is being worked out."))
            return
        self.state.add_widget(self._state_of(plan))
        self.confirming.hold(None if plan.state == "Draft" else self.confirmation)
        self.confirm.disabled = plan.state == "Draft" or self.session.stale
        if plan.parts:
            self._show_preview(plan)
            self.grey(self.preview)

    def _state_of(self, plan: Any) -> Notice:
        """The state with its reason, and the way to what is missing."""
        if not plan.parts:
            words = "There is no trip yet, so there is nothing to hand over."
            return Notice(words, "caution", title="Draft.", actions=(("Enter the trip", lambda: self.go("trip")),))
        kind = {"Draft": "caution", "Flows decided": "note", "Confirmed": "good"}[plan.state]
        way = (("Decide the flows", lambda: self.go("oxygen")),) if plan.state == "Draft" else ()
        words = plan.state_reason
        if plan.state == "Draft":
            words += " Until then the papers are drafts and cannot be confirmed."
        return Notice(plain(words), kind, title=f"{plan.state}.", actions=way)

    # -- inside

    def _choose(self, name: str) -> None:
        self.paper = name
        self.session.place["paper"] = name
        self.refresh()

    def _show_preview(self, plan: Any) -> None:
        seen = (plan, self.paper)
        if self._laid == seen or self.session.stale:
            return
        from planner.papers import lay_paper

        self._laid = seen
        self.preview.show(lay_paper(self.paper, self.session.case, plan))

    def _confirm(self) -> None:
        from planner.case.confirmation import Confirmation

        name, role = self.by.input.text.strip(), self.role.input.text.strip()
        if not name or not role:
            self.problem.text = "A confirmation needs the prescriber's name and role."
            return
        confirmation = Confirmation(
            name=name,
            role=role,
            version=self.session.kept_version(),
            confirmed_at=datetime.now(UTC).replace(microsecond=0),
            inputs_digest=self.session.case.inputs_digest(),
        )
        self.problem.text = plain(self.session.choose("confirmation", confirmation, "the confirmation"))

    @property
    def folder(self) -> Path:
        """Where the papers are saved."""
        place = self.session.place.get("papers_place", PLACES[0][0])
        name = self.session.place.get("papers_folder", "").strip() or "oxygen papers"
        return _place(place) / name

    def _fill_folder(self, body: Any) -> None:
        chosen = self.session.place.get("papers_place", PLACES[0][0])
        body.add_widget(Choice("Inside", PLACES, chosen, lambda value: self._keep_folder("papers_place", value)))
        body.add_widget(
            TextEntry(
                "Folder", self.folder.name, longest=24, on_value=lambda text: self._keep_folder("papers_folder", text)
            )
        )

    def _keep_folder(self, name: str, value: str) -> None:
        self.session.place[name] = value
        self.where.summary = plain(str(self.folder))

    def _save(self) -> None:
        from planner.papers import make_papers
        from planner.records.reading import write_atomically

        plan = self.session.shown_plan
        if plan is None:
            self.saved.text = "The plan is being worked out; try again in a moment."
            return
        folder = self.folder
        try:
            folder.mkdir(parents=True, exist_ok=True)
            for name, content in make_papers(self.session.case, plan).items():
                write_atomically(folder / f"{self._prefix()}{name}.pdf", content)
        except OSError as error:
            self.saved.text = plain(f"Not saved: {folder} cannot be written ({error.strerror}). Choose another folder.")
            return
        self.saved.text = plain(f"Four papers saved in {folder}.")

    def _prefix(self) -> str:
        reference = "".join(
            letter for letter in self.session.case.patient.reference if letter.isalnum() or letter in "-_"
        )
        return f"{reference or 'case'} {today():%Y-%m-%d} "

    def _open(self) -> None:
        folder = self.folder
        if not folder.is_dir():
            self.saved.text = "Save the papers first."
            return
        opener = {"win32": ["explorer"], "darwin": ["open"]}.get(sys.platform, ["xdg-open"])
        try:
            subprocess.Popen([*opener, str(folder)], stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        except OSError:
            self.saved.text = plain(f"This system has no way to open folders; the papers are in {folder}.")


def _place(name: str) -> Path:
    places = {
        "documents": platformdirs.user_documents_dir,
        "downloads": platformdirs.user_downloads_dir,
        "home": lambda: str(Path.home()),
    }
    return Path(places[name]())
