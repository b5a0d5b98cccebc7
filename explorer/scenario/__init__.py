"""Scenarios: what is decided and assumed, how it is stored, turned and evaluated."""
