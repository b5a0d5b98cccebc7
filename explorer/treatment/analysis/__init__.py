"""From a laboratory analysis to conserved totals, and whether the analysis hangs together."""

from explorer.treatment.analysis.measured import ANALYSIS_KEYS, CARBONATE_KEYS, AnalysisError, Measured

__all__ = ["ANALYSIS_KEYS", "CARBONATE_KEYS", "AnalysisError", "Measured"]
