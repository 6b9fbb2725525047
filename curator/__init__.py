"""Pairwright: from messy identity folders to pair lists a verification model can be trained and judged on."""

__version__ = "0.1.0"
