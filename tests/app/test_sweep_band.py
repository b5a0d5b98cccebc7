"""The band of outcomes around the curves of the sweep."""

import asyncio

import numpy as np
import pytest

from explorer.app import sweep_band
from explorer.app.files import Shelf
from explorer.app.main import build
from explorer.app.shell import Shell
from explorer.app.sweep_view import SweepView
from explorer.scenario.shipped import shipped

BANDED = ("ph", "buffer", "chosen")
WELL, WELL_PH = "waters.well.share", "waters.well.analysis.ph"


@pytest.fixture
def shell() -> Shell:
    return build(shipped()["amber"], shelf=Shelf())


@pytest.fixture
def view(shell: Shell) -> SweepView:
    return shell.views["sweep"]


def layers(view: SweepView) -> dict[str, int]:
    return {name: len(plot.fan.data["xs"]) for name, plot in view.plots.plots.items()}


def width(view: SweepView, name: str) -> float:
    (layer,) = view.plots.plots[name].picture.fan
    return float(np.mean(layer.high - layer.low))


def test_readouts_have_a_band_and_species_have_none(view: SweepView) -> None:
    """90 % of the outcomes, unless another part is chosen."""
    assert layers(view) == {"ph": 1, "species": 0, "buffer": 1, "chosen": 1}
    assert view.plots.plots["ph"].picture.fan[0].percent == 90
    assert "90 % of the outcomes" in view.plots.plots["ph"].figure.html_attributes["aria-label"]


def test_band_is_switched_off_and_narrowed(shell: Shell, view: SweepView) -> None:
    """The choice is remembered with what the views show."""
    wide = width(view, "ph")
    view.controls.report("band", "50")
    assert width(view, "ph") < wide
    view.controls.report("band", "0")
    assert set(layers(view).values()) == {0} and shell.session.choices["band"] == "0"
    view.controls.report("band", "90")
    assert width(view, "ph") == pytest.approx(wide)


def test_band_follows_the_tolerances(shell: Shell, view: SweepView) -> None:
    """Half the tolerance that matters most, a narrower band."""
    wide = width(view, "chosen")

    def halve(scenario) -> None:
        scenario.tolerances[WELL_PH].plus_minus = 0.02

    shell.session.edit("Halve", halve)
    assert width(view, "chosen") < 0.8 * wide


def test_without_tolerances_there_is_no_band_and_no_choice_of_one() -> None:
    """Nothing may be off, so nothing is drawn that says so."""
    shell = build(shipped()["faulty_analyses"], shelf=Shelf())
    view = shell.views["sweep"]
    assert set(layers(view).values()) == {0} and "band" not in view.controls


def test_band_stays_while_the_point_moves_along_the_curve(shell: Shell, view: SweepView) -> None:
    """The curves are the same, so is the band: it is not calculated again."""
    study = view.band._study
    shell.session.turn(WELL, 55)
    assert view.band._study is study and layers(view)["ph"] == 1


def test_band_of_other_curves_is_hidden_until_the_new_one_is_there(
    shell: Shell, view: SweepView, monkeypatch: pytest.MonkeyPatch
) -> None:
    """While a slider is dragged there are curves only, and the axes stay."""
    monkeypatch.setattr(sweep_band, "REST", 0.2)

    async def until(condition) -> None:
        for _ in range(2000):
            if condition():
                return
            await asyncio.sleep(0.005)
        raise AssertionError("waited in vain")

    async def drag() -> None:
        limits = [(plot.y_range.start, plot.y_range.end) for plot in view.plots.plots.values()]
        for value in (7.26, 7.27, 7.28):
            swept = shell.session.swept
            shell.session.turn(WELL_PH, value)
            await until(lambda swept=swept: shell.session.swept is not swept)
            assert layers(view)["ph"] == 0 and view.band.errand.under_way
            assert [(plot.y_range.start, plot.y_range.end) for plot in view.plots.plots.values()] == limits
        await until(lambda: not view.band.errand.under_way)

    asyncio.run(drag())
    assert [layers(view)[name] for name in BANDED] == [1, 1, 1]


def test_closed_view_calculates_no_band(shell: Shell, view: SweepView) -> None:
    """It comes with the view."""
    shell.views.open("ledger")
    shell.session.turn(WELL_PH, 7.4)
    assert view.band._study is None
    shell.views.open("sweep")
    assert layers(view)["ph"] == 1
