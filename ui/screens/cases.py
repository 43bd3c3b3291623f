"""The list of cases: open one, start one, open a demo, import a file. An empty start explains itself."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import platformdirs
from kivy.app import App
from kivy.core.window import Window
from kivy.uix.boxlayout import BoxLayout

from planner.case import Case
from planner.errors import PlannerError
from ui.library import CaseRow
from ui.screens.outcomes import show_outcomes
from ui.screens.passphrase import fill_changing, fill_setting
from ui.theme import theme
from ui.widgets.buttons import PlainButton, PrimaryButton
from ui.widgets.choices import Choice
from ui.widgets.entries import TextEntry
from ui.widgets.notices import CautionStrip, Notice, paint_ground
from ui.widgets.page import Page
from ui.widgets.rows import Fold, ListRow, Stack
from ui.widgets.text import Text, plain
from ui.worker import away

DEMOS = (
    ("copd_layover", "COPD, flights with a layover"),
    ("fibrosis_mountain_hotel", "Lung fibrosis, a hotel in the mountains"),
    ("neuromuscular_car_and_plane", "Neuromuscular disease, by car and plane"),
)
EXPLAINED = (
    "A person with lung disease wants to travel. Enter who travels and the trip from door to door. The planner shows "
    "the air on the way, what the blood is likely to do, what the guideline says, and what to carry, and writes it "
    "down for the record, the airline, the supplier and the traveller."
)
PRIVATE = "Everything stays on this device. The app never goes online."


class CasesPage(BoxLayout):
    """Outside of any case. `open_case(case_id, case)` opens one."""

    def __init__(self, library: Any, open_case: Callable[[str, Case], None]) -> None:
        super().__init__(orientation="vertical")
        paint_ground(self, theme.ground)
        self.library, self.open_case = library, open_case
        self.content = Stack(gap=5)
        self.add_widget(Page(self.content))
        self.add_widget(CautionStrip())
        Window.bind(on_drop_file=self._dropped)
        self._fill()

    def on_parent(self, _: Any, parent: Any) -> None:
        """Stop taking dropped files once this page is left."""
        if parent is None:
            Window.unbind(on_drop_file=self._dropped)

    def _fill(self) -> None:
        if self.library.locked:
            self._fill_locked()
            return
        rows = self.library.rows()
        title = Text("[b]Cases[/b]" if rows else "[b]Oxygen and altitude planner[/b]", role="title")
        self.fault = Stack()
        self.content.add_widget(Stack(title, self.fault, gap=2))
        if self.library.fault:
            self.fault.add_widget(Notice(plain(self.library.fault), "stop", title="Cases are not kept."))
        if not rows:
            self.content.add_widget(Text(EXPLAINED))
            self.content.add_widget(Text(PRIVATE, role="label", tone="muted"))
        else:
            listed = Stack(gap=0)
            for row in rows:
                listed.add_widget(ListRow(plain(row.title), row.detail, "", lambda r=row: self._open(r.case_id)))
            self.content.add_widget(listed)
        self.content.add_widget(PrimaryButton("New case", self.new_case))
        self.content.add_widget(PlainButton("Open a demo", self.open_demo))
        folds = Stack(gap=0)
        folds.add_widget(Fold("Other demos", "Three invented people and trips", self._fill_demos))
        folds.add_widget(Fold("Import cases", "From a file or folder on this device", self._fill_import))
        if rows:
            sealed = "Lock, or change it" if self.library.protected else "Seal the cases on this device"
            folds.add_widget(Fold("Passphrase", sealed, self._fill_passphrase))
            folds.add_widget(Fold("Versions of a case", "Compare them, go back to one", self._fill_versions))
            folds.add_widget(Fold("Export a case", "To a file, without name and birth date", self._fill_export))
            folds.add_widget(Fold("Remove a case", "With all its versions", self._fill_removal))
            folds.add_widget(
                ListRow("[b]After the trip[/b]", "What happened beside what was planned", "›", show_outcomes)
            )
        self.content.add_widget(folds)

    def _fill_demos(self, body: BoxLayout) -> None:
        for name, words in DEMOS:
            body.add_widget(PlainButton(words, lambda n=name: self.open_demo(n)))

    def _fill_import(self, body: BoxLayout) -> None:
        words = "Drop a case file, an export, a FHIR Bundle or a folder on this window, or write where it is."
        body.add_widget(Text(words))
        self.path = TextEntry("File or folder", longest=1000)
        body.add_widget(self.path)
        body.add_widget(PlainButton("Import this", lambda: self.import_file(Path(self.path.value).expanduser())))

    def _fill_locked(self) -> None:
        self.fault = Stack()
        entry = TextEntry("Passphrase", longest=200)
        entry.input.password = True
        words = "The cases on this device are sealed. Enter the passphrase to read them."
        self.content.add_widget(Stack(Text("[b]Cases[/b]", role="title"), self.fault, Text(words), gap=2))
        self.content.add_widget(entry)
        self.content.add_widget(PrimaryButton("Unlock", lambda: self._away(lambda: self.library.unlock(entry.value))))

    def _fill_passphrase(self, body: BoxLayout) -> None:
        if self.library.protected:
            fill_changing(body, self.library, self._away, self._lock)
        else:
            fill_setting(body, self.library, self._away)

    def _lock(self) -> None:
        self.library.lock()
        self.content.clear_widgets()
        self._fill()

    def _away(self, work: Callable[[], None]) -> None:
        """Do what takes longer than a frame, then show what came of it."""

        def done(_result: None, refused: PlannerError | None) -> None:
            if refused is None:
                self.content.clear_widgets()
                self._fill()
                return
            self.fault.clear_widgets()
            self.fault.add_widget(Notice(plain(str(refused)), "stop"))

        away(work, done)

    def _fill_versions(self, body: BoxLayout) -> None:
        listed = Stack(gap=0)
        for row in self.library.rows():
            listed.add_widget(ListRow(plain(row.title), row.detail, "›", on_tap=lambda r=row: _show_history(r)))
        body.add_widget(listed)

    def _fill_export(self, body: BoxLayout) -> None:
        listed, said = Stack(gap=0), Stack()
        forms = Choice("As", ((False, "Whole case"), (True, "Measurements, FHIR")), False)
        who = Choice("Name and birth date", ((False, "Left out"), (True, "Kept")), False)

        def write(row: CaseRow) -> None:
            def do() -> None:
                folder = Path(platformdirs.user_documents_dir()) / "oxygen-exports"
                path, words = self.library.export(row.case_id, folder, fhir=forms.value, with_identity=who.value)
                said.hold(Notice(plain(" ".join((f"Written: {path}.", *words))), "note"))

            self._try(do)

        for row in self.library.rows():
            listed.add_widget(ListRow(plain(row.title), row.detail, on_tap=lambda r=row: write(r)))
        for widget in (forms, who, said, listed):
            body.add_widget(widget)

    def _fill_removal(self, body: BoxLayout) -> None:
        listed, asked = Stack(gap=0), Stack()

        def ask(row: CaseRow) -> None:
            words = f"{plain(row.title)}, {row.detail}. It cannot be brought back."
            asked.hold(Notice(words, "stop", title="Remove this case?", actions=(("Remove it", lambda: remove(row)),)))

        def remove(row: CaseRow) -> None:
            self._try(lambda: self.library.remove(row.case_id))
            self.content.clear_widgets()
            self._fill()

        for row in self.library.rows():
            listed.add_widget(ListRow(plain(row.title), row.detail, on_tap=lambda r=row: ask(r)))
        body.add_widget(listed)
        body.add_widget(asked)

    def new_case(self) -> None:
        """Start an empty case."""
        self.open_case(self.library.new_id(), Case())

    def open_demo(self, name: str = DEMOS[0][0]) -> None:
        """Open a demo as a case of one's own: it can be changed freely."""
        self._try(lambda: self.open_case(self.library.new_id(), self.library.demo(name)))

    def import_file(self, path: Path) -> None:
        """Read cases from a file or a folder: one is opened, several are kept; what is not taken is said."""

        def take() -> None:
            taken = self.library.read_file(path)
            ids = [self.library.new_id() for _ in taken.cases]
            for case_id, case in zip(ids, taken.cases, strict=True):
                self.library.save(case_id, case)  # what comes in is kept before it is shown
            if len(ids) == 1 and not taken.said:
                self.open_case(ids[0], taken.cases[0])
                return
            self.content.clear_widgets()
            self._fill()
            words = " ".join((f"Cases taken: {len(taken.cases)}.", *taken.said))
            self.fault.add_widget(Notice(plain(words), "note" if taken.cases else "stop"))

        self._try(take)

    def _open(self, case_id: str) -> None:
        self._try(lambda: self.open_case(case_id, self.library.read(case_id)))

    def _dropped(self, _window: Any, path: bytes, *_: Any) -> None:
        self.import_file(Path(path.decode("utf-8", "surrogateescape")))

    def _try(self, act: Callable[[], None]) -> None:
        self.fault.clear_widgets()
        try:
            act()
        except PlannerError as error:
            self.fault.add_widget(Notice(plain(str(error)), "stop", title="Not opened."))
        except OSError as error:
            self.fault.add_widget(Notice(plain(f"{error.filename}: {error.strerror}."), "stop", title="Not opened."))


def _show_history(row: CaseRow) -> None:
    from ui.screens.history import HistoryPage

    app = App.get_running_app()
    app.root.show(HistoryPage(app, row))
