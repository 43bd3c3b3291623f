"""Works plans out away from the screen: the newest case wins, older work is given up."""

from __future__ import annotations

import threading
from collections.abc import Callable
from typing import Any

from kivy.clock import Clock

from planner.errors import PlannerError

QUICK_DRAWS = 200  # a first answer while a digit is typed; the refined one follows at once
Planner = Callable[..., Any]  # planner.plan: (case, *, memory, through, on_progress, cancelled) -> Plan
Load = Callable[[], tuple[Planner, Any]]  # planner and its memory; called in the thread, so that it may import
Deliver = Callable[[Any, Any, str, str, str], None]  # case, plan or None, how far it goes, what is done now, fault


class PlanWorker:
    """One thread that answers the last case asked for: the forecast from few draws, then all through titration, then
    with the kit."""

    def __init__(self, load: Load, deliver: Deliver) -> None:
        self._load, self._deliver = load, deliver
        self._planner: Planner | None = None  # with its memory of stages: only the thread touches them
        self._memory: Any = None
        self._quick_memory: Any = None
        self._wanted: Any = None
        self._turn = 0
        self._changed = threading.Condition()
        self._thread: threading.Thread | None = None

    def ask(self, case: Any) -> None:
        """Work this case out; what is being worked out now is given up."""
        with self._changed:
            self._wanted = case
            self._turn += 1
            self._changed.notify()
        self.start()

    def start(self) -> None:
        """Load what the work needs before anything is asked."""
        if self._thread is None:
            self._thread = threading.Thread(target=self._run, name="plan", daemon=True)
            self._thread.start()

    def cancel(self) -> None:
        """Give up what is being worked out."""
        with self._changed:
            self._wanted = None
            self._turn += 1

    def _run(self) -> None:
        self._planner, self._memory = self._load()
        self._quick_memory = type(self._memory)() if self._memory is not None else None
        while True:
            with self._changed:
                while self._wanted is None:
                    self._changed.wait()
                case, turn = self._wanted, self._turn
                self._wanted = None
            quick = self._work(case, turn, "forecast", self._quick_memory, draws=QUICK_DRAWS)
            if quick and self._work(case, turn, "titration", self._memory):
                self._work(case, turn, "kit", self._memory)

    def _work(self, case: Any, turn: int, through: str, memory: Any, **keywords: Any) -> bool:
        def given_up() -> bool:
            return self._turn != turn

        def progress(what: str, share: float) -> None:
            self._say(case, None, through, f"{what}, {share * 100:.0f} %", "")

        if given_up():
            return False
        try:
            assert self._planner is not None
            plan = self._planner(
                case, memory=memory, through=through, on_progress=progress, cancelled=given_up, **keywords
            )
        except (
            Exception
        ) as error:  # shown to the person: a worker that dies in silence would leave old numbers standing
            if not given_up():
                self._say(case, None, through, "", f"The plan could not be worked out: {error}")
            return False
        if given_up():
            return False
        self._say(case, plan, through, "Working out what to carry" if through == "titration" else "", "")
        return True

    def _say(self, case: Any, plan: Any, through: str, working_on: str, fault: str) -> None:
        Clock.schedule_once(lambda _dt: self._deliver(case, plan, through, working_on, fault), 0)


def away(work: Callable[[], Any], done: Callable[[Any, PlannerError | None], None]) -> None:
    """Do one piece of work away from the screen; then done(result, None) or done(None, what was refused)."""

    def run() -> None:
        try:
            result, refused = work(), None
        except PlannerError as error:
            result, refused = None, error
        Clock.schedule_once(lambda _dt: done(result, refused), 0)

    threading.Thread(target=run, name="away", daemon=True).start()
