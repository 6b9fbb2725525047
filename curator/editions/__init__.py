"""Editions: sampled lists, their files and manifest, and the audit of any list."""
