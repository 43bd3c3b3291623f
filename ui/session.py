"""One open case: the edits a person makes, undo, what does not fit yet, and the plan that answers.

Every edit builds a new validated Case; nothing is changed in place. The plan is worked out away from the screen
(ui/worker.py); until it answers, what is shown is stale and says so. Saving is asked for at most a second behind.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Mapping
from typing import Any

from kivy.clock import Clock
from kivy.event import EventDispatcher
from kivy.properties import BooleanProperty, NumericProperty, ObjectProperty, StringProperty
from pydantic import BaseModel, ValidationError

from planner.case import Case
from planner.errors import PlannerError
from ui.worker import Load, PlanWorker

SAVE_AFTER_S = 0.8
SAME_EDIT_S = 2.0  # typing on in one field is one step to undo
UNDO_STEPS = 200


class Session(EventDispatcher):
    """Bind to `revision` (a new case), `plan` and `stale`; change the case by `set`, `set_many` and `undo`."""

    case = ObjectProperty(None, allownone=True)
    plan = ObjectProperty(None, allownone=True)
    preview = ObjectProperty(None, allownone=True)  # a quick forecast of this case while the plan is stale
    revision = NumericProperty(0)
    stale = BooleanProperty(False)
    working_on = StringProperty("")  # what the worker does now, a sentence, empty when idle
    said = StringProperty("")  # the last thing the app has to say: undone, saved, could not be saved

    def __init__(
        self,
        *,
        load_planner: Load | None = None,
        saver: Callable[[str, Case], int] | None = None,
        **keywords: Any,
    ) -> None:
        super().__init__(**keywords)
        self.case_id = ""
        self.faults: dict[str, str] = {}
        self.place: dict[str, Any] = {}  # where the person was on each step: open part, minute of the ribbon
        self._undo: list[tuple[str, Case]] = []
        self._redo: list[tuple[str, Case]] = []
        self._last_edit = ("", 0.0)
        self._saver = saver
        self._save_due: Any = None
        self._laid_out: tuple[Any, Any] = (None, None)
        self._worker = PlanWorker(load_planner, self._planned) if load_planner is not None else None

    # -- opening and closing

    def warm(self) -> None:
        """Load the planner before it is needed."""
        if self._worker is not None:
            self._worker.start()

    def open(self, case: Case, case_id: str) -> None:
        """Start on a case. Faults, undo and the old plan belong to the case before and go."""
        self.close()
        self.case_id = case_id
        self.faults, self.place, self._undo, self._redo = {}, {}, [], []
        self._last_edit = ("", 0.0)
        self.plan = None
        self.said = ""
        self._show(case)

    def close(self) -> None:
        """Save what is not saved yet, and stop working."""
        self.save_now()
        if self._worker is not None:
            self._worker.cancel()

    # -- reading

    def get(self, path: str) -> Any:
        """The value at a path such as "patient.age_years" or "trip.parts.2.duration_min"."""
        value: Any = self.case
        for step in path.split("."):
            value = value[int(step)] if step.isdigit() else getattr(value, step)
        return value

    @property
    def shown_plan(self) -> Any:
        """The plan of this very case, or None while it is being worked out."""
        return None if self.stale else self.plan

    @property
    def timeline(self) -> Any:
        """The trip in time and air of the case as it is now (planner.trip.itinerary.Timeline); never stale."""
        rests_on = (self.case.trip, self.case.policy)
        if self._laid_out[0] != rests_on:
            from planner.trip.itinerary import lay_out

            self._laid_out = (rests_on, lay_out(*rests_on))
        return self._laid_out[1]

    # -- editing

    def set(self, path: str, value: Any, what: str = "") -> str:
        """Change one value. Gives "" or the sentence why it was refused, which is kept in faults too."""
        return self.set_many({path: value}, what)

    def set_many(self, changes: Mapping[str, Any], what: str = "") -> str:
        """Change several values at once, as one step to undo. All are taken or none."""
        path = next(iter(changes))
        try:
            case = _changed(self.case, changes)
        except (ValidationError, PlannerError) as error:
            self.faults[path] = sentence_of(error)
            return self.faults[path]
        for changed in changes:
            self.faults.pop(changed, None)
        if case == self.case:
            return ""
        self._remember(path, what)
        self._redo.clear()
        self._show(case)
        self._save_soon()
        return ""

    def choose(self, path: str, value: Any, what: str = "") -> str:
        """Set what was tapped, not typed: always a step of its own to undo."""
        self._last_edit = ("", 0.0)
        return self.set(path, value, what)

    def save_now(self) -> None:
        """Save what is not saved yet, without waiting: what cannot be measured again."""
        if self._save_due is not None:
            self._save_due.cancel()
            self._save()

    def kept_version(self) -> int | None:
        """The number of the kept version of the case as it is now; None where it cannot be kept."""
        if self._saver is None:
            return None
        try:
            return self._saver(self.case_id, self.case)
        except PlannerError as error:
            self.said = f"Not saved: {error}"
            return None

    def fault(self, path: str, sentence: str) -> None:
        """Keep (or with "" forget) that what stands in a field does not fit."""
        if sentence:
            self.faults[path] = sentence
        else:
            self.faults.pop(path, None)

    @property
    def can_undo(self) -> bool:
        """True if there is something to undo."""
        return bool(self._undo)

    def undo(self) -> None:
        """Take the last edit back, on whatever step it was made."""
        if self._undo:
            self._swap(self._undo, self._redo, "Undone")

    def redo(self) -> None:
        """Make the edit again that was undone last."""
        if self._redo:
            self._swap(self._redo, self._undo, "Done again")

    def _swap(self, source: list[tuple[str, Case]], other: list[tuple[str, Case]], verb: str) -> None:
        what, case = source.pop()
        other.append((what, self.case))
        self._last_edit = ("", 0.0)
        self.faults.clear()
        self._show(case)
        self._save_soon()
        self.said = f"{verb}: {what}."

    def _remember(self, path: str, what: str) -> None:
        now = time.monotonic()
        key = f"{path} {what}"
        if self._last_edit[0] != key or now - self._last_edit[1] > SAME_EDIT_S:
            self._undo.append((what or _words(path), self.case))
            del self._undo[:-UNDO_STEPS]
        self._last_edit = (key, now)

    def show_again(self) -> None:
        """Ask what is on screen to show the case again: something beside the case has changed."""
        self.revision += 1

    # -- answering

    def _show(self, case: Case) -> None:
        self.case = case
        self.said = ""
        if self._worker is not None:
            self.stale = True
            self.preview = None
            self._worker.ask(case)
        self.revision += 1

    def _planned(self, case: Case, plan: Any, through: str, working_on: str, fault: str) -> None:
        if case is not self.case:
            return
        self.working_on = working_on
        if fault:
            self.said = fault
            return
        if plan is not None and through == "forecast":
            self.preview = plan
        elif plan is not None:
            self.preview = None
            self.stale = False
            self.plan = plan

    def stop_working(self) -> None:
        """Give up what is being worked out; what is there stays, and the next edit asks again."""
        if self._worker is not None:
            self._worker.cancel()
        self.working_on = ""

    # -- keeping

    def _save_soon(self) -> None:
        if self._saver is not None and self._save_due is None:
            self._save_due = Clock.schedule_once(lambda _dt: self._save(), SAVE_AFTER_S)

    def _save(self) -> None:
        self._save_due = None
        if self._saver is None:
            return
        try:
            self._saver(self.case_id, self.case)
        except PlannerError as error:
            self.said = f"Not saved: {error}"
            self._save_due = Clock.schedule_once(lambda _dt: self._save(), 10 * SAVE_AFTER_S)


def sentence_of(error: Exception) -> str:
    """What a refusal says, in one sentence for a person."""
    if isinstance(error, ValidationError):
        message = error.errors()[0]["msg"].removeprefix("Value error, ").removeprefix("Input ")
        return message[:1].upper() + message[1:] + ("" if message.endswith(".") else ".")
    return str(error)


def _changed(case: Case, changes: Mapping[str, Any]) -> Case:
    sections: dict[str, Any] = {}
    for path, value in changes.items():
        first, _, rest = path.partition(".")
        section = sections.get(first, getattr(case, first))
        sections[first] = _replaced(section, rest.split("."), value) if rest else value
    return _rebuilt(case, sections)


def _replaced(node: Any, steps: list[str], value: Any) -> Any:
    step, rest = steps[0], steps[1:]
    if isinstance(node, tuple):
        index = int(step)
        item = _replaced(node[index], rest, value) if rest else value
        return (*node[:index], item, *node[index + 1 :])
    child = _replaced(getattr(node, step), rest, value) if rest else value
    return _rebuilt(node, {step: child})


def _rebuilt(model: BaseModel, changes: Mapping[str, Any]) -> Any:
    kept = {name: getattr(model, name) for name in type(model).model_fields}
    return type(model).model_validate(kept | dict(changes))


def _words(path: str) -> str:
    last = [step for step in path.split(".") if not step.isdigit()][-1]
    for unit in ("_years", "_percent", "_mmhg", "_min", "_m", "_l", "_kg", "_g_dl", "_on", "_id"):
        last = last.removesuffix(unit)
    return last.replace("_", " ")
