"""The verdict: one or two sentences a mixed audience understands, from data alone."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from explorer.scenario.words import in_sentence, number_text, range_text


@dataclass(frozen=True)
class TargetState:
    """One target at the operating point and along the sweep.

    ``value`` and the bounds are in the readout's ``unit``, ``text`` is the value as printed; ``along`` holds
    the readout along the sweep (nan where not solved). Within ``slack`` of a bound counts as inside, so that
    a value held at a bound does not flicker.
    """

    name: str
    value: float
    text: str
    unit: str
    low: float | None
    high: float | None
    along: np.ndarray | None = None
    slack: float = 0.0
    said: bool = False
    """True where the sentence on calcium carbonate has given the value already."""

    @property
    def solved(self) -> bool:
        return bool(np.isfinite(self.value))

    @property
    def met(self) -> bool:
        return self.solved and _inside(self.value, *self.bounds)

    @property
    def bounds(self) -> tuple[float | None, float | None]:
        """The bounds, wider by the slack."""
        low = None if self.low is None else self.low - self.slack
        return low, None if self.high is None else self.high + self.slack

    @property
    def room(self) -> float:
        """Distance to the nearest bound over the size of the target; negative outside, 0 on the bound.

        The size is the width of the band, or the bound itself when there is one bound only.
        """
        if self.low is not None and self.high is not None:
            size = self.high - self.low
        else:
            size = abs(self.low if self.low is not None else self.high or 0.0)
        distances = []
        if self.low is not None:
            distances.append(self.value - self.low)
        if self.high is not None:
            distances.append(self.high - self.value)
        return min(distances, default=np.inf) / (size or 1.0)


@dataclass(frozen=True)
class Verdict:
    """``lead`` is the finding, ``rest`` what it rests on, both plain; ``good`` is None without targets."""

    lead: str
    rest: str
    good: bool | None

    def __str__(self) -> str:
        return f"{self.lead} {self.rest}".strip()


def _inside(value: float, low: float | None, high: float | None) -> bool:
    return (low is None or value >= low) and (high is None or value <= high)


Stretches = list[tuple[float, float]]


def stretches(x: np.ndarray, y: np.ndarray, low: float | None, high: float | None) -> Stretches:
    """Where along ``x`` a readout ``y`` lies within its bounds: (from, to), ends by linear interpolation."""
    found: Stretches = []

    def add(start: float, stop: float) -> None:
        if found and start - found[-1][1] <= 1e-9 * (abs(start) + 1.0):
            found[-1] = (found[-1][0], stop)
        elif stop > start:
            found.append((start, stop))

    for x0, x1, y0, y1 in zip(x[:-1], x[1:], y[:-1], y[1:], strict=True):
        if not (np.isfinite(y0) and np.isfinite(y1)):
            continue
        near, far = 0.0, 1.0
        for bound, sign in ((low, 1.0), (high, -1.0)):
            if bound is None:
                continue
            a, b = sign * (y0 - bound), sign * (y1 - bound)
            if a < 0 and b < 0:
                near, far = 1.0, 0.0
            elif a < 0:
                near = max(near, a / (a - b))
            elif b < 0:
                far = min(far, a / (a - b))
        if near <= far:
            add(float(x0 + near * (x1 - x0)), float(x0 + far * (x1 - x0)))
    return found


def shared(first: Stretches, second: Stretches) -> Stretches:
    """Overlap of two lists of stretches."""
    pairs = [(max(a, c), min(b, d)) for a, b in first for c, d in second]
    return [(start, stop) for start, stop in pairs if start < stop]


def where(places: Stretches, x: np.ndarray, unit: str, name: str) -> str:
    """Stretches of the sweep in words: "from 52 % Granite Wellfield", "between 20 and 45 %", "nowhere …"."""
    if not places:
        return "nowhere along this sweep"
    first, last = float(x[0]), float(x[-1])
    slack = 1e-6 * (last - first)
    step = (last - first) / 100 or 1.0
    digits = max(0, -int(np.floor(np.log10(step) + 1e-9)))
    after = f" {unit}" if unit else ""

    def at(value: float) -> str:
        return number_text(value, digits)

    parts = []
    for start, stop in places[:2]:
        if start <= first + slack and stop >= last - slack:
            return "all along this sweep"
        if start <= first + slack:
            parts.append(f"up to {at(stop)}{after}")
        elif stop >= last - slack:
            parts.append(f"from {at(start)}{after}")
        else:
            parts.append(f"between {at(start)} and {at(stop)}{after}")
    return " and ".join(parts) + (f" {name}" if name else "")


def calcium_carbonate(ccpp: float, unit: str = "mg/L CaCO₃") -> str:
    """Calcium carbonate precipitation potential in words; "" without a value. Positive precipitates."""
    if not np.isfinite(ccpp):
        return ""
    amount = number_text(abs(ccpp), 1)
    if not float(amount):
        return "In balance with calcium carbonate."
    return f"{'Precipitates' if ccpp > 0 else 'Dissolves'} {amount} {unit}."


def verdict(
    states: Sequence[TargetState],
    ccpp: float = np.nan,
    x: np.ndarray | None = None,
    x_unit: str = "",
    x_name: str = "",
    reason: str = "",
) -> Verdict:
    """The verdict on the finished water.

    Parameters
    ----------
    states
        Targets in the order entered.
    ccpp
        Calcium carbonate precipitation potential, mg/L as CaCO3, + precipitates; nan: not said.
    x, x_unit, x_name
        The sweep, for the place where the limiting target would be met.
    reason
        Why the operating point could not be solved, "" when it was.
    """
    if reason:
        return Verdict("No result at this setting:", reason.rstrip(".") + ".", False)
    carbonate = calcium_carbonate(ccpp)
    if not states:
        return Verdict("No targets entered.", carbonate, None)
    met = sum(state.met for state in states)
    total = len(states)
    good = met == total
    if good:
        lead = "Meets the entered target." if total == 1 else f"Meets all {total} entered targets."
    else:
        lead = f"Meets {met or 'none'} of {total} entered target{'s' if total > 1 else ''}."
    solved = [state for state in states if state.solved]
    if not solved:
        return Verdict(lead, carbonate, good)
    limiting = min(solved, key=lambda state: state.room)
    wish = range_text(limiting.low, limiting.high)
    word = "Closest to its bound" if limiting.met else "Limiting"
    value = "" if limiting.said and carbonate else f" {limiting.text}{_spaced(limiting.unit)}"
    rest = f"{word}: {in_sentence(limiting.name)}{value}, target {wish}"
    if not good and x is not None and limiting.along is not None:
        all_met = _all_met(states, x)
        places = stretches(x, limiting.along, *limiting.bounds)
        rest += f", met {where(places, x, x_unit, x_name)}"
        if total > 1 and all_met is not None and all_met and all_met != places:
            rest += f"; all met {where(all_met, x, x_unit, '')}"
    return Verdict(lead, f"{carbonate} {rest}.".strip(), good)


def _all_met(states: Sequence[TargetState], x: np.ndarray) -> Stretches | None:
    common = [(float(x[0]), float(x[-1]))]
    for state in states:
        if state.along is None:
            return None
        common = shared(common, stretches(x, state.along, *state.bounds))
    return common


def _spaced(unit: str) -> str:
    return f" {unit}" if unit else ""
