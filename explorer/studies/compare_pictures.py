"""Picture of a comparison: one readout along the sweep of every case."""

from collections.abc import Sequence

import numpy as np

from explorer.scenario.model import Target
from explorer.scenario.words import plain
from explorer.studies.axes import Limits
from explorer.studies.compare import CURRENT, SOURCE_OFF, Case
from explorer.studies.pictures import Line, Picture
from explorer.studies.sweep import Sweep
from explorer.studies.sweep_pictures import picture_of, with_options

NOW = "now"
SIGN_LENGTH = 12


def sign_of(case: Case) -> str:
    """A case in a word, for its curve and its column: letter of an option, season, water that is off."""
    if case.kind == CURRENT:
        return NOW
    if case.letter:
        return case.letter
    name = f"no {case.name.removesuffix(' off')}" if case.kind == SOURCE_OFF else case.name
    return plain(name, SIGN_LENGTH)


def overlay_picture(
    cases: Sequence[Case],
    found: Sequence[tuple[Case, Sweep]],
    key: str,
    targets: Sequence[Target],
    previous: Limits | None = None,
) -> Picture:
    """A readout along the sweeps of the cases ``found``, the first of which is drawn as the main one.

    Colour and dash follow the place among all ``cases``, so that a case keeps them when another has no curve.
    """
    (_, first), *others = found
    curves = []
    for case, swept in others:
        place = cases.index(case) - 1
        curves.append((Line(sign_of(case), np.array([]), place, place + 1), swept))
    return with_options(picture_of(first, key, targets, previous), key, curves, previous)
