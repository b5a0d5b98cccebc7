"""Invented waters and a builder of scenarios, shared by the specifications of the upper floors."""

import asyncio
import os
from collections.abc import Callable, Iterator
from copy import deepcopy
from pathlib import Path
from typing import Any

import pytest
from hypothesis import settings

from explorer.scenario.model import Scenario

# how long an example takes depends on the machine and says nothing about the rule it tests
settings.register_profile("no deadline", deadline=None)
settings.load_profile("no deadline")

CHROMIUM = os.environ.get("CHROMIUM", "/usr/bin/chromium")
FLAGS = (
    "--no-sandbox",
    "--disable-dev-shm-usage",
    "--host-resolver-rules=MAP * ~NOTFOUND , EXCLUDE 127.0.0.1",
)

UNITS = {
    "temperature": "°C",
    "ph": None,
    "alkalinity": "mg/L as CaCO3",
    "silica": "mg/L as SiO2",
    "ammonia": "mg/L as N",
    "phosphate": "mg/L as P",
    "free_chlorine": "mg/L as Cl2",
    "monochloramine": "mg/L as Cl2",
}

SHEETS: dict[str, dict[str, float]] = {
    "river": {
        "temperature": 4, "ph": 8.6, "alkalinity": 64, "calcium": 26, "magnesium": 3.6, "sodium": 11,
        "potassium": 1.6, "chloride": 15, "sulfate": 17, "nitrate": 6.2, "silica": 4.5,
    },
    "well": {
        "temperature": 11, "ph": 7.25, "alkalinity": 272, "calcium": 116, "magnesium": 12.5, "sodium": 21,
        "potassium": 2.4, "chloride": 38, "sulfate": 46, "nitrate": 29, "silica": 16,
    },
    "transfer": {
        "temperature": 14, "ph": 8.6, "alkalinity": 58, "calcium": 30, "magnesium": 8.5, "sodium": 58,
        "potassium": 3.5, "chloride": 96, "sulfate": 41, "nitrate": 2, "silica": 5,
    },
    "permeate": {
        "temperature": 24, "ph": 5.9, "alkalinity": 3, "calcium": 0.6, "magnesium": 1.4, "sodium": 52,
        "potassium": 2, "chloride": 84, "sulfate": 2, "boron": 0.75,
    },
    "moor": {
        "temperature": 3, "ph": 6.5, "alkalinity": 7.5, "calcium": 3.6, "magnesium": 1.1, "sodium": 5.9,
        "potassium": 0.5, "chloride": 8.9, "sulfate": 5.2, "nitrate": 1.3, "silica": 2.6, "toc": 6.8,
    },
}  # fmt: skip
"""Invented analyses in the units of the sheet; mg/L of the ion unless UNITS says otherwise."""


def entry(key: str, value: float) -> dict[str, Any]:
    unit = UNITS.get(key, "mg/L")
    return {"value": value} if unit is None else {"value": value, "unit": unit}


def sheet(name: str, **changed: float | dict[str, Any] | None) -> dict[str, Any]:
    """JSON form of an analysis; a number is put in the unit of the sheet, None leaves an entry out."""
    values = {**SHEETS[name], **changed}
    return {
        key: value if isinstance(value, dict) else entry(key, value)
        for key, value in values.items()
        if value is not None
    }


def dosed(step: str, chemical: str, value: float, unit: str, **more: Any) -> dict[str, Any]:
    """JSON form of a fixed dose."""
    return {"id": step, "step": "dose", "chemical": chemical, "dose": {"value": value, "unit": unit}, **more}


def held(step: str, chemical: str, readout: str, value: float, ceiling: float, unit: str) -> dict[str, Any]:
    """JSON form of a held dose."""
    ceilings = {"value": ceiling, "unit": unit}
    hold = {"readout": readout, "value": value, "ceiling": ceilings}
    return {"id": step, "step": "dose", "chemical": chemical, "hold": hold}


def plant_dict(
    shares: dict[str, float], train: list[dict[str, Any]] | None = None, **parts: Any
) -> dict[str, Any]:
    """JSON form of a scenario: waters by name of their sheet with shares; ``parts`` replace usual ones."""
    waters = [
        {"id": name, "name": name.capitalize(), "share": share, "analyses": {"winter": sheet(name)}}
        for name, share in shares.items()
    ]
    usual = {
        "format": "blendwright-scenario",
        "version": 1,
        "title": "Plant",
        "seasons": ["winter"],
        "season": "winter",
        "flow": {"value": 24, "unit": "ML/d"},
        "waters": waters,
        "train": train or [],
    }
    return deepcopy({**usual, **parts})


class Maker:
    """What a specification builds its plants with."""

    sheet = staticmethod(sheet)
    dosed = staticmethod(dosed)
    held = staticmethod(held)
    dict = staticmethod(plant_dict)
    read = staticmethod(Scenario.from_dict)

    def __call__(self, *arguments: Any, **parts: Any) -> Scenario:
        return Scenario.from_dict(plant_dict(*arguments, **parts))


@pytest.fixture(scope="session")
def plant() -> Callable[..., Scenario]:
    """Builder of scenarios, with the helpers that make their parts."""
    return Maker()


@pytest.fixture(scope="session")
def browser() -> Iterator[Any]:
    """A Chromium that reaches this machine and nothing else; skipped where there is none."""
    playwright = pytest.importorskip("playwright.sync_api")
    if not Path(CHROMIUM).exists():
        pytest.skip(f"no browser at {CHROMIUM}")
    with playwright.sync_playwright() as driver:
        chromium = driver.chromium.launch(executable_path=CHROMIUM, args=list(FLAGS))
        loop = asyncio._get_running_loop()
        yield chromium
        asyncio._set_running_loop(loop)
        chromium.close()


@pytest.hookimpl(wrapper=True)
def pytest_runtest_protocol(item: pytest.Item) -> Iterator[None]:
    """The browser's driver keeps an event loop of its own in this thread, which counts as running between two
    tests as well. A test without a browser is given a thread without one, whatever came before it."""
    loop = asyncio._get_running_loop()
    if loop is None or "browser" in getattr(item, "fixturenames", ()):
        return (yield)
    asyncio._set_running_loop(None)
    try:
        return (yield)
    finally:
        # the driver's last word may have been said in the teardown of this very test
        asyncio._set_running_loop(loop if loop.is_running() else None)
