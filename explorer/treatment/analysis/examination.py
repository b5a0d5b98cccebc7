"""Does an analysis hang together? Charge balance, dissolved solids, conductivity, and what may be wrong.

Nothing is corrected here: a bad balance is named, with the likely cause, and left for the user to mend.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

from explorer.chemistry import Solution, System
from explorer.chemistry.conductivity import conductivity
from explorer.treatment.analysis.intake import analysis_totals, entry_units
from explorer.treatment.analysis.measured import Measured
from explorer.treatment.ions import charge_sums, dissolved_solids
from explorer.treatment.notes import Note
from explorer.treatment.units import find_unit, from_base

MAJOR_IONS: tuple[str, ...] = (
    "calcium",
    "magnesium",
    "sodium",
    "potassium",
    "chloride",
    "sulfate",
    "nitrate",
)
"""Ions whose absence from an analysis is worth a word."""

USUAL_REFERENCE = 25.0
"""°C to which a conductivity is taken to refer when the analysis does not say."""

CONDUCTIVITY_AGREES = (0.9, 1.1)
"""Entered over computed conductivity (common practice after Standard Methods 1030E)."""

SOLIDS_AGREE = (0.9, 1.2)
"""Entered over computed dissolved solids (common practice after Standard Methods 1030E: 1.0 to 1.2)."""

_MISLABELLED: tuple[tuple[str, str], ...] = (
    ("calcium", "mg/L as CaCO3"),
    ("magnesium", "mg/L as CaCO3"),
    ("alkalinity", "mg/L as HCO3"),
    ("nitrate", "mg/L as N"),
    ("sulfate", "mg/L as S"),
    ("alkalinity", "mg/L as CaCO3"),
    ("nitrate", "mg/L as NO3"),
    ("calcium", "mg/L"),
    ("magnesium", "mg/L"),
)
"""Entry and the unit it may have been meant in, the commonest slip first."""

_LEFT_OUT: tuple[tuple[str, float], ...] = (("sulfate", -2), ("chloride", -1), ("sodium", 1))
"""Ions that laboratories leave out and that are large enough to spoil a balance, with their charge."""


PLAUSIBLE_ORGANIC_CARBON = 30.0
"""mg/L; more than this does not explain a bad balance of a drinking-water source."""


@dataclass(frozen=True)
class Balance:
    """Sums of charges [meq/L], their difference in percent of both, and whether that is acceptable.

    The limit, in words in ``limit``, is that of Standard Methods 1030E as commonly practised, by the sum of
    anions: ±0.2 meq/L below 3 meq/L, ±2 % to 10, ±5 % above.
    """

    cations: float
    anions: float

    @property
    def percent(self) -> float:
        return 100 * (self.cations - self.anions) / (self.cations + self.anions)

    @property
    def acceptable(self) -> bool:
        if self.anions < 3:
            return abs(self.cations - self.anions) <= 0.2
        return abs(self.percent) <= (2 if self.anions <= 10 else 5)

    @property
    def limit(self) -> str:
        if self.anions < 3:
            return "±0.2 meq/L below 3 meq/L"
        return "±2 % from 3 to 10 meq/L" if self.anions <= 10 else "±5 % above 10 meq/L"


def balance_of(solution: Solution) -> Balance:
    """The charge balance of one solved water."""
    cations, anions = charge_sums(solution)
    return Balance(1000 * float(cations), 1000 * float(anions))


@dataclass(frozen=True)
class Examination:
    """What an analysis says about itself.

    balance: its charges. tds [mg/L] and conductivity [µS/cm at ``conductivity_at`` °C] are computed; the
    entered ones are None if absent. likely_cause: a sentence, empty where the balance is acceptable.
    assumed, missing: analysis keys.
    """

    balance: Balance
    tds: float
    tds_entered: float | None
    conductivity: float
    conductivity_at: float
    conductivity_entered: float | None
    likely_cause: str
    assumed: tuple[str, ...]
    missing: tuple[str, ...]
    notes: tuple[Note, ...]


def examine(entries: Mapping[str, Measured], system: System, *, close_with: str = "none") -> Examination:
    """Examine an analysis at its own temperature.

    Raises AnalysisError as :func:`analysis_totals` does; an impossible carbonate system gives a note of
    level ``error`` and nan.
    """
    intake = analysis_totals(entries, system, close_with=close_with)
    solution = system.solve(intake.totals, intake.temperature)
    balance = balance_of(solution)
    suspect = bool(intake.possible) and not balance.acceptable
    at = _reference(entries)
    examination = Examination(
        balance=balance,
        tds=float(dissolved_solids(solution)),
        tds_entered=_entered(entries, "tds", system),
        conductivity=float(conductivity(solution, at=at)),
        conductivity_at=at,
        conductivity_entered=_entered(entries, "conductivity", system),
        likely_cause=_likely_cause(entries, system, solution) if suspect else "",
        assumed=tuple(key for key, entry in entries.items() if entry.assumed),
        missing=_missing(entries),
        notes=(),
    )
    return replace(examination, notes=(*intake.notes, *_remarks(examination)))


def _reference(entries: Mapping[str, Measured]) -> float:
    """Temperature [°C] that the conductivity of the analysis refers to."""
    read_at = entries["conductivity"].read_at if "conductivity" in entries else None
    return USUAL_REFERENCE if read_at is None else read_at


def _missing(entries: Mapping[str, Measured]) -> tuple[str, ...]:
    known = {*entries, *(("calcium", "magnesium") if "total_hardness" in entries else ())}
    return tuple(key for key in MAJOR_IONS if key not in known)


def _entered(entries: Mapping[str, Measured], key: str, system: System) -> float | None:
    if key not in entries:
        return None
    return float(find_unit(entries[key].unit, entry_units(key, system)).to_base(entries[key].central))


def _remarks(found: Examination) -> list[Note]:
    """What to say about the figures of an examination."""
    notes = []
    if found.likely_cause:
        side = "cations exceed anions" if found.balance.percent > 0 else "anions exceed cations"
        text = f"{found.balance.percent:+.1f} %, {side} (allowed {found.balance.limit}); {found.likely_cause}"
        notes.append(Note("caution", "charge balance", text))
    if found.missing:
        notes.append(Note("info", "analysis", f"not entered, taken as 0: {', '.join(found.missing)}"))
    if found.conductivity_entered:
        notes += _comparison(
            "conductivity", "µS/cm", found.conductivity, found.conductivity_entered, CONDUCTIVITY_AGREES
        )
    if found.tds_entered:
        notes += _comparison("tds", "mg/L", found.tds, found.tds_entered, SOLIDS_AGREE)
    return notes


def _comparison(
    key: str, unit: str, computed: float, entered: float, agrees: tuple[float, float]
) -> list[Note]:
    """A caution where entered over computed is out of the range that agrees."""
    low, high = agrees
    if not computed or low <= entered / computed <= high:
        return []
    side = "an ion is missing or too low" if entered > computed else "an ion is too high"
    return [Note("caution", key, f"the ions give {computed:.0f} {unit}, {entered:.0f} was entered: {side}")]


def _likely_cause(entries: Mapping[str, Measured], system: System, solution: Solution) -> str:
    """What, put right, would close the balance: an ion left out, else a slip of unit, else organic anions.

    Of several slips that would, a measured conductivity picks those it fits.
    """
    charge = float(solution.charge)
    for slips in (_left_out(entries, charge), _mislabelled(entries), _organic(entries, charge, system)):
        closing = {slip: mended for slip, mended in slips if _closes(mended, system)}
        fitting = [slip for slip, mended in closing.items() if _conducts_as_measured(mended, system)]
        if closing:
            return f"{'; or '.join(fitting or closing)}: that would close the balance"
    return "no single slip explains it: check every unit, then take another sample"


def _closes(entries: Mapping[str, Measured], system: System) -> bool:
    intake = analysis_totals(entries, system)
    return bool(intake.possible) and balance_of(system.solve(intake.totals, intake.temperature)).acceptable


def _conducts_as_measured(entries: Mapping[str, Measured], system: System) -> bool:
    """False too where no conductivity was measured."""
    measured = _entered(entries, "conductivity", system)
    if measured is None:
        return False
    intake = analysis_totals(entries, system)
    computed = conductivity(system.solve(intake.totals, intake.temperature), at=_reference(entries))
    low, high = CONDUCTIVITY_AGREES
    return bool(low <= measured / computed <= high)


_Slips = Iterator[tuple[str, dict[str, Measured]]]
"""Possible slips in words, each with the analysis put right."""


def _left_out(entries: Mapping[str, Measured], charge: float) -> _Slips:
    for ion, ion_charge in _LEFT_OUT:
        if ion not in entries and charge * ion_charge < 0:
            amount = float(from_base(-charge / ion_charge, "mg/L", ion))
            mended = {**entries, ion: Measured(amount, unit="mg/L")}
            yield f"{ion} may be missing, about {amount:.0f} mg/L", mended


def _mislabelled(entries: Mapping[str, Measured]) -> _Slips:
    for key, meant in _MISLABELLED:
        if key in entries and entries[key].unit != meant:
            mended = {**entries, key: replace(entries[key], unit=meant)}
            yield f"{key} {entries[key].central:g} may be {meant}", mended


def _organic(entries: Mapping[str, Measured], charge: float, system: System) -> _Slips:
    """Coloured water: its cations honestly exceed the inorganic anions."""
    carbon = float(from_base(charge / system.organic_equivalents, "mg/L", "toc"))
    if "toc" not in entries and 0 < carbon <= PLAUSIBLE_ORGANIC_CARBON:
        mended = {**entries, "toc": Measured(carbon, unit="mg/L")}
        yield f"organic anions may be missing, about {carbon:.0f} mg/L of TOC", mended
