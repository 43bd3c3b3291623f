"""Every version of one case: when it was saved, what differs from the last, and a way back to it."""

from __future__ import annotations

from datetime import datetime
from typing import Any

from planner.errors import PlannerError
from planner.records.comparison import Difference, compare
from ui.screens.outside import OutsidePage
from ui.widgets.buttons import PlainButton
from ui.widgets.notices import Notice
from ui.widgets.rows import ListRow, Stack
from ui.widgets.text import Text, plain, strong
from ui.widgets.typing import date_text

MOST_SHOWN = 60
NOTHING_LOST = "Restoring makes it the last version again. Every version in between is kept too."


class HistoryPage(OutsidePage):
    """The versions of one case, the newest first; a tapped one is compared with the last."""

    def __init__(self, app: Any, row: Any) -> None:
        super().__init__("Versions", "Cases", app.show_cases)
        self.app, self.row = app, row
        self.content.add_widget(Text(plain(f"{row.title}, {row.detail}"), tone="muted"))
        self.fault, self.compared, self.listed = Stack(), Stack(gap=4), Stack(gap=0)
        for one in (self.fault, self.compared, self.listed):
            self.content.add_widget(one)
        self._fill()

    def _fill(self) -> None:
        self.compared.clear_widgets()
        self.listed.clear_widgets()
        self.versions = self._tried(lambda: self.app.library.history(self.row.case_id)) or ()
        for number, one in enumerate(self.versions):
            words = [_moment(one.saved_at), one.note, "the last one" if number == 0 else ""]
            row = ListRow(f"Version {one.version}", plain(", ".join(word for word in words if word)))
            if number:
                row.on_tap = lambda v=one.version: self.compare_with_last(v)
            self.listed.add_widget(row)

    def compare_with_last(self, version: int) -> None:
        """Show what this version has otherwise than the last one."""
        library, case_id = self.app.library, self.row.case_id
        differences = self._tried(lambda: compare(library.read(case_id, version), library.read(case_id)))
        self.compared.clear_widgets()
        if differences is None:
            return
        title = f"Version {version}, beside version {self.versions[0].version}"
        self.compared.add_widget(Text(strong(title), role="lead"))
        if not differences:
            self.compared.add_widget(Text("They are the same."))
        rows = Stack(gap=0)
        for one in differences[:MOST_SHOWN]:
            rows.add_widget(_difference(one))
        self.compared.add_widget(rows)
        if len(differences) > MOST_SHOWN:
            self.compared.add_widget(Text(f"And {len(differences) - MOST_SHOWN} more.", tone="muted"))
        self.compared.add_widget(Text(NOTHING_LOST, role="label", tone="muted"))
        self.compared.add_widget(PlainButton("Restore this version", lambda: self.restore(version)))
        self.compared.add_widget(PlainButton("Open a copy of it", lambda: self.open_copy(version)))

    def restore(self, version: int) -> None:
        """Make it the last version again."""
        if self._tried(lambda: self.app.library.restore(self.row.case_id, version) or True):
            self._fill()

    def open_copy(self, version: int) -> None:
        """Open it as a case of its own; the case here stays as it is."""
        case = self._tried(lambda: self.app.library.read(self.row.case_id, version))
        if case is not None:
            self.app.open_case(self.app.library.new_id(), case)

    def _tried(self, act: Any) -> Any:
        self.fault.clear_widgets()
        try:
            return act()
        except PlannerError as error:
            self.fault.add_widget(Notice(plain(str(error)), "stop", title="Not done."))
            return None


def _difference(one: Difference) -> ListRow:
    return ListRow(plain(one.where), plain(f"{one.before} → {one.after}"))


def _moment(at: datetime) -> str:
    local = at.astimezone()
    return f"{date_text(local.date())}, {local:%H:%M}"
