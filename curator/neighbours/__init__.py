"""Search with no meaning attached: nearest embeddings, codes within a radius, connected components."""
