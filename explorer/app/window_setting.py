"""Which two dials the map is over, their ranges, and what its contours are of."""

from __future__ import annotations

import json
from contextlib import suppress
from dataclasses import dataclass
from typing import Any

from explorer.app.choosers import default_range
from explorer.app.state import Session
from explorer.scenario.dials import Dial, turn
from explorer.scenario.errors import ScenarioError
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS

DEFAULT_READOUT = "ccpp"

KINDS = ("dose", "share", "fraction", "cycles", "approach", "temperature")
"""Last parts of the addresses of dials that are drawn against another first, best first."""

_ELSEWHERE = ("title", "note", "sweep", "tolerances", "options")
"""Parts of a scenario on which no map depends."""

Range = tuple[float, float]


@dataclass(frozen=True)
class Setting:
    """Dials across (``x``) and up (``y``) with their ranges, lower end first, and a readout."""

    x: Dial
    y: Dial
    x_range: Range
    y_range: Range
    readout: str

    def inputs(self, scenario: Scenario) -> str:
        """Everything the map depends on, as text: two settings of a plant with the same text have the same
        map, wherever both dials stand."""
        drawn = scenario.copy()
        for dial, ends in ((self.x, self.x_range), (self.y, self.y_range)):
            # Where another water has too little left to give, the dials count as they stand.
            with suppress(ScenarioError):
                turn(drawn, dial.address, sum(ends) / 2)
        plant = {key: part for key, part in drawn.to_dict().items() if key not in _ELSEWHERE}
        sides = [self.x.address, self.y.address, self.x_range, self.y_range, self.readout]
        return json.dumps([_rounded(plant), sides], sort_keys=True)


def _rounded(part: Any) -> Any:
    """Without the last digits, which depend on the way a share was turned."""
    if isinstance(part, dict):
        return {key: _rounded(value) for key, value in part.items()}
    if isinstance(part, list | tuple):
        return [_rounded(value) for value in part]
    return float(f"{part:.9g}") if isinstance(part, float) else part


class WindowChoices:
    """Reads and changes what the session has chosen for the map.

    A range stays as it was first drawn while the dial is turned; only choosing another changes it.
    """

    def __init__(self, session: Session) -> None:
        self.session = session
        self._drawn: dict[str, Range] = {}

    def setting(self) -> Setting | None:
        """What is chosen, with defaults for the rest; None where there are no two dials."""
        chosen, dials = self._chosen(), self.session.dials
        x = dials.get(chosen.get("x")) or self._usual(None)
        y = dials.get(chosen.get("y")) or self._usual(x)
        if x is None or y is None or x.address == y.address:
            return None
        readout = chosen.get("readout")
        readout = readout if readout in READOUTS else DEFAULT_READOUT
        return Setting(x, y, self._range(x), self._range(y), readout)

    def choose(self, **parts: Any) -> None:
        """Choose another dial (``x``, ``y``) or readout; the dial of the other side changes sides."""
        setting = self.setting()
        if setting is not None:
            sides = {"x": setting.x.address, "y": setting.y.address}
            for side, other in (("x", "y"), ("y", "x")):
                if parts.get(side) == sides[other] and other not in parts:
                    parts = parts | {other: sides[side]}
            parts = sides | parts
        self.session.choose(window={**self._chosen(), **parts})

    def swap(self) -> None:
        """Change sides."""
        setting = self.setting()
        if setting is not None:
            self.choose(x=setting.y.address, y=setting.x.address)

    def choose_range(self, dial: Dial, ends: Range) -> str:
        """Draw a dial over another range; "" or why not."""
        ranges = self._chosen().get("ranges", {})
        self.session.choose(window={**self._chosen(), "ranges": {**ranges, dial.address: sorted(ends)}})
        return ""

    def _chosen(self) -> dict[str, Any]:
        return self.session.choices.get("window", {})

    def _range(self, dial: Dial) -> Range:
        chosen = self._chosen().get("ranges", {}).get(dial.address)
        if chosen is None:
            chosen = self._drawn.setdefault(dial.address, self._first_range(dial))
        low, high = chosen
        low = max(low, dial.low) if dial.bounded else low
        high = high if dial.high is None else min(high, dial.high)
        return (low, high) if low < high else default_range(dial)

    def _first_range(self, dial: Dial) -> Range:
        sweep = self.session.scenario.sweep
        if sweep is not None and sweep.dial == dial.address and sweep.start != sweep.stop:
            return min(sweep.start, sweep.stop), max(sweep.start, sweep.stop)
        return default_range(dial)

    def _usual(self, other: Dial | None) -> Dial | None:
        """The dial of the sweep first; against it, one of another kind that can be turned at a plant."""
        swept = self.session.swept
        if other is None and swept is not None and swept.address in self.session.dials:
            return self.session.dials[swept.address]

        def rank(dial: Dial) -> tuple[bool, int]:
            kind = dial.address.rsplit(".", 1)[-1]
            same = other is not None and other.address.endswith(f".{kind}") and kind == "share"
            return same, KINDS.index(kind) if kind in KINDS else len(KINDS)

        rest = [
            dial for dial in self.session.dials.values() if other is None or dial.address != other.address
        ]
        return min(rest, key=rank, default=None)
