"""Measures and a brief become miss, rate spread, cost and violation, each with its parts."""
