"""What pointing at a plot does: a place becomes the nearest value a dial can take."""

from __future__ import annotations

from explorer.app.state import Session
from explorer.scenario.dials import Dial


def at_step(dial: Dial, value: float) -> float:
    """The nearest step of a dial to a place that was pointed at, within the limits of the dial."""
    value = round(round(value / dial.step) * dial.step, 10)
    value = max(value, dial.low) if dial.bounded else value
    return value if dial.high is None else min(value, dial.high)


def turn_swept(session: Session, x: float) -> None:
    """The operating point was moved to ``x`` along the sweep: turn its dial."""
    swept = session.swept
    if swept is not None:
        refused = session.turn(swept.address, at_step(swept.dial, x))
        if refused:
            session.message = refused
