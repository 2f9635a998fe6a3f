"""Polynomials in floating point over batches of boxes: a search, not a proof."""
