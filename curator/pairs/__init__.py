"""Pairs: how likely a pair's label is right, and which pairs teach most."""
