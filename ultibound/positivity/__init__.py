"""Weighted sums of squares on boxes: searched by semidefinite programmes, rounded to exact identities."""
