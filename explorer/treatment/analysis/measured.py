"""One entry of a laboratory analysis, as it was entered."""

from dataclasses import dataclass

ANALYSIS_KEYS: tuple[str, ...] = (
    "temperature",
    "ph",
    "alkalinity",
    "dic",
    "co2",
    "calcium",
    "magnesium",
    "total_hardness",
    "sodium",
    "potassium",
    "chloride",
    "sulfate",
    "nitrate",
    "fluoride",
    "phosphate",
    "silica",
    "boron",
    "ammonia",
    "free_chlorine",
    "monochloramine",
    "aluminium",
    "iron",
    "toc",
    "tds",
    "conductivity",
)
"""Everything an analysis may state, in the order of a laboratory sheet; user acids come on top."""

CARBONATE_KEYS: tuple[str, ...] = ("ph", "alkalinity", "dic", "co2")
"""Any two of these fix the carbonate system."""


class AnalysisError(ValueError):
    """An analysis that cannot be used: ``key`` is the entry to look at, ``message`` one sentence."""

    def __init__(self, key: str, message: str) -> None:
        self.key, self.message = key, message
        super().__init__(f"{key}: {message}")


@dataclass(frozen=True)
class Measured:
    """A measured value in its own unit, or the limit below which nothing was found.

    Exactly one of ``value`` and ``below`` is given. ``read_at`` [°C] is the temperature of the reading:
    of the sample for pH, the reference temperature for conductivity. ``plus_minus`` is the half-width of
    the measurement in the same unit.
    """

    value: float | None = None
    below: float | None = None
    unit: str = ""
    read_at: float | None = None
    plus_minus: float | None = None
    note: str = ""
    assumed: bool = False

    def __post_init__(self) -> None:
        if (self.value is None) == (self.below is None):
            raise ValueError("give either a value or the limit it is below")

    @property
    def central(self) -> float:
        """The value to calculate with: half the limit for a non-detect (common practice)."""
        return self.value if self.value is not None else self.below / 2
