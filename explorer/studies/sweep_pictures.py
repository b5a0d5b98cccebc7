"""Pictures of a sweep: any readout, any family of species, in the words of page and report."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from explorer.scenario.model import Target
from explorer.scenario.outcome import FINISHED
from explorer.scenario.readouts import READOUTS, Readout
from explorer.scenario.words import compact, plain, unit_text
from explorer.studies.axes import Limits, steady_limits
from explorer.studies.pictures import (
    Axis,
    Dots,
    Line,
    Missing,
    Picture,
    Quantity,
    axis,
    readout_picture,
    rising,
    species_picture,
)
from explorer.studies.sweep import Sweep


def swept_axis(swept: Sweep) -> Axis:
    """The dial of a sweep as the axis of its pictures."""
    return axis(plain(swept.dial.label, 60), unit_text(swept.dial.unit), rising(swept.x, swept.x))


def quantity_of(readout: Readout) -> Quantity:
    """A readout as the pictures name it."""
    return Quantity(
        compact(readout.label),
        unit_text(readout.unit),
        readout.digits,
        readout.significant,
        readout.sign_words is not None,
    )


def picture_of(
    swept: Sweep,
    key: str,
    targets: Sequence[Target],
    previous: Limits | None = None,
    dots: Sequence[Dots] = (),
    stage: str = FINISHED,
) -> Picture:
    """A readout along a sweep, with those of the ``targets`` that are of it, and the measured ``dots``.

    ``previous``: limits in use. ``stage``: where in the plant; targets are of the finished water alone.
    """
    readout = READOUTS[key]
    quantity, finished = quantity_of(readout), is_finished(swept, stage)
    if not finished:
        quantity = replace(quantity, label=f"{quantity.label}, {place_name(swept, stage)}")
    return readout_picture(
        quantity,
        rising(swept.x, swept.x),
        rising(swept.x, swept.outcome.readout(key, stage)),
        swept_axis(swept),
        [(target.low, target.high) for target in targets if finished and target.readout == key],
        missing(swept, key, stage),
        previous,
        readout.slack,
        dots,
    )


def is_finished(swept: Sweep, stage: str) -> bool:
    """Whether a stage is that of the finished water, under either of its names."""
    return stage in (FINISHED, swept.outcome.stages[-1].id)


def place_name(swept: Sweep, stage: str) -> str:
    """Where in the plant, short enough for a title."""
    return plain(swept.outcome.stage(stage).name, 40)


def with_options(
    picture: Picture,
    key: str,
    curves: Sequence[tuple[Line, Sweep]],
    previous: Limits | None,
    stage: str = FINISHED,
) -> Picture:
    """A picture of a readout with the curves of kept options beside its own, all of them inside its limits.

    curves: name, colour and dash of each option (its ``y`` is not looked at), with its sweep. An option
    without such a ``stage`` has no curve.
    """
    others = tuple(
        replace(line, y=rising(swept.x, swept.outcome.readout(key, stage)))
        for line, swept in curves
        if stage in swept.outcome
    )
    everything = np.concatenate([np.array(picture.limits), *(line.y for line in others)])
    limits = steady_limits(everything, previous, picture.limits[1] - picture.limits[0])
    return replace(picture, others=others, limits=limits)


def picture_of_species(
    swept: Sweep,
    family: str,
    name: str,
    logarithmic: bool = False,
    previous: Limits | None = None,
    stage: str = FINISHED,
) -> Picture:
    """The species of a ``family`` in the water at a ``stage`` along a sweep; ``name`` is the family's printed
    name."""
    members = {
        species: rising(swept.x, amount)
        for species, amount in swept.outcome.solution(stage).family(family).items()
    }
    x, along = rising(swept.x, swept.x), swept_axis(swept)
    gaps = missing(swept, stage=stage)
    picture = species_picture(name, members, x, along, logarithmic, gaps, previous)
    if is_finished(swept, stage):
        return picture
    return replace(picture, title=f"{picture.title}, {place_name(swept, stage)}")


def missing(swept: Sweep, key: str | None = None, stage: str = FINISHED) -> Missing:
    """Stretches of a sweep without a result, as they are drawn: half a step beyond their points."""
    half = abs(float(swept.x[1] - swept.x[0])) / 2
    low, high = sorted((float(swept.x[0]), float(swept.x[-1])))
    return tuple(
        (max(min(gap.start, gap.stop) - half, low), min(max(gap.start, gap.stop) + half, high), gap.reason)
        for gap in swept.gaps(key, stage)
    )
