"""Echoes: photos that show the same shot, found by hashes and embeddings, settled by registration."""
