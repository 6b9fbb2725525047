"""Splits: what must stay together, and which identities go to train, val and test."""
