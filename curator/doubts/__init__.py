"""Doubts: label faults and unusable photos, each with a probability."""
