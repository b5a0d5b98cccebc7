"""Studies: questions asked of a scenario, each a thin use of ``evaluate``."""
