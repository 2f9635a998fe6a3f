"""Continuous stance: polynomials that nearly solve x' = A x + b (search in floating point, nothing proved)."""
