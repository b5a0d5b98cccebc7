"""Invented source waters as a laboratory sheet would give them, and the analyses made from them."""

from collections.abc import Callable

import numpy as np
import pytest

from explorer.chemistry import COMPONENT, System
from explorer.treatment.analysis import Measured, analysis_totals
from explorer.treatment.stream import Stream

_SHEET_UNIT = {
    "temperature": "°C",
    "ph": "",
    "alkalinity": "mg/L as CaCO3",
    "silica": "mg/L as SiO2",
    "ammonia": "mg/L as N",
    "phosphate": "mg/L as P",
    "free_chlorine": "mg/L as Cl2",
    "monochloramine": "mg/L as Cl2",
}
_COLUMNS = (
    "temperature", "ph", "alkalinity", "calcium", "magnesium", "sodium", "potassium", "chloride", "sulfate",
    "nitrate", "silica",
)  # fmt: skip


def analysis(**values: float) -> dict[str, Measured]:
    """An analysis from plain numbers in the units of the sheet."""
    return {key: Measured(value, unit=_SHEET_UNIT.get(key, "mg/L")) for key, value in values.items()}


def _row(*numbers: float | None, **others: float) -> dict[str, Measured]:
    columns = {key: value for key, value in zip(_COLUMNS, numbers, strict=True) if value is not None}
    return analysis(**columns, **others)


GOOD_WATERS: dict[str, dict[str, Measured]] = {
    "Fern River, winter": _row(4, 8.60, 64, 26, 3.6, 11, 1.6, 15, 17, 6.2, 4.5),
    "Fern River, summer": _row(19, 8.30, 79, 30, 4.4, 14, 1.9, 19, 21, 3.0, 3.1),
    "Granite Wellfield": _row(11, 7.25, 272, 116, 12.5, 21, 2.4, 38, 46, 29, 16),
    "Dune permeate": _row(24, 5.90, 3.0, 0.6, 1.4, 52, 2.0, 84, 2.0, 0, 0, boron=0.75),
    "Cobble Wellfield": _row(22, 7.35, 245, 92, 34, 118, 5, 210, 78, 18, 14, fluoride=0.4, boron=0.2),
    "Moss Reservoir, winter": _row(3, 6.50, 7.5, 3.6, 1.1, 5.9, 0.5, 8.9, 5.2, 1.3, 2.6, toc=6.8),
    "Moss Reservoir, summer": _row(15, 6.85, 11, 4.6, 1.3, 6.2, 0.6, 9.2, 5.6, 0.9, 2.1, toc=5.9),
    "Quartz Wellfield": _row(12, 7.18, 312, 118, 31, 34, 3.1, 47, 104, 4.2, 18, fluoride=0.3),
    "Harbor Transfer": _row(
        16, 8.35, 74, 28, 7.2, 24, 2.6, 29, 38, 3.1, 6, fluoride=0.7, monochloramine=2.3, ammonia=0.06
    ),
    "Pebble Wells": _row(13, 7.55, 196, 71, 14, 19, 2.0, 31, 29, 17, 13, free_chlorine=0.9),
    "Cinder Reclaimed": _row(
        22, 7.40, 128, 52, 11, 96, 16, 118, 74, 38, 14, ammonia=1.4, phosphate=0.8, fluoride=0.6
    ),
    "Cinder Town Main": _row(15, 7.80, 105, 43, 6.4, 17, 2.2, 24, 28, 9, 8, phosphate=0.9),
    "Ember Brackish Well": _row(21, 7.25, 228, 148, 62, 480, 12, 830, 305, 3, 24, fluoride=0.9, boron=0.6),
    "Ember permeate": _row(21, 5.94, 9, 1.6, 0.7, 17, 0.5, 22.5, 2.2, 0, 0.5, fluoride=0.05, boron=0.45),
    "Linen Reservoir": _row(8, 7.40, 41, 16.5, 3.9, 12, 1.9, 19, 14, 4.4, 3.6),
    "Slate Wellfield": _row(12, 7.30, 168, 68, 11, 26, 1.6, 44, 31, 22, 12),
    "Wicker Transfer": _row(14, 8.60, 58, 30, 8.5, 58, 3.5, 96, 41, 2, 5),
    "High-sulfate well": _row(15, 7.40, 210, 200, 65, 150, 6, 120, 690, 5, 15),
    "Non-carbonate alkalinity": _row(
        20, 9.00, 30, 12, 2, 7.2, 1, 10, 8, 1, 25, phosphate=1.0, boron=0.75, ammonia=0.5, free_chlorine=2
    ),
}  # fmt: skip

CALCIUM_AS_HARDNESS = _row(11, 7.25, 272, 290, 12.5, 21, 2.4, 38, 46, 29, 16)
SULFATE_MISSING = _row(22, 7.35, 245, 92, 34, 118, 5, 210, None, 18, 14, fluoride=0.4, boron=0.2)


@pytest.fixture(scope="session")
def system() -> System:
    """The usual system, without acids of the user."""
    return System()


@pytest.fixture(params=list(GOOD_WATERS))
def good_water(request: pytest.FixtureRequest) -> dict[str, Measured]:
    """Each of the waters whose analysis is in order."""
    return GOOD_WATERS[request.param]


@pytest.fixture(scope="session")
def waters() -> dict[str, dict[str, Measured]]:
    """All of them, by name."""
    return GOOD_WATERS


@pytest.fixture
def calcium_as_hardness() -> dict[str, Measured]:
    """Granite Wellfield with its calcium entered as hardness."""
    return CALCIUM_AS_HARDNESS


@pytest.fixture
def sulfate_missing() -> dict[str, Measured]:
    """Cobble Wellfield without its sulfate."""
    return SULFATE_MISSING


@pytest.fixture
def granite() -> dict[str, Measured]:
    """A hard well water."""
    return dict(GOOD_WATERS["Granite Wellfield"])


@pytest.fixture
def sheet() -> Callable[..., dict[str, Measured]]:
    """Makes an analysis from numbers in the units of the sheet."""
    return analysis


@pytest.fixture(scope="session")
def stream(system: System) -> Callable[..., Stream]:
    """Makes a stream of one of the waters by name."""

    def make(name: str, flow: float = 100.0) -> Stream:
        intake = analysis_totals(GOOD_WATERS[name], system)
        return Stream(system, intake.totals, intake.temperature, flow)

    return make


@pytest.fixture(scope="session")
def charge(system: System) -> Callable[[np.ndarray], np.ndarray]:
    """Charge [eq/L] that totals carry, from the zero-level forms alone."""

    def of(totals: np.ndarray) -> np.ndarray:
        weights = np.array([COMPONENT[key].charge for key in system.keys], float)
        weights[system.index["alkalinity"]] = -1
        return np.tensordot(weights, totals, axes=1)

    return of
