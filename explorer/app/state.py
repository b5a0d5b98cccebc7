"""The working state of one browser tab: scenario, results, history. No widget lives here.

Views read a :class:`Session` and watch its parameters; they change the scenario only through ``turn`` (one
dial), ``edit`` (anything structural), ``choose_season``, ``set_sweep``, ``replace``, ``undo`` and ``redo``.
A view never writes to another view.

==============  =====================================================================================
parameter       when it changes
==============  =====================================================================================
``values``      at once after any change of dial values (move sliders and number fields; no rebuild)
``structure``   waters, steps, season, units, names or targets changed: rebuild what is drawn from them
``point``       the operating point has been solved (``Outcome``, scalar shape)
``swept``       the sweep has been solved (``Sweep``), always together with ``point``
``message``     one sentence the user has to read, "" when there is none
``stale``       True while the results on screen belong to inputs that could not be solved
``kept``        results of the kept options are there (by ``options``), in the order of their letters
``offered``     a file is there for the user to save (``Offer``); ``files`` hands it to the browser
==============  =====================================================================================
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Any

import param

from explorer.app.calculation import Immediate, Results, Runner, Wanted, solve
from explorer.app.held import computed, fixed, is_computed
from explorer.app.history import MOST_STEPS, Step, Work
from explorer.scenario.dials import Dial, dials, turn
from explorer.scenario.editing import tidy
from explorer.scenario.evaluate import Outcome
from explorer.scenario.holding import Holding, holdings, resting
from explorer.scenario.model import Scenario, SweepSetting
from explorer.scenario.outcome import FINISHED
from explorer.studies.sweep import Sweep

MERGE_SECONDS = 0.8
"""Turns of one dial that follow each other faster than this are one undo step."""

Change = Callable[[Scenario], None]


@dataclass(frozen=True, eq=False)
class Offer:
    """A file for the user to save: its name, its text, and what kind of text that is."""

    name: str
    text: str
    kind: str


class Session(param.Parameterized):
    """State of one browser tab, apart from all widgets.

    Parameters
    ----------
    work
        A ``Scenario`` to start from, or the ``Work`` record of an earlier session of the same tab.
    runner
        Runs the calculations; the default computes at once.
    clock
        Seconds, monotonic; only for merging turns into one undo step.
    """

    scenario = param.Parameter(doc="the working Scenario; replaced by edits, turned in place by dials")
    point = param.Parameter(doc="Outcome at the operating point, None before the first success")
    swept = param.Parameter(doc="Sweep of the scenario's chosen dial, None before the first success")
    structure = param.Integer(0, doc="bumped when views drawn from the structure must be rebuilt")
    values = param.Integer(0, doc="bumped at once when dial values changed")
    message = param.String("", doc="sentence for the message line")
    stale = param.Boolean(False, doc="results on screen belong to earlier inputs")
    choices = param.Dict({}, doc="what views show (tiles, plots); not part of the scenario file")
    kept = param.Parameter((), doc="tuple of Kept, the options with their results")
    offered = param.Parameter(doc="Offer, the last file made for the user to save; None at first")
    unsaved = param.Boolean(False)
    can_undo = param.Boolean(False)
    can_redo = param.Boolean(False)

    def __init__(
        self,
        work: Scenario | Work,
        runner: Runner | None = None,
        clock: Callable[[], float] = time.monotonic,
    ) -> None:
        record = work if isinstance(work, Work) else Work(work)
        super().__init__(scenario=record.scenario, choices=dict(record.choices))
        self.work = record
        self.solved: Scenario | None = None
        """What ``point`` and ``swept`` are of: a copy of its own, which nobody changes."""
        self.runner: Runner = runner or Immediate()
        self._clock = clock
        self._wanted: dict[str, tuple[Wanted, ...]] = {}
        self._questions: dict[str, Callable[[Outcome], None]] = {}
        self._dials: dict[str, Dial] | None = None
        self._held: tuple[dict[str, Holding], dict[str, Holding]] | None = None
        self._curve = self._shown_curve = 0
        if record.saved is None:
            record.saved = record.scenario.to_dict()
        self._refresh_marks()

    # ---- reading -------------------------------------------------------------------------------------

    @property
    def file_name(self) -> str:
        return self.work.file_name

    @property
    def season(self) -> str:
        return self.scenario.season

    @property
    def undo_label(self) -> str:
        return self.work.past[-1].label if self.work.past else ""

    @property
    def redo_label(self) -> str:
        return self.work.future[-1].label if self.work.future else ""

    @property
    def dials(self) -> dict[str, Dial]:
        """Every dial of the scenario in the chosen season by address, with current values."""
        if self._dials is None:
            self._dials = dials(self.scenario)
        return self._dials

    @property
    def holdings(self) -> dict[str, Holding]:
        """Every hold, by the address of the dial that it is about."""
        return self._every_hold()[0]

    @property
    def held(self) -> dict[str, Holding]:
        """The holds in force: their dials are computed."""
        return self._every_hold()[1]

    def _every_hold(self) -> tuple[dict[str, Holding], dict[str, Holding]]:
        if self._held is None:
            every, rests = holdings(self.scenario), resting(self.scenario)
            self._held = every, {key: hold for key, hold in every.items() if key not in rests}
        return self._held

    @property
    def swept_here(self) -> Sweep | None:
        """The sweep, None while there is none or only that of a scenario whose dial is no longer there: the
        results of an opened scenario are on their way."""
        return self.swept if self.swept is not None and self.swept.address in self.dials else None

    def value(self, address: str) -> float:
        """Current value of the dial at ``address``: as entered, or as computed where it is held or a share
        beside a held one (nan without a result). Raises KeyError for an unknown one."""
        if is_computed(self.held, address):
            return computed(self.point, address)
        return self.dials[address].value

    def fixed(self, address: str) -> str:
        """Why a dial cannot be turned by hand now, as the end of a sentence about it; "" where it can."""
        return fixed(self.scenario, self.held, address)

    # ---- changing ------------------------------------------------------------------------------------

    def turn(self, address: str, value: float) -> str:
        """Turn one dial and recalculate; "" or the sentence that says why the value is refused."""
        label = self.dials[address].label if address in self.dials else address
        if reason := self.fixed(address):
            return f"{label} {reason}"
        merge, keeps_curve = self._merges(address), self._keeps_curve(address, value)
        before = None if merge else self.scenario.to_dict()
        try:
            turn(self.scenario, address, value)
        except ValueError as error:
            return str(error)
        if before is None:
            self.work.past[-1].at = self._clock()
            self.work.future.clear()
        else:
            self._remember(Step(label, address, before, self._clock()))
        self._dials = self._held = None
        self.param.update(unsaved=True, can_undo=True, can_redo=False, values=self.values + 1)
        self.calculate(keeps_curve)
        return ""

    def turn_along(self, x: float) -> None:
        """The operating point was moved to ``x`` of a plot over the swept dial: turn the dial to the nearest
        step within its bounds."""
        swept = self.swept_here
        if swept is None:
            return
        refused = self.turn(swept.address, swept.dial.nearest(x))
        if refused:
            self.message = refused

    def step_along(self, steps: int) -> None:
        """Move the operating point along the sweep by hundredths of its range, or steps of its dial."""
        swept = self.swept_here
        if swept is not None:
            one = max(abs(float(swept.x[-1] - swept.x[0])) / 100, swept.dial.step)
            self.turn_along(self.value(swept.address) + steps * one)

    def edit(
        self, label: str, change: Change, key: str = "", rebuild: bool = True, together: bool = False
    ) -> str:
        """Apply a structural change to a copy, validate it and take it over.

        Parameters
        ----------
        label
            Name of the undo step, e.g. "Add a source water".
        change
            Function that alters the scenario it is given.
        key
            Edits with the same non-empty key that follow each other quickly merge into one undo step.
        rebuild
            False when nothing drawn from the structure changes (``structure`` is then not bumped).
        together
            Edits with the same key merge however long they take: the fields of one form.

        Returns
        -------
        str
            "" when taken over, else one sentence; the old state stays.
        """

        def changed(draft: Scenario) -> Scenario:
            change(draft)
            tidy(draft)
            return draft

        return self.adopt(label, changed, key, rebuild, together)

    def adopt(
        self,
        label: str,
        make: Callable[[Scenario], Scenario],
        key: str = "",
        rebuild: bool = True,
        together: bool = False,
    ) -> str:
        """Go on with what ``make`` returns for a copy of the scenario; otherwise as :meth:`edit`."""
        before = self.scenario.to_dict()
        try:
            draft = Scenario.from_dict(make(self.scenario.copy()).to_dict())
        except ValueError as error:
            return str(error)
        if key and self._merges(key, math.inf if together else MERGE_SECONDS):
            self.work.past[-1].at = self._clock()
            self.work.future.clear()
        else:
            self._remember(Step(label, key, before, self._clock()))
        self._take(draft, rebuild)
        return ""

    def choose_season(self, name: str) -> str:
        """Switch to another season of the scenario."""

        def change(scenario: Scenario) -> None:
            scenario.season = name

        return self.edit(f"Season {name}", change)

    def set_sweep(self, **plan: Any) -> str:
        """Change the sweep: any of ``dial``, ``start``, ``stop``, ``points``; the rest stays as it is."""

        def change(scenario: Scenario) -> None:
            kept = {} if scenario.sweep is None else scenario.sweep.to_dict()
            if not kept and self.swept is not None:
                x = self.swept.x
                kept = {
                    "dial": self.swept.address,
                    "start": float(x[0]),
                    "stop": float(x[-1]),
                    "points": len(x),
                }
            scenario.sweep = SweepSetting.from_dict({**kept, **plan}, "sweep")

        return self.edit("Sweep", change, key="sweep", rebuild=False)

    def replace(self, scenario: Scenario, file_name: str = "") -> None:
        """Go on with an opened scenario; nothing is unsaved, and undo leads back to the one before."""
        label, before = f"Open {file_name or 'a new scenario'}", self.scenario.to_dict()
        self._remember(Step(label, "", before, self._clock(), self.work.file_name))
        self.work.file_name = file_name
        self.work.saved = scenario.to_dict()
        # What was looked at in the scenario before may be of no interest in this one.
        self.choose(readout=None, family=None)
        self._take(scenario)

    def undo(self) -> None:
        """Go back one step; nothing happens when there is none."""
        self._travel(self.work.past, self.work.future)

    def redo(self) -> None:
        """Take back the last undo; nothing happens when there is none."""
        self._travel(self.work.future, self.work.past)

    def choose(self, **choices: Any) -> None:
        """Remember what a view shows, by name of the choice; neither an undo step nor an unsaved change."""
        self.work.choices |= choices
        self.choices = dict(self.work.choices)

    def offer(self, name: str, text: str, kind: str = "text/csv") -> None:
        """Let the user save a text as a file of this name."""
        self.offered = Offer(name, text, kind)

    def mark_saved(self, file_name: str) -> None:
        """The scenario as it stands has been written to a file of this name."""
        self.work.file_name = file_name
        self.work.saved = self.scenario.to_dict()
        self._refresh_marks()

    # ---- calculating ---------------------------------------------------------------------------------

    def want(self, view: str, readouts: Iterable[str], stage: str = FINISHED) -> None:
        """Tell which readouts a view will ask for, so that they are computed off the event loop."""
        self._wanted[view] = tuple((key, stage) for key in readouts)

    def ask(self, view: str, question: Callable[[Outcome], None]) -> None:
        """Tell what a view will ask of the operating point alone (its stages), for the same reason."""
        self._questions[view] = question

    def solve_now(self) -> None:
        """Solve before anything else happens; for the first page, which should come with results."""
        snapshot, questions = self.scenario.copy(), self._questions.values()
        self._apply(solve(snapshot, self.wanted, questions, curve=self._curve))

    def calculate(self, keeps_curve: bool = False) -> None:
        """Solve the scenario as it stands; results arrive in ``point`` and ``swept``.

        keeps_curve: nothing the sweep depends on has changed since the last call.
        """
        if not keeps_curve:
            self._curve += 1
        snapshot, curve = self.scenario.copy(), self._curve
        wanted, questions = self.wanted, tuple(self._questions.values())
        swept = self.swept if curve == self._shown_curve else None
        self.runner.submit(lambda: solve(snapshot, wanted, questions, swept, curve), self._apply)

    def _keeps_curve(self, address: str, value: float) -> bool:
        """Whether turning a dial to ``value`` leaves the sweep as it is: the operating point moves along it.

        At the end of a range other shares may become zero and lose their proportion, so ends do not count.
        """
        if self.swept is None or address != self.swept.address or address not in self.dials:
            return False
        dial = self.dials[address]
        high = math.inf if dial.high is None else dial.high
        return all(dial.low < number < high for number in (dial.value, value))

    @property
    def wanted(self) -> set[Wanted]:
        """Readouts that some view will ask for, each with its stage."""
        return {wanted for several in self._wanted.values() for wanted in several}

    def _apply(self, results: Results) -> None:
        if results.point is None:
            self.param.update(message=results.message, stale=self.point is not None)
        else:
            self._shown_curve, self.solved = results.curve, results.scenario
            self.param.update(point=results.point, swept=results.swept, message="", stale=False)

    # ---- history -------------------------------------------------------------------------------------

    def _merges(self, key: str, within: float = MERGE_SECONDS) -> bool:
        past = self.work.past
        return bool(past) and past[-1].key == key and self._clock() - past[-1].at < within

    def _remember(self, step: Step) -> None:
        self.work.past.append(step)
        del self.work.past[:-MOST_STEPS]
        self.work.future.clear()

    def _travel(self, source: list[Step], destination: list[Step]) -> None:
        if not source:
            return
        step = source.pop()
        # No key: a turn right after an undo must not merge into the step that was undone.
        back = None if step.file_name is None else self.work.file_name
        destination.append(Step(step.label, "", self.scenario.to_dict(), 0.0, back))
        if step.file_name is not None:
            self.work.file_name = step.file_name
        self._take(Scenario.from_dict(step.before))

    def _take(self, scenario: Scenario, rebuild: bool = True) -> None:
        self.work.scenario = scenario
        self._dials = self._held = None
        with param.parameterized.batch_call_watchers(self):
            self.scenario = scenario
            self.structure += int(rebuild)
            self.values += 1
            self._refresh_marks()
        self.calculate()

    def _refresh_marks(self) -> None:
        self.param.update(
            unsaved=self.scenario.to_dict() != self.work.saved,
            can_undo=bool(self.work.past),
            can_redo=bool(self.work.future),
        )
