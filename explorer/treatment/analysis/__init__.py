"""From a laboratory analysis to conserved totals, and whether the analysis hangs together."""

from explorer.treatment.analysis.examination import Balance, Examination, balance_of, examine
from explorer.treatment.analysis.intake import Intake, analysis_totals, entry_units
from explorer.treatment.analysis.measured import ANALYSIS_KEYS, CARBONATE_KEYS, AnalysisError, Measured
from explorer.treatment.ions import balance_percent, charge_sums, dissolved_solids

__all__ = [
    "ANALYSIS_KEYS",
    "CARBONATE_KEYS",
    "AnalysisError",
    "Balance",
    "Examination",
    "Intake",
    "Measured",
    "analysis_totals",
    "balance_of",
    "balance_percent",
    "charge_sums",
    "dissolved_solids",
    "entry_units",
    "examine",
]
