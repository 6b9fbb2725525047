"""Measures: error rates, intervals, agreement, and what a list can support."""
